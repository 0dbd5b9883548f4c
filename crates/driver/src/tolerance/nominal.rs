//! What is measured of the design as drawn, with its exact derivatives.
//!
//! What is measured of a state is one row of numbers: per wavelength and ray √w times the
//! wavefront without tilt in waves, then the ratio's error in per cent and the exit slope in µrad.

use surface_model::paraxial::{ParaxialRay, ParaxialWeights};
use surface_model::quantities::Shapes;
use surface_model::skew::{ExitSum, RayStart, trace_ray};

use super::ToleranceError;
use super::bench::{ARMS, Bench, BenchState, RINGS};

impl Bench<'_> {
    /// What is measured of a state as it stands, and its derivatives: by the reverse sweep along
    /// one ray a ring, since the design is round.
    pub(super) fn measure_nominal(&self, state: &mut BenchState) -> Result<(), ToleranceError> {
        let quantities = self.quantities;
        let rows = self.roots.len() * state.trains.len() + 2;
        state.nominal = vec![0.0; rows];
        state.by_quantity = vec![vec![0.0; rows]; quantities.count()];
        let mut row = 0;
        for (train, waves) in state.trains.iter().zip(&state.waves_per_mm) {
            for ring in 0..RINGS {
                let position_mm = self.pupil.positions_mm()[ring * ARMS];
                let start = RayStart { position_mm, direction: [0.0, 0.0] };
                let ray = trace_ray(train, start).map_err(|fault| ToleranceError::Nominal {
                    state: state.name.clone(),
                    fault: self.design.fault_in_words(&fault),
                })?;
                let weights = ExitSum { path_mm: 1.0, ..ExitSum::default() };
                let by = ray.differentiate(&weights, Shapes::None);
                for arm in ring * ARMS..(ring + 1) * ARMS {
                    state.nominal[row + arm] = waves * ray.exit().path_mm;
                    for (column, by) in state.by_quantity.iter_mut().zip(&by) {
                        column[row + arm] = waves * by;
                    }
                }
            }
            self.weigh(&mut state.nominal[row..row + self.roots.len()]);
            for column in &mut state.by_quantity {
                self.weigh(&mut column[row..row + self.roots.len()]);
            }
            row += self.roots.len();
        }
        self.measure_first_order(state, row)
    }

    /// Piston out, then times √w.
    fn weigh(&self, waves: &mut [f64]) {
        let weights = self.pupil.weights();
        let mean: f64 = waves.iter().zip(weights).map(|(wave, weight)| weight * wave).sum();
        for (wave, root) in waves.iter_mut().zip(&self.roots) {
            *wave = root * (*wave - mean);
        }
    }

    fn measure_first_order(
        &self,
        state: &mut BenchState,
        row: usize,
    ) -> Result<(), ToleranceError> {
        let overflow = || ToleranceError::Overflow { state: state.name.clone() };
        let train = &state.trains[0];
        let mut ray = ParaxialRay::new();
        ray.trace(train, 1.0, 0.0).map_err(|_| overflow())?;
        let (ratio, slope) =
            (ray.ratio().ok_or_else(overflow)?, ray.exit_slope().ok_or_else(overflow)?);
        let to_urad = 1e6 * self.design.beam.radius_mm();
        let to_percent = 100.0 / state.ratio_wanted;
        let quantities = self.quantities;
        let mut gradient = vec![0.0; quantities.count()];
        let last = [(train.len() - 1, to_percent)];
        let measured = [
            (row, ratio * to_percent - 100.0, ParaxialWeights { heights: &last, exit_slope: 0.0 }),
            (row + 1, slope * to_urad, ParaxialWeights { heights: &[], exit_slope: to_urad }),
        ];
        for (row, value, weights) in measured {
            ray.differentiate(train, weights, quantities, &mut gradient).map_err(|_| overflow())?;
            state.nominal[row] = value;
            for (column, by) in state.by_quantity.iter_mut().zip(&gradient) {
                column[row] = *by;
            }
        }
        Ok(())
    }
}
