//! What a movement curve holds: the ratio, and collimation on exact rays.
//!
//! **Collimation** is the slope that the best sphere of the exit wavefront gives the ray at the
//! 1/e² radius. With W(r) the optical path (less the axial ray's) of the exact ray that enters at
//! height r, and weights exp(−2r²/w²) r dr over the traced heights, the straight line a + b r² is
//! fitted to W by weighted least squares,
//!
//! ```text
//! b = Σ c_i W(r_i),   c_i = g_i (q_i − q̄)/Σ g_j (q_j − q̄)²,   q = r²,  Σ g_i = 1,  q̄ = Σ g_i q_i
//! ```
//!
//! and since a wavefront of slope dW/dy stands perpendicular to its rays, and y = m r behind an
//! expander of ratio m, the slope at r = w is 2 b w/m: positive when the beam spreads. Where it is
//! zero no other defocus gives a smaller weighted RMS (the normal equation of that fit), which is
//! what a shear plate or an autocollimator is adjusted for; the paraxial slope differs from it by
//! the balance against spherical aberration.
//!
//! The **ratio** is the paraxial one, as everywhere in the program.

use surface_model::bundle::Bundle;
use surface_model::design::{Design, ZoomState};
use surface_model::fault::RayFault;
use surface_model::glass::GlassError;
use surface_model::paraxial::{ParaxialError, ParaxialRay, ParaxialWeights};
use surface_model::quadrature::{BeamSample, beam_sample};
use surface_model::quantities::{Quantities, Shapes};
use surface_model::sequence::GapId;
use surface_model::train::Train;

/// Rays of the fit: with these, twice as many change the slope by less than 1e-9 µrad.
const RAYS: usize = 16;

/// Ratio and collimation of a train, with their derivatives by its spacings.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Held {
    /// Paraxial ratio.
    pub(super) ratio: f64,
    /// Its derivative by every spacing, 1/mm.
    pub(super) ratio_by_spacing: Vec<f64>,
    /// Collimation, rad.
    pub(super) collimation_rad: f64,
    /// Its derivative by every spacing, rad/mm.
    pub(super) collimation_by_spacing: Vec<f64>,
}

/// Why ratio and collimation cannot be told.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub(super) enum HeldFault {
    /// A ray does not get through.
    #[error("{0}")]
    Ray(RayFault),
    /// The paraxial ray leaves all bounds, or the ratio is zero.
    #[error("the paraxial ray does not get through")]
    Paraxial,
}

impl From<ParaxialError> for HeldFault {
    fn from(_: ParaxialError) -> Self {
        Self::Paraxial
    }
}

/// Measures ratio and collimation of one design at one wavelength, at any spacings.
pub(super) struct Gauge {
    train: Train,
    /// Place in the train of the gap behind each group but the last.
    gaps: Vec<usize>,
    sample: BeamSample,
    /// Per ray, what its path counts in b, 1/mm².
    counts: Vec<f64>,
    radius_mm: f64,
    bundle: Bundle,
    paraxial: ParaxialRay,
}

impl Gauge {
    /// # Errors
    /// A glass is not known at the wavelength.
    pub(super) fn new(
        design: &Design,
        state: &ZoomState,
        wavelength_nm: f64,
    ) -> Result<Self, GlassError> {
        let train = design.train(state, wavelength_nm)?;
        let sequence = design.sequence();
        let spacings = 0..state.spacings_mm.len();
        let gaps =
            spacings.filter_map(|after| sequence.place_of_gap(GapId::Spacing { after })).collect();
        let radius_mm = design.beam.radius_mm();
        let sample = beam_sample(radius_mm, design.beam.traced_to, RAYS);
        let counts = defocus_counts(&sample);
        let (bundle, paraxial) = (Bundle::new(), ParaxialRay::new());
        Ok(Self { train, gaps, sample, counts, radius_mm, bundle, paraxial })
    }

    /// Ratio and collimation at these spacings, mm.
    ///
    /// # Errors
    /// A ray does not get through.
    pub(super) fn measure(&mut self, spacings_mm: &[f64]) -> Result<Held, HeldFault> {
        for (&gap, &spacing) in self.gaps.iter().zip(spacings_mm) {
            self.train.gaps_mut()[gap] = spacing;
        }
        self.paraxial.trace(&self.train, 1.0, 0.0)?;
        let ratio = self.paraxial.ratio().filter(|ratio| *ratio != 0.0);
        let ratio = ratio.ok_or(HeldFault::Paraxial)?;
        let quantities = Quantities::new(self.train.len(), Shapes::None);
        let mut row = vec![0.0; quantities.count()];
        let last = [(self.train.len() - 1, 1.0)];
        let weights = ParaxialWeights { heights: &last, exit_slope: 0.0 };
        self.paraxial.differentiate(&self.train, weights, quantities, &mut row)?;
        let ratio_by_spacing: Vec<f64> =
            self.gaps.iter().map(|&gap| row[quantities.gap(gap)]).collect();

        let mut paths = vec![0.0; self.sample.heights_mm.len()];
        self.bundle.load([&self.train], &self.sample.heights_mm);
        self.bundle.trace_kept(&mut paths).map_err(|failed| HeldFault::Ray(failed.fault))?;
        let quantities = self.bundle.differentiate(Shapes::None);
        let slope = 2.0 * self.radius_mm / ratio;
        let sum = |values: &mut dyn Iterator<Item = f64>| {
            slope * self.counts.iter().zip(values).map(|(count, path)| count * path).sum::<f64>()
        };
        let collimation_rad = sum(&mut paths.iter().copied());
        let by_gap = self.gaps.iter().zip(&ratio_by_spacing).map(|(&gap, ratio_by)| {
            let by_path = sum(&mut self.bundle.path_derivatives(0, quantities.gap(gap)));
            by_path - collimation_rad * ratio_by / ratio
        });
        let collimation_by_spacing = by_gap.collect();
        Ok(Held { ratio, ratio_by_spacing, collimation_rad, collimation_by_spacing })
    }
}

/// The c_i of the fit.
fn defocus_counts(sample: &BeamSample) -> Vec<f64> {
    let squares: Vec<f64> = sample.heights_mm.iter().map(|height| height * height).collect();
    let weighed = || squares.iter().zip(&sample.weights);
    let mean: f64 = weighed().map(|(q, weight)| weight * q).sum();
    let spread: f64 = weighed().map(|(q, weight)| weight * (q - mean) * (q - mean)).sum();
    weighed().map(|(q, weight)| weight * (q - mean) / spread).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_pure_defocus_is_told_as_its_slope() {
        let sample = beam_sample(1.2, 1.5, RAYS);
        let counts = defocus_counts(&sample);
        // W = 3 − 0.02 r²: b is −0.02 whatever the weights.
        let waves = sample.heights_mm.iter().map(|r| 3.0 - 0.02 * r * r);
        let b: f64 = counts.iter().zip(waves).map(|(count, w)| count * w).sum();
        assert!((b + 0.02).abs() < 1e-14, "{b}");
    }

    #[test]
    fn spherical_aberration_is_balanced_as_a_gaussian_beam_balances_it() {
        // W = r⁴ over an unbounded Gaussian beam: q is exponential with mean μ = w²/2, and the
        // line fitted to q² has the slope cov(q², q)/var(q) = (6 − 2)μ³/μ² = 4μ = 2w².
        let w = 1.2;
        let sample = beam_sample(w, 4.5, 60);
        let b: f64 = defocus_counts(&sample)
            .iter()
            .zip(&sample.heights_mm)
            .map(|(count, r)| count * r.powi(4))
            .sum();
        assert!((b / (2.0 * w * w) - 1.0).abs() < 1e-6, "{b}");
    }
}
