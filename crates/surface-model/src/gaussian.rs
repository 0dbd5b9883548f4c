//! The real beam: a Gaussian beam with a beam propagation factor M², to first order.
//!
//! In the terms of ISO 11146-1 a beam has a waist diameter d₀, a divergence angle Θ (full angle,
//! far from the waist), and M² = πd₀Θ/(4λ). Its radius is that of two paraxial rays together,
//!
//! ```text
//! w² = a² + b²
//! ```
//!
//! the *waist ray*, parallel to the axis at the waist radius where the waist is, and the
//! *divergence ray*, which crosses the axis there with slope Θ/2 (J. Arnaud, Appl. Opt. 24, 538
//! (1985); from memory). Both go through a train as any paraxial ray does, so the beam follows from
//! exactly the same surfaces and gaps, inside glass too, and its derivatives from those of the two
//! rays.
//! aᵤb − abᵤ = M²λ/π behind every surface that faces air: the invariant.

use crate::paraxial::{ParaxialError, ParaxialRay, ParaxialWeights};
use crate::quantities::Quantities;
use crate::train::Train;

/// A Gaussian beam in air, along an axis on which z = 0 is a plane of reference.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GaussianBeam {
    /// Radius of the waist, mm: where the intensity has fallen to 1/e².
    pub waist_radius_mm: f64,
    /// Half of the divergence angle, rad.
    pub half_divergence_rad: f64,
    /// Where the waist is, mm from the plane of reference, positive in front of the beam.
    pub waist_at_mm: f64,
}

impl GaussianBeam {
    /// M², beam propagation factor at a wavelength in nm.
    #[must_use]
    pub fn m_squared(&self, wavelength_nm: f64) -> f64 {
        std::f64::consts::PI * self.waist_radius_mm * self.half_divergence_rad
            / (wavelength_nm * 1e-6)
    }

    /// Distance from the waist at which the beam is √2 times as wide, mm.
    #[must_use]
    pub fn rayleigh_length_mm(&self) -> f64 {
        self.waist_radius_mm / self.half_divergence_rad
    }

    /// 1/e² radius at a distance from the plane of reference, mm.
    #[must_use]
    pub fn radius_mm(&self, at_mm: f64) -> f64 {
        self.waist_radius_mm.hypot(self.half_divergence_rad * (at_mm - self.waist_at_mm))
    }

    /// Curvature of the wavefront at a distance from the plane of reference, 1/mm, positive when
    /// the beam diverges there.
    #[must_use]
    pub fn curvature_per_mm(&self, at_mm: f64) -> f64 {
        let from_waist = at_mm - self.waist_at_mm;
        let slope = self.half_divergence_rad;
        let radius = self.radius_mm(at_mm);
        (slope / radius) * (slope / radius) * from_waist
    }

    /// Height in the plane of reference and slope of the ray at the 1/e² radius, square to the
    /// wavefront.
    #[must_use]
    pub fn edge_ray(&self) -> (f64, f64) {
        let height = self.radius_mm(0.0);
        (height, height * self.curvature_per_mm(0.0))
    }
}

/// Peak of a Gaussian beam's cross-section: 2·dose/(πw²), in the unit of the dose per cm².
#[must_use]
pub fn peak_per_cm2(dose: f64, radius_mm: f64) -> f64 {
    2.0 * dose / (std::f64::consts::PI * radius_mm * radius_mm) * 100.0
}

/// Share of a Gaussian beam's power that does not pass a round hole: exp(−2a²/w²).
#[must_use]
pub fn clipped(hole_radius_mm: f64, radius_mm: f64) -> f64 {
    (-2.0 * (hole_radius_mm / radius_mm).powi(2)).exp()
}

/// A Gaussian beam on its way through a train. Buffers are kept from call to call.
#[derive(Debug, Clone, Default)]
pub struct GaussianPath {
    waist: ParaxialRay,
    divergence: ParaxialRay,
    row: Vec<f64>,
}

/// Weights of the two rays in a sum that is to be differentiated.
#[derive(Debug, Clone, Copy, Default)]
pub struct GaussianWeights {
    /// Weights of both rays' heights (mm) at one surface: waist ray, divergence ray.
    pub heights: Option<(usize, [f64; 2])>,
    /// Weights of their slopes behind the last surface.
    pub exit_slopes: [f64; 2],
}

impl GaussianPath {
    /// Carries a beam whose plane of reference is the first vertex through a train.
    ///
    /// # Errors
    /// A height or slope leaves the range of numbers.
    pub fn trace(&mut self, train: &Train, beam: &GaussianBeam) -> Result<(), ParaxialError> {
        let slope = beam.half_divergence_rad;
        self.waist.trace(train, beam.waist_radius_mm, 0.0)?;
        self.divergence.trace(train, -slope * beam.waist_at_mm, slope)
    }

    /// Heights of waist ray and divergence ray at a surface, mm.
    ///
    /// # Panics
    /// If the train that was traced has no such surface.
    #[must_use]
    pub fn heights(&self, surface: usize) -> [f64; 2] {
        [self.waist.heights()[surface], self.divergence.heights()[surface]]
    }

    /// Slopes of waist ray and divergence ray behind a surface.
    ///
    /// # Panics
    /// If the train that was traced has no such surface.
    #[must_use]
    pub fn slopes_behind(&self, surface: usize) -> [f64; 2] {
        [self.waist.slopes()[surface + 1], self.divergence.slopes()[surface + 1]]
    }

    /// Square of the 1/e² radius at a surface, mm².
    ///
    /// # Panics
    /// If the train that was traced has no such surface.
    #[must_use]
    pub fn radius_squared(&self, surface: usize) -> f64 {
        let [a, b] = self.heights(surface);
        a * a + b * b
    }

    /// The narrowest place in the gap behind a surface: its distance from that surface along +z
    /// and the 1/e² radius there, both mm. `length_mm` is the gap's length along +z; negative
    /// where light goes back, infinite behind the last surface.
    ///
    /// # Panics
    /// If the train that was traced has no such surface.
    #[must_use]
    pub fn narrowest_behind(&self, surface: usize, length_mm: f64) -> (f64, f64) {
        let ([a, b], [ua, ub]) = (self.heights(surface), self.slopes_behind(surface));
        let growth = ua * ua + ub * ub;
        let waist = if growth > 0.0 { -(a * ua + b * ub) / growth } else { 0.0 };
        let at = waist.clamp(length_mm.min(0.0), length_mm.max(0.0));
        (at, (a + at * ua).hypot(b + at * ub))
    }

    /// The beam behind the last surface, which faces air; its plane of reference is the last
    /// vertex. `None` before a trace.
    #[must_use]
    pub fn exit(&self) -> Option<GaussianBeam> {
        let [ua, ub] = [self.waist.exit_slope()?, self.divergence.exit_slope()?];
        let [a, b] = [*self.waist.heights().last()?, *self.divergence.heights().last()?];
        let growth = ua * ua + ub * ub;
        let beam = GaussianBeam {
            waist_radius_mm: (a * ub - b * ua).abs() / growth.sqrt(),
            half_divergence_rad: growth.sqrt(),
            waist_at_mm: -(a * ua + b * ub) / growth,
        };
        let numbers = [beam.waist_radius_mm, beam.half_divergence_rad, beam.waist_at_mm];
        numbers.iter().all(|number| number.is_finite()).then_some(beam)
    }

    /// Exact derivatives of a weighted sum of both rays' heights and exit slopes by every quantity
    /// of the train they were traced through, written to `row`.
    ///
    /// # Errors
    /// A derivative leaves the range of numbers.
    ///
    /// # Panics
    /// If `row` or the train does not fit the traced rays.
    pub fn differentiate(
        &mut self,
        train: &Train,
        weights: GaussianWeights,
        quantities: Quantities,
        row: &mut [f64],
    ) -> Result<(), ParaxialError> {
        let of = |ray: usize| {
            let heights = weights.heights.map(|(surface, weights)| (surface, weights[ray]));
            (heights, weights.exit_slopes[ray])
        };
        let (heights, exit_slope) = of(0);
        let first = ParaxialWeights { heights: heights.as_slice(), exit_slope };
        self.waist.differentiate(train, first, quantities, row)?;
        let (heights, exit_slope) = of(1);
        let second = ParaxialWeights { heights: heights.as_slice(), exit_slope };
        self.row.resize(row.len(), 0.0);
        self.divergence.differentiate(train, second, quantities, &mut self.row)?;
        row.iter_mut().zip(&self.row).for_each(|(sum, by)| *sum += by);
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::surface::Surface;

    fn beam() -> GaussianBeam {
        let (waist_radius_mm, nm, m_squared) = (1.2, 532.0, 1.4);
        let half_divergence_rad = m_squared * nm * 1e-6 / (std::f64::consts::PI * waist_radius_mm);
        GaussianBeam { waist_radius_mm, half_divergence_rad, waist_at_mm: -400.0 }
    }

    #[test]
    fn m_squared_and_the_edge_ray_are_those_of_the_beam() {
        assert!((beam().m_squared(532.0) - 1.4).abs() < 1e-14);
        let (height, slope) = beam().edge_ray();
        assert!((height - beam().radius_mm(0.0)).abs() < 1e-15);
        // The radius grows as its edge ray does.
        let h = 1e-2;
        let growth = (beam().radius_mm(h) - beam().radius_mm(-h)) / (2.0 * h);
        assert!((slope - growth).abs() < 1e-12, "{slope} {growth}");
    }

    #[test]
    fn the_invariant_holds_and_the_exit_beam_has_the_radius_of_the_last_surface() {
        let surfaces = [0.02, -0.01, -0.03, 0.0].map(|c| Surface::sphere(c, 9.0)).into();
        let train = Train::new(surfaces, vec![6.0, 30.0, 2.0], vec![1.0, 1.5, 1.0, 1.7, 1.0]);
        let mut path = GaussianPath::default();
        path.trace(&train.unwrap(), &beam()).unwrap();
        let exit = path.exit().unwrap();
        assert!((exit.m_squared(532.0) - 1.4).abs() < 1e-12);
        assert!((exit.radius_mm(0.0).powi(2) - path.radius_squared(3)).abs() < 1e-12);
        let (at, radius) = path.narrowest_behind(3, f64::INFINITY);
        assert!(at >= 0.0 && radius <= exit.radius_mm(0.0));
        let (at, radius) = path.narrowest_behind(1, 0.0);
        assert!(at == 0.0 && (radius * radius - path.radius_squared(1)).abs() < 1e-14);
    }
}
