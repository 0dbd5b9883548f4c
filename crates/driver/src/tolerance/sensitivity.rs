//! What each tolerance alone does to every state, the spacings following it.
//!
//! An error that keeps the system round acts through the exact derivative, from the reverse sweep,
//! times the tolerance. Any other is built at its full tolerance, traced exactly, and the design
//! as drawn is subtracted. In both cases the spacings follow to first order, except an error of
//! setting, which comes after all re-adjustment.

use rayon::prelude::*;
use serde::Serialize;
use surface_model::document::Address;

use super::ToleranceError;
use super::bench::Bench;
use super::built::{Gauges, Mounts};
use super::effect::Effect;
use super::kind::{Form, Kind, Spread};
use super::readjust::Levers;
use super::requirement::Quantity;
use super::system::{between, pairs, widest};

/// How a sensitivity was found.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum By {
    /// Exact derivative times the tolerance.
    Derivative,
    /// Exact trace at the full tolerance.
    Trace,
}

impl By {
    /// Its word.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Derivative => "derivative",
            Self::Trace => "trace",
        }
    }
}

/// What one tolerance does.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Sensitivity {
    /// What is off.
    pub kind: Kind,
    /// Where.
    pub at: Address,
    /// The tolerance either way, in the unit of its kind.
    pub tolerance: f64,
    /// How it was found.
    pub by: By,
    /// Part of all expected misses, squared and added up over what is required, per cent.
    pub share_percent: f64,
    /// Largest change of the beam's direction between any two states, µrad.
    pub wander_urad: f64,
    /// One entry a state.
    pub states: Vec<StateSensitivity>,
    /// Where the beam points, per state, µrad.
    #[serde(skip)]
    directions: Vec<[f64; 2]>,
}

/// What one tolerance does to one state once the spacings have followed it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateSensitivity {
    /// Name of the state.
    pub state: String,
    /// RMS of what it adds to the wavefront, tilt taken out, waves.
    pub wavefront_rms_waves: f64,
    /// Change of the ratio, per cent.
    pub ratio_percent: f64,
    /// Change of the exit slope, µrad.
    pub exit_slope_urad: f64,
    /// Direction of the beam, µrad.
    pub boresight_urad: f64,
    /// By how much each re-adjusted spacing follows, mm.
    pub readjustment_mm: Vec<f64>,
}

/// Finds what every tolerance does.
///
/// # Errors
/// A ray fails with one of the errors at its full tolerance.
pub(crate) fn sensitivities(
    bench: &Bench<'_>,
    levers: &[Levers],
) -> Result<Vec<Sensitivity>, ToleranceError> {
    let spacings: Vec<Vec<Vec<f64>>> = (0..bench.states.len())
        .map(|k| {
            let packed = bench.readjusted(k).iter();
            packed.map(|&(packed, _)| bench.by_packed(k, packed)).collect()
        })
        .collect();
    let numbers = 0..bench.items.len();
    let found: Result<Vec<Sensitivity>, ToleranceError> = numbers
        .into_par_iter()
        .map_init(Gauges::default, |gauges, number| {
            sensitivity(bench, levers, &spacings, number, gauges)
        })
        .collect();
    let mut found = found?;
    let misses = expected_misses(bench, &found).into_iter().map(|misses| misses.iter().sum());
    let misses: Vec<f64> = misses.collect();
    let all: f64 = misses.iter().sum();
    for (sensitivity, misses) in found.iter_mut().zip(misses) {
        sensitivity.share_percent = if all > 0.0 { 100.0 * misses / all } else { 0.0 };
    }
    Ok(found)
}

fn sensitivity(
    bench: &Bench<'_>,
    levers: &[Levers],
    spacings: &[Vec<Vec<f64>>],
    number: usize,
    gauges: &mut Gauges,
) -> Result<Sensitivity, ToleranceError> {
    let item = bench.items[number];
    let tolerance = item.item.tolerance;
    let mut states = Vec::with_capacity(bench.states.len());
    let mut directions = Vec::with_capacity(bench.states.len());
    for (k, state) in bench.states.iter().enumerate() {
        let (change, direction) = match bench.by_error(k, item.effect) {
            Some(by) => (by.iter().map(|by| tolerance * by).collect(), [0.0; 2]),
            None => traced(bench, number, k, gauges).map_err(|fault| ToleranceError::Spoilt {
                at: item.item.at().to_string(),
                kind: item.item.kind.word(),
                state: state.name.clone(),
                fault: fault.to_string(),
            })?,
        };
        let (after, readjustment_mm) = match item.effect {
            Effect::Setting { .. } => (change, vec![0.0; spacings[k].len()]),
            _ => levers[k].follow(&change, &spacings[k]),
        };
        let rays = bench.roots.len();
        let (waves, first_order) = after.split_at(rays * state.trains.len());
        let squares = waves.chunks(rays).map(|chunk| chunk.iter().map(|w| w * w).sum::<f64>());
        states.push(StateSensitivity {
            state: state.name.clone(),
            wavefront_rms_waves: squares.fold(0.0, f64::max).sqrt(),
            ratio_percent: first_order[0],
            exit_slope_urad: first_order[1],
            boresight_urad: direction[0].hypot(direction[1]),
            readjustment_mm,
        });
        directions.push(direction);
    }
    let by = if item.item.kind.form() == Form::Round { By::Derivative } else { By::Trace };
    let (kind, at) = (item.item.kind, item.item.at());
    let wander_urad = widest(&directions);
    Ok(Sensitivity { kind, at, tolerance, by, share_percent: 0.0, wander_urad, states, directions })
}

/// The change of what is measured when one error alone is at its full tolerance, and where the
/// beam then points, µrad.
fn traced(
    bench: &Bench<'_>,
    number: usize,
    k: usize,
    gauges: &mut Gauges,
) -> Result<(Vec<f64>, [f64; 2]), super::built::StateFault> {
    let mut errors = vec![[0.0; 2]; bench.items.len()];
    let item = bench.items[number].item;
    errors[number] = match item.kind.form() {
        Form::Across => [0.0, item.tolerance],
        Form::Round | Form::TwoFold => [item.tolerance, 0.0],
    };
    let built = bench.build(&errors);
    let state = bench.state_of(&built, k, Mounts::AsGiven);
    let numbers = bench.measure(k, &state, gauges)?;
    let nominal = &bench.states[k].nominal;
    let change = gauges.row.iter().zip(nominal).map(|(now, before)| now - before).collect();
    Ok((change, numbers.boresight_urad))
}

impl Sensitivity {
    /// Mean square of the error over the square of its tolerance.
    pub(crate) fn mean_square(&self, spread: Spread) -> f64 {
        match self.kind.form() {
            Form::Across => spread.mean_square_across(),
            Form::Round | Form::TwoFold => spread.mean_square(),
        }
    }

    /// Per state and quantity, the mean square it adds, in units of what is allowed.
    fn misses_in_states(&self, bench: &Bench<'_>) -> Vec<f64> {
        let mean_square = self.mean_square(bench.spread);
        let states = self.states.iter().zip(&bench.states);
        states
            .flat_map(|(sensitivity, state)| {
                Quantity::ALL.map(|quantity| {
                    let within = state.requirement.within(quantity);
                    within.map_or(0.0, |within| {
                        mean_square * (sensitivity.size(quantity) / within).powi(2)
                    })
                })
            })
            .collect()
    }

    /// Mean square of what it turns the beam by between two states, µrad².
    fn wander_square(&self, spread: Spread, (one, other): (usize, usize)) -> f64 {
        self.mean_square(spread) * between(self.directions[one], self.directions[other]).powi(2)
    }
}

/// Per tolerance, what it adds to everything that is required, mean squares in units of what is
/// allowed: per state and quantity, and last, where the wander through the zoom is limited, that
/// between the two states where all tolerances together make it widest.
pub(crate) fn expected_misses(bench: &Bench<'_>, all: &[Sensitivity]) -> Vec<Vec<f64>> {
    let mut misses: Vec<Vec<f64>> = all.iter().map(|one| one.misses_in_states(bench)).collect();
    let Some(within) = bench.wander_within_urad else { return misses };
    let sum = |&pair: &(usize, usize)| -> f64 {
        all.iter().map(|one| one.wander_square(bench.spread, pair)).sum()
    };
    if let Some(pair) = pairs(bench.states.len()).max_by(|a, b| sum(a).total_cmp(&sum(b))) {
        for (misses, one) in misses.iter_mut().zip(all) {
            misses.push(one.wander_square(bench.spread, pair) / (within * within));
        }
    }
    misses
}

impl StateSensitivity {
    /// Size of the change of a quantity.
    #[must_use]
    pub fn size(&self, quantity: Quantity) -> f64 {
        match quantity {
            Quantity::WavefrontRmsWaves => self.wavefront_rms_waves,
            Quantity::RatioPercent => self.ratio_percent.abs(),
            Quantity::ExitSlopeUrad => self.exit_slope_urad.abs(),
            Quantity::BoresightUrad => self.boresight_urad,
        }
    }
}
