//! A zoom beam expander in small, as the solvers will meet them: exact meridional rays, six
//! curvatures shared, two spacings a state.

use merit_function::block::{BlockShape, Bounds};

use super::problems::{C, Functions, TestLimit, TestProblem};
use super::solve;
use crate::solve::{Settings, Unwatched, run};

const INDEX: f64 = 1.4607;
const WAVELENGTH_MM: f64 = 532e-6;
const THICKNESSES_MM: [f64; 3] = [3.0, 2.0, 4.0];
const TRACK_MM: f64 = 150.0;

/// A three-singlet expander in fused silica, track at most 150 mm: 2.4 mm beam, one state a
/// ratio. Residuals are wavefront in units of 0.05 waves at six heights, ratio error in units of
/// 0.2 %, exit slope in units of 20 µrad. The start is a layout off by `upset` of everything.
pub(crate) fn expander(ratios: &[f64], upset: f64, seed: u64) -> (TestProblem, Vec<f64>) {
    let shape = BlockShape { shared: 6, own: vec![2; ratios.len()], rows: vec![8; ratios.len()] };
    let states =
        ratios.iter().map(|&ratio| -> Functions { Box::new(move |x| wavefront(x, ratio)) });
    let mut problem = TestProblem::blocks(shape, states.collect());
    problem.tolerance = 1e-3;
    for state in 0..ratios.len() {
        let room = TRACK_MM - THICKNESSES_MM.iter().sum::<f64>();
        let value = Box::new(move |x: &[C]| C::new(room, 0.0) - x[6] - x[7]);
        problem.limits.push(TestLimit { state: Some(state), value });
        for own in problem.shape.own_range(state) {
            problem.bounds[own].low = 0.5;
        }
    }
    for bounds in &mut problem.bounds[..6] {
        *bounds = Bounds { low: -0.125, high: 0.125 };
    }
    // Powers of a thin-lens layout that works, and spacings roughly linear in the ratio.
    let (entry, runner, exit): (f64, f64, f64) = (1.0 / 34.5, -1.0 / 13.8, 1.0 / 140.0);
    let bend = |power: f64, shape: f64| {
        let sum = power / (INDEX - 1.0);
        [sum * (1.0 + shape) / 2.0, -sum * (1.0 - shape) / 2.0]
    };
    let mut start: Vec<f64> = [bend(entry, -0.5), bend(runner, -0.3), bend(exit, -1.0)].concat();
    for &ratio in ratios {
        start.extend([16.0 - 2.0 * ratio, 110.0 + 3.0 * ratio]);
    }
    let mut state = seed;
    for value in &mut start {
        state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        *value *= 1.0 + upset * ((state >> 33) as f64 / f64::from(1_u32 << 30) - 1.0);
    }
    (problem, start)
}

fn wavefront(x: &[C], ratio: f64) -> Vec<C> {
    // Six-point Gauss-Legendre on 0 to 1, in the squared height.
    let nodes = [0.0338, 0.1694, 0.3807, 0.6193, 0.8306, 0.9662];
    let weights: [f64; 6] = [0.0857, 0.1804, 0.2340, 0.2340, 0.1804, 0.0857];
    let weights: Vec<f64> =
        nodes.iter().zip(weights).map(|(s, w)| w * (-2.0 * s * 2.25_f64).exp()).collect();
    let total: f64 = weights.iter().sum();
    let axial = trace(x, 0.0).2;
    let paths: Vec<C> =
        nodes.iter().map(|s| (trace(x, 1.8 * s.sqrt()).2 - axial) / WAVELENGTH_MM / 0.05).collect();
    let mean: C = paths.iter().zip(&weights).map(|(w, weight)| w * weight).sum::<C>() / total;
    let mut residuals: Vec<C> = paths
        .iter()
        .zip(&weights)
        .map(|(w, weight)| (w - mean) * (weight / total).sqrt())
        .collect();
    let height = 1e-4;
    let (y, slope, _) = trace(x, height);
    residuals.push((y / height - ratio) / (ratio * 0.002));
    residuals.push(slope * (1.2 / height) / 20e-6);
    residuals
}

/// Height, slope (sine) and optical path at the plane of the last vertex.
fn trace(x: &[C], height: f64) -> (C, C, C) {
    let one = C::new(1.0, 0.0);
    let (mut z, mut y) = (C::new(0.0, 0.0), C::new(height, 0.0));
    let (mut sine, mut cosine, mut path) = (C::new(0.0, 0.0), one, C::new(0.0, 0.0));
    let mut index = 1.0;
    for surface in 0..6 {
        let curvature = x[surface];
        // Intersection from the vertex plane (z measured from the vertex).
        let f = curvature * (z * z + y * y) - z * 2.0;
        let g = cosine - curvature * (z * cosine + y * sine);
        let root = (g * g - curvature * f).sqrt();
        let length = f / (g + root);
        path += length * index;
        z += cosine * length;
        y += sine * length;
        let next = if surface % 2 == 0 { INDEX } else { 1.0 };
        let mu = index / next;
        let cos_after = (one - (one - root * root) * (mu * mu)).sqrt();
        let bend = cos_after - root * mu;
        // The normal (1 − c z, −c y) points along the light.
        sine = sine * mu - curvature * y * bend;
        cosine = cosine * mu + (one - curvature * z) * bend;
        index = next;
        let gap = match surface {
            0 | 2 | 4 => C::new(THICKNESSES_MM[surface / 2], 0.0),
            1 => x[6],
            3 => x[7],
            _ => C::new(0.0, 0.0),
        };
        z -= gap;
    }
    path -= z / cosine;
    y -= sine / cosine * z;
    (y, sine, path)
}

#[test]
fn a_zoom_expander_is_found_from_poor_starts() {
    let mut steps = [0, 0];
    for seed in 0..8 {
        let (mut problem, start) = expander(&[2.0, 3.0, 4.0, 6.0], 0.1, seed);
        for (total, acceleration) in steps.iter_mut().zip([Some(0.75), None]) {
            let settings = Settings::default().with_acceleration(acceleration).unwrap();
            let outcome = run(&mut problem, &start, &settings, &mut Unwatched).unwrap();
            assert!(outcome.stopped.was_successful(), "{}", outcome.stopped);
            assert!(outcome.limits_kept());
            assert!(outcome.sum_of_squares < 0.1, "{}", outcome.sum_of_squares);
            *total += outcome.iterations;
        }
    }
    assert!(2 * steps[0] < steps[1], "acceleration saves most of the steps: {steps:?}");
}

#[test]
fn the_same_start_gives_the_same_bits() {
    let solved = || {
        let (mut problem, start) = expander(&[2.0, 4.0], 0.1, 3);
        solve(&mut problem, &start)
    };
    let (first, second) = (solved(), solved());
    assert_eq!(first.variables, second.variables);
    assert_eq!(first.sum_of_squares.to_bits(), second.sum_of_squares.to_bits());
    assert_eq!(first.evaluations, second.evaluations);
}

#[test]
fn a_short_tube_is_kept_to() {
    // 115 mm for both spacings is less than the layout would take: the limit holds it back.
    let (mut problem, start) = expander(&[2.0, 3.0, 4.0, 6.0], 0.05, 1);
    for limit in &mut problem.limits {
        limit.value = Box::new(|x: &[C]| C::new(115.0, 0.0) - x[6] - x[7]);
    }
    let outcome = solve(&mut problem, &start);
    assert!(outcome.stopped.was_successful(), "{} {}", outcome.stopped, outcome.violation);
    assert!(outcome.limits_kept());
    let shared = problem.shape.shared;
    let tightest = outcome.variables[shared..].chunks(2).map(|d| 115.0 - d[0] - d[1]);
    assert!(tightest.fold(f64::INFINITY, f64::min).abs() < 1e-6);
}
