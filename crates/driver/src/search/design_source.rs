//! Points of a design file: its free numbers throughout their ranges.

use merit_function::block::Bounds;
use merit_function::problem::{MeritFunction, RAYS};
use merit_function::variables::{SharedVariable, Variables};
use merit_function::wishes::Wishes;
use rand::RngExt;
use surface_model::place::Place;

use super::candidate::Candidate;
use super::ground::{Ground, likely_range};
use super::workbench::{Workbench, short};
use crate::design_file::DesignFile;
use crate::optimise::{OptimiseError, merit_of};
use crate::run::Interrupted;
use crate::sampling::RandomStream;

/// Points crowd towards flat surfaces: a curvature is its bound times this power of the distance
/// from the middle of the cube. Beam expanders are made of weak surfaces and a few strong ones.
const CROWDING: f64 = 2.0;
/// Slope wanted to first order where a file has no such goal, µrad: what it is within matters
/// little, as it can be met exactly.
const SLOPE_WITHIN_URAD: f64 = 20.0;
/// Steps in which a point must reach first order.
const FIRST_ORDER_STEPS: u64 = 30;
/// How far off the goals a point may still be, as a sum of squares in units of their `within`, to
/// count as at first order.
const FIRST_ORDER_REACHED: f64 = 1e-2;
/// Points around the file's own numbers are shaken by these powers of ten of an ordinary shake.
const AROUND: std::ops::Range<f64> = -2.0..0.5;

/// A design file to be searched.
#[derive(Debug)]
pub(super) struct DesignSource {
    pub(super) file: DesignFile,
    /// Its wishes with first-order goals alone.
    first_order: Wishes,
    draws: Vec<Draw>,
    own: Vec<OwnSpacing>,
    gaps: usize,
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

/// The problems of a start on a design file.
pub(super) struct DesignBench {
    first_order: MeritFunction,
    ground: usize,
}

impl DesignSource {
    pub(super) fn new(file: DesignFile) -> Result<Self, OptimiseError> {
        let merit = merit_of(&file)?;
        let variables = merit.variables();
        let track_mm = file.design.housing.track_mm;
        let draws = draws(variables, track_mm);
        let own = own_spacings(&file, variables, track_mm);
        let gaps = file.design.groups.len() - 1;
        let mut first_order = file.wishes.clone();
        for goals in &mut first_order.states {
            goals.wavefront_rms_waves = None;
            if goals.exit_focus_m.is_none() {
                goals.exit_slope_urad.get_or_insert(SLOPE_WITHIN_URAD);
            }
        }
        Ok(Self { file, first_order, draws, own, gaps })
    }

    /// Sets up the problems of a start.
    pub(super) fn bench(&self, bench: &mut Workbench<'_>) -> Result<DesignBench, OptimiseError> {
        let exact = merit_of(&self.file)?;
        let variables = exact.variables().clone();
        let design = &self.file.design;
        let first_order = MeritFunction::new(design, &self.first_order, variables, RAYS)?;
        let ground = bench.lay(Ground::new(exact, design.housing.track_mm));
        Ok(DesignBench { first_order, ground })
    }

    /// Coordinates of a point: one a shared variable, two a gap between groups.
    pub(super) fn dimensions(&self) -> usize {
        self.draws.len() + 2 * self.gaps
    }

    /// The candidate at a point of the unit cube, if there is one.
    pub(super) fn at(
        &self,
        problems: &mut DesignBench,
        bench: &mut Workbench<'_>,
        point: &[f64],
    ) -> Result<Option<Candidate>, Interrupted> {
        bring_to_first_order(problems, bench, &self.place(point))
    }

    /// A candidate around the file's own numbers, if there is one.
    pub(super) fn around(
        &self,
        problems: &mut DesignBench,
        bench: &mut Workbench<'_>,
        random: &mut RandomStream,
    ) -> Result<Option<Candidate>, Interrupted> {
        let share = 10.0_f64.powf(random.random_range(AROUND));
        let variables = problems.first_order.variables().start().to_vec();
        let Some(file) = bench.stand(problems.ground, variables) else { return Ok(None) };
        let shaken = bench.shake(&file, share, random);
        bring_to_first_order(problems, bench, &shaken)
    }

    /// The variables a point of the unit cube stands for. Each gap between groups has two
    /// coordinates: its length at the lowest ratio and at the highest. States between them lie
    /// between.
    fn place(&self, point: &[f64]) -> Vec<f64> {
        let (shared, gaps) = point.split_at(self.draws.len());
        let glass = self.draws.iter().zip(shared).map(|(draw, &u)| draw.at(u));
        let spacing = |own: &OwnSpacing| {
            let u = gaps[2 * own.after] * (1.0 - own.share) + gaps[2 * own.after + 1] * own.share;
            between(own.bounds, u)
        };
        glass.chain(self.own.iter().map(spacing)).collect()
    }
}

/// Brings a point to the ratio, collimation and limits wanted, to first order, and traces it;
/// `None` where it does not get there, or loses rays.
fn bring_to_first_order(
    problems: &mut DesignBench,
    bench: &mut Workbench<'_>,
    point: &[f64],
) -> Result<Option<Candidate>, Interrupted> {
    bench.watch()?;
    let Ok(settings) = short(FIRST_ORDER_STEPS).with_target(FIRST_ORDER_REACHED) else {
        return Ok(None);
    };
    let outcome = bench.solve(&mut problems.first_order, point, &settings)?;
    let reached = outcome
        .filter(|outcome| outcome.limits_kept() && outcome.sum_of_squares <= FIRST_ORDER_REACHED);
    Ok(reached.and_then(|outcome| bench.stand(problems.ground, outcome.variables)))
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
}

fn between(bounds: Bounds, u: f64) -> f64 {
    bounds.clamp(bounds.low + u * (bounds.high - bounds.low))
}

fn draws(variables: &Variables, track_mm: f64) -> Vec<Draw> {
    let all = variables.shared().iter().zip(variables.bounds()).zip(variables.start());
    all.map(|((variable, &bounds), &start)| match variable {
        SharedVariable::Glass(Place::Radius(_)) if bounds.low < 0.0 && bounds.high > 0.0 => {
            Draw::Curvature(bounds)
        }
        SharedVariable::Glass(Place::Radius(_)) => Draw::Even(bounds),
        SharedVariable::Glass(Place::Thickness { .. } | Place::Air { .. }) => {
            Draw::Even(likely_range(bounds, start, track_mm))
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
