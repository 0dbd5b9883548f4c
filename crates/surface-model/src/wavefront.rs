//! Wavefront error of one train at one wavelength, integrated to convergence.
//!
//! Rays parallel to the axis enter at heights r from 0 to `reach` times the 1/e² radius w.
//! W(r) is the optical path to the plane through the last vertex less that of the axial ray, in
//! waves: positive where the wavefront lags. RMS is the standard deviation of W weighted with the
//! beam's intensity, exp(−2r²/w²) r dr: piston is taken out and nothing else, so that an error of
//! collimation shows. PV is max − min of W over the same heights.
//!
//! RMS doubles the Gauss-Legendre nodes in r² until it no longer changes. PV doubles equal steps
//! in r², axis and edge included, and traces a further ray at the vertex of the parabola through
//! each extreme sample and its neighbours, until it no longer changes. Only traced rays count:
//! a parabola says where to look, never how high it is.

use crate::bundle::Bundle;
use crate::fault::RayFault;
use crate::quadrature::beam_sample;
use crate::skew::{RayStart, trace_ray};
use crate::traced_beam::{BeamFault, TracedBeam};
use crate::train::Train;

/// Change, in waves or as a part of the value, below which a result has converged.
const CONVERGED: f64 = 1e-6;
/// Gauss-Legendre nodes to begin with, and at most.
const RMS_RAYS: (usize, usize) = (8, 1024);
/// Steps in r² to begin with, and at most.
const PV_STEPS: (usize, usize) = (32, 16384);

/// RMS and peak-to-valley wavefront error.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct WavefrontError {
    /// Intensity-weighted standard deviation of W, waves.
    pub rms_waves: f64,
    /// Largest less smallest W, waves.
    pub pv_waves: f64,
}

/// W at one height.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct WavefrontSample {
    /// Height of the ray in the plane through the first vertex, mm.
    pub height_mm: f64,
    /// Optical path less that of the axial ray, waves.
    pub waves: f64,
}

/// Which number of a [`WavefrontError`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Measure {
    /// Root mean square.
    Rms,
    /// Peak to valley.
    Pv,
}

impl std::fmt::Display for Measure {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Self::Rms => "RMS",
            Self::Pv => "peak-to-valley",
        })
    }
}

/// Why a wavefront error could not be told.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum WavefrontFault {
    /// A number of the beam is not finite or not positive.
    #[error(transparent)]
    Beam(#[from] BeamFault),
    /// A ray of the beam does not get through.
    #[error("the ray at height {height_mm} mm: {fault}")]
    Ray {
        /// Where it enters, mm from the axis.
        height_mm: f64,
        /// What happened to it.
        fault: RayFault,
    },
    /// The result still changes with as many rays as are ever traced.
    #[error(
        "the {measure} wavefront error did not converge: it changes by {change_waves} waves at \
         {rays} rays"
    )]
    NotConverged {
        /// Which result.
        measure: Measure,
        /// Rays traced for the last value.
        rays: usize,
        /// What the last doubling changed, waves.
        change_waves: f64,
    },
}

/// RMS and PV wavefront error of a train, each to 1e-6 waves or 1e-6 of the value, whichever is
/// larger.
///
/// # Errors
/// A ray fails, or a result does not converge.
pub fn wavefront_error(train: &Train, beam: &TracedBeam) -> Result<WavefrontError, WavefrontFault> {
    let mut paths = Paths { train, beam, bundle: Bundle::new(), waves: Vec::new() };
    let (first, last) = PV_STEPS;
    let pv_waves = converge(Measure::Pv, first, last, |steps| paths.pv(steps))?;
    let (first, last) = RMS_RAYS;
    let rms_waves = converge(Measure::Rms, first, last, |rays| paths.rms(rays))?;
    Ok(WavefrontError { rms_waves, pv_waves })
}

/// W at `count` heights in equal steps from the axis to the edge, for plotting (the axis alone
/// when `count` is 1).
///
/// # Errors
/// The first ray that fails, from the axis outwards.
pub fn wavefront_samples(
    train: &Train,
    beam: &TracedBeam,
    count: usize,
) -> Result<Vec<WavefrontSample>, WavefrontFault> {
    let mut paths = Paths { train, beam, bundle: Bundle::new(), waves: Vec::new() };
    let steps = count.saturating_sub(1).max(1) as f64;
    let heights: Vec<f64> = (0..count).map(|i| beam.edge_mm() * (i as f64 / steps)).collect();
    paths.trace(&heights)?;
    let samples = heights.iter().zip(&paths.waves);
    Ok(samples.map(|(&height_mm, &waves)| WavefrontSample { height_mm, waves }).collect())
}

/// Doubles the number of rays from `first` to at most `last` until two values in a row agree.
fn converge(
    measure: Measure,
    first: usize,
    last: usize,
    mut value_with: impl FnMut(usize) -> Result<f64, WavefrontFault>,
) -> Result<f64, WavefrontFault> {
    let mut rays = first;
    let mut before = value_with(rays)?;
    loop {
        rays *= 2;
        let value = value_with(rays)?;
        let change_waves = (value - before).abs();
        if change_waves <= CONVERGED * value.abs().max(1.0) {
            return Ok(value);
        }
        if rays >= last {
            return Err(WavefrontFault::NotConverged { measure, rays, change_waves });
        }
        before = value;
    }
}

/// Traces the beam's rays and keeps their paths in waves.
struct Paths<'a> {
    train: &'a Train,
    beam: &'a TracedBeam,
    bundle: Bundle,
    waves: Vec<f64>,
}

impl Paths<'_> {
    fn trace(&mut self, heights_mm: &[f64]) -> Result<(), WavefrontFault> {
        self.waves.resize(heights_mm.len(), 0.0);
        self.bundle.load([self.train], heights_mm);
        self.bundle.trace(&mut self.waves).map_err(|failed| WavefrontFault::Ray {
            height_mm: heights_mm[failed.ray],
            fault: failed.fault,
        })?;
        let scale = self.beam.waves_per_mm();
        self.waves.iter_mut().for_each(|path| *path *= scale);
        if self.beam.comes_to_a_focus() {
            for (waves, &height_mm) in self.waves.iter_mut().zip(heights_mm) {
                let ray = trace_ray(self.train, RayStart::parallel(height_mm))
                    .map_err(|fault| WavefrontFault::Ray { height_mm, fault })?;
                *waves += scale * self.beam.path_to_focus_mm(ray.exit().position_mm[1]);
            }
        }
        Ok(())
    }

    fn rms(&mut self, rays: usize) -> Result<f64, WavefrontFault> {
        let sample = beam_sample(self.beam.radius_mm(), self.beam.reach(), rays);
        self.trace(&sample.heights_mm)?;
        let weighed = || self.waves.iter().zip(&sample.weights);
        let mean: f64 = weighed().map(|(w, weight)| weight * w).sum();
        let variance: f64 = weighed().map(|(w, weight)| weight * (w - mean) * (w - mean)).sum();
        Ok(variance.sqrt())
    }

    fn pv(&mut self, steps: usize) -> Result<f64, WavefrontFault> {
        let step = 1.0 / steps as f64;
        let heights: Vec<f64> = (0..=steps).map(|i| self.beam.height(i as f64 * step)).collect();
        self.trace(&heights)?;
        let range = |waves: &[f64]| {
            let ends = (f64::INFINITY, f64::NEG_INFINITY);
            waves.iter().fold(ends, |(low, high), &w| (low.min(w), high.max(w)))
        };
        let (low, high) = range(&self.waves);
        let turns = turning_points(&self.waves);
        let heights: Vec<f64> = turns.iter().map(|at| self.beam.height(at * step)).collect();
        self.trace(&heights)?;
        let (lower, higher) = range(&self.waves);
        Ok(high.max(higher) - low.min(lower))
    }
}

/// Vertices of the parabolas through each sample that is an extreme among its neighbours, in
/// units of the step.
fn turning_points(values: &[f64]) -> Vec<f64> {
    let turn = |(i, three): (usize, &[f64])| {
        let &[left, middle, right] = three else { return None };
        let (rise, fall) = (middle - left, middle - right);
        let extreme = rise * fall > 0.0 || (rise == 0.0) != (fall == 0.0);
        extreme.then(|| (i + 1) as f64 + 0.5 * (rise - fall) / (rise + fall))
    };
    values.windows(3).enumerate().filter_map(turn).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fault::FaultReason;
    use crate::surface::Surface;

    fn beam() -> TracedBeam {
        TracedBeam::new(2.0, 1.5, 532.0).unwrap()
    }

    /// A flat window whose back is bent by r⁴ and r⁶ terms alone.
    fn window(r4: f64, r6: f64) -> Train {
        let mut back = Surface::sphere(0.0, 5.0);
        back.asphere[0] = r4;
        back.asphere[1] = r6;
        let surfaces = vec![Surface::sphere(0.0, 5.0), back];
        Train::new(surfaces, vec![2.0], vec![1.0, 1.5, 1.0]).unwrap()
    }

    #[test]
    fn a_flat_window_has_no_error_at_all() {
        let error = wavefront_error(&window(0.0, 0.0), &beam()).unwrap();
        assert_eq!(error, WavefrontError { rms_waves: 0.0, pv_waves: 0.0 });
    }

    #[test]
    fn an_extreme_inside_the_beam_is_found() {
        // For slopes this small W = (n − n′)(a q² + b q³) but for terms in the slope squared,
        // 1e-5 of it: an extreme at q = −2a/(3b) of 4a³/(27b²), between edge and axis.
        let (a, b) = (1e-6, -1.5e-7);
        let q_edge = beam().edge_mm().powi(2);
        let q_peak = -2.0 * a / (3.0 * b);
        assert!(q_peak < q_edge);
        let waves = |sag: f64| 0.5 * sag * 1e6 / 532.0;
        let peak = waves(4.0 * a.powi(3) / (27.0 * b * b));
        let edge = waves(a * q_edge.powi(2) + b * q_edge.powi(3));
        let expected = peak.max(0.0) - edge.min(0.0);
        let pv = wavefront_error(&window(a, b), &beam()).unwrap().pv_waves;
        assert!((pv - expected).abs() < 3e-5 * expected, "{pv} {expected}");
        // And no sample, however dense, is beyond it.
        let samples = wavefront_samples(&window(a, b), &beam(), 20001).unwrap();
        let high = samples.iter().map(|sample| sample.waves).fold(f64::MIN, f64::max);
        let low = samples.iter().map(|sample| sample.waves).fold(f64::MAX, f64::min);
        assert!((pv - (high - low)).abs() < 1e-6, "{pv} {}", high - low);
    }

    #[test]
    fn turning_points_are_those_of_a_parabola() {
        let values: Vec<f64> = (0..6).map(|i| (f64::from(i) - 2.3).powi(2)).collect();
        let turns = turning_points(&values);
        assert_eq!(turns.len(), 1);
        assert!((turns[0] - 2.3).abs() < 1e-14);
        assert!(turning_points(&[1.0, 1.0, 1.0, 1.0]).is_empty());
        assert!(turning_points(&[1.0, 2.0, 3.0]).is_empty());
        // Two equal highest samples: the parabolas of both look half way between them.
        assert_eq!(turning_points(&[0.0, 1.0, 1.0, 0.0]), [1.5, 1.5]);
    }

    #[test]
    fn samples_run_from_the_axis_to_the_edge() {
        let samples = wavefront_samples(&window(1e-6, 0.0), &beam(), 7).unwrap();
        assert_eq!(samples[0], WavefrontSample { height_mm: 0.0, waves: 0.0 });
        assert_eq!((samples[3].height_mm, samples[6].height_mm), (1.5, 3.0));
        let alone = wavefront_samples(&window(1e-6, 0.0), &beam(), 1).unwrap();
        assert_eq!(alone, samples[..1]);
        assert_eq!(wavefront_samples(&window(1e-6, 0.0), &beam(), 0), Ok(vec![]));
    }

    /// A concave mirror image of a wave from a point: a hyperboloid of conic constant −n² focuses a
    /// parallel beam from glass without any error (R. Descartes, *La Dioptrique* (1637); Hecht,
    /// *Optics*, §5.2).
    #[test]
    fn a_perfect_focus_has_no_error_about_its_own_point() {
        let (n, focus) = (1.5, 80.0);
        let mut back = Surface::sphere(-1.0 / (focus * (n - 1.0)), 6.0);
        back.conic = -n * n;
        let surfaces = vec![Surface::sphere(0.0, 6.0), back];
        let lens = Train::new(surfaces, vec![5.0], vec![1.0, n, 1.0]).unwrap();
        let focused = wavefront_error(&lens, &beam().focused(focus)).unwrap();
        assert!(focused.pv_waves < 1e-8, "{focused:?}");
        assert!(wavefront_error(&lens, &beam()).unwrap().rms_waves > 10.0);
        let beside = wavefront_error(&lens, &beam().focused(focus + 0.1)).unwrap();
        // A shift dz of the focus is y² dz/(2f²) of path at height y.
        let expected = 9.0 * 0.1 / (2.0 * focus * focus) * 1e6 / 532.0;
        assert!((beside.pv_waves / expected - 1.0).abs() < 0.01, "{beside:?} {expected}");
    }

    #[test]
    fn a_lost_ray_is_told_with_its_height() {
        let ball = Train::new(vec![Surface::sphere(0.5, 2.0)], vec![], vec![1.0, 1.5]).unwrap();
        let error = wavefront_error(&ball, &beam()).unwrap_err();
        let WavefrontFault::Ray { height_mm, fault } = error else { panic!("{error}") };
        assert_eq!(fault, RayFault { surface: 0, reason: FaultReason::Miss });
        assert!((2.0..2.1).contains(&height_mm), "the first beyond the ball: {height_mm}");
    }

    #[test]
    fn what_never_settles_is_told() {
        let mut sign = 1.0;
        let restless = converge(Measure::Rms, 8, 64, |_| {
            sign = -sign;
            Ok(2.0 + sign)
        });
        let expected =
            WavefrontFault::NotConverged { measure: Measure::Rms, rays: 64, change_waves: 2.0 };
        assert_eq!(restless, Err(expected));
        assert_eq!(converge(Measure::Pv, 8, 64, |rays| Ok(1.0 + 1e-5 / rays as f64)), {
            Ok(1.0 + 1e-5 / 16.0)
        });
    }
}
