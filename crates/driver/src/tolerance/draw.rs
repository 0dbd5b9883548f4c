//! Drawing the errors of a system: keyed by its number, so that it does not matter which thread
//! draws it, or when.

use rand::Rng;

use super::bench::Bench;
use super::built::Error;
use super::kind::{Form, Spread};
use crate::sampling::{RandomStream, stream};

/// Draws the errors of system `number`, one an item, in units of their tolerances.
pub(crate) fn draw(bench: &Bench<'_>, seed: u64, number: u64) -> Vec<Error> {
    let mut source = stream(seed, number);
    let forms = bench.items.iter().map(|item| item.item.kind.form());
    forms.map(|form| error(form, bench.spread, &mut source)).collect()
}

fn error(form: Form, spread: Spread, source: &mut RandomStream) -> Error {
    match (form, spread) {
        (Form::Round, _) => [number(spread, source), 0.0],
        (Form::TwoFold, _) => [number(spread, source), std::f64::consts::PI * uniform(source)],
        (Form::Across, Spread::Uniform) => {
            let (radius, angle) = (uniform(source).sqrt(), std::f64::consts::TAU * uniform(source));
            [radius * angle.cos(), radius * angle.sin()]
        }
        (Form::Across, Spread::Normal) => loop {
            let [x, y] = normal_pair(source).map(|z| 0.5 * z);
            if x * x + y * y <= 1.0 {
                break [x, y];
            }
        },
    }
}

/// From −1 to 1.
fn number(spread: Spread, source: &mut RandomStream) -> f64 {
    match spread {
        Spread::Uniform => 2.0 * uniform(source) - 1.0,
        Spread::Normal => loop {
            let [x, _] = normal_pair(source).map(|z| 0.5 * z);
            if x.abs() <= 1.0 {
                break x;
            }
        },
    }
}

/// From 0 to 1 in steps of 2⁻⁵³.
fn uniform(source: &mut RandomStream) -> f64 {
    (source.next_u64() >> 11) as f64 / (1_u64 << 53) as f64
}

/// Two normal numbers (G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29, 610 (1958)).
fn normal_pair(source: &mut RandomStream) -> [f64; 2] {
    let (radius, angle) = (1.0 - uniform(source), std::f64::consts::TAU * uniform(source));
    let radius = (-2.0 * radius.ln()).sqrt();
    [radius * angle.cos(), radius * angle.sin()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn mean_squares_are_what_is_told_of_them() {
        let mut source = stream(7, 0);
        for spread in [Spread::Normal, Spread::Uniform] {
            let (mut single, mut across) = (0.0, 0.0);
            let draws = 100_000;
            for _ in 0..draws {
                single += error(Form::Round, spread, &mut source)[0].powi(2);
                let [x, y] = error(Form::Across, spread, &mut source);
                assert!(x * x + y * y <= 1.0 + 1e-12);
                across += x * x + y * y;
            }
            let (single, across) = (single / f64::from(draws), across / f64::from(draws));
            // Five standard errors of these means are below 1 %.
            assert!((single / spread.mean_square() - 1.0).abs() < 0.02, "{spread:?} {single}");
            assert!((across / spread.mean_square_across() - 1.0).abs() < 0.02, "{across}");
        }
    }
}
