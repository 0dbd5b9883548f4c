//! A beam that enters at an angle: exact skew rays over its whole cross-section.
//!
//! The beam turns about the first vertex. Optical path is counted from its own plane wavefront to
//! the plane through the last vertex; the part of it that is linear in the place of exit is the
//! *tilt* of the beam that leaves, and what is left is wavefront error. A beam that should come to a
//! focus has its path counted on to that focus: the same tilt then moves the focus sideways.

use std::f64::consts::PI;

use crate::quadrature::beam_sample;
use crate::skew::{RayPath, RayStart, trace_ray};
use crate::traced_beam::TracedBeam;
use crate::train::Train;

/// Rays along the radius and around half of the beam (the other half is its mirror image) to
/// begin with, and at most.
const RAYS: (usize, usize) = (12, 384);
/// Change of the RMS, in waves or as a part of it, below which it has converged.
const CONVERGED: f64 = 1e-5;
/// Change of the vignetted share below which it has converged: the edge of a clear diameter is
/// sharp, and rays find it slowly.
const SHARE_CONVERGED: f64 = 1e-4;

/// What a beam at an angle becomes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pointing {
    /// Angle to the axis at which the beam leaves, rad; negative when it is turned over.
    pub exit_angle_rad: f64,
    /// How far its centre leaves from the axis in the plane through the last vertex, mm.
    pub exit_shift_mm: f64,
    /// RMS wavefront error, piston and tilt removed, waves.
    pub rms_waves: f64,
    /// Share of the traced power that misses a clear diameter or does not get through.
    pub vignetted: f64,
}

/// Sends a beam in at an angle to the axis (rad). `None` when less than half of it gets through
/// the glass.
#[must_use]
pub fn pointing(train: &Train, beam: &TracedBeam, angle_rad: f64) -> Option<Pointing> {
    let mut rays = RAYS.0;
    let mut before = Section::trace(train, beam, angle_rad, rays).result()?;
    loop {
        rays *= 2;
        let now = Section::trace(train, beam, angle_rad, rays).result()?;
        let change = (now.rms_waves - before.rms_waves).abs();
        let settled = change <= CONVERGED * now.rms_waves.max(1.0)
            && (now.vignetted - before.vignetted).abs() <= SHARE_CONVERGED;
        if settled || rays >= RAYS.1 {
            return Some(now);
        }
        before = now;
    }
}

/// Rays over the cross-section of the beam.
struct Section {
    waves_per_mm: f64,
    /// Per ray that gets through: weight, path in mm, place of exit along the tilt in mm.
    through: Vec<[f64; 3]>,
    vignetted: f64,
}

impl Section {
    fn trace(train: &Train, beam: &TracedBeam, angle_rad: f64, rays: usize) -> Self {
        let sample = beam_sample(beam.radius_mm(), beam.reach(), rays);
        let direction = [0.0, angle_rad.sin()];
        let (mut through, mut vignetted) = (Vec::with_capacity(rays * rays), 0.0);
        for (&height, &ring) in sample.heights_mm.iter().zip(&sample.weights) {
            for spoke in 0..rays {
                let (sin, cos) = (PI * (spoke as f64 + 0.5) / rays as f64).sin_cos();
                let position_mm = [height * sin, height * cos];
                let weight = ring / rays as f64;
                let Ok(ray) = trace_ray(train, RayStart { position_mm, direction }) else {
                    vignetted += weight;
                    continue;
                };
                if misses(train, &ray) {
                    vignetted += weight;
                }
                let exit = ray.exit();
                let height = exit.position_mm[0].hypot(exit.position_mm[1]);
                let to_focus = beam.path_to_focus_mm(height);
                let path = exit.path_mm + position_mm[1] * direction[1] + to_focus;
                through.push([weight, path, exit.position_mm[1]]);
            }
        }
        Self { waves_per_mm: beam.waves_per_mm(), through, vignetted }
    }

    fn result(&self) -> Option<Pointing> {
        let sum = |of: &dyn Fn(f64, f64) -> f64| -> f64 {
            self.through.iter().map(|&[weight, path, y]| weight * of(path, y)).sum()
        };
        let all = sum(&|_, _| 1.0);
        if all < 0.5 {
            return None;
        }
        let (mean_path, mean_y) = (sum(&|path, _| path) / all, sum(&|_, y| y) / all);
        let spread = sum(&|_, y| (y - mean_y).powi(2));
        let tilt = sum(&|path, y| (path - mean_path) * (y - mean_y)) / spread;
        let rest = sum(&|path, y| (path - mean_path - tilt * (y - mean_y)).powi(2)) / all;
        let found = Pointing {
            exit_angle_rad: tilt.clamp(-1.0, 1.0).asin(),
            exit_shift_mm: mean_y,
            rms_waves: rest.sqrt() * self.waves_per_mm,
            vignetted: self.vignetted,
        };
        let sound = found.exit_angle_rad.is_finite() && found.rms_waves.is_finite();
        sound.then_some(found)
    }
}

/// Whether a ray passes outside a clear diameter.
fn misses(train: &Train, ray: &RayPath) -> bool {
    ray.points().iter().zip(train.surfaces()).any(|(point, surface)| {
        point.position_mm[0].hypot(point.position_mm[1]) > surface.semi_diameter
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::surface::Surface;

    /// Parallel plates turn no beam and bend no wavefront, at any angle.
    #[test]
    fn a_window_leaves_a_tilted_beam_as_it_is() {
        let surfaces = vec![Surface::sphere(0.0, 5.0); 2];
        let train = Train::new(surfaces, vec![8.0], vec![1.0, 1.5, 1.0]).unwrap();
        let beam = TracedBeam::new(2.0, 1.5, 532.0).unwrap();
        let turned = pointing(&train, &beam, 0.02).unwrap();
        assert!((turned.exit_angle_rad - 0.02).abs() < 1e-12, "{turned:?}");
        assert!(turned.rms_waves < 1e-8 && turned.vignetted == 0.0, "{turned:?}");
        // The plate's closed form for the shift of a ray, d(tan I′).
        let inside = (0.02_f64.sin() / 1.5).asin();
        assert!((turned.exit_shift_mm - 8.0 * inside.tan()).abs() < 1e-9, "{turned:?}");
        let narrow = vec![Surface::sphere(0.0, 2.0); 2];
        let train = Train::new(narrow, vec![8.0], vec![1.0, 1.5, 1.0]).unwrap();
        let cut = pointing(&train, &beam, 0.0).unwrap().vignetted;
        // (e⁻² − e^(−4.5))/(1 − e^(−4.5)) of the traced power lies outside a hole of radius w.
        let outside = ((-2.0_f64).exp() - (-4.5_f64).exp()) / (1.0 - (-4.5_f64).exp());
        assert!((cut - outside).abs() < 0.02, "{cut} {outside}");
    }
}
