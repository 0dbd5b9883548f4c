//! Many systems built at random, and what is told of them.

use std::ops::ControlFlow;

use rayon::prelude::*;
use serde::Serialize;

use super::bench::Bench;
use super::built::Gauges;
use super::draw::draw;
use super::readjust::Levers;
use super::requirement::Quantity;
use super::sensitivity::Sensitivity;
use super::system::{Miss, StateOutcome, SystemOutcome};

/// Systems that are built between two looks at the clock.
const BATCH: u64 = 256;

/// Who watches the building of systems.
pub trait Watcher {
    /// `done` of `of` systems have been built. To break off is to stop there.
    fn built(&mut self, done: u64, of: u64) -> ControlFlow<()>;
}

/// Nobody watches.
#[derive(Debug, Clone, Copy, Default)]
pub struct Unwatched;

impl Watcher for Unwatched {
    fn built(&mut self, _: u64, _: u64) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }
}

/// Builds systems 0 to `systems` with errors drawn within `tolerances`, one an item; fewer if the
/// watcher breaks off.
pub(crate) fn build_systems(
    bench: &Bench<'_>,
    levers: &[Levers],
    tolerances: &[f64],
    (systems, seed): (u64, u64),
    watcher: &mut dyn Watcher,
) -> Vec<SystemOutcome> {
    let mut outcomes = Vec::new();
    let mut done = 0;
    while done < systems {
        let batch = done..systems.min(done + BATCH);
        done = batch.end;
        outcomes.par_extend(batch.into_par_iter().map_init(Gauges::default, |gauges, number| {
            let mut errors = draw(bench, seed, number);
            for ((error, item), tolerance) in errors.iter_mut().zip(&bench.items).zip(tolerances) {
                error[0] *= tolerance;
                if item.item.kind.form() == super::kind::Form::Across {
                    error[1] *= tolerance;
                }
            }
            bench.system(levers, &errors, gauges)
        }));
        if watcher.built(done, systems).is_break() {
            break;
        }
    }
    outcomes
}

/// What came of the systems that were built.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct MonteCarlo {
    /// Systems asked for.
    pub systems_wanted: u64,
    /// Systems built.
    pub systems: u64,
    /// Which sequence of random numbers.
    pub seed: u64,
    /// Systems that do all that is required.
    pub passed: u64,
    /// Those among all, per cent.
    pub yield_percent: f64,
    /// The yield's 95 % confidence interval (E. B. Wilson, J. Am. Stat. Assoc. 22, 209 (1927)).
    pub yield_between_percent: [f64; 2],
    /// What the others fall short in, and how many of them; most first.
    pub missed: Vec<MissCount>,
    /// Systems in which a ray does not get through.
    pub failed: u64,
    /// Why, for the first of them.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub first_fault: Option<String>,
    /// Systems in which the re-adjustment of some state stopped at a bound.
    pub readjustment_at_bound: u64,
    /// One entry a state.
    pub states: Vec<StateDistribution>,
    /// Largest change of direction between any two states, µrad, mounts as the file says.
    pub boresight_wander_urad: Distribution,
    /// The same if every mount slid; only where some rotate.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub boresight_wander_sliding_urad: Option<Distribution>,
    /// What is allowed of the wander, µrad.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub boresight_wander_within_urad: Option<f64>,
    /// Systems within it, per cent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub boresight_wander_within_percent: Option<f64>,
}

/// How many systems fall short in something.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub struct MissCount {
    /// In what.
    pub what: Miss,
    /// How many.
    pub systems: u64,
}

/// How the systems are spread in one state.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateDistribution {
    /// Name of the state.
    pub state: String,
    /// One entry a quantity.
    pub quantities: Vec<QuantityDistribution>,
    /// By how much each re-adjusted spacing was moved, sizes, mm.
    pub readjustment_mm: Vec<Distribution>,
}

/// How the systems are spread in one quantity of one state.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct QuantityDistribution {
    /// Which.
    pub quantity: Quantity,
    /// Its size in the design as drawn.
    pub nominal: f64,
    /// Root mean square that the sensitivities predict, the design as drawn included.
    pub predicted_rms: f64,
    /// What is allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub within: Option<f64>,
    /// Systems within, per cent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub within_percent: Option<f64>,
    /// Its sizes.
    #[serde(flatten)]
    pub sizes: Distribution,
}

/// Percentiles of a size: so many per cent of the systems are no larger. `None` where systems
/// fail.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Distribution {
    /// Root mean square of the systems that do not fail.
    pub rms: f64,
    /// Half of the systems.
    pub percent_50: Option<f64>,
    /// Nine of ten.
    pub percent_90: Option<f64>,
    /// 98 of a hundred.
    pub percent_98: Option<f64>,
    /// All.
    pub largest: Option<f64>,
}

impl Distribution {
    /// Of sizes; infinite ones are of systems that fail.
    fn of(mut sizes: Vec<f64>) -> Self {
        sizes.sort_by(f64::total_cmp);
        let at = |percent: usize| {
            let rank = (sizes.len() * percent).div_ceil(100).max(1) - 1;
            sizes.get(rank).copied().filter(|size| size.is_finite())
        };
        let sound = || sizes.iter().filter(|size| size.is_finite());
        let squares: f64 = sound().map(|size| size * size).sum();
        Self {
            rms: (squares / sound().count().max(1) as f64).sqrt(),
            percent_50: at(50),
            percent_90: at(90),
            percent_98: at(98),
            largest: at(100),
        }
    }
}

/// Tells what came of systems.
pub(crate) fn account(
    bench: &Bench<'_>,
    sensitivities: &[Sensitivity],
    outcomes: &[SystemOutcome],
    (systems_wanted, seed): (u64, u64),
) -> MonteCarlo {
    let count = |what: &dyn Fn(&SystemOutcome) -> bool| {
        outcomes.iter().filter(|outcome| what(outcome)).count() as u64
    };
    let (passed, systems) = (count(&|outcome| bench.passes(outcome)), outcomes.len() as u64);
    let fault_of = |outcome: &SystemOutcome| {
        let states = outcome.states.iter().zip(&bench.states);
        states.into_iter().find_map(|(outcome, state)| {
            outcome.as_ref().err().map(|fault| format!("state {}: {fault}", state.name))
        })
    };
    let wander = |boresight: fn(&StateOutcome) -> [f64; 2]| {
        Distribution::of(outcomes.iter().map(|outcome| outcome.wander_urad(boresight)).collect())
    };
    let missed = |what: Miss| count(&|outcome| bench.misses(outcome, what));
    let mut all_missed: Vec<MissCount> =
        Miss::ALL.into_iter().map(|what| MissCount { what, systems: missed(what) }).collect();
    all_missed.retain(|miss| miss.systems > 0);
    all_missed.sort_by_key(|miss| std::cmp::Reverse(miss.systems));
    let percent = |part: u64| 100.0 * part as f64 / systems.max(1) as f64;
    MonteCarlo {
        systems_wanted,
        systems,
        seed,
        passed,
        yield_percent: percent(passed),
        yield_between_percent: wilson(passed, systems).map(|part| 100.0 * part),
        missed: all_missed,
        failed: missed(Miss::Rays),
        first_fault: outcomes.iter().find_map(fault_of),
        readjustment_at_bound: count(&|outcome| {
            outcome.states.iter().flatten().any(|state| state.readjusted.at_bound)
        }),
        states: (0..bench.states.len())
            .map(|k| distribution(bench, k, sensitivities, outcomes))
            .collect(),
        boresight_wander_urad: wander(|outcome| outcome.numbers.boresight_urad),
        boresight_wander_sliding_urad: bench
            .any_rotating
            .then(|| wander(|outcome| outcome.sliding_urad)),
        boresight_wander_within_urad: bench.wander_within_urad,
        boresight_wander_within_percent: bench
            .wander_within_urad
            .map(|_| 100.0 - percent(missed(Miss::Wander))),
    }
}

fn distribution(
    bench: &Bench<'_>,
    k: usize,
    sensitivities: &[Sensitivity],
    outcomes: &[SystemOutcome],
) -> StateDistribution {
    let state = &bench.states[k];
    let sizes = |size: &dyn Fn(&StateOutcome) -> f64| -> Vec<f64> {
        let of = |outcome: &SystemOutcome| outcome.states[k].as_ref().map_or(f64::INFINITY, size);
        outcomes.iter().map(of).collect()
    };
    let quantities = Quantity::ALL.map(|quantity| {
        let sizes = sizes(&|outcome| outcome.numbers.size(quantity));
        let within = state.requirement.within(quantity);
        let inside = |within: f64| sizes.iter().filter(|&&size| size <= within).count() as f64;
        let nominal = bench.nominal(k, quantity);
        let added = sensitivities.iter().map(|sensitivity| {
            sensitivity.mean_square(bench.spread) * sensitivity.states[k].size(quantity).powi(2)
        });
        QuantityDistribution {
            quantity,
            nominal,
            predicted_rms: (nominal * nominal + added.sum::<f64>()).sqrt(),
            within,
            within_percent: within.map(|within| 100.0 * inside(within) / sizes.len().max(1) as f64),
            sizes: Distribution::of(sizes),
        }
    });
    let moved = (0..bench.readjusted(k).len()).map(|spacing| {
        Distribution::of(sizes(&|outcome| outcome.readjusted.moved_mm[spacing].abs()))
    });
    StateDistribution {
        state: state.name.clone(),
        quantities: quantities.into(),
        readjustment_mm: moved.collect(),
    }
}

impl Bench<'_> {
    /// Size of a quantity in the design as drawn.
    pub(crate) fn nominal(&self, k: usize, quantity: Quantity) -> f64 {
        let state = &self.states[k];
        let rays = self.roots.len();
        let (waves, first_order) = state.nominal.split_at(rays * state.trains.len());
        match quantity {
            Quantity::WavefrontRmsWaves => waves
                .chunks(rays)
                .map(|chunk| chunk.iter().map(|wave| wave * wave).sum::<f64>())
                .fold(0.0, f64::max)
                .sqrt(),
            Quantity::RatioPercent => first_order[0].abs(),
            Quantity::ExitSlopeUrad => first_order[1].abs(),
            Quantity::BoresightUrad => 0.0,
        }
    }
}

/// Wilson's 95 % interval of a proportion.
fn wilson(passed: u64, of: u64) -> [f64; 2] {
    const Z: f64 = 1.959_963_984_540_054;
    if of == 0 {
        return [0.0, 1.0];
    }
    let (n, part) = (of as f64, passed as f64 / of as f64);
    let centre = part + Z * Z / (2.0 * n);
    let reach = Z * (part * (1.0 - part) / n + Z * Z / (4.0 * n * n)).sqrt();
    let all = 1.0 + Z * Z / n;
    [((centre - reach) / all).max(0.0), ((centre + reach) / all).min(1.0)]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn percentiles_count_systems() {
        let sizes: Vec<f64> = (1..=100).rev().map(f64::from).collect();
        let told = Distribution::of(sizes);
        assert_eq!(
            [told.percent_50, told.percent_90, told.percent_98, told.largest],
            [Some(50.0), Some(90.0), Some(98.0), Some(100.0)]
        );
        let failing = Distribution::of(vec![1.0, f64::INFINITY]);
        assert_eq!((failing.percent_50, failing.percent_90, failing.rms), (Some(1.0), None, 1.0));
    }

    #[test]
    fn an_interval_of_wilson() {
        // 8 of 10: 0.4902 to 0.9433, the usual worked example; value from memory.
        let [low, high] = wilson(8, 10);
        assert!((low - 0.4902).abs() < 5e-5 && (high - 0.9433).abs() < 5e-5, "{low} {high}");
        assert_eq!(wilson(0, 0), [0.0, 1.0]);
    }
}
