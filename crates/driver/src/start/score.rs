//! What first and third order foretell of a layout, so that layouts can be ranked before any ray
//! is traced.
//!
//! Three sums, each over the surfaces of a state and in units of the wavefront goal:
//!
//! - *third order*: the first Seidel sum S_I (W. T. Welford, *Aberrations of Optical Systems*
//!   (1986), ch. 8), W = S_I/8 at the outermost ray; what bending has left of it, and what the
//!   optimiser lessens further;
//! - *higher orders*: every surface's own |S_I|/8 times the square of its angle of incidence i.
//!   Snell's law expanded one term further adds to a surface's share of the third order one of the
//!   fifth that is larger or smaller by a factor of about i² (H. A. Buchdahl, *Optical Aberration
//!   Coefficients* (1954), from memory); this does not cancel when the third order does;
//! - *colour*: the focus error u h/2 at the other wavelengths of the state.
//!
//! Beside them stands the *bending of the outermost ray*: the root mean square over surfaces and
//! states of hφ, the power of a surface weighted by the height there, after J. M. Sasián and
//! M. R. Descour, "Power distribution and symmetry in lens systems", Opt. Eng. 37, 1001 (1998)
//! (from memory): the smaller, the laxer the tolerances.

use merit_function::wishes::Wishes;
use surface_model::design::{Design, ZoomState};
use surface_model::paraxial::ParaxialRay;
use surface_model::train::Train;

use super::shape::{MARECHAL_WAVES, RMS_OF_FOURTH_POWER};

/// What first and third order foretell of a layout.
#[derive(Debug, Clone, Copy, PartialEq, serde::Serialize)]
pub struct Score {
    /// The number layouts are ranked by, least first: about the wavefront error to be expected of
    /// the optimised design in units of the goal, root mean square over the states, but for a
    /// factor.
    pub total: f64,
    /// Third order as it stands, in units of the goal.
    pub third_order: f64,
    /// Higher orders, in units of the goal.
    pub higher_orders: f64,
    /// Colour, in units of the goal.
    pub colour: f64,
    /// Root mean square of hφ over surfaces and states, mrad.
    pub bending_mrad: f64,
}

/// Shares of the sums in the total: what the optimiser can be expected to leave of each. Found by
/// optimising layouts of the shipped briefs.
const THIRD_ORDER_LEFT: f64 = 0.2;
const HIGHER_ORDERS_LEFT: f64 = 1.0;
const COLOUR_LEFT: f64 = 0.3;
/// Units of the goal a mrad of bending counts as.
const OF_BENDING_MRAD: f64 = 0.002;
/// Weighted RMS over the beam of (r/edge)², for a beam traced to 1.5.
const RMS_OF_SQUARE: f64 = 0.195;

/// Sums over the surfaces of one state.
#[derive(Debug, Clone, Copy, Default)]
struct Sums {
    third_mm: f64,
    higher_mm: f64,
    bending_squared: f64,
    surfaces: usize,
}

/// The score of a design; `None` where a number has no end.
pub(super) fn score(design: &Design, wishes: &Wishes) -> Option<Score> {
    let (mut third, mut higher, mut colour, mut weights) = (0.0, 0.0, 0.0, 0.0);
    let (mut bending, mut surfaces) = (0.0, 0);
    for (state, goals) in design.states.iter().zip(&wishes.states) {
        let goal = goals.wavefront_rms_waves.unwrap_or(MARECHAL_WAVES);
        let &first_nm = state.wavelengths_nm.first()?;
        let sums = sums(&design.train(state, first_nm).ok()?, design.beam.edge_mm())?;
        let unit = 1.0 / (first_nm * 1e-6 * goal);
        third += goals.weight * (RMS_OF_FOURTH_POWER * sums.third_mm / 8.0 * unit).powi(2);
        higher += goals.weight * (RMS_OF_FOURTH_POWER * sums.higher_mm / 8.0 * unit).powi(2);
        colour += goals.weight * (colour_waves(design, state)? / goal).powi(2);
        weights += goals.weight;
        bending += sums.bending_squared;
        surfaces += sums.surfaces;
    }
    let rms = |sum: f64| (sum / f64::max(weights, 1e-9)).sqrt();
    let (third_order, higher_orders, colour) = (rms(third), rms(higher), rms(colour));
    let bending_mrad = 1e3 * (bending / surfaces as f64).sqrt();
    let parts = [
        THIRD_ORDER_LEFT * third_order,
        HIGHER_ORDERS_LEFT * higher_orders,
        COLOUR_LEFT * colour,
        OF_BENDING_MRAD * bending_mrad,
    ];
    let total = parts.iter().map(|part| part * part).sum::<f64>().sqrt();
    let score = Score { total, third_order, higher_orders, colour, bending_mrad };
    total.is_finite().then_some(score)
}

fn sums(train: &Train, edge_mm: f64) -> Option<Sums> {
    let mut ray = ParaxialRay::new();
    ray.trace(train, edge_mm, 0.0).ok()?;
    let mut sums = Sums { surfaces: train.len(), ..Sums::default() };
    for (i, surface) in train.surfaces().iter().enumerate() {
        let (n, n1) = (train.indices()[i], train.indices()[i + 1]);
        let (h, u, u1) = (ray.heights()[i], ray.slopes()[i], ray.slopes()[i + 1]);
        let incidence = h * surface.curvature + u;
        let share = -(n * incidence).powi(2) * h * (u1 / n1 - u / n);
        sums.third_mm += share;
        // The angle on the side of the thinner medium is the larger one.
        let wider = incidence * (n / n1).max(1.0);
        sums.higher_mm += share.abs() * wider * wider;
        sums.bending_squared += (h * surface.curvature * (n1 - n)).powi(2);
    }
    Some(sums)
}

/// Largest RMS focus error at the wavelengths behind the first, waves.
fn colour_waves(design: &Design, state: &ZoomState) -> Option<f64> {
    let mut largest: f64 = 0.0;
    let mut ray = ParaxialRay::new();
    for &nm in state.wavelengths_nm.iter().skip(1) {
        ray.trace(&design.train(state, nm).ok()?, design.beam.edge_mm(), 0.0).ok()?;
        let waves = 0.5 * ray.heights().last()? * ray.exit_slope()? / (nm * 1e-6);
        largest = largest.max(RMS_OF_SQUARE * waves.abs());
    }
    Some(largest)
}
