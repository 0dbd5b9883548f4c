//! How the residuals change along any change of the trains: exact derivatives by quantities that
//! are no variables (an index, a measured radius), from the same reverse sweep.

use nalgebra::{DMatrix, DVector};

use super::MeritFunction;
use crate::block::{BlockProblem, StateBlock};
use crate::fault::EvaluationFault;

impl MeritFunction {
    /// Residuals at a point, and their derivative along a direction in which the quantities of the
    /// trains change: `direction` gives, for a state and a wavelength in nm, by how much which
    /// quantity does (in the order of [`Quantities`](surface_model::quantities::Quantities); conic
    /// constants and asphere coefficients only of surfaces whose shape has a variable).
    ///
    /// # Errors
    /// The point cannot be evaluated.
    pub fn along(
        &mut self,
        variables: &[f64],
        direction: impl Fn(usize, f64) -> Vec<(usize, f64)>,
    ) -> Result<(Vec<f64>, Vec<f64>), EvaluationFault> {
        self.place(variables)?;
        self.trace(true)?;
        self.bundle.differentiate_all(self.variables.quantities().shapes());
        let (mut residuals, mut derivative) = (Vec::new(), Vec::new());
        for k in 0..self.states.len() {
            let shared = std::mem::take(&mut self.states[k].by_shared);
            let own = std::mem::take(&mut self.states[k].by_own);
            let done = self.state_along(k, &direction);
            (self.states[k].by_shared, self.states[k].by_own) = (shared, own);
            let (values, slopes) = done?;
            residuals.extend(values);
            derivative.extend(slopes);
        }
        Ok((residuals, derivative))
    }

    /// One state: a Jacobian of one column for each wavelength, of which the rows of that
    /// wavelength count; those of the paraxial goals belong to the first.
    fn state_along(
        &mut self,
        k: usize,
        direction: &impl Fn(usize, f64) -> Vec<(usize, f64)>,
    ) -> Result<(Vec<f64>, Vec<f64>), EvaluationFault> {
        let rows = self.shape().rows[k];
        let traced = self.states[k].wavefronts() * self.beam.rays;
        let mut slopes = vec![0.0; rows];
        let mut residuals = vec![0.0; rows];
        for (w, nm) in self.states[k].wavelengths_nm.clone().into_iter().enumerate() {
            self.states[k].by_own = vec![direction(k, nm)];
            let mut block = StateBlock {
                residuals: DVector::zeros(0),
                by_shared: DMatrix::zeros(rows, 0),
                by_own: DMatrix::zeros(rows, 1),
            };
            self.state(k, &mut residuals, Some(&mut block))?;
            let here = w * self.beam.rays..(w + 1) * self.beam.rays;
            for row in here.filter(|&row| row < traced) {
                slopes[row] = block.by_own[(row, 0)];
            }
            for row in (traced..rows).filter(|_| w == 0) {
                slopes[row] = block.by_own[(row, 0)];
            }
        }
        Ok((residuals, slopes))
    }
}
