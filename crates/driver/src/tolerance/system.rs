//! One built system: re-adjusted in every state, then set as well as it can be set.

use serde::Serialize;

use super::bench::Bench;
use super::built::{Error, Gauges, Mounts, StateFault, StateNumbers};
use super::readjust::{Levers, Readjusted};
use super::requirement::Quantity;

/// A state of a built system after re-adjustment.
#[derive(Debug, Clone)]
pub(crate) struct StateOutcome {
    pub(crate) numbers: StateNumbers,
    pub(crate) readjusted: Readjusted,
    /// Where the beam would point if every mount slid, µrad.
    pub(crate) sliding_urad: [f64; 2],
}

/// A built system.
#[derive(Debug, Clone)]
pub(crate) struct SystemOutcome {
    pub(crate) states: Vec<Result<StateOutcome, StateFault>>,
}

impl Bench<'_> {
    /// Builds a system with these errors, re-adjusts it and measures it.
    pub(crate) fn system(
        &self,
        levers: &[Levers],
        errors: &[Error],
        gauges: &mut Gauges,
    ) -> SystemOutcome {
        let built = self.build(errors);
        let states = (0..self.states.len()).map(|k| {
            let mut packed = built.packed.clone();
            let mut state = self.state_of(&built, k, Mounts::AsGiven);
            let (mut numbers, readjusted) =
                self.readjust(k, &levers[k], &mut packed, &mut state, gauges)?;
            if !built.settings.is_empty() {
                for &(at, by) in &built.settings {
                    packed[at] += by;
                }
                self.move_to(k, &packed, &mut state);
                numbers = self.measure(k, &state, gauges)?;
            }
            let mut sliding_urad = numbers.boresight_urad;
            if self.any_rotating {
                let mut sliding = self.state_of(&built, k, Mounts::Sliding);
                self.move_to(k, &packed, &mut sliding);
                sliding_urad = self.measure(k, &sliding, gauges)?.boresight_urad;
            }
            Ok(StateOutcome { numbers, readjusted, sliding_urad })
        });
        SystemOutcome { states: states.collect() }
    }

    /// Whether a system does what is required of it.
    pub(crate) fn passes(&self, system: &SystemOutcome) -> bool {
        Miss::ALL.iter().all(|&miss| !self.misses(system, miss))
    }

    /// Whether a system falls short in this.
    pub(crate) fn misses(&self, system: &SystemOutcome, miss: Miss) -> bool {
        let quantity = match miss {
            Miss::Rays => return system.states.iter().any(Result::is_err),
            Miss::Wander => {
                return self.wander_within_urad.is_some_and(|within| {
                    system.wander_urad(|outcome| outcome.numbers.boresight_urad) > within
                });
            }
            Miss::WavefrontRmsWaves => Quantity::WavefrontRmsWaves,
            Miss::RatioPercent => Quantity::RatioPercent,
            Miss::ExitSlopeUrad => Quantity::ExitSlopeUrad,
            Miss::BoresightUrad => Quantity::BoresightUrad,
        };
        self.states.iter().zip(&system.states).any(|(state, outcome)| {
            let within = state.requirement.within(quantity);
            let size = outcome.as_ref().map_or(f64::INFINITY, |o| o.numbers.size(quantity));
            within.is_some_and(|within| size > within)
        })
    }
}

/// What a built system may fall short in.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Miss {
    /// A ray does not get through.
    Rays,
    /// The wavefront of a state.
    WavefrontRmsWaves,
    /// The ratio of a state.
    RatioPercent,
    /// The exit slope of a state.
    ExitSlopeUrad,
    /// The direction of the beam in a state.
    BoresightUrad,
    /// The change of direction through the zoom.
    Wander,
}

impl Miss {
    /// All of them.
    pub(crate) const ALL: [Self; 6] = [
        Self::Rays,
        Self::WavefrontRmsWaves,
        Self::RatioPercent,
        Self::ExitSlopeUrad,
        Self::BoresightUrad,
        Self::Wander,
    ];
}

impl SystemOutcome {
    /// The largest change of direction between any two states, µrad; infinite where rays fail.
    pub(crate) fn wander_urad(&self, boresight: impl Fn(&StateOutcome) -> [f64; 2]) -> f64 {
        let mut directions = Vec::with_capacity(self.states.len());
        for state in &self.states {
            let Ok(outcome) = state else { return f64::INFINITY };
            directions.push(boresight(outcome));
        }
        widest(&directions)
    }
}

impl StateNumbers {
    /// Size of a quantity.
    pub(crate) fn size(&self, quantity: Quantity) -> f64 {
        match quantity {
            Quantity::WavefrontRmsWaves => self.wavefront_rms_waves,
            Quantity::RatioPercent => self.ratio_percent.abs(),
            Quantity::ExitSlopeUrad => self.exit_slope_urad.abs(),
            Quantity::BoresightUrad => self.off_axis_urad(),
        }
    }
}

/// Every two of so many states.
pub(crate) fn pairs(states: usize) -> impl Iterator<Item = (usize, usize)> {
    (0..states).flat_map(|other| (0..other).map(move |one| (one, other)))
}

/// Angle between two directions, as small angles go.
pub(crate) fn between(one: [f64; 2], other: [f64; 2]) -> f64 {
    (one[0] - other[0]).hypot(one[1] - other[1])
}

/// Angle between the two directions furthest apart; none between fewer than two.
pub(crate) fn widest(directions: &[[f64; 2]]) -> f64 {
    pairs(directions.len())
        .map(|(one, other)| between(directions[one], directions[other]))
        .fold(0.0, f64::max)
}
