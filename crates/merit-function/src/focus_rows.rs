//! Wavefront residuals of a beam that should come to a focus: about the sphere around that point.
//!
//! √v/within · √wⱼ (Wⱼ + Sⱼ − mean), with Sⱼ the way from the place of exit to the focus less that
//! along the axis. Sⱼ depends on the place of exit, so each ray is traced by itself and its
//! derivative is one reverse sweep for path and place together.

use surface_model::quadrature::BeamSample;
use surface_model::quantities::Shapes;
use surface_model::skew::{ExitSum, RayStart, trace_ray};
use surface_model::traced_beam::sphere_path_mm;
use surface_model::train::Train;

use crate::beam_rows::gather;
use crate::block::StateBlock;
use crate::fault::EvaluationFault;
use crate::state_optics::StateOptics;

/// The rays of one state at one wavelength.
pub(crate) struct FocusFan<'a> {
    pub(crate) state: &'a StateOptics,
    pub(crate) train: &'a Train,
    pub(crate) wavelength_nm: f64,
    pub(crate) sample: &'a BeamSample,
}

impl FocusFan<'_> {
    /// Writes the rows, one a ray, and with `block` their derivatives from row `first` on.
    pub(crate) fn evaluate(
        &self,
        residuals: &mut [f64],
        first: usize,
        shapes: Shapes,
        block: Option<&mut StateBlock>,
    ) -> Result<(), EvaluationFault> {
        let Self { state, sample, .. } = self;
        let Some(focus) = state.goals.exit_focus_m else { return Ok(()) };
        let focus_mm = 1e3 * focus.wanted_m;
        let count = sample.heights_mm.len();
        let mut gradients = Vec::new();
        for (residual, &height_mm) in residuals.iter_mut().zip(&sample.heights_mm) {
            let ray = trace_ray(self.train, RayStart::parallel(height_mm)).map_err(|fault| {
                EvaluationFault::ray(&state.name, self.wavelength_nm, height_mm, fault)
            })?;
            let exit = ray.exit();
            let y = exit.position_mm[1];
            *residual = exit.path_mm + sphere_path_mm(focus_mm, y);
            if block.is_some() {
                let by_height = focus_mm.signum() * y / focus_mm.hypot(y);
                let weights =
                    ExitSum { path_mm: 1.0, position_mm: [0.0, by_height], ..ExitSum::default() };
                gradients.push(ray.differentiate(&weights, shapes));
            }
        }
        let within = state.goals.wavefront_rms_waves.unwrap_or(1.0);
        let scale = state.goals.weight.sqrt() / within * 1e6 / self.wavelength_nm;
        self.centre(&mut residuals[..count], scale);
        let Some(block) = block else { return Ok(()) };
        for (ray, gradient) in gradients.iter().enumerate() {
            gather(gradient, &state.by_shared, first + ray, &mut block.by_shared);
            gather(gradient, &state.by_own, first + ray, &mut block.by_own);
        }
        for mut columns in
            [block.by_shared.rows_mut(first, count), block.by_own.rows_mut(first, count)]
        {
            for mut column in columns.column_iter_mut() {
                self.centre(column.as_mut_slice(), scale);
            }
        }
        Ok(())
    }

    /// Takes the mean out and weighs each ray, as for a collimated beam.
    fn centre(&self, numbers: &mut [f64], scale: f64) {
        let weights = &self.sample.weights;
        let mean: f64 = numbers.iter().zip(weights).map(|(x, weight)| x * weight).sum();
        for (x, weight) in numbers.iter_mut().zip(weights) {
            *x = scale * weight.sqrt() * (*x - mean);
        }
    }
}
