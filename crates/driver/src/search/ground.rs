//! The ground a candidate stands on: a design's merit function over its variables, and how far an
//! ordinary shake of each goes.

use std::f64::consts::PI;

use merit_function::block::{BlockProblem, Bounds};
use merit_function::problem::MeritFunction;
use merit_function::variables::{SharedVariable, Variables};
use rand::RngExt;
use surface_model::place::Place;

use crate::sampling::RandomStream;

/// An ordinary shake of a curvature, as a share of its range.
const OF_CURVATURE: f64 = 0.02;
/// Of a thickness or an air inside a group, as a share of its likely range.
const OF_LENGTH: f64 = 0.1;
/// Of a spacing or a position, as a share of the tube.
const OF_TRACK: f64 = 0.02;
/// A number is shaken by a share of itself too, up to so many ordinary shakes.
const STRONGEST: f64 = 10.0;
/// A length inside a group without an upper bound is likely to stay below so many times its value,
/// and below this share of the tube.
const LONGEST: f64 = 3.0;
const LONGEST_OF_TRACK: f64 = 0.02;

/// A design's merit function and what a search has to know of its variables.
#[derive(Debug)]
pub(super) struct Ground {
    pub(super) exact: MeritFunction,
    shakes: Vec<f64>,
    residuals: Vec<f64>,
}

impl Ground {
    pub(super) fn new(exact: MeritFunction, track_mm: f64) -> Self {
        let shakes = shakes(exact.variables(), track_mm);
        let residuals = vec![0.0; exact.shape().residuals()];
        Self { exact, shakes, residuals }
    }

    /// The merit at a point; `None` where it cannot be evaluated.
    pub(super) fn merit(&mut self, variables: &[f64]) -> Option<f64> {
        self.exact.residuals(variables, &mut self.residuals).ok()?;
        let merit: f64 = self.residuals.iter().map(|r| r * r).sum();
        merit.is_finite().then_some(merit)
    }

    /// The variables shaken: each by a normal number times `share` of itself and of what is
    /// ordinary for its kind, kept within its bounds.
    pub(super) fn shake(
        &self,
        variables: &[f64],
        share: f64,
        random: &mut RandomStream,
    ) -> Vec<f64> {
        let all = variables.iter().zip(&self.shakes).zip(self.exact.bounds());
        all.map(|((&x, &ordinary), bounds)| {
            let size = x.abs().min(STRONGEST * ordinary) + ordinary;
            bounds.clamp(x + share * size * normal(random))
        })
        .collect()
    }
}

/// The range a length inside a group is likely to be found in.
pub(super) fn likely_range(bounds: Bounds, value_mm: f64, track_mm: f64) -> Bounds {
    let longest = bounds.low.max(LONGEST * value_mm).max(LONGEST_OF_TRACK * track_mm);
    Bounds { low: bounds.low, high: bounds.high.min(longest) }
}

fn shakes(variables: &Variables, track_mm: f64) -> Vec<f64> {
    let width = |bounds: Bounds| bounds.high - bounds.low;
    let all = variables.bounds().iter().zip(variables.start());
    let shared = variables.shared().iter().zip(all.clone());
    let shared = shared.map(|(variable, (&bounds, &start))| match variable {
        SharedVariable::Glass(Place::Radius(_)) => OF_CURVATURE * width(bounds),
        SharedVariable::Glass(Place::Thickness { .. } | Place::Air { .. }) => {
            OF_LENGTH * width(likely_range(bounds, start, track_mm))
        }
        SharedVariable::Glass(_) => OF_LENGTH * start.abs(),
        SharedVariable::FixedPosition(_) | SharedVariable::TravelStart(_) => OF_TRACK * track_mm,
    });
    let own = all.skip(variables.shared().len()).map(|(bounds, _)| {
        let high = bounds.high.min(track_mm.max(bounds.low));
        OF_TRACK * (high - bounds.low)
    });
    shared.chain(own).collect()
}

/// A number of the normal distribution (G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29, 610
/// (1958)).
fn normal(random: &mut RandomStream) -> f64 {
    let (u, v): (f64, f64) = (random.random(), random.random());
    // 1 − u is above 0, so the logarithm is finite.
    (-2.0 * (1.0 - u).ln()).sqrt() * (2.0 * PI * v).cos()
}
