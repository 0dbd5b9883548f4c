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
//! fails most often counts most.
//!
//! First order does not see a spacing that stops at its limit before it has followed an error, so
//! that tolerances loosened by it alone may cost yield for nothing. Mixtures between it and the
//! tolerances to begin with, tᵢ = s gᵢ (Sᵢgᵢ)^(−2p/3), are therefore tried for several p; for each the number s is found by building whole systems, all from the same
//! random numbers, and the cheapest set that reaches the yield is taken. The tolerances to begin
//! with are among them: what is told never costs more for less.
//!
//! Tolerances are taken from the preferred numbers R10 (ISO 3:1973), rounded down, and stay within
//! a tenth and five times of where they began.

use serde::Serialize;
use surface_model::document::Address;

use super::bench::Bench;
use super::kind::Kind;
use super::monte_carlo::{Watcher, build_systems};
use super::readjust::Levers;
use super::sensitivity::{Sensitivity, expected_misses};

/// How far a tolerance may go from where it began.
const TIGHTEST: f64 = 0.1;
/// See [`TIGHTEST`].
const LOOSEST: f64 = 5.0;
/// Halvings of the range in which the scale is sought: to a part of one preferred number.
const HALVINGS: usize = 7;
/// How much of first order is in the mixtures that are tried.
const MIXTURES: [f64; 5] = [0.0, 0.25, 0.5, 0.75, 1.0];
/// The preferred numbers R10 of one decade (ISO 3:1973).
const PREFERRED: [f64; 10] = [1.0, 1.25, 1.6, 2.0, 2.5, 3.15, 4.0, 5.0, 6.3, 8.0];

/// Tolerances for a wanted yield.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Balance {
    /// The yield that was wanted, per cent.
    pub wanted_percent: f64,
    /// The yield with the tolerances it began with, per cent.
    pub given_percent: f64,
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

/// A set of tolerances that has been tried.
struct Tried {
    tolerances: Vec<f64>,
    yield_percent: f64,
    cost: f64,
}

/// Finds the tolerances; `given_percent` is the yield of the same draws with those to begin with.
/// `None` if the watcher breaks off.
pub(crate) fn balance(
    bench: &Bench<'_>,
    levers: &[Levers],
    sensitivities: &[Sensitivity],
    (given_percent, wanted_percent): (f64, f64),
    draws: (u64, u64),
    watcher: &mut dyn Watcher,
) -> Option<Balance> {
    let begun: Vec<f64> = bench.items.iter().map(|item| item.item.tolerance).collect();
    let mut build = |tolerances: Vec<f64>| -> Option<Tried> {
        let outcomes = build_systems(bench, levers, &tolerances, draws, watcher);
        if (outcomes.len() as u64) < draws.0 {
            return None;
        }
        let passed = outcomes.iter().filter(|outcome| bench.passes(outcome)).count();
        let yield_percent = 100.0 * passed as f64 / draws.0.max(1) as f64;
        let cost = relative_cost(&begun, &tolerances);
        Some(Tried { tolerances, yield_percent, cost })
    };
    let mut best = Tried {
        tolerances: begun.clone(),
        yield_percent: given_percent,
        cost: relative_cost(&begun, &begun),
    };
    let by_first_order = first_order(bench, sensitivities);
    for part in MIXTURES {
        // In units of the tolerance to begin with, the least being 1.
        let mixed: Vec<f64> = by_first_order.iter().map(|factor| factor.powf(part)).collect();
        let found = loosest(&begun, &mixed, wanted_percent, &mut build)?;
        if better(&found, &best, wanted_percent) {
            best = found;
        }
    }
    let tolerances = bench.items.iter().zip(&best.tolerances);
    Some(Balance {
        wanted_percent,
        given_percent,
        yield_percent: best.yield_percent,
        reached: best.yield_percent >= wanted_percent,
        relative_cost: best.cost,
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

/// Mean of what each tolerance costs over what it cost to begin with.
fn relative_cost(begun: &[f64], now: &[f64]) -> f64 {
    let cost: f64 = begun.iter().zip(now).map(|(begun, now)| begun / now).sum();
    cost / begun.len().max(1) as f64
}

/// Of two sets that reach the yield the cheaper is better, otherwise the one that comes closer.
fn better(one: &Tried, other: &Tried, wanted_percent: f64) -> bool {
    let short = |tried: &Tried| (wanted_percent - tried.yield_percent).max(0.0);
    short(one).total_cmp(&short(other)).then(one.cost.total_cmp(&other.cost)).is_lt()
}

/// The loosest set in these proportions that reaches the yield; the tightest if none does.
fn loosest(
    begun: &[f64],
    proportions: &[f64],
    wanted_percent: f64,
    build: &mut dyn FnMut(Vec<f64>) -> Option<Tried>,
) -> Option<Tried> {
    let at = |scale: f64| -> Vec<f64> {
        let each = begun.iter().zip(proportions);
        each.map(|(begun, part)| preferred(begun * (scale * part).clamp(TIGHTEST, LOOSEST)))
            .collect()
    };
    // With s from low to high every tolerance goes from its tightest to its loosest.
    let bound = proportions.iter().filter(|part| part.is_finite());
    let (mut low, mut high) = (TIGHTEST / bound.copied().fold(1.0, f64::max), LOOSEST);
    let mut best = build(at(low))?;
    for _ in 0..HALVINGS {
        if best.yield_percent < wanted_percent {
            break;
        }
        let middle = (low * high).sqrt();
        let tolerances = at(middle);
        if tolerances == best.tolerances {
            low = middle;
            continue;
        }
        let tried = build(tolerances)?;
        if tried.yield_percent >= wanted_percent {
            (low, best) = (middle, tried);
        } else {
            high = middle;
        }
    }
    Some(best)
}

/// Per item (gᵢ/Sᵢ²)^⅓ in units of gᵢ, the least of them being 1; infinite for one that does
/// nothing.
fn first_order(bench: &Bench<'_>, sensitivities: &[Sensitivity]) -> Vec<f64> {
    let misses = expected_misses(bench, sensitivities);
    let requirements = misses.first().map_or(0, Vec::len);
    let used: Vec<f64> =
        (0..requirements).map(|k| misses.iter().map(|misses| misses[k]).sum()).collect();
    let weighed = |misses: &Vec<f64>| -> f64 {
        misses.iter().zip(&used).map(|(miss, used)| miss * used).sum()
    };
    // What is weighed is Sᵢ²gᵢ², so that (gᵢ/Sᵢ²)^⅓ is gᵢ over its cube root.
    let weights: Vec<f64> = misses.iter().map(weighed).collect();
    let most = weights.iter().copied().fold(0.0, f64::max);
    weights
        .iter()
        .map(|weight| if *weight > 0.0 { (most / weight).cbrt() } else { f64::INFINITY })
        .collect()
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
