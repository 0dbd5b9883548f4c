//! Tolerances balanced to a yield at least cost.
//!
//! *Cost.* A tolerance half as wide is taken to cost twice as much, cost = Σ gᵢ/tᵢ with gᵢ the
//! tolerance to begin with, so that every tolerance then costs one unit: the reciprocal model of
//! cost and tolerance (K. W. Chase, W. H. Greenwood, B. G. Loosli, L. F. Hauglund, Manufacturing
//! Review 3, 49 (1990), with the exponent 1; from memory). It knows nothing of your workshop's
//! prices.
//!
//! *Yield.* To first order each tolerance adds Sᵢ²tᵢ² to the squared misses. The cost is least
//! for a given sum where tᵢ = s (gᵢ/Sᵢ²)^⅓: by Lagrange's rule, the more sensitive the tighter.
//! Each requirement counts in Sᵢ² with the part of it that is used up at the start, so that what
//! fails most often counts most. The one number s is then found by building whole systems, all
//! from the same random numbers.
//!
//! Tolerances are taken from the preferred numbers R10 (ISO 3:1973), rounded down, and stay within
//! a tenth and five times of where they began.

use serde::Serialize;
use surface_model::document::Address;

use super::bench::Bench;
use super::kind::Kind;
use super::monte_carlo::{Watcher, build_systems};
use super::readjust::Levers;
use super::sensitivity::Sensitivity;

/// How far a tolerance may go from where it began.
const TIGHTEST: f64 = 0.1;
/// See [`TIGHTEST`].
const LOOSEST: f64 = 5.0;
/// Halvings of the range in which the scale is sought.
const HALVINGS: usize = 9;
/// The preferred numbers R10 of one decade (ISO 3:1973).
const PREFERRED: [f64; 10] = [1.0, 1.25, 1.6, 2.0, 2.5, 3.15, 4.0, 5.0, 6.3, 8.0];

/// Tolerances for a wanted yield.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Balance {
    /// The yield that was wanted, per cent.
    pub wanted_percent: f64,
    /// The yield with these tolerances, from the same random numbers, per cent.
    pub yield_percent: f64,
    /// Whether it is what was wanted.
    pub reached: bool,
    /// Cost over that of the tolerances it began with.
    pub relative_cost: f64,
    /// The tolerances.
    pub tolerances: Vec<BalancedTolerance>,
}

/// One tolerance, before and after.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BalancedTolerance {
    /// What is off.
    pub kind: Kind,
    /// Where.
    pub at: Address,
    /// Before.
    pub from: f64,
    /// After.
    pub to: f64,
}

/// Finds the tolerances; `None` if the watcher breaks off.
pub(crate) fn balance(
    bench: &Bench<'_>,
    levers: &[Levers],
    sensitivities: &[Sensitivity],
    wanted_percent: f64,
    draws: (u64, u64),
    watcher: &mut dyn Watcher,
) -> Option<Balance> {
    let begun: Vec<f64> = bench.items.iter().map(|item| item.item.tolerance).collect();
    let shapes = shapes(bench, sensitivities);
    let at = |scale: f64| -> Vec<f64> {
        let each = begun.iter().zip(&shapes);
        each.map(|(&begun, &shape)| {
            let wanted = if shape.is_finite() { scale * shape } else { f64::INFINITY };
            preferred(wanted.clamp(TIGHTEST * begun, LOOSEST * begun))
        })
        .collect()
    };
    let mut yield_of = |tolerances: &[f64]| -> Option<f64> {
        let outcomes = build_systems(bench, levers, tolerances, draws, watcher);
        if (outcomes.len() as u64) < draws.0 {
            return None;
        }
        let passed = outcomes.iter().filter(|outcome| bench.passes(outcome)).count();
        Some(100.0 * passed as f64 / draws.0.max(1) as f64)
    };
    // With s from low to high every tolerance goes from its tightest to its loosest.
    let ratios: Vec<f64> = begun
        .iter()
        .zip(&shapes)
        .filter(|(_, shape)| shape.is_finite())
        .map(|(begun, shape)| begun / shape)
        .collect();
    let mut low = TIGHTEST * ratios.iter().copied().fold(f64::INFINITY, f64::min);
    let mut high = LOOSEST * ratios.iter().copied().fold(0.0, f64::max);
    if !(low > 0.0 && high > low && high.is_finite()) {
        (low, high) = (1.0, 1.0);
    }
    let mut best = at(low);
    let mut reached = yield_of(&best)?;
    for _ in 0..HALVINGS {
        let middle = (low * high).sqrt();
        let tried = at(middle);
        if reached < wanted_percent {
            break;
        }
        if tried == best {
            low = middle;
            continue;
        }
        let got = yield_of(&tried)?;
        if got >= wanted_percent {
            (low, best, reached) = (middle, tried, got);
        } else {
            high = middle;
        }
    }
    let cost: f64 = begun.iter().zip(&best).map(|(begun, now)| begun / now).sum();
    let tolerances = bench.items.iter().zip(&best);
    Some(Balance {
        wanted_percent,
        yield_percent: reached,
        reached: reached >= wanted_percent,
        relative_cost: cost / begun.len().max(1) as f64,
        tolerances: tolerances
            .map(|(item, &to)| BalancedTolerance {
                kind: item.item.kind,
                at: item.item.at(),
                from: item.item.tolerance,
                to,
            })
            .collect(),
    })
}

/// Per item (gᵢ/Sᵢ²)^⅓; infinite for one that does nothing.
fn shapes(bench: &Bench<'_>, sensitivities: &[Sensitivity]) -> Vec<f64> {
    let misses: Vec<Vec<f64>> =
        sensitivities.iter().map(|sensitivity| sensitivity.expected_misses(bench)).collect();
    let requirements = misses.first().map_or(0, Vec::len);
    let used: Vec<f64> =
        (0..requirements).map(|k| misses.iter().map(|misses| misses[k]).sum()).collect();
    let shape = |(sensitivity, misses): (&Sensitivity, &Vec<f64>)| {
        let weighed: f64 = misses.iter().zip(&used).map(|(miss, used)| miss * used).sum();
        let tolerance = sensitivity.tolerance;
        (tolerance * tolerance * tolerance / weighed).cbrt()
    };
    sensitivities.iter().zip(&misses).map(shape).collect()
}

/// The largest preferred number that is not larger.
fn preferred(value: f64) -> f64 {
    let decade = value.log10().floor() as i32;
    // The next decade's first number counts too: a logarithm may come out a hair too small.
    let candidates = (decade..=decade + 1).flat_map(|decade| {
        PREFERRED.map(|number| format!("{number}e{decade}").parse().unwrap_or(number))
    });
    candidates.filter(|&candidate: &f64| candidate <= value * (1.0 + 1e-12)).fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn preferred_numbers_are_rounded_down() {
        for (value, wanted) in
            [(1.0, 1.0), (0.1, 0.1), (0.099, 0.08), (0.0124, 0.01), (0.013, 0.0125), (7.9, 6.3)]
        {
            assert_eq!(preferred(value), wanted, "{value}");
        }
    }
}
