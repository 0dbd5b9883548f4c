//! How far to move a group so that the real beam leaves as well collimated as it can be.
//!
//! Heights and slopes of both rays of the beam behind the last surface are quadratic in the way of
//! one group (linear at an end of the row), so three traces give them for every way. Looked for
//! are, nearest to where the group stands and within the air around it and the tube, the least divergence, and
//! the place that puts the waist at the last vertex.

use serde::Serialize;
use surface_model::design::{Design, ZoomState};
use surface_model::gaussian::{GaussianBeam, GaussianPath};
use surface_model::sequence::GapId;
use surface_model::train::Train;

/// Steps in which each side is looked through for a change of sign.
const STEPS: usize = 256;
/// Halvings of the step in which one is found: to below a picometre.
const HALVINGS: usize = 60;

/// What a movement of one group does for the beam.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Readjustment {
    /// The group that moves.
    pub group: String,
    /// Its way to the least divergence, mm, positive away from the laser; `None` if there is none
    /// within the air around it and the tube.
    pub to_least_divergence_mm: Option<f64>,
    /// The divergence then, full angle, mrad.
    pub least_divergence_mrad: Option<f64>,
    /// Its way to where the waist is at the last vertex, mm; `None` likewise.
    pub to_waist_at_exit_mm: Option<f64>,
}

/// Every group that is not fixed, moved alone.
pub(super) fn readjustments(
    design: &Design,
    state: &ZoomState,
    train: &Train,
    beam: &GaussianBeam,
) -> Vec<Readjustment> {
    let groups = design.groups.iter().zip(&design.housing.fixed).enumerate();
    let free = groups.filter(|(_, (_, fixed))| !**fixed);
    let positions_mm = design.positions_mm(state);
    free.map(|(g, (group, _))| {
        let way = Way::of(design, state, train, beam, (g, positions_mm[g]));
        let least = way.as_ref().and_then(|way| way.nearest(true, &|at| way.growth_slope(at)));
        let waist = way.as_ref().and_then(|way| way.nearest(false, &|at| way.waist_product(at)));
        Readjustment {
            group: group.name.clone(),
            to_least_divergence_mm: least,
            least_divergence_mrad: way.zip(least).map(|(way, at)| 2e3 * way.growth(at).sqrt()),
            to_waist_at_exit_mm: waist,
        }
    })
    .collect()
}

/// A quadratic through its values at −1, 0 and 1.
#[derive(Debug, Clone, Copy)]
struct Quadratic([f64; 3]);

impl Quadratic {
    fn through([below, at, above]: [f64; 3]) -> Self {
        Self([at, 0.5 * (above - below), 0.5 * (above + below) - at])
    }

    fn value(self, x: f64) -> f64 {
        self.0[0] + x * (self.0[1] + x * self.0[2])
    }

    fn slope(self, x: f64) -> f64 {
        self.0[1] + 2.0 * x * self.0[2]
    }
}

/// The two rays behind the last surface as functions of a group's way in mm.
struct Way {
    heights: [Quadratic; 2],
    slopes: [Quadratic; 2],
    low_mm: f64,
    high_mm: f64,
}

impl Way {
    fn of(
        design: &Design,
        state: &ZoomState,
        train: &Train,
        beam: &GaussianBeam,
        (group, position_mm): (usize, f64),
    ) -> Option<Self> {
        let sequence = design.sequence();
        let gap = |after: usize| sequence.place_of_gap(GapId::Spacing { after });
        let before = group.checked_sub(1).and_then(gap);
        let behind = gap(group);
        let last = train.len() - 1;
        let mut path = GaussianPath::default();
        let mut rays = [[[0.0; 3]; 2]; 2];
        for (i, by) in [-1.0, 0.0, 1.0].into_iter().enumerate() {
            let mut moved = train.clone();
            if let Some(before) = before {
                moved.gaps_mut()[before] += by;
            }
            if let Some(behind) = behind {
                moved.gaps_mut()[behind] -= by;
            }
            // The first group moves away from the waist of the laser.
            let shift = if group == 0 { by } else { 0.0 };
            let beam = GaussianBeam { waist_at_mm: beam.waist_at_mm - shift, ..*beam };
            path.trace(&moved, &beam).ok()?;
            let (heights, slopes) = (path.heights(last), path.slopes_behind(last));
            for ray in 0..2 {
                rays[0][ray][i] = heights[ray];
                rays[1][ray][i] = slopes[ray];
            }
        }
        let room = |after: Option<usize>| after.and_then(|g| state.spacings_mm.get(g)).copied();
        let rear_mm = design.housing.track_mm - position_mm - design.groups[group].length_mm();
        let high_mm = room(Some(group)).unwrap_or(rear_mm.max(0.0));
        let low_mm = -room(group.checked_sub(1)).unwrap_or(position_mm.max(0.0));
        let [heights, slopes] = rays.map(|pair| pair.map(Quadratic::through));
        Some(Self { heights, slopes, low_mm, high_mm })
    }

    /// Square of the half divergence.
    fn growth(&self, at: f64) -> f64 {
        self.slopes.iter().map(|slope| slope.value(at).powi(2)).sum()
    }

    fn growth_slope(&self, at: f64) -> f64 {
        self.slopes.iter().map(|slope| slope.value(at) * slope.slope(at)).sum()
    }

    /// Zero where the waist is at the last vertex.
    fn waist_product(&self, at: f64) -> f64 {
        let rays = self.heights.iter().zip(&self.slopes);
        rays.map(|(height, slope)| height.value(at) * slope.value(at)).sum()
    }

    /// The nearest zero, of those where the function grows if only they count.
    fn nearest(&self, growing: bool, of: &dyn Fn(f64) -> f64) -> Option<f64> {
        let side = |end: f64| {
            let step = end / STEPS as f64;
            (0..STEPS).find_map(|i| {
                let (near, far) = (i as f64 * step, (i + 1) as f64 * step);
                let (low, high) = if near < far { (near, far) } else { (far, near) };
                let (at_low, at_high) = (of(low), of(high));
                let found = if growing {
                    at_low <= 0.0 && at_high > 0.0
                } else {
                    (at_low <= 0.0) != (at_high <= 0.0)
                };
                found.then(|| bisected(low, high, of))
            })
        };
        let sides = [side(self.low_mm), side(self.high_mm)];
        sides.into_iter().flatten().min_by(|a, b| a.abs().total_cmp(&b.abs()))
    }
}

fn bisected(mut low: f64, mut high: f64, of: &dyn Fn(f64) -> f64) -> f64 {
    let below = of(low) <= 0.0;
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        if (of(middle) <= 0.0) == below { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}
