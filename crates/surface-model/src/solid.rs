//! The solid between two surfaces: its thickness at any height, its volume, its mass.
//!
//! With q = r² and the sag z(q) of [`surface`](crate::surface), differentiating
//! c(q + (1+κ)z²) = 2z gives the derivatives of the sag of the conic part,
//!
//! ```text
//! ∂z/∂c = (q + (1+κ)z²)/(2w)      ∂z/∂κ = cz²/(2w)      ∂z/∂aⱼ = qʲ
//! ```
//!
//! and substituting w for q its integral, in a form that stays exact for flats and parabolas:
//!
//! ```text
//! ∫₀^Q z dq = c Q² (1 + 2W)/(3(1 + W)²) + Σ aⱼ Q^(j+1)/(j+1),      W = w(Q)
//! ```
//!
//! The volume under a cap is π times that. For a sphere it is the πh²(3R − h)/3 of the textbooks.

use crate::surface::{ASPHERE_TERMS, Surface};

/// Two surfaces and the axial distance from the first vertex to the second.
#[derive(Debug, Clone, Copy)]
pub struct Solid<'a> {
    /// The left surface.
    pub front: &'a Surface,
    /// The right surface.
    pub back: &'a Surface,
    /// Axial distance from vertex to vertex, mm.
    pub axial_mm: f64,
}

/// Why a solid has no thickness or no volume at a height.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum SolidError {
    /// A surface ends before it gets out to that height, or ends there with a vertical slope.
    #[error("the {side} surface does not reach {height_mm} mm from the axis")]
    Reach {
        /// Which surface.
        side: Side,
        /// The height asked for, mm.
        height_mm: f64,
    },
    /// The surfaces cross, so that there is no glass between them somewhere.
    #[error("the surfaces overlap by {} mm at {height_mm} mm from the axis", -.thickness_mm)]
    Overlap {
        /// Where, mm from the axis.
        height_mm: f64,
        /// The (negative) thickness there, mm.
        thickness_mm: f64,
    },
    /// The result is too large to be told.
    #[error("the solid is out of all bounds")]
    Overflow,
}

/// One of the two surfaces of a solid.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Side {
    /// The left one.
    Front,
    /// The right one.
    Back,
}

impl std::fmt::Display for Side {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Self::Front => "front",
            Self::Back => "back",
        })
    }
}

/// Derivatives of a thickness, or of a sag, by the numbers of one surface.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ShapeGradient {
    /// By the curvature, mm².
    pub curvature: f64,
    /// By the conic constant, mm.
    pub conic: f64,
    /// By the coefficients of r⁴, r⁶, …, r²⁰.
    pub asphere: [f64; ASPHERE_TERMS],
}

/// A thickness at a height with its exact derivatives. That by the axial distance is 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ThicknessGradient {
    /// Thickness, mm.
    pub thickness_mm: f64,
    /// By the numbers of the front surface.
    pub by_front: ShapeGradient,
    /// By the numbers of the back surface.
    pub by_back: ShapeGradient,
}

impl Solid<'_> {
    /// Axial distance from the front surface to the back one at `height_mm` from the axis, in
    /// mm: the edge thickness at the clear semi-diameter. Negative where the surfaces have crossed.
    ///
    /// # Errors
    /// A surface does not reach that height.
    pub fn thickness(&self, height_mm: f64) -> Result<f64, SolidError> {
        let sag = |side, surface: &Surface| {
            surface.sag(height_mm).ok_or(SolidError::Reach { side, height_mm })
        };
        let front = sag(Side::Front, self.front)?;
        let thickness = self.axial_mm + (sag(Side::Back, self.back)? - front);
        if thickness.is_finite() { Ok(thickness) } else { Err(SolidError::Overflow) }
    }

    /// The thickness at `height_mm` with its derivatives by both surfaces' numbers.
    ///
    /// # Errors
    /// A surface does not reach that height, or stands vertical there.
    pub fn thickness_gradient(&self, height_mm: f64) -> Result<ThicknessGradient, SolidError> {
        let thickness_mm = self.thickness(height_mm)?;
        let gradient = |side, surface: &Surface, sign: f64| {
            let fault = SolidError::Reach { side, height_mm };
            ShapeGradient::of_sag(surface, height_mm, sign).ok_or(fault)
        };
        Ok(ThicknessGradient {
            thickness_mm,
            by_front: gradient(Side::Front, self.front, -1.0)?,
            by_back: gradient(Side::Back, self.back, 1.0)?,
        })
    }

    /// Volume between the surfaces out to `height_mm` from the axis, mm³: that of the element,
    /// ground to a cylinder of that radius.
    ///
    /// # Errors
    /// A surface does not reach that height, or the surfaces overlap on the axis or at the edge.
    pub fn volume_mm3(&self, height_mm: f64) -> Result<f64, SolidError> {
        for height_mm in [0.0, height_mm] {
            let thickness_mm = self.thickness(height_mm)?;
            if thickness_mm < 0.0 {
                return Err(SolidError::Overlap { height_mm, thickness_mm });
            }
        }
        let q = height_mm * height_mm;
        let between =
            self.axial_mm * q + (sag_integral(self.back, q) - sag_integral(self.front, q));
        let volume = std::f64::consts::PI * between;
        if volume.is_finite() { Ok(volume) } else { Err(SolidError::Overflow) }
    }

    /// Mass in grams of the element out to `height_mm` from the axis, of a glass of the given
    /// density in g/cm³.
    ///
    /// # Errors
    /// As [`Self::volume_mm3`].
    pub fn mass_g(&self, height_mm: f64, density_g_per_cm3: f64) -> Result<f64, SolidError> {
        let mass = self.volume_mm3(height_mm)? * 1e-3 * density_g_per_cm3;
        if mass.is_finite() { Ok(mass) } else { Err(SolidError::Overflow) }
    }
}

impl ShapeGradient {
    /// `sign` times the derivatives of a surface's sag; `None` where they are not finite.
    fn of_sag(surface: &Surface, height: f64, sign: f64) -> Option<Self> {
        let q = height * height;
        let profile = surface.profile(q);
        let (z2, half_over_w) = (profile.conic_sag * profile.conic_sag, 0.5 * sign / profile.w);
        let mut power = sign * q;
        let asphere = [(); ASPHERE_TERMS].map(|()| {
            power *= q;
            power
        });
        let gradient = Self {
            curvature: half_over_w * (q + (1.0 + surface.conic) * z2),
            conic: half_over_w * surface.curvature * z2,
            asphere,
        };
        let finite = gradient.curvature.is_finite() && gradient.conic.is_finite();
        (finite && asphere.iter().all(|derivative| derivative.is_finite())).then_some(gradient)
    }
}

/// ∫ z dq from the axis to q = `end`, mm³.
fn sag_integral(surface: &Surface, end: f64) -> f64 {
    let w = surface.profile(end).w;
    let mut sum = 0.0;
    for (term, coefficient) in surface.asphere.iter().enumerate().rev() {
        sum = sum * end + coefficient / (term + 3) as f64;
    }
    let conic = surface.curvature * (1.0 + 2.0 * w) / (3.0 * (1.0 + w) * (1.0 + w));
    end * end * (conic + end * sum)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quadrature::gauss_legendre;
    use std::f64::consts::PI;

    fn asphere() -> Surface {
        let mut surface = Surface::sphere(0.03, 12.0);
        surface.conic = -0.7;
        surface.asphere[0] = 2e-6;
        surface.asphere[1] = -3e-9;
        surface.asphere[8] = 1e-24;
        surface
    }

    #[test]
    fn a_ball_is_a_ball() {
        let (front, back) = (Surface::sphere(0.125, 8.0), Surface::sphere(-0.125, 8.0));
        let ball = Solid { front: &front, back: &back, axial_mm: 16.0 };
        assert_eq!(ball.thickness(8.0), Ok(0.0));
        let volume = 4.0 / 3.0 * PI * 512.0;
        assert!((ball.volume_mm3(8.0).unwrap() - volume).abs() < 1e-12 * volume);
        // 2.203 g/cm³ is 0.002203 g/mm³.
        assert!((ball.mass_g(8.0, 2.203).unwrap() - 0.002203 * volume).abs() < 1e-14 * volume);
        // At the equator the derivatives have no end.
        let fault = SolidError::Reach { side: Side::Front, height_mm: 8.0 };
        assert_eq!(ball.thickness_gradient(8.0), Err(fault));
    }

    #[test]
    fn a_cap_has_the_volume_of_the_textbook() {
        // Cap of height h on a sphere of radius R: πh²(3R − h)/3. It stands on a millimetre of
        // cylinder here.
        let (front, back) = (Surface::sphere(1.0 / 25.0, 15.0), Surface::sphere(0.0, 15.0));
        let sag = 25.0 - (625.0_f64 - 225.0).sqrt();
        let lens = Solid { front: &front, back: &back, axial_mm: sag + 1.0 };
        let cap = PI * sag * sag * (75.0 - sag) / 3.0;
        let volume = lens.volume_mm3(15.0).unwrap();
        assert!((volume - (cap + PI * 225.0)).abs() < 1e-13 * volume);
        assert!((lens.thickness(15.0).unwrap() - 1.0).abs() < 1e-14);
    }

    #[test]
    fn the_closed_form_is_the_integral() {
        let flat = Surface::sphere(0.0, 12.0);
        for conic in [-3.0, -1.0, -0.7, 0.0, 0.6] {
            let back = Surface { conic, ..asphere() };
            let solid = Solid { front: &flat, back: &back, axial_mm: 3.0 };
            let rule = gauss_legendre(40);
            let by_rule: f64 = rule
                .iter()
                .map(|&(x, weight)| weight * solid.thickness((144.0 * x).sqrt()).unwrap())
                .sum::<f64>()
                * PI
                * 144.0;
            let volume = solid.volume_mm3(12.0).unwrap();
            assert!((volume - by_rule).abs() < 1e-12 * by_rule, "{conic}: {volume} {by_rule}");
        }
    }

    #[test]
    fn a_surface_that_ends_too_soon_is_named() {
        let (near, far) = (Surface::sphere(0.1, 5.0), Surface::sphere(0.02, 5.0));
        let solid = Solid { front: &far, back: &near, axial_mm: 3.0 };
        let error = solid.thickness(11.0).unwrap_err();
        assert_eq!(error, SolidError::Reach { side: Side::Back, height_mm: 11.0 });
        assert_eq!(error.to_string(), "the back surface does not reach 11 mm from the axis");
        assert_eq!(solid.volume_mm3(11.0), Err(error));
        assert!(solid.thickness(f64::NAN).is_err());
    }

    #[test]
    fn overlapping_surfaces_have_a_thickness_but_no_volume() {
        let (front, back) = (Surface::sphere(0.05, 9.0), Surface::sphere(-0.05, 9.0));
        let solid = Solid { front: &front, back: &back, axial_mm: 1.0 };
        let thickness_mm = solid.thickness(8.0).unwrap();
        assert!((thickness_mm - (1.0 - 2.0 * (20.0 - 336.0_f64.sqrt()))).abs() < 1e-14);
        let overlap = SolidError::Overlap { height_mm: 8.0, thickness_mm };
        assert_eq!(solid.volume_mm3(8.0), Err(overlap));
    }
}
