//! Seidel sums: the aberrations of the third order, surface by surface.
//!
//! W. T. Welford, *Aberrations of Optical Systems* (1986), ch. 8. With h, u the marginal ray and
//! h̄, ū the chief ray, A = n(hc + u) and Ā = n(h̄c + ū) their refraction invariants, H = Ah̄ − Āh
//! the Lagrange invariant, and Δ the change across a surface:
//!
//! ```text
//! S_I   = −Σ A² h Δ(u/n)        S_II = −Σ AĀ h Δ(u/n)        S_III = −Σ Ā² h Δ(u/n)
//! S_IV  = −Σ H² c Δ(1/n)
//! S_V   = −Σ (Ā/A)(Ā² h Δ(u/n) + H² c Δ(1/n))
//!       = −Σ Ā(Ā² h Δ(1/n²) − h̄(2Āh − Ah̄) c Δ(1/n))
//! ```
//!
//! The second form of S_V follows from Δ(u/n) = AΔ(1/n²) − hcΔ(1/n); it has no division and is
//! the one used, since A = 0 wherever collimated light meets a flat. A surface whose sag differs
//! from its sphere's by a r⁴, a = a₄ + κc³/8, adds T = 8(n′ − n)a h⁴ to S_I, and T times h̄/h,
//! (h̄/h)², (h̄/h)³ to S_II, S_III and S_V. Colour, with δn the index for the second wavelength
//! less that for the first:
//!
//! ```text
//! C_L = Σ A h Δ(δn/n)           C_T = Σ Ā h Δ(δn/n)
//! ```
//!
//! **Sign.** Welford's wavefront aberration is positive where the wavefront is ahead of its
//! reference: S_I > 0 is an undercorrected lens, as a single positive one is. Optical *path* to a
//! plane, which [`bundle`](crate::bundle) and [`wavefront`](crate::wavefront) tell, is then
//! shorter: for an afocal train, path excess = −(S_I/8)(r/h)⁴ to the fourth order in r.

use std::ops::AddAssign;

use crate::paraxial::{ParaxialError, ParaxialRay};
use crate::surface::Surface;
use crate::train::Train;

/// The two paraxial rays Seidel sums are taken for. The stop is at the first surface: there the
/// chief ray's height is zero.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SeidelRays {
    /// Marginal height at the first surface, mm.
    pub marginal_height_mm: f64,
    /// Marginal slope before the first surface; 0 for collimated light.
    pub marginal_slope: f64,
    /// Chief ray's slope before the first surface: the (tangent of the) field angle.
    pub chief_slope: f64,
}

/// The five sums, or one surface's share of them, mm.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct SeidelSums {
    /// S_I, spherical aberration.
    pub spherical_mm: f64,
    /// S_II, coma.
    pub coma_mm: f64,
    /// S_III, astigmatism.
    pub astigmatism_mm: f64,
    /// S_IV, Petzval curvature.
    pub petzval_mm: f64,
    /// S_V, distortion.
    pub distortion_mm: f64,
}

impl AddAssign for SeidelSums {
    fn add_assign(&mut self, other: Self) {
        self.spherical_mm += other.spherical_mm;
        self.coma_mm += other.coma_mm;
        self.astigmatism_mm += other.astigmatism_mm;
        self.petzval_mm += other.petzval_mm;
        self.distortion_mm += other.distortion_mm;
    }
}

/// First-order colour between two wavelengths, or one surface's share of it, mm.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct ChromaticSums {
    /// C_L, longitudinal colour.
    pub longitudinal_mm: f64,
    /// C_T, transverse colour.
    pub transverse_mm: f64,
}

impl AddAssign for ChromaticSums {
    fn add_assign(&mut self, other: Self) {
        self.longitudinal_mm += other.longitudinal_mm;
        self.transverse_mm += other.transverse_mm;
    }
}

/// Shares of the surfaces, from left to right, and their sum.
#[derive(Debug, Clone, PartialEq)]
pub struct BySurface<Sums> {
    /// What each surface gives.
    pub surfaces: Vec<Sums>,
    /// What they come to.
    pub total: Sums,
}

/// Why there are no Seidel sums.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum SeidelError {
    /// A paraxial ray has no end.
    #[error(transparent)]
    Ray(#[from] ParaxialError),
    /// A sum is too large to be told.
    #[error("the aberration of surface {} is out of all bounds", .surface + 1)]
    Overflow {
        /// Which surface, counted from 0.
        surface: usize,
    },
    /// Indices for a second wavelength that are not one a medium, finite and positive.
    #[error("index {place} of the second wavelength is missing or no index")]
    SecondIndices {
        /// Which medium, counted from 0.
        place: usize,
    },
}

/// One surface as both paraxial rays see it.
struct Refraction<'a> {
    surface: &'a Surface,
    /// Indices before and behind.
    n: [f64; 2],
    /// Marginal and chief height.
    h: f64,
    h_chief: f64,
    /// Refraction invariants A and Ā.
    a: f64,
    a_chief: f64,
    /// Marginal slopes before and behind.
    u: [f64; 2],
}

impl Refraction<'_> {
    fn seidel(&self) -> SeidelSums {
        let Self { n: [n, n1], h, h_chief, a, a_chief, u: [u, u1], surface } = *self;
        let c = surface.curvature;
        let spread = h * (u1 / n1 - u / n);
        let over_n = 1.0 / n1 - 1.0 / n;
        let over_n2 = over_n * (1.0 / n1 + 1.0 / n);
        let lagrange = a * h_chief - a_chief * h;
        let bent = h_chief * (2.0 * a_chief * h - a * h_chief) * c * over_n;
        let fourth = surface.asphere[0] + surface.conic * c * c * c / 8.0;
        let aspheric = 8.0 * (n1 - n) * fourth;
        SeidelSums {
            spherical_mm: aspheric * h.powi(4) - a * a * spread,
            coma_mm: aspheric * h.powi(3) * h_chief - a * a_chief * spread,
            astigmatism_mm: aspheric * (h * h_chief).powi(2) - a_chief * a_chief * spread,
            petzval_mm: -lagrange * lagrange * c * over_n,
            distortion_mm: aspheric * h * h_chief.powi(3)
                - a_chief * (a_chief * a_chief * h * over_n2 - bent),
        }
    }

    /// `dn` holds the index changes before and behind.
    fn chromatic(&self, dn: [f64; 2]) -> ChromaticSums {
        let change = self.h * (dn[1] / self.n[1] - dn[0] / self.n[0]);
        ChromaticSums { longitudinal_mm: self.a * change, transverse_mm: self.a_chief * change }
    }
}

/// Hands every surface, with both rays there, to `share`, and adds up what comes back.
fn by_surface<Sums: Copy + Default + AddAssign>(
    train: &Train,
    rays: SeidelRays,
    share: impl Fn(usize, &Refraction<'_>) -> (Sums, bool),
) -> Result<BySurface<Sums>, SeidelError> {
    let (mut marginal, mut chief) = (ParaxialRay::new(), ParaxialRay::new());
    marginal.trace(train, rays.marginal_height_mm, rays.marginal_slope)?;
    chief.trace(train, 0.0, rays.chief_slope)?;
    let mut sums = BySurface { surfaces: Vec::with_capacity(train.len()), total: Sums::default() };
    for (i, surface) in train.surfaces().iter().enumerate() {
        let n = [train.indices()[i], train.indices()[i + 1]];
        let invariant = |ray: &ParaxialRay| {
            let (h, u) = (ray.heights()[i], ray.slopes()[i]);
            n[0] * (h * surface.curvature + u)
        };
        let refraction = Refraction {
            surface,
            n,
            h: marginal.heights()[i],
            h_chief: chief.heights()[i],
            a: invariant(&marginal),
            a_chief: invariant(&chief),
            u: [marginal.slopes()[i], marginal.slopes()[i + 1]],
        };
        let (sum, finite) = share(i, &refraction);
        if !finite {
            return Err(SeidelError::Overflow { surface: i });
        }
        sums.total += sum;
        sums.surfaces.push(sum);
    }
    Ok(sums)
}

/// Seidel sums of a train and the share of every surface.
///
/// # Errors
/// A paraxial ray or a sum leaves the range of numbers.
pub fn seidel(train: &Train, rays: SeidelRays) -> Result<BySurface<SeidelSums>, SeidelError> {
    by_surface(train, rays, |_, refraction| {
        let s = refraction.seidel();
        let all = [s.spherical_mm, s.coma_mm, s.astigmatism_mm, s.petzval_mm, s.distortion_mm];
        (s, all.iter().all(|sum| sum.is_finite()))
    })
}

/// First-order colour of a train, and the share of every surface, between its own wavelength and
/// a second one for which the media have the indices `second` (one a medium, left to right).
///
/// # Errors
/// `second` does not fit the train, or a paraxial ray or a sum leaves the range of numbers.
pub fn chromatic(
    train: &Train,
    second: &[f64],
    rays: SeidelRays,
) -> Result<BySurface<ChromaticSums>, SeidelError> {
    let wrong = second.iter().position(|index| !(index.is_finite() && *index > 0.0));
    let media = train.indices().len();
    let short = (second.len() != media).then_some(second.len().min(media));
    if let Some(place) = wrong.or(short) {
        return Err(SeidelError::SecondIndices { place });
    }
    by_surface(train, rays, |i, refraction| {
        let dn = [second[i] - refraction.n[0], second[i + 1] - refraction.n[1]];
        let c = refraction.chromatic(dn);
        (c, c.longitudinal_mm.is_finite() && c.transverse_mm.is_finite())
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::first_order::first_order;

    const RAYS: SeidelRays =
        SeidelRays { marginal_height_mm: 3.0, marginal_slope: 0.01, chief_slope: 0.05 };

    fn train() -> Train {
        let surfaces = [0.03, -0.02, 0.012, -0.01].map(|c| Surface::sphere(c, 9.0)).into();
        Train::new(surfaces, vec![4.0, 11.0, 2.5], vec![1.0, 1.6, 1.0, 1.75, 1.1]).unwrap()
    }

    #[test]
    fn distortion_without_division_is_distortion_with_it() {
        let sums = seidel(&train(), RAYS).unwrap();
        let (mut marginal, mut chief) = (ParaxialRay::new(), ParaxialRay::new());
        marginal.trace(&train(), 3.0, 0.01).unwrap();
        chief.trace(&train(), 0.0, 0.05).unwrap();
        for (i, (share, surface)) in sums.surfaces.iter().zip(train().surfaces()).enumerate() {
            let (n, c) = (train().indices()[i], surface.curvature);
            let a = n * (marginal.heights()[i] * c + marginal.slopes()[i]);
            let a_chief = n * (chief.heights()[i] * c + chief.slopes()[i]);
            // S_V = (Ā/A)(S_III + S_IV), Welford's first form.
            let by_ratio = a_chief / a * (share.astigmatism_mm + share.petzval_mm);
            let error = share.distortion_mm - by_ratio;
            assert!(error.abs() < 1e-12 * by_ratio.abs(), "{i}: {share:?} {by_ratio}");
        }
    }

    #[test]
    fn collimated_light_on_a_flat_has_distortion_and_nothing_else() {
        let flat = Train::new(vec![Surface::sphere(0.0, 9.0)], vec![], vec![1.0, 1.5]).unwrap();
        let rays = SeidelRays { marginal_slope: 0.0, ..RAYS };
        let s = seidel(&flat, rays).unwrap().total;
        let others = [s.spherical_mm, s.coma_mm, s.astigmatism_mm, s.petzval_mm];
        assert!(others.iter().all(|&sum| sum == 0.0), "{s:?}");
        // −Ā³hΔ(1/n²): Snell's law for a slope, u′ = u/n + u³(1/n³ − 1/n)/2 against u/n.
        let expected = -(0.05_f64.powi(3)) * 3.0 * (1.0 / 2.25 - 1.0);
        assert!((s.distortion_mm - expected).abs() < 1e-18);
    }

    #[test]
    fn the_conic_that_images_without_error_has_no_spherical_aberration() {
        // Collimated light meets an ellipsoid, κ = −(n/n′)²: Born and Wolf, Principles of
        // Optics, on surfaces that image a point perfectly.
        let mut surface = Surface::sphere(0.02, 9.0);
        surface.conic = -1.0 / 2.25;
        let rays = SeidelRays { marginal_slope: 0.0, ..RAYS };
        let with = |surface| {
            let train = Train::new(vec![surface], vec![], vec![1.0, 1.5]).unwrap();
            seidel(&train, rays).unwrap().total
        };
        assert!(with(surface).spherical_mm.abs() < 1e-18);
        assert!(with(Surface::sphere(0.02, 9.0)).spherical_mm > 1e-6);
        // κc³/8 may as well be written as a coefficient of r⁴.
        let mut asphere = Surface::sphere(0.02, 9.0);
        asphere.asphere[0] = surface.conic * 0.02_f64.powi(3) / 8.0;
        assert!(with(asphere).spherical_mm.abs() < 1e-18);
    }

    #[test]
    fn an_aspheric_term_away_from_the_stop_is_weighed_by_the_ratio_of_heights() {
        let plain = train();
        let mut bent = train();
        bent.surfaces_mut()[2].asphere[0] = 1e-6;
        let (mut marginal, mut chief) = (ParaxialRay::new(), ParaxialRay::new());
        marginal.trace(&plain, 3.0, 0.01).unwrap();
        chief.trace(&plain, 0.0, 0.05).unwrap();
        let (h, h_chief) = (marginal.heights()[2], chief.heights()[2]);
        let (a, b) = (seidel(&plain, RAYS).unwrap().total, seidel(&bent, RAYS).unwrap().total);
        let term = 8.0 * 0.75 * 1e-6 * h.powi(4);
        let close = |x: f64, y: f64| assert!((x - y).abs() < 1e-12 * y.abs(), "{x} {y}");
        close(b.spherical_mm - a.spherical_mm, term);
        close(b.coma_mm - a.coma_mm, term * h_chief / h);
        close(b.astigmatism_mm - a.astigmatism_mm, term * (h_chief / h).powi(2));
        close(b.distortion_mm - a.distortion_mm, term * (h_chief / h).powi(3));
        assert_eq!(b.petzval_mm, a.petzval_mm);
    }

    #[test]
    fn longitudinal_colour_is_the_change_of_power() {
        // For collimated light on a thin lens A₁ − A₂ = nh(c₁ − c₂), so C_L = h² δK exactly.
        let surfaces = vec![Surface::sphere(0.02, 9.0), Surface::sphere(-0.01, 9.0)];
        let thin = |n| Train::new(surfaces.clone(), vec![0.0], vec![1.0, n, 1.0]).unwrap();
        let rays = SeidelRays { marginal_slope: 0.0, ..RAYS };
        let colour = chromatic(&thin(1.5), &[1.0, 1.51, 1.0], rays).unwrap().total;
        let power = |n| first_order(&thin(n), 0..2).unwrap().power_per_mm;
        let change = 9.0 * (power(1.51) - power(1.5));
        assert!((colour.longitudinal_mm - change).abs() < 1e-14, "{colour:?} {change}");
        assert!(colour.transverse_mm.abs() < 1e-15, "thin, and the stop at the lens");
    }

    #[test]
    fn what_cannot_be_told_is_an_error() {
        let huge = SeidelRays { marginal_height_mm: 1e100, ..RAYS };
        assert_eq!(seidel(&train(), huge), Err(SeidelError::Overflow { surface: 0 }));
        let endless = SeidelRays { marginal_height_mm: f64::NAN, ..RAYS };
        let fault = ParaxialError::Ray { surface: 0 };
        assert_eq!(seidel(&train(), endless), Err(SeidelError::Ray(fault)));
        for (second, place) in [(vec![1.0; 3], 3), (vec![1.0, 0.0, 1.0, 1.0, 1.0], 1)] {
            let error = chromatic(&train(), &second, RAYS).unwrap_err();
            assert_eq!(error, SeidelError::SecondIndices { place });
        }
    }
}
