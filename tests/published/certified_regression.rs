//! The solver on NIST's Statistical Reference Datasets for nonlinear regression: certified
//! parameters and residual sums of squares to eleven digits, two starts each, the first of which
//! is far off. Data and provenance: `data/nist/README.md`.
//!
//! Scored by the log relative error, `LRE = −log₁₀ |found − certified| / |certified|`, capped at
//! 11. **Solved** means LRE ≥ 6 on every parameter and on the residual sum of squares.

use std::f64::consts::PI;

use driver::solve::{Settings, Unwatched, run};

use crate::smooth::{C, Smooth};

/// The response `y` to the parameters `b` at `x`.
type Model = fn(&[C], f64) -> C;

const SOLVED: f64 = 6.0;

const SETS: &[(&str, &str, Model)] = &[
    ("Misra1a", include_str!("data/nist/Misra1a.dat"), rise),
    ("Misra1b", include_str!("data/nist/Misra1b.dat"), |b, x| {
        b[0] * (real(1.0) - (b[1] * x / 2.0 + 1.0).powi(-2))
    }),
    ("Misra1c", include_str!("data/nist/Misra1c.dat"), |b, x| {
        b[0] * (real(1.0) - power(b[1] * 2.0 * x + 1.0, real(-0.5)))
    }),
    ("Misra1d", include_str!("data/nist/Misra1d.dat"), |b, x| b[0] * b[1] * x / (b[1] * x + 1.0)),
    ("Chwirut1", include_str!("data/nist/Chwirut1.dat"), decay_over_line),
    ("Chwirut2", include_str!("data/nist/Chwirut2.dat"), decay_over_line),
    ("Lanczos1", include_str!("data/nist/Lanczos1.dat"), three_decays),
    ("Lanczos2", include_str!("data/nist/Lanczos2.dat"), three_decays),
    ("Lanczos3", include_str!("data/nist/Lanczos3.dat"), three_decays),
    ("Gauss1", include_str!("data/nist/Gauss1.dat"), two_peaks),
    ("Gauss2", include_str!("data/nist/Gauss2.dat"), two_peaks),
    ("Gauss3", include_str!("data/nist/Gauss3.dat"), two_peaks),
    ("DanWood", include_str!("data/nist/DanWood.dat"), |b, x| b[0] * power(real(x), b[1])),
    ("Kirby2", include_str!("data/nist/Kirby2.dat"), |b, x| {
        polynomial(&b[..3], x) / (polynomial(&b[3..], x) * x + 1.0)
    }),
    ("Hahn1", include_str!("data/nist/Hahn1.dat"), |b, x| {
        polynomial(&b[..4], x) / (polynomial(&b[4..], x) * x + 1.0)
    }),
    ("Thurber", include_str!("data/nist/Thurber.dat"), |b, x| {
        polynomial(&b[..4], x) / (polynomial(&b[4..], x) * x + 1.0)
    }),
    ("MGH09", include_str!("data/nist/MGH09.dat"), |b, x| {
        b[0] * (b[1] * x + x * x) / (b[2] * x + b[3] + x * x)
    }),
    ("MGH10", include_str!("data/nist/MGH10.dat"), |b, x| b[0] * (b[1] / (b[2] + x)).exp()),
    ("MGH17", include_str!("data/nist/MGH17.dat"), |b, x| {
        b[0] + b[1] * (-b[3] * x).exp() + b[2] * (-b[4] * x).exp()
    }),
    ("Roszman1", include_str!("data/nist/Roszman1.dat"), |b, x| {
        b[0] - b[1] * x - arctangent(b[2] / (real(x) - b[3])) / PI
    }),
    ("ENSO", include_str!("data/nist/ENSO.dat"), seasons),
    ("BoxBOD", include_str!("data/nist/BoxBOD.dat"), rise),
    ("Rat42", include_str!("data/nist/Rat42.dat"), |b, x| b[0] / ((b[1] - b[2] * x).exp() + 1.0)),
    ("Rat43", include_str!("data/nist/Rat43.dat"), |b, x| {
        b[0] / power((b[1] - b[2] * x).exp() + 1.0, real(1.0) / b[3])
    }),
    ("Eckerle4", include_str!("data/nist/Eckerle4.dat"), |b, x| {
        let away = (real(x) - b[2]) / b[1];
        b[0] / b[1] * (away * away * -0.5).exp()
    }),
    ("Bennett5", include_str!("data/nist/Bennett5.dat"), |b, x| {
        b[0] * power(b[1] + x, real(-1.0) / b[2])
    }),
];

fn real(x: f64) -> C {
    C::new(x, 0.0)
}

/// `base^exponent` for a positive base; a negative one has no real power, as in the models.
fn power(base: C, exponent: C) -> C {
    if base.re > 0.0 { (exponent * base.ln()).exp() } else { real(f64::NAN) }
}

/// The library's complex arctangent loses a tiny imaginary part in its logarithms.
fn arctangent(z: C) -> C {
    C::new(z.re.atan(), z.im / (1.0 + z.re * z.re))
}

fn polynomial(coefficients: &[C], x: f64) -> C {
    coefficients.iter().rev().fold(real(0.0), |sum, c| sum * x + c)
}

fn rise(b: &[C], x: f64) -> C {
    b[0] * (real(1.0) - (-b[1] * x).exp())
}

fn decay_over_line(b: &[C], x: f64) -> C {
    (-b[0] * x).exp() / (b[1] + b[2] * x)
}

fn three_decays(b: &[C], x: f64) -> C {
    b.chunks(2).map(|term| term[0] * (-term[1] * x).exp()).sum()
}

fn two_peaks(b: &[C], x: f64) -> C {
    let peak = |b: &[C]| {
        let away = (real(x) - b[1]) / b[2];
        b[0] * (-away * away).exp()
    };
    b[0] * (-b[1] * x).exp() + peak(&b[2..5]) + peak(&b[5..8])
}

fn seasons(b: &[C], x: f64) -> C {
    let wave = |period: C, cosine: C, sine: C| {
        let angle = real(2.0 * PI * x) / period;
        cosine * angle.cos() + sine * angle.sin()
    };
    b[0] + wave(real(12.0), b[1], b[2]) + wave(b[3], b[4], b[5]) + wave(b[6], b[7], b[8])
}

/// A parsed data file.
#[derive(Debug, Default)]
struct Certified {
    starts: [Vec<f64>; 2],
    parameters: Vec<f64>,
    sum_of_squares: f64,
    /// Pairs `(y, x)`.
    data: Vec<(f64, f64)>,
}

fn parse(file: &str) -> Certified {
    let mut certified = Certified::default();
    let numbers = |line: &str| -> Vec<f64> {
        line.split_whitespace().filter_map(|word| word.parse().ok()).collect()
    };
    let mut in_data = false;
    for line in file.lines() {
        let words = line.trim_start();
        if in_data {
            if let [y, x] = numbers(line)[..] {
                certified.data.push((y, x));
            }
        } else if let Some((_, values)) = line.split_once('=').filter(|_| words.starts_with('b')) {
            let [far, near, value, _deviation] = numbers(values)[..] else { continue };
            certified.starts[0].push(far);
            certified.starts[1].push(near);
            certified.parameters.push(value);
        } else if words.starts_with("Residual Sum of Squares") {
            certified.sum_of_squares = numbers(line)[0];
        }
        in_data |= line.split_whitespace().eq(["Data:", "y", "x"]);
    }
    certified
}

fn log_relative_error(found: f64, certified: f64) -> f64 {
    if found == certified {
        11.0
    } else {
        (-((found - certified) / certified).abs().log10()).clamp(0.0, 11.0)
    }
}

/// Steps, evaluations, Jacobians and the poorest score of one run.
struct Scored {
    steps: u64,
    evaluations: u64,
    linearisations: u64,
    parameters: f64,
    squares: f64,
}

fn score(certified: &Certified, model: Model, start: &[f64], settings: &Settings) -> Scored {
    let data = certified.data.clone();
    let residuals = move |b: &[C]| data.iter().map(|&(y, x)| model(b, x) - y).collect();
    let mut problem = Smooth::new(start, residuals);
    let outcome = run(&mut problem, start, settings, &mut Unwatched).unwrap();
    let parameters = outcome
        .variables
        .iter()
        .zip(&certified.parameters)
        .map(|(found, certified)| log_relative_error(*found, *certified))
        .fold(f64::INFINITY, f64::min);
    Scored {
        steps: outcome.iterations,
        evaluations: outcome.evaluations,
        linearisations: outcome.linearisations,
        parameters,
        squares: log_relative_error(outcome.sum_of_squares, certified.sum_of_squares),
    }
}

#[test]
fn files_are_read_as_they_state() {
    for (name, file, _) in SETS {
        let certified = parse(file);
        let stated: usize = file
            .lines()
            .find_map(|line| line.trim().strip_suffix("Observations"))
            .and_then(|count| count.trim().parse().ok())
            .unwrap();
        assert_eq!(certified.data.len(), stated, "{name}");
        assert!(certified.parameters.len() >= 2 && certified.sum_of_squares > 0.0, "{name}");
    }
}

/// What is not solved, and why. Lanczos1: the certified sum of squares, 1.4e-25, is rounding of
/// data given to sixteen digits; the parameters are met to ten. BoxBOD from its first start: the
/// first step lands where the exponential vanishes and the sum of squares is flat. MGH10 from its
/// first start: still creeping along the valley when the iterations run out.
const UNSOLVED: [&str; 4] =
    ["Lanczos1 start 1", "Lanczos1 start 2", "MGH10 start 1", "BoxBOD start 1"];

#[test]
fn certified_values_are_met_from_both_starts() {
    for acceleration in [Some(0.75), None] {
        let settings = Settings::default()
            .with_acceleration(acceleration)
            .and_then(|settings| settings.with_target(0.0))
            .and_then(|settings| settings.with_reduction(1e-14))
            .and_then(|settings| settings.with_gradient(1e-12))
            .unwrap();
        let (mut steps, mut evaluations, mut linearisations) = (0, 0, 0);
        let mut unsolved = vec![];
        for &(name, file, model) in SETS {
            let certified = parse(file);
            for (start, number) in certified.starts.iter().zip(1..) {
                let scored = score(&certified, model, start, &settings);
                if scored.parameters.min(scored.squares) < SOLVED {
                    unsolved.push(format!("{name} start {number}"));
                } else {
                    steps += scored.steps;
                    evaluations += scored.evaluations;
                    linearisations += scored.linearisations;
                }
            }
        }
        println!(
            "acceleration {acceleration:?}, solved sets: {steps} steps, {evaluations} residuals, \
             {linearisations} Jacobians"
        );
        assert_eq!(unsolved, UNSOLVED);
    }
}
