//! Timings: min, median and max of a number of rounds.

use std::fmt;
use std::time::{Duration, Instant};

/// Smallest, middle and largest of some timings, s.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Spread {
    pub(crate) min: f64,
    pub(crate) median: f64,
    pub(crate) max: f64,
}

impl Spread {
    /// Of seconds, at least one; infinite where there is none.
    pub(crate) fn of(mut seconds: Vec<f64>) -> Self {
        seconds.sort_by(f64::total_cmp);
        let at = |i: usize| seconds.get(i).copied().unwrap_or(f64::INFINITY);
        Self { min: at(0), median: at(seconds.len() / 2), max: at(seconds.len().saturating_sub(1)) }
    }

    /// Every number times `factor`.
    pub(crate) fn scaled(self, factor: f64) -> Self {
        Self { min: self.min * factor, median: self.median * factor, max: self.max * factor }
    }
}

/// `median (min … max)`.
impl fmt::Display for Spread {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let digits = |x: f64| match x {
            x if x >= 1000.0 => format!("{x:.0}"),
            x if x >= 100.0 => format!("{x:.1}"),
            x if x >= 1.0 => format!("{x:.2}"),
            x => format!("{x:.3}"),
        };
        write!(f, "{} ({} … {})", digits(self.median), digits(self.min), digits(self.max))
    }
}

/// The ratios of two lists of timings, round by round: peers measured side by side share the
/// machine's moods.
pub(crate) fn ratios(above: &[f64], below: &[f64]) -> Spread {
    Spread::of(above.iter().zip(below).map(|(a, b)| a / b).collect())
}

/// Of timings that were taken before and after each of some others, what they were meanwhile: a
/// drift of the machine's speed cancels.
pub(crate) fn meanwhile(around: &[f64]) -> Vec<f64> {
    around.windows(2).map(|pair| 0.5 * (pair[0] + pair[1])).collect()
}

/// Times several jobs in turn, `rounds` times over; seconds per call of each, one a round. Each
/// job is called often enough to fill `share`.
pub(crate) fn interleaved(
    rounds: usize,
    share: Duration,
    jobs: &mut [&mut dyn FnMut()],
) -> Vec<Vec<f64>> {
    let calls: Vec<usize> = jobs.iter_mut().map(|job| calls_for(share, job)).collect();
    let mut seconds = vec![Vec::with_capacity(rounds); jobs.len()];
    for _ in 0..rounds {
        for ((job, &calls), seconds) in jobs.iter_mut().zip(&calls).zip(&mut seconds) {
            let began = Instant::now();
            for _ in 0..calls {
                job();
            }
            seconds.push(began.elapsed().as_secs_f64() / calls as f64);
        }
    }
    seconds
}

fn calls_for(share: Duration, job: &mut dyn FnMut()) -> usize {
    let mut calls = 1;
    loop {
        let began = Instant::now();
        for _ in 0..calls {
            job();
        }
        let took = began.elapsed();
        if took * 4 >= share {
            let wanted = calls as f64 * share.as_secs_f64() / took.as_secs_f64();
            return (wanted.ceil() as usize).max(1);
        }
        calls *= 2;
    }
}
