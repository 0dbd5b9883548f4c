//! Residuals of the goals about the real beam, with derivatives.
//!
//! ```text
//! divergence          √v/within · 2√(aᵤ² + bᵤ²)                     full angle in mrad
//! diameter at range   √v/within · (2√((a + aᵤz)² + (b + bᵤz)²) − wanted)
//! exit focus          √v · wanted²/within · (−u/h − 1/wanted)       vergence in 1/m
//! ```
//!
//! with a, b the heights of waist ray and divergence ray at the last surface, aᵤ, bᵤ their slopes
//! behind it, and h, u those of the ray at the 1/e² radius, which is a sum of the two.

use nalgebra::DMatrix;
use surface_model::gaussian::{GaussianBeam, GaussianPath, GaussianWeights};
use surface_model::quantities::Quantities;

use crate::block::StateBlock;
use crate::fault::EvaluationFault;
use crate::state_optics::StateOptics;

/// Evaluates these rows. Buffers are kept from call to call.
#[derive(Debug, Default)]
pub(crate) struct BeamRows {
    path: GaussianPath,
    gradient: Vec<f64>,
}

/// A residual, and the weights of the two rays in its derivative.
type Row = (f64, GaussianWeights);

impl BeamRows {
    /// Writes the rows of a state, and with `block` their derivatives from row `first` on.
    pub(crate) fn evaluate(
        &mut self,
        state: &StateOptics,
        residuals: &mut [f64],
        quantities: Quantities,
        first: usize,
        mut block: Option<&mut StateBlock>,
    ) -> Result<(), EvaluationFault> {
        let overflow = || EvaluationFault::overflow(&state.name);
        let train = &state.train;
        let beam = state.beam()?;
        self.path.trace(train, beam).map_err(|_| overflow())?;
        let last = train.len() - 1;
        let rays = ExitRays {
            last,
            heights: self.path.heights(last),
            slopes: self.path.slopes_behind(last),
        };
        for (i, (value, weights)) in rays.rows(state, beam).into_iter().flatten().enumerate() {
            if !value.is_finite() {
                return Err(overflow());
            }
            residuals[i] = value;
            let Some(block) = block.as_deref_mut() else { continue };
            self.gradient.resize(quantities.count(), 0.0);
            self.path
                .differentiate(train, weights, quantities, &mut self.gradient)
                .map_err(|_| overflow())?;
            gather(&self.gradient, &state.by_shared, first + i, &mut block.by_shared);
            gather(&self.gradient, &state.by_own, first + i, &mut block.by_own);
        }
        Ok(())
    }
}

/// Puts a derivative by quantities into a row of a block, by variables.
pub(crate) fn gather(
    gradient: &[f64],
    columns: &[Vec<(usize, f64)>],
    row: usize,
    block: &mut DMatrix<f64>,
) {
    for (column, follows) in columns.iter().enumerate() {
        let by = follows.iter().map(|&(quantity, factor)| factor * gradient[quantity]);
        block[(row, column)] = by.sum();
    }
}

/// The two rays behind the last surface.
struct ExitRays {
    last: usize,
    heights: [f64; 2],
    slopes: [f64; 2],
}

impl ExitRays {
    fn rows(&self, state: &StateOptics, beam: &GaussianBeam) -> [Option<Row>; 3] {
        let goals = &state.goals;
        let root = goals.weight.sqrt();
        [
            goals.divergence_mrad.map(|within| self.divergence(root / within)),
            goals.diameter_at_range_mm.map(|goal| {
                let factor = root / goal.within_mm;
                let (value, weights) = self.diameter(1e3 * goal.range_m, factor);
                (value - factor * goal.wanted_mm, weights)
            }),
            goals.exit_focus_m.map(|goal| {
                let factor = root * goal.weight_m();
                let (value, weights) = self.vergence(beam, factor);
                (value - factor / goal.wanted_m, weights)
            }),
        ]
    }

    /// Full angle in mrad, times a factor.
    fn divergence(&self, factor: f64) -> Row {
        let [ua, ub] = self.slopes;
        let half = ua.hypot(ub);
        let scale = 2e3 * factor;
        let exit_slopes = [scale * ua / half, scale * ub / half];
        (scale * half, GaussianWeights { heights: None, exit_slopes })
    }

    /// Diameter in mm at a distance in mm, times a factor.
    fn diameter(&self, at_mm: f64, factor: f64) -> Row {
        let [a, b] = [0, 1].map(|ray| self.heights[ray] + at_mm * self.slopes[ray]);
        let radius = a.hypot(b);
        let scale = 2.0 * factor;
        let by = [scale * a / radius, scale * b / radius];
        let heights = Some((self.last, by));
        (scale * radius, GaussianWeights { heights, exit_slopes: by.map(|by| at_mm * by) })
    }

    /// Vergence in 1/m of the ray at the 1/e² radius, times a factor.
    fn vergence(&self, beam: &GaussianBeam, factor: f64) -> Row {
        let shares = edge_shares(beam);
        let sum = |numbers: [f64; 2]| shares[0] * numbers[0] + shares[1] * numbers[1];
        let (height, slope) = (sum(self.heights), sum(self.slopes));
        let scale = 1e3 * factor / height;
        let by_height = scale * slope / height;
        let heights = Some((self.last, shares.map(|share| share * by_height)));
        let exit_slopes = shares.map(|share| -share * scale);
        (-scale * slope, GaussianWeights { heights, exit_slopes })
    }
}

/// How much of the waist ray and of the divergence ray make up the ray at the 1/e² radius.
fn edge_shares(beam: &GaussianBeam) -> [f64; 2] {
    let (height, slope) = beam.edge_ray();
    let divergence = slope / beam.half_divergence_rad;
    [(height + slope * beam.waist_at_mm) / beam.waist_radius_mm, divergence]
}
