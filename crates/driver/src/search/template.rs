//! A template: a design whose free numbers are to be found, and how points of the unit cube become
//! values for them.

use std::f64::consts::PI;

use merit_function::block::Bounds;
use merit_function::variables::{SharedVariable, Variables};
use merit_function::wishes::Wishes;
use rand::RngExt;
use surface_model::place::Place;

use crate::design_file::DesignFile;
use crate::optimise::{OptimiseError, merit_of};
use crate::sampling::RandomStream;

/// Points crowd towards flat surfaces: a curvature is its bound times this power of the distance
/// from the middle of the cube. Beam expanders are made of weak surfaces and a few strong ones.
const CROWDING: f64 = 2.0;
/// A length without an upper bound is sampled up to this many times its value in the file.
const LONGEST: f64 = 3.0;

/// Slope and ratio wanted to first order where a file has no such goals: what they are within
/// matters little, as both can be met exactly.
const SLOPE_WITHIN_URAD: f64 = 20.0;

/// A design to be searched.
#[derive(Debug, Clone)]
pub(super) struct Template {
    /// The file; its free numbers are a start among others.
    pub(super) file: DesignFile,
    /// Its wishes with first-order goals alone.
    pub(super) first_order: Wishes,
    /// Per variable, the range points are drawn from, and how.
    draws: Vec<Draw>,
    /// Own variables, as (state, gap) and in the order of the packed vector.
    own: Vec<OwnSpacing>,
    gaps: usize,
    shared: usize,
}

/// How a shared variable follows from a coordinate.
#[derive(Debug, Clone, Copy)]
enum Draw {
    /// Both signs, crowded towards zero.
    Curvature(Bounds),
    /// Evenly.
    Even(Bounds),
    /// It stays as it is in the file.
    Kept(f64),
}

/// A spacing of one state.
#[derive(Debug, Clone, Copy)]
struct OwnSpacing {
    after: usize,
    /// Place of the state's ratio between the lowest (0) and the highest (1).
    share: f64,
    bounds: Bounds,
}

impl Template {
    /// The template of a design file.
    ///
    /// # Errors
    /// The file has no goals or nothing to change, or its ranges contradict each other.
    pub(super) fn new(file: DesignFile) -> Result<Self, OptimiseError> {
        let merit = merit_of(&file)?;
        let variables = merit.variables();
        let track_mm = file.design.housing.track_mm;
        let draws = draws(variables, track_mm);
        let own = own_spacings(&file, variables, track_mm);
        let gaps = file.design.groups.len() - 1;
        let shared = variables.shared().len();
        let mut first_order = file.wishes.clone();
        for goals in &mut first_order.states {
            goals.wavefront_rms_waves = None;
            if goals.exit_focus_m.is_none() {
                goals.exit_slope_urad.get_or_insert(SLOPE_WITHIN_URAD);
            }
        }
        Ok(Self { file, first_order, draws, own, gaps, shared })
    }

    /// Coordinates of a point.
    pub(super) fn dimensions(&self) -> usize {
        self.draws.len() + 2 * self.gaps
    }

    /// The variables a point of the unit cube stands for. Each gap between groups has two
    /// coordinates: its length at the lowest ratio and at the highest. States between them lie
    /// between.
    pub(super) fn place(&self, point: &[f64]) -> Vec<f64> {
        let (shared, gaps) = point.split_at(self.draws.len());
        let glass = self.draws.iter().zip(shared).map(|(draw, &u)| draw.at(u));
        let spacing = |own: &OwnSpacing| {
            let u = gaps[2 * own.after] * (1.0 - own.share) + gaps[2 * own.after + 1] * own.share;
            between(own.bounds, u)
        };
        glass.chain(self.own.iter().map(spacing)).collect()
    }

    /// The variables shaken: curvatures by `share` of themselves and of what is common, lengths by
    /// `share` of themselves and of the tube.
    pub(super) fn shake(
        &self,
        variables: &[f64],
        share: f64,
        bounds: &[Bounds],
        random: &mut RandomStream,
    ) -> Vec<f64> {
        let draw = |j: usize| -> f64 {
            if j < self.shared {
                self.draws[j].spread()
            } else {
                self.own[j - self.shared].spread()
            }
        };
        let shaken = variables.iter().zip(bounds).enumerate();
        shaken
            .map(|(j, (&x, bounds))| {
                let size = x.abs().min(10.0 * draw(j)) + draw(j);
                bounds.clamp(x + share * size * normal(random))
            })
            .collect()
    }
}

impl Draw {
    fn at(self, u: f64) -> f64 {
        match self {
            Self::Curvature(bounds) => {
                let v = 2.0 * u - 1.0;
                let end = if v < 0.0 { -bounds.low } else { bounds.high };
                v.signum() * end * v.abs().powf(CROWDING)
            }
            Self::Even(bounds) => between(bounds, u),
            Self::Kept(value) => value,
        }
    }

    /// How far it goes in an ordinary shake.
    fn spread(self) -> f64 {
        match self {
            Self::Curvature(bounds) => 0.02 * (bounds.high - bounds.low),
            Self::Even(bounds) => 0.1 * (bounds.high - bounds.low),
            Self::Kept(value) => 0.1 * value.abs(),
        }
    }
}

impl OwnSpacing {
    fn spread(self) -> f64 {
        0.02 * (self.bounds.high - self.bounds.low)
    }
}

fn between(bounds: Bounds, u: f64) -> f64 {
    bounds.clamp(bounds.low + u * (bounds.high - bounds.low))
}

/// A number of the normal distribution (G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29, 610
/// (1958)).
fn normal(random: &mut RandomStream) -> f64 {
    let (u, v): (f64, f64) = (random.random(), random.random());
    // 1 − u is above 0, so the logarithm is finite.
    (-2.0 * (1.0 - u).ln()).sqrt() * (2.0 * PI * v).cos()
}

fn draws(variables: &Variables, track_mm: f64) -> Vec<Draw> {
    let all = variables.shared().iter().zip(variables.bounds()).zip(variables.start());
    all.map(|((variable, &bounds), &start)| match variable {
        SharedVariable::Glass(Place::Radius(_)) if bounds.low < 0.0 && bounds.high > 0.0 => {
            Draw::Curvature(bounds)
        }
        SharedVariable::Glass(Place::Radius(_)) => Draw::Even(bounds),
        SharedVariable::Glass(Place::Thickness { .. } | Place::Air { .. }) => {
            let longest = bounds.low.max(LONGEST * start).max(0.02 * track_mm);
            Draw::Even(Bounds { low: bounds.low, high: bounds.high.min(longest) })
        }
        SharedVariable::FixedPosition(_) => Draw::Even(Bounds { low: 0.0, high: track_mm }),
        SharedVariable::Glass(_) | SharedVariable::TravelStart(_) => Draw::Kept(start),
    })
    .collect()
}

fn own_spacings(file: &DesignFile, variables: &Variables, track_mm: f64) -> Vec<OwnSpacing> {
    let ratios: Vec<f64> = file.design.states.iter().map(|state| state.ratio).collect();
    let lowest = ratios.iter().copied().fold(f64::INFINITY, f64::min);
    let highest = ratios.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let width = if highest > lowest { highest - lowest } else { 1.0 };
    let states = ratios.iter().enumerate();
    let places = states.flat_map(|(k, &ratio)| {
        let own = variables.own(k).iter();
        own.map(move |place| (place, (ratio - lowest) / width))
    });
    let bounds = &variables.bounds()[variables.shared().len()..];
    places
        .zip(bounds)
        .filter_map(|((place, share), bounds)| match *place {
            Place::Spacing { after, .. } => {
                let high = bounds.high.min(track_mm.max(bounds.low));
                Some(OwnSpacing { after, share, bounds: Bounds { low: bounds.low, high } })
            }
            _ => None,
        })
        .collect()
}
