//! The wavefront over a pupil of rays in two dimensions, with the beam's tilt told apart.
//!
//! Rays enter parallel to the axis on rings and arms: the rings at the Gauss-Legendre nodes in
//! r², the arms at equal angles (G. W. Forbes, J. Opt. Soc. Am. A 5, 1943 (1988)). A polynomial
//! wavefront is integrated exactly as long as W² stays below the degree 4·rings in r and the
//! order 'arms' in the angle. Each ray weighs what it carries of the beam, exp(−2r²/w²) r dr dφ.
//!
//! With the weights w, W = a + bx + cy + rest is fitted by least squares to the optical path to
//! the plane through the last vertex, x and y being where the rays cross it. A ray's direction is
//! the gradient of the optical path (the eikonal: M. Born and E. Wolf, *Principles of Optics*,
//! 7th ed., §3.1), so (b, c) is where the beam points: its **boresight**. For a whole Gaussian
//! beam this is also the mean direction of its power (integration by parts: ⟨∂W/∂x⟩ = ⟨xW⟩/⟨x²⟩).
//! The standard deviation of the rest is the **RMS wavefront error** without tilt; on axis it is
//! that of [`wavefront`](crate::wavefront).

use crate::fault::RayFault;
use crate::quadrature::beam_sample;
use crate::real::{LANES, Lanes};
use crate::spoilt::{SpoiltStages, SpoiltTrain, forward_lanes};
use crate::trace::{Crossing, Exit, Ray, find_fault};

/// Smallest part of the pupil's size in one direction over that in the other at which a tilt can
/// still be told.
const NARROWEST: f64 = 1e-9;

/// The rays of a beam, spread over its cross section.
#[derive(Debug, Clone)]
pub struct Pupil {
    positions_mm: Vec<[f64; 2]>,
    weights: Vec<f64>,
    blocks: Vec<Ray<Lanes, 2>>,
}

/// What the rays of a pupil end with; buffers are kept from call to call.
#[derive(Debug, Clone, Default)]
pub struct PupilWavefront {
    /// Per ray, where it crosses the plane of the last vertex as drawn, mm.
    positions_mm: Vec<[f64; 2]>,
    /// Per ray, its optical path less piston and tilt, mm.
    rest_mm: Vec<f64>,
    boresight: [f64; 2],
    crossings: Vec<Crossing<Lanes, 2>>,
}

/// A ray of a pupil that fails, or a beam without width.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum PupilFault {
    /// A ray does not get through.
    #[error("the ray entering at x {} mm, y {} mm: {fault}", .at_mm[0], .at_mm[1])]
    Ray {
        /// Where it enters, mm.
        at_mm: [f64; 2],
        /// What happened to it.
        fault: RayFault,
    },
    /// The beam has shrunk to a point or a line at the last vertex: no tilt can be told.
    #[error("the beam has no width at the last vertex")]
    NoWidth,
}

impl Pupil {
    /// A beam of 1/e² radius `radius_mm`, traced to `reach` times that radius, as `rings` times
    /// `arms` rays.
    #[must_use]
    pub fn new(radius_mm: f64, reach: f64, rings: usize, arms: usize) -> Self {
        let sample = beam_sample(radius_mm, reach, rings);
        let (mut positions_mm, mut weights) = (Vec::new(), Vec::new());
        for (height, weight) in sample.heights_mm.iter().zip(&sample.weights) {
            for arm in 0..arms {
                let angle = std::f64::consts::TAU * arm as f64 / arms as f64;
                positions_mm.push([height * angle.cos(), height * angle.sin()]);
                weights.push(weight / arms as f64);
            }
        }
        let blocks = positions_mm.chunks(LANES).map(block).collect();
        Self { positions_mm, weights, blocks }
    }

    /// Where the rays enter, mm.
    #[must_use]
    pub fn positions_mm(&self) -> &[[f64; 2]] {
        &self.positions_mm
    }

    /// Shares of the beam's power, one a ray; they add up to 1.
    #[must_use]
    pub fn weights(&self) -> &[f64] {
        &self.weights
    }

    /// Traces all rays and takes piston and tilt out of their paths.
    ///
    /// # Errors
    /// The first ray that fails, or a beam without width.
    pub fn trace(&self, train: &SpoiltTrain, out: &mut PupilWavefront) -> Result<(), PupilFault> {
        let stages = SpoiltStages::<Lanes>::of(train);
        out.positions_mm.clear();
        out.rest_mm.clear();
        let surfaces = train.drawn_at_mm().len();
        if let (true, Some(&ray)) = (out.crossings.len() < surfaces, self.blocks.first()) {
            let zero = Lanes::ZERO;
            let blank = Crossing { ray, path: zero, cos_in: zero, cos_out: zero };
            out.crossings.resize(surfaces, blank);
        }
        for (start, entered) in self.blocks.iter().zip(self.positions_mm.chunks(LANES)) {
            let exit = forward_lanes(&stages, start, &mut out.crossings);
            for (number, &at_mm) in entered.iter().enumerate() {
                let lane = |value: Lanes| value.0[number];
                let crossings = &out.crossings[..surfaces];
                if let Some(fault) = find_fault(crossings, &exit, lane) {
                    return Err(PupilFault::Ray { at_mm, fault });
                }
                let Exit { y, path_excess, .. } = &exit;
                out.positions_mm.push(y.map(lane));
                out.rest_mm.push(lane(*path_excess));
            }
        }
        out.take_out_plane(&self.weights)
    }
}

/// Up to eight rays; a block that is not full repeats its last ray.
fn block(positions_mm: &[[f64; 2]]) -> Ray<Lanes, 2> {
    let last = positions_mm.len() - 1;
    let axis = |axis: usize| Lanes(std::array::from_fn(|lane| positions_mm[lane.min(last)][axis]));
    let all = |value: f64| Lanes([value; LANES]);
    Ray { y: [axis(0), axis(1)], z: all(0.0), d: [all(0.0); 2], dz: all(1.0) }
}

impl PupilWavefront {
    /// Nothing traced yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Per ray, its optical path less piston and tilt, mm.
    #[must_use]
    pub fn rest_mm(&self) -> &[f64] {
        &self.rest_mm
    }

    /// Where the beam points, rad against the axis in x and y.
    #[must_use]
    pub fn boresight_rad(&self) -> [f64; 2] {
        self.boresight
    }

    /// Weighted standard deviation of the wavefront without tilt, mm.
    #[must_use]
    pub fn rms_mm(&self, pupil: &Pupil) -> f64 {
        let weighed = self.rest_mm.iter().zip(&pupil.weights);
        weighed.map(|(rest, weight)| weight * rest * rest).sum::<f64>().sqrt()
    }

    /// Fits a + bx + cy by weighted least squares and subtracts it.
    fn take_out_plane(&mut self, weights: &[f64]) -> Result<(), PupilFault> {
        let rays = || self.positions_mm.iter().zip(&self.rest_mm).zip(weights);
        let (mut mean_x, mut mean_y, mut mean) = (0.0, 0.0, 0.0);
        for (([x, y], path), weight) in rays() {
            mean_x += weight * x;
            mean_y += weight * y;
            mean += weight * path;
        }
        let (mut xx, mut xy, mut yy, mut xw, mut yw) = (0.0, 0.0, 0.0, 0.0, 0.0);
        for (([x, y], path), weight) in rays() {
            let (x, y, path) = (x - mean_x, y - mean_y, path - mean);
            xx += weight * x * x;
            xy += weight * x * y;
            yy += weight * y * y;
            xw += weight * x * path;
            yw += weight * y * path;
        }
        let determinant = xx * yy - xy * xy;
        let size = xx + yy;
        if determinant.is_nan() || determinant <= NARROWEST * size * size || size <= 0.0 {
            return Err(PupilFault::NoWidth);
        }
        let tilt = [(yy * xw - xy * yw) / determinant, (xx * yw - xy * xw) / determinant];
        for (rest, [x, y]) in self.rest_mm.iter_mut().zip(&self.positions_mm) {
            *rest -= mean + tilt[0] * (x - mean_x) + tilt[1] * (y - mean_y);
        }
        self.boresight = tilt;
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::spoilt::trace_spoilt;
    use crate::surface::Surface;
    use crate::traced_beam::TracedBeam;
    use crate::train::Train;
    use crate::wavefront::wavefront_error;

    fn singlet() -> Train {
        let surfaces = [0.01, -0.008].map(|c| Surface::sphere(c, 12.0)).into();
        Train::new(surfaces, vec![5.0], vec![1.0, 1.52, 1.0]).unwrap()
    }

    #[test]
    fn on_axis_it_is_the_wavefront_error() {
        let train = singlet();
        let pupil = Pupil::new(3.0, 1.5, 8, 12);
        let mut wavefront = PupilWavefront::new();
        pupil.trace(&SpoiltTrain::of(&train), &mut wavefront).unwrap();
        let beam = TracedBeam::new(3.0, 1.5, 532.0).unwrap();
        let whole = wavefront_error(&train, &beam).unwrap().rms_waves;
        let here = wavefront.rms_mm(&pupil) * 1e6 / 532.0;
        assert!((here / whole - 1.0).abs() < 1e-7, "{here} {whole}");
        assert!(wavefront.boresight_rad().iter().all(|tilt| tilt.abs() < 1e-13));
        assert_eq!(wavefront.rest_mm().len(), 96);
    }

    #[test]
    fn rays_abreast_are_rays_one_by_one() {
        let mut spoilt = SpoiltTrain::of(&singlet());
        for (i, surface) in spoilt.surfaces_mut().iter_mut().enumerate() {
            surface.pose = surface.pose.decentred([0.2, -0.1]).turned([0.01, 0.003], 4.0);
            surface.irregularity_fringes = 1.0 + i as f64;
            surface.irregularity_at_rad = 0.3;
        }
        let pupil = Pupil::new(3.0, 1.5, 5, 7);
        let mut wavefront = PupilWavefront::new();
        pupil.trace(&spoilt, &mut wavefront).unwrap();
        let plane = wavefront.boresight_rad();
        let single: Vec<_> =
            pupil.positions_mm().iter().map(|&at| trace_spoilt(&spoilt, at).unwrap()).collect();
        for (i, ray) in single.iter().enumerate() {
            assert_eq!(wavefront.positions_mm[i], ray.position_mm);
            let before = wavefront.rest_mm()[i]
                + plane[0] * ray.position_mm[0]
                + plane[1] * ray.position_mm[1];
            let first = wavefront.rest_mm()[0]
                + plane[0] * single[0].position_mm[0]
                + plane[1] * single[0].position_mm[1];
            let (a, b) = (before - first, ray.path_mm - single[0].path_mm);
            assert!((a - b).abs() < 1e-12, "{a} {b}");
        }
    }

    #[test]
    fn enough_rays_are_enough() {
        let mut spoilt = SpoiltTrain::of(&singlet());
        let first = &mut spoilt.surfaces_mut()[0];
        first.pose = first.pose.decentred([0.5, 0.0]).turned_at_vertex([0.0, 0.01]);
        let told = |rings, arms| {
            let pupil = Pupil::new(3.0, 1.5, rings, arms);
            let mut wavefront = PupilWavefront::new();
            pupil.trace(&spoilt, &mut wavefront).unwrap();
            (wavefront.rms_mm(&pupil), wavefront.boresight_rad()[0])
        };
        let (few, many) = (told(8, 12), told(24, 40));
        assert!((few.0 / many.0 - 1.0).abs() < 1e-8, "{few:?} {many:?}");
        assert!((few.1 / many.1 - 1.0).abs() < 1e-8, "{few:?} {many:?}");
    }

    #[test]
    fn a_ray_that_fails_is_told_by_its_place() {
        let steep = Train::new(
            vec![Surface::sphere(0.3, 3.0), Surface::sphere(0.0, 3.0)],
            vec![1.0],
            vec![1.0, 1.5, 1.0],
        );
        let mut wavefront = PupilWavefront::new();
        let spoilt = SpoiltTrain::of(&steep.unwrap());
        let fault = Pupil::new(2.0, 2.0, 4, 6).trace(&spoilt, &mut wavefront).unwrap_err();
        assert!(matches!(fault, PupilFault::Ray { fault: RayFault { surface: 0, .. }, .. }));
    }
}
