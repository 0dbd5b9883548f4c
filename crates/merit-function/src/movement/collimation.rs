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
//! A beam that should come to a **focus** at the distance f = 1/V behind the last vertex (V is
//! negative where it should spread from a point before it) is held against the sphere around that
//! point: W + S takes the place of W, with S the way from the place of exit to the focus less that
//! along the axis,
//!
//! ```text
//! S(y) = (√(1 + V² y²) − 1)/V = V y²/(1 + √(1 + V² y²))
//! ```
//!
//! for the exact height y of exit. The slope told is then the one by which the beam misses the
//! focus.
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
use surface_model::skew::{ExitSum, RayStart, trace_ray};
use surface_model::train::Train;

/// Rays of the fit: with these, twice as many change the slope by less than 1e-9 µrad.
const RAYS: usize = 16;

/// Ratio and collimation of a train, with their derivatives by its spacings.
#[derive(Debug, Clone, PartialEq)]
pub struct Held {
    /// Paraxial ratio.
    pub ratio: f64,
    /// Its derivative by every spacing, 1/mm.
    pub(crate) ratio_by_spacing: Vec<f64>,
    /// Collimation, rad.
    pub collimation_rad: f64,
    /// Its derivative by every spacing, rad/mm.
    pub collimation_by_spacing: Vec<f64>,
}

/// Why ratio and collimation cannot be told.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum HeldFault {
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
#[derive(Debug)]
pub struct Gauge {
    train: Train,
    /// Place in the train of the gap behind each group but the last.
    gaps: Vec<usize>,
    sample: BeamSample,
    /// Per ray, what its path counts in b, 1/mm².
    counts: Vec<f64>,
    radius_mm: f64,
    bundle: Bundle,
    paraxial: ParaxialRay,
    /// One over the distance of the focus that is wanted, 1/mm; zero for a collimated beam.
    vergence_per_mm: f64,
}

impl Gauge {
    /// Measures a zoom state of a design, its spacings aside, at a wavelength in air; as if it were to
    /// leave collimated.
    ///
    /// # Errors
    /// A glass is not known at the wavelength.
    pub fn new(design: &Design, state: &ZoomState, wavelength_nm: f64) -> Result<Self, GlassError> {
        let train = design.train(state, wavelength_nm)?;
        let sequence = design.sequence();
        let spacings = 0..state.spacings_mm.len();
        let gaps =
            spacings.filter_map(|after| sequence.place_of_gap(GapId::Spacing { after })).collect();
        let radius_mm = design.beam.radius_mm();
        let sample = beam_sample(radius_mm, design.beam.traced_to, RAYS);
        let counts = defocus_counts(&sample);
        let (bundle, paraxial) = (Bundle::new(), ParaxialRay::new());
        let vergence_per_mm = 0.0;
        Ok(Self { train, gaps, sample, counts, radius_mm, bundle, paraxial, vergence_per_mm })
    }

    /// From now on a focus is wanted, at one over this distance behind the last vertex, 1/mm; zero
    /// is collimation again.
    pub fn want_vergence(&mut self, per_mm: f64) {
        self.vergence_per_mm = per_mm;
    }

    /// Takes the shapes of another train of the same design, and the gaps within its groups.
    pub(crate) fn take_shape(&mut self, train: &Train) {
        self.train.surfaces_mut().copy_from_slice(train.surfaces());
        self.train.gaps_mut().copy_from_slice(train.gaps());
    }

    /// Fits collimation over the inner `fraction` (0 to 1) of the traced beam from now on.
    pub(crate) fn set_aperture(&mut self, traced_to: f64, fraction: f64) {
        self.sample = beam_sample(self.radius_mm, traced_to * fraction, RAYS);
        self.counts = defocus_counts(&self.sample);
    }

    /// Ratio and collimation at these spacings, mm.
    ///
    /// # Errors
    /// A ray does not get through.
    pub fn measure(&mut self, spacings_mm: &[f64]) -> Result<Held, HeldFault> {
        let (ratio, row) = self.ratio(spacings_mm, Shapes::None)?;
        let quantities = Quantities::new(self.train.len(), Shapes::None);
        let ratio_by_spacing: Vec<f64> =
            self.gaps.iter().map(|&gap| row[quantities.gap(gap)]).collect();
        let (paths, by_gap) = if self.vergence_per_mm == 0.0 {
            self.paths_by_gap()?
        } else {
            self.paths_to_the_focus()?
        };
        let collimation_rad = self.slope(ratio, paths.into_iter());
        let by_gap = by_gap.into_iter().zip(&ratio_by_spacing).map(|(by, ratio_by)| {
            self.slope(ratio, by.into_iter()) - collimation_rad * ratio_by / ratio
        });
        let collimation_by_spacing = by_gap.collect();
        Ok(Held { ratio, ratio_by_spacing, collimation_rad, collimation_by_spacing })
    }

    /// W of every ray, and per spacing its derivatives.
    fn paths_by_gap(&mut self) -> Result<(Vec<f64>, Vec<Vec<f64>>), HeldFault> {
        let (paths, quantities) = self.paths(Shapes::None)?;
        let by_gap = self
            .gaps
            .iter()
            .map(|&gap| self.bundle.path_derivatives(0, quantities.gap(gap)).collect::<Vec<f64>>());
        Ok((paths, by_gap.collect()))
    }

    /// W + S of every ray, and per spacing its derivatives: S depends on the place of exit, so each
    /// ray is traced by itself and one reverse sweep gives both.
    fn paths_to_the_focus(&self) -> Result<(Vec<f64>, Vec<Vec<f64>>), HeldFault> {
        let quantities = Quantities::new(self.train.len(), Shapes::None);
        let v = self.vergence_per_mm;
        let mut paths = Vec::with_capacity(self.sample.heights_mm.len());
        let mut by_gap = vec![Vec::new(); self.gaps.len()];
        for &height_mm in &self.sample.heights_mm {
            let start = RayStart::parallel(height_mm);
            let ray = trace_ray(&self.train, start).map_err(HeldFault::Ray)?;
            let exit = ray.exit();
            let y = exit.position_mm[1];
            let root = (v * y).hypot(1.0);
            paths.push(exit.path_mm + v * y * y / (1.0 + root));
            let weights =
                ExitSum { path_mm: 1.0, position_mm: [0.0, v * y / root], ..ExitSum::default() };
            let row = ray.differentiate(&weights, Shapes::None);
            for (by, &gap) in by_gap.iter_mut().zip(&self.gaps) {
                by.push(row[quantities.gap(gap)]);
            }
        }
        Ok((paths, by_gap))
    }

    /// Derivatives of ratio and collimation by every quantity of the train at these spacings, mm,
    /// for a collimated beam.
    ///
    /// # Errors
    /// A ray does not get through.
    pub(crate) fn gradients(
        &mut self,
        spacings_mm: &[f64],
        shapes: Shapes,
    ) -> Result<[Vec<f64>; 2], HeldFault> {
        let (ratio, ratio_by) = self.ratio(spacings_mm, shapes)?;
        let (paths, quantities) = self.paths(shapes)?;
        let collimation_rad = self.slope(ratio, paths.iter().copied());
        let by = |place: usize| {
            self.slope(ratio, self.bundle.path_derivatives(0, place))
                - collimation_rad * ratio_by[place] / ratio
        };
        let collimation_by = (0..quantities.count()).map(by).collect();
        Ok([ratio_by, collimation_by])
    }

    /// Sets the spacings. The ratio, and its derivatives by every quantity.
    fn ratio(&mut self, spacings_mm: &[f64], shapes: Shapes) -> Result<(f64, Vec<f64>), HeldFault> {
        for (&gap, &spacing) in self.gaps.iter().zip(spacings_mm) {
            self.train.gaps_mut()[gap] = spacing;
        }
        self.paraxial.trace(&self.train, 1.0, 0.0)?;
        let ratio = self.paraxial.ratio().filter(|ratio| *ratio != 0.0);
        let ratio = ratio.ok_or(HeldFault::Paraxial)?;
        let quantities = Quantities::new(self.train.len(), shapes);
        let mut row = vec![0.0; quantities.count()];
        let last = [(self.train.len() - 1, 1.0)];
        let weights = ParaxialWeights { heights: &last, exit_slope: 0.0 };
        self.paraxial.differentiate(&self.train, weights, quantities, &mut row)?;
        Ok((ratio, row))
    }

    /// Paths of the rays of the fit, which can then be differentiated by these quantities.
    fn paths(&mut self, shapes: Shapes) -> Result<(Vec<f64>, Quantities), HeldFault> {
        let mut paths = vec![0.0; self.sample.heights_mm.len()];
        self.bundle.load([&self.train], &self.sample.heights_mm);
        self.bundle.trace_kept(&mut paths).map_err(|failed| HeldFault::Ray(failed.fault))?;
        Ok((paths, self.bundle.differentiate(shapes)))
    }

    /// The slope that these paths' best sphere gives the ray at the 1/e² radius, rad.
    fn slope(&self, ratio: f64, paths: impl Iterator<Item = f64>) -> f64 {
        let b: f64 = self.counts.iter().zip(paths).map(|(count, path)| count * path).sum();
        2.0 * self.radius_mm / ratio * b
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
