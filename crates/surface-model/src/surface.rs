//! One refracting surface of revolution: a sphere, a conic, an even asphere or a flat.
//!
//! With q = r² the sag is
//!
//! z(q) = c q / (1 + w) + Σ aⱼ qʲ,  w = √(1 − (1+κ) c² q),  j = 2 … 10
//!
//! (D. Malacara (ed.), *Optical Shop Testing*, appendix on optical surfaces; ISO 10110-12 writes
//! the same sum with its own letters). c is the vertex curvature, κ the conic constant (0 sphere,
//! −1 paraboloid), aⱼ the coefficient of r²ʲ.

use crate::real::Real;

/// Number of even-asphere coefficients kept: r⁴, r⁶, …, r²⁰.
pub const ASPHERE_TERMS: usize = 9;

/// The power of r that coefficient `term` (0-based) stands for: 4, 6, …, 20.
#[must_use]
pub fn asphere_power(term: usize) -> usize {
    2 * term + 4
}

/// A surface of revolution. Lengths in mm, curvature in 1/mm.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Surface {
    /// Vertex curvature, 1/mm; positive when the centre is to the right, 0 for a flat.
    pub curvature: f64,
    /// Conic constant κ: 0 sphere, −1 paraboloid, below −1 hyperboloid.
    pub conic: f64,
    /// Coefficients of r⁴, r⁶, …, r²⁰ in mm⁻³, mm⁻⁵, ….
    pub asphere: [f64; ASPHERE_TERMS],
    /// Half of the clear diameter, mm.
    pub semi_diameter: f64,
}

impl Surface {
    /// A sphere or, with zero curvature, a flat.
    #[must_use]
    pub fn sphere(curvature: f64, semi_diameter: f64) -> Self {
        Self { curvature, conic: 0.0, asphere: [0.0; ASPHERE_TERMS], semi_diameter }
    }

    /// Whether the closed form for spheres applies.
    #[must_use]
    #[inline]
    pub fn is_sphere(&self) -> bool {
        self.conic == 0.0 && !self.is_asphere()
    }

    /// Every number it has.
    pub(crate) fn numbers(&self) -> impl Iterator<Item = f64> + use<> {
        let Self { curvature, conic, asphere, semi_diameter } = *self;
        [curvature, conic, semi_diameter].into_iter().chain(asphere)
    }

    /// The same surface seen from the other side.
    pub(crate) fn turned_round(&self) -> Self {
        let Self { curvature, conic, asphere, semi_diameter } = *self;
        let asphere = asphere.map(|coefficient| -coefficient);
        Self { curvature: -curvature, conic, asphere, semi_diameter }
    }

    /// Whether polynomial terms are present, so that rays meet it by iteration.
    #[must_use]
    #[inline]
    pub fn is_asphere(&self) -> bool {
        self.asphere.iter().any(|&coefficient| coefficient != 0.0)
    }

    /// Sag in mm at height `height` mm above the axis; NaN-free: `None` where the surface does
    /// not reach that far out.
    #[must_use]
    pub fn sag(&self, height: f64) -> Option<f64> {
        let profile = self.profile(height * height);
        profile.sag.is_finite().then_some(profile.sag)
    }

    /// Sag and slope terms at q = r²; NaN beyond the end of the surface.
    #[inline(always)]
    pub(crate) fn profile<N: Real>(&self, q: N) -> Profile<N> {
        let one = N::splat(1.0);
        let c = N::splat(self.curvature);
        let ck = N::splat((1.0 + self.conic) * self.curvature);
        let w = (one - ck * c * q).sqrt();
        let conic_sag = c * q / (one + w);
        // Horner in q for Σ aⱼ qʲ, its first and its second derivative.
        let (mut sum, mut first, mut second) = (N::splat(0.0), N::splat(0.0), N::splat(0.0));
        if self.is_asphere() {
            for &coefficient in self.asphere.iter().rev() {
                second = second * q + first;
                first = first * q + sum;
                sum = sum * q + N::splat(coefficient);
            }
            // The sum so far is p(q) with z = q² p(q).
            second = N::splat(2.0) * (sum + N::splat(2.0) * q * first + q * q * second);
            first = q * (N::splat(2.0) * sum + q * first);
            sum = q * q * sum;
        }
        Profile {
            w,
            conic_sag,
            sag: conic_sag + sum,
            slope: c / w + N::splat(2.0) * first,
            slope_by_q: N::splat(0.5) * c * ck * c / (w * w * w) + N::splat(2.0) * second,
        }
    }
}

/// A surface's shape at one height, from [`Surface::profile`].
#[derive(Debug, Clone, Copy)]
pub(crate) struct Profile<N> {
    /// w = √(1 − (1+κ) c² q): 1 at the vertex, 0 where the conic turns back.
    pub(crate) w: N,
    /// Sag of the conic part alone, mm.
    pub(crate) conic_sag: N,
    /// Sag, mm.
    pub(crate) sag: N,
    /// g = (dz/dr)/r = 2 dz/dq, 1/mm: the normal is (−g x, −g y, 1)/√(1 + g² q).
    pub(crate) slope: N,
    /// dg/dq, mm⁻³.
    pub(crate) slope_by_q: N,
}

#[cfg(test)]
mod tests {
    use super::*;

    fn asphere() -> Surface {
        let mut surface = Surface::sphere(0.02, 12.0);
        surface.conic = -0.7;
        surface.asphere[0] = 2e-6;
        surface.asphere[1] = -3e-9;
        surface.asphere[8] = 1e-24;
        surface
    }

    #[test]
    fn a_sphere_has_the_sag_of_a_sphere() {
        let surface = Surface::sphere(1.0 / 50.0, 20.0);
        let by_pythagoras = 50.0 - (50.0_f64 * 50.0 - 20.0 * 20.0).sqrt();
        assert!((surface.sag(20.0).unwrap() - by_pythagoras).abs() < 1e-14);
        assert_eq!(Surface::sphere(0.0, 5.0).sag(5.0), Some(0.0));
        assert_eq!(surface.sag(50.1), None);
    }

    #[test]
    fn slopes_are_the_derivatives_of_the_sag() {
        let surface = asphere();
        let (r, h) = (9.0_f64, 1e-4);
        let q = r * r;
        let dz_dr = (surface.sag(r + h).unwrap() - surface.sag(r - h).unwrap()) / (2.0 * h);
        assert!((surface.profile(q).slope * r - dz_dr).abs() < 1e-9);
        let dg = (surface.profile(q + h).slope - surface.profile(q - h).slope) / (2.0 * h);
        assert!((surface.profile(q).slope_by_q - dg).abs() < 1e-10);
    }

    #[test]
    fn a_single_term_is_its_power() {
        for term in 0..ASPHERE_TERMS {
            let mut surface = Surface::sphere(0.0, 2.0);
            surface.asphere[term] = 1.0;
            let expected = 1.5_f64.powi(asphere_power(term) as i32);
            assert!((surface.sag(1.5).unwrap() / expected - 1.0).abs() < 1e-14);
        }
    }
}
