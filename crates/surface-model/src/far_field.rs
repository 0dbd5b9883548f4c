//! What a design's own aberration does to the beam far away: its beam propagation factor, and its
//! intensity on axis by direct diffraction integral of the exact wavefront.
//!
//! *M².* With x the height and θ the slope of a ray behind the last surface, second moments give
//! M²ₐ = (4π/λ)√(⟨x²⟩⟨θ²⟩ − ⟨xθ⟩²) for what the wavefront alone does, and M⁴ = M⁴₀ + M⁴ₐ with the
//! M² of the beam that enters (A. E. Siegman, Appl. Opt. 32, 5893 (1993), there for a quartic
//! phase). An error of focus drops out, as it must.
//!
//! *Intensity.* On axis far away it is |∫ A e^{2πiW} r dr|² over that without W, with A = exp(−r²/w²)
//! the field over the traced part of the beam; and the same after the best re-focusing.

use std::f64::consts::{PI, TAU};

use crate::quadrature::gauss_legendre;
use crate::skew::{RayStart, trace_ray};
use crate::traced_beam::TracedBeam;
use crate::train::Train;
use crate::wavefront::WavefrontFault;

/// Nodes in r² to begin with, and at most.
const RAYS: (usize, usize) = (16, 1024);
/// Change below which a result has converged.
const CONVERGED: f64 = 1e-7;
/// Golden-section steps to the best focus: the bracket shrinks to 1e-10 of itself.
const FOCUS_STEPS: usize = 48;

/// What aberration does to the beam far away.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FarField {
    /// M²ₐ, what the wavefront adds to M², in quadrature.
    pub m_squared_added: f64,
    /// Intensity on axis over that of the same beam without aberration, 0 to 1.
    pub on_axis: f64,
    /// The same after the best re-focusing: what is left is aberration proper.
    pub on_axis_refocused: f64,
}

impl FarField {
    /// M² behind the design of a beam that enters with `m_squared`.
    #[must_use]
    pub fn m_squared(&self, m_squared: f64) -> f64 {
        m_squared.hypot(self.m_squared_added)
    }
}

/// The far field of a train at the wavelength of the beam.
///
/// # Errors
/// A ray fails.
pub fn far_field(train: &Train, beam: &TracedBeam) -> Result<FarField, WavefrontFault> {
    let mut rays = RAYS.0;
    let mut before = Fan::trace(train, beam, rays)?.far_field();
    loop {
        rays *= 2;
        let now = Fan::trace(train, beam, rays)?.far_field();
        let close = |a: f64, b: f64| (a - b).abs() <= CONVERGED * a.abs().max(1.0);
        let settled = close(now.m_squared_added, before.m_squared_added)
            && close(now.on_axis, before.on_axis)
            && close(now.on_axis_refocused, before.on_axis_refocused);
        if settled || rays >= RAYS.1 {
            return Ok(now);
        }
        before = now;
    }
}

/// Rays from the axis outwards, at the nodes of r².
struct Fan {
    wavelength_mm: f64,
    /// Per ray: its share of the power, its share of the field.
    shares: Vec<(f64, f64)>,
    /// Path in waves.
    waves: Vec<f64>,
    /// Height (mm) and slope behind the last surface.
    exits: Vec<(f64, f64)>,
}

impl Fan {
    fn trace(train: &Train, beam: &TracedBeam, rays: usize) -> Result<Self, WavefrontFault> {
        let rule = gauss_legendre(rays);
        let reach = beam.reach() * beam.reach();
        let power: Vec<f64> = rule.iter().map(|&(q, w)| w * (-2.0 * q * reach).exp()).collect();
        let field: Vec<f64> = rule.iter().map(|&(q, w)| w * (-q * reach).exp()).collect();
        let (all_power, all_field): (f64, f64) = (power.iter().sum(), field.iter().sum());
        let shares = power.iter().zip(&field).map(|(p, f)| (p / all_power, f / all_field));
        let (mut waves, mut exits) = (Vec::with_capacity(rays), Vec::with_capacity(rays));
        for &(q, _) in &rule {
            let height_mm = q.sqrt() * beam.edge_mm();
            let exit = trace_ray(train, RayStart::parallel(height_mm))
                .map_err(|fault| WavefrontFault::Ray { height_mm, fault })?
                .exit();
            let y = exit.position_mm[1];
            waves.push(beam.waves_per_mm() * (exit.path_mm + beam.path_to_focus_mm(y)));
            exits.push((y, exit.direction[1]));
        }
        let wavelength_mm = 1.0 / beam.waves_per_mm();
        Ok(Self { wavelength_mm, shares: shares.collect(), waves, exits })
    }

    fn far_field(&self) -> FarField {
        let refocus = self.best_refocus();
        FarField {
            m_squared_added: self.m_squared_added(),
            on_axis: self.on_axis(0.0),
            on_axis_refocused: self.on_axis(refocus),
        }
    }

    fn mean(&self, of: impl Fn(f64, f64) -> f64) -> f64 {
        let rays = self.shares.iter().zip(&self.exits);
        rays.map(|(&(power, _), &(y, slope))| power * of(y, slope)).sum()
    }

    /// Moments along one axis are half of those along the radius.
    fn m_squared_added(&self) -> f64 {
        let heights = self.mean(|y, _| y * y);
        if heights == 0.0 {
            return 0.0;
        }
        // Slopes less their linear part have no moment with the height: nothing cancels.
        let linear = self.mean(|y, slope| y * slope) / heights;
        let slopes = self.mean(|y, slope| (slope - linear * y).powi(2));
        2.0 * PI / self.wavelength_mm * (heights * slopes).sqrt()
    }

    /// |∫ A e^{2πi(W − refocus y²)} r dr|² over that without phase.
    fn on_axis(&self, refocus: f64) -> f64 {
        let (mut re, mut im) = (0.0, 0.0);
        for ((&(_, field), &waves), &(y, _)) in self.shares.iter().zip(&self.waves).zip(&self.exits)
        {
            let (sin, cos) = (TAU * (waves - refocus * y * y)).sin_cos();
            re += field * cos;
            im += field * sin;
        }
        re * re + im * im
    }

    /// Waves per mm² of focus that make the axis brightest, about the least-squares focus.
    fn best_refocus(&self) -> f64 {
        let weighed = || self.shares.iter().zip(&self.waves).zip(&self.exits);
        let sum = |of: &dyn Fn(f64, f64) -> f64| -> f64 {
            weighed().map(|((&(_, field), &w), &(y, _))| field * of(w, y * y)).sum()
        };
        let (mean_w, mean_q) = (sum(&|w, _| w), sum(&|_, q| q));
        let spread = sum(&|_, q| (q - mean_q).powi(2));
        if spread == 0.0 {
            return 0.0;
        }
        let centre = sum(&|w, q| (w - mean_w) * (q - mean_q)) / spread;
        let reach = 0.5 / spread.sqrt();
        let golden = 0.5 * (5.0_f64.sqrt() - 1.0);
        let (mut low, mut high) = (centre - reach, centre + reach);
        let at = |low: f64, high: f64| (high - golden * (high - low), low + golden * (high - low));
        for _ in 0..FOCUS_STEPS {
            let (left, right) = at(low, high);
            if self.on_axis(left) < self.on_axis(right) { low = left } else { high = right }
        }
        0.5 * (low + high)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::surface::Surface;

    /// A flat window whose back is a weak sphere: an error of focus and nothing else.
    #[test]
    fn an_error_of_focus_leaves_m_squared_and_is_focused_away() {
        let surfaces = vec![Surface::sphere(0.0, 6.0), Surface::sphere(-1e-5, 6.0)];
        let train = Train::new(surfaces, vec![2.0], vec![1.0, 1.5, 1.0]).unwrap();
        let beam = TracedBeam::new(2.0, 1.5, 532.0).unwrap();
        let far = far_field(&train, &beam).unwrap();
        assert!(far.m_squared_added < 1e-6, "{far:?}");
        assert!(far.on_axis < 0.999 && far.on_axis_refocused > 1.0 - 1e-9, "{far:?}");
        assert!((far.m_squared(1.3) - 1.3).abs() < 1e-9);
    }
}
