//! Residuals of ratio and exit slope, with derivatives.
//!
//! ```text
//! ratio       √v/within · 100 (ratio/wanted − 1)
//! exit slope  √v/within · slope in µrad
//! ```

use surface_model::paraxial::ParaxialRay;
use surface_model::quantities::Quantities;

use crate::block::StateBlock;
use crate::fault::EvaluationFault;
use crate::state_optics::StateOptics;

/// Evaluates these rows. Buffers are kept from call to call.
#[derive(Debug)]
pub(crate) struct ParaxialRows {
    ray: ParaxialRay,
    /// Radius of the beam at entry, 1/e², mm.
    radius_mm: f64,
    /// Per quantity, the derivatives of the height and slope that the ray ends with.
    end: Vec<[f64; 2]>,
}

impl ParaxialRows {
    /// Rows of a beam of this 1/e² radius in trains of these quantities.
    pub(crate) fn new(radius_mm: f64, quantities: Quantities) -> Self {
        let end = vec![[0.0; 2]; quantities.count()];
        Self { ray: ParaxialRay::default(), radius_mm, end }
    }

    /// Writes the rows of a state, and with `block` their derivatives from row `first` on.
    pub(crate) fn evaluate(
        &mut self,
        state: &StateOptics,
        residuals: &mut [f64],
        quantities: Quantities,
        first: usize,
        block: Option<&mut StateBlock>,
    ) -> Result<(), EvaluationFault> {
        let goals = &state.goals;
        let train = &state.train;
        let root_weight = goals.weight.sqrt();
        let overflow = || EvaluationFault::overflow(&state.name);
        self.ray.trace(train, 1.0, 0.0).map_err(|_| overflow())?;
        let ratio_now = self.ray.ratio().ok_or_else(overflow)?;
        let slope_now = self.ray.exit_slope().ok_or_else(overflow)?;
        let ratio = goals.ratio_percent.map(|within| {
            let factor = root_weight / within * 100.0 / state.ratio_wanted;
            (factor * (ratio_now - state.ratio_wanted), [factor, 0.0])
        });
        let slope = goals.exit_slope_urad.map(|within| {
            let factor = root_weight / within * 1e6 * self.radius_mm;
            (factor * slope_now, [0.0, factor])
        });
        let rows = || [ratio, slope].into_iter().flatten().enumerate();
        for (i, (value, _)) in rows() {
            residuals[i] = value;
        }
        let Some(block) = block else { return Ok(()) };
        self.ray.differentiate_end(train, quantities, &mut self.end).map_err(|_| overflow())?;
        let columns =
            [(&state.by_shared, &mut block.by_shared), (&state.by_own, &mut block.by_own)];
        for (follows, out) in columns {
            for (column, follows) in follows.iter().enumerate() {
                let mut by = [0.0; 2];
                for &(quantity, factor) in follows {
                    by[0] += factor * self.end[quantity][0];
                    by[1] += factor * self.end[quantity][1];
                }
                for (i, (_, [by_height, by_slope])) in rows() {
                    out[(first + i, column)] = by_height * by[0] + by_slope * by[1];
                }
            }
        }
        Ok(())
    }
}
