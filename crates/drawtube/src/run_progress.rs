//! Progress of a run on standard error: a bar, a plain line now and then, a line when asked by
//! SIGUSR1.

use std::io;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

use driver::run::{Earlier, Saving, Tally};
use indicatif::{ProgressBar, ProgressStyle};
use report::text::overnight::time;

use crate::console::Console;
use crate::progress::Manner;
use crate::progress_line::ProgressLine;

/// How often the bar is redrawn.
const REDRAW: Duration = Duration::from_millis(500);

/// Tells how far a run is.
pub(crate) struct RunTeller<'a> {
    line: ProgressLine<'a>,
    asked: Arc<AtomicBool>,
    /// What a unit of the run is called, in the plural.
    units: &'static str,
    /// Time the run may take, all sessions together.
    run_time: Option<Duration>,
}

impl<'a> RunTeller<'a> {
    /// Begins to listen for SIGUSR1.
    pub(crate) fn new(
        manner: Manner,
        console: &'a Console,
        units: &'static str,
        run_time: Option<Duration>,
    ) -> io::Result<Self> {
        let line = ProgressLine::new(manner, console, bar, REDRAW);
        let asked = Arc::new(AtomicBool::new(false));
        #[cfg(unix)]
        signal_hook::flag::register(signal_hook::consts::SIGUSR1, Arc::clone(&asked))?;
        Ok(Self { line, asked, units, run_time })
    }

    /// Tells what an earlier session left in the folder `run`; of a run that only goes on, nothing
    /// if `quiet`.
    pub(crate) fn earlier(&self, run: &str, earlier: &Earlier, quiet: bool) {
        let Earlier { finished, sessions, seconds, dropped_bytes } = *earlier;
        if dropped_bytes > 0 {
            self.line.say(&format!(
                "notice: the last line of the journal in {run} was torn; its {dropped_bytes} bytes \
                 are dropped, and what they held is computed again"
            ));
        }
        if sessions > 0 && !quiet {
            let units = self.units;
            self.line
                .say(&format!("{run} goes on: {finished} {units} were done in {}.", time(seconds)));
        }
    }

    /// Tells whether the journal in `run` can be written, while `work`, such as "the search", goes
    /// on.
    pub(crate) fn saving(&self, run: &str, saving: &Saving<'_>, work: &str) {
        match saving {
            Saving::Failed(error) => self.line.say(&format!(
                "warning: the journal in {run} CANNOT BE WRITTEN: {error}; {work} goes on and \
                 writing is tried again"
            )),
            Saving::Recovered => self
                .line
                .say(&format!("The journal in {run} can be written again; nothing is missing.")),
        }
    }

    /// Called often; `best` tells the best few merits when a line is due.
    pub(crate) fn tick(&mut self, tally: &Tally, best: impl FnOnce() -> Vec<String>) {
        let asked = self.asked.swap(false, Ordering::Relaxed);
        if !self.line.is_due() && !asked {
            return;
        }
        let told = self.told(tally, &best());
        if let Some(bar) = self.line.bar() {
            bar.set_length(tally.wanted.unwrap_or(0));
            bar.set_position(tally.finished);
            if asked {
                self.line.say(&told);
            }
        }
        self.line.tell(&time(tally.run_seconds), &told);
    }

    /// Takes the bar off the terminal.
    pub(crate) fn finish(&self) {
        self.line.finish();
    }

    fn told(&self, tally: &Tally, best: &[String]) -> String {
        let of = tally.wanted.map_or_else(String::new, |wanted| format!(" of {wanted}"));
        let session = tally.session.as_secs_f64();
        let rate = tally.in_session as f64 / session.max(1e-9);
        let best = match best {
            [] => "none found yet".to_owned(),
            [first] => format!("best merit {first}"),
            [first, others @ ..] => format!("best merit {first}, then {}", others.join(", ")),
        };
        let left = left(tally, rate, self.run_time);
        format!(
            "{}{of} {}, {rate:.1} a second, {best}, {} left",
            tally.finished,
            self.units,
            left.map_or_else(|| "--".to_owned(), time)
        )
    }
}

/// Seconds left: of the time of the run, and of the units by this session's rate alone, whichever
/// is less. Unknown until one unit is done.
fn left(tally: &Tally, rate: f64, run_time: Option<Duration>) -> Option<f64> {
    let by_time = run_time.map(|time| (time.as_secs_f64() - tally.run_seconds).max(0.0));
    let by_units = tally
        .wanted
        .filter(|_| tally.in_session > 0)
        .map(|wanted| wanted.saturating_sub(tally.finished) as f64 / rate);
    [by_time, by_units].into_iter().flatten().reduce(f64::min)
}

fn bar() -> ProgressBar {
    let bar = ProgressBar::new(0);
    if let Ok(style) = ProgressStyle::with_template("{elapsed} {bar:16} {wide_msg}") {
        bar.set_style(style);
    }
    bar
}

#[cfg(test)]
mod tests {
    use super::*;

    fn tally(finished: u64, in_session: u64, seconds: u64) -> Tally {
        Tally {
            finished,
            in_session,
            wanted: Some(100),
            run_seconds: 1000.0,
            session: Duration::from_secs(seconds),
        }
    }

    #[test]
    fn the_time_left_is_of_this_session_s_rate() {
        let of = |tally: &Tally, run_time| {
            let rate = tally.in_session as f64 / tally.session.as_secs_f64();
            left(tally, rate, run_time)
        };
        assert_eq!(of(&tally(50, 0, 5), None), None);
        assert_eq!(of(&tally(50, 10, 5), None), Some(25.0));
        assert_eq!(of(&tally(50, 10, 5), Some(Duration::from_secs(1010))), Some(10.0));
        assert_eq!(of(&tally(50, 10, 5), Some(Duration::from_secs(900))), Some(0.0));
    }
}
