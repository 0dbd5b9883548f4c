//! One built system: re-adjusted in every state, then set as well as it can be set.

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
        let every_state = self.states.iter().zip(&system.states).all(|(state, outcome)| {
            outcome.as_ref().is_ok_and(|outcome| {
                Quantity::ALL.iter().all(|&quantity| {
                    let within = state.requirement.within(quantity);
                    within.is_none_or(|within| outcome.numbers.size(quantity) <= within)
                })
            })
        });
        let steady = self.wander_within_urad.is_none_or(|within| {
            system.wander_urad(|outcome| outcome.numbers.boresight_urad) <= within
        });
        every_state && steady
    }
}

impl SystemOutcome {
    /// The largest change of direction between any two states, µrad; infinite where rays fail.
    pub(crate) fn wander_urad(&self, boresight: impl Fn(&StateOutcome) -> [f64; 2]) -> f64 {
        let mut directions = Vec::with_capacity(self.states.len());
        for state in &self.states {
            let Ok(outcome) = state else { return f64::INFINITY };
            directions.push(boresight(outcome));
        }
        let mut widest = 0.0_f64;
        for (i, a) in directions.iter().enumerate() {
            for b in &directions[..i] {
                widest = widest.max((a[0] - b[0]).hypot(a[1] - b[1]));
            }
        }
        widest
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
