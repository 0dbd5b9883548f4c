//! Problems for the tests of the solvers: any smooth functions with derivatives by the complex
//! step (Squire and Trapp, SIAM Review 40, 110 (1998)), and a zoom beam expander in small.

use merit_function::block::{BlockProblem, BlockShape, Bounds, LimitRow, Linearisation};
use nalgebra::{Complex, DVector};

pub(crate) type C = Complex<f64>;

const STEP: f64 = 1e-100;

pub(crate) type Functions = Box<dyn Fn(&[C]) -> Vec<C>>;
type Value = Box<dyn Fn(&[C]) -> C>;
type Faults = Box<dyn Fn(usize, &[f64]) -> bool>;

/// A limit over the shared variables and, perhaps, one state's own.
pub(crate) struct TestLimit {
    pub(crate) state: Option<usize>,
    pub(crate) value: Value,
}

/// Residual and limit functions of `[shared, own of one state]`, one of the former a state.
pub(crate) struct TestProblem {
    pub(crate) shape: BlockShape,
    pub(crate) bounds: Vec<Bounds>,
    pub(crate) states: Vec<Functions>,
    pub(crate) limits: Vec<TestLimit>,
    pub(crate) tolerance: f64,
    /// Evaluations so far, of any kind.
    pub(crate) calls: usize,
    /// Evaluations that fault, by number.
    pub(crate) faults: Faults,
}

#[derive(Debug, thiserror::Error)]
#[error("evaluation {0} fails on purpose")]
pub(crate) struct TestFault(usize);

impl TestProblem {
    /// One state, all variables shared.
    pub(crate) fn dense(variables: usize, residuals: impl Fn(&[C]) -> Vec<C> + 'static) -> Self {
        let rows = residuals(&vec![C::new(0.5, 0.0); variables]).len();
        Self::blocks(
            BlockShape { shared: variables, own: vec![0], rows: vec![rows] },
            vec![Box::new(residuals)],
        )
    }

    pub(crate) fn blocks(shape: BlockShape, states: Vec<Functions>) -> Self {
        Self {
            bounds: vec![Bounds::FREE; shape.variables()],
            shape,
            states,
            limits: vec![],
            tolerance: 1e-6,
            calls: 0,
            faults: Box::new(|_, _| false),
        }
    }

    pub(crate) fn limit(mut self, value: impl Fn(&[C]) -> C + 'static) -> Self {
        self.limits.push(TestLimit { state: None, value: Box::new(value) });
        self
    }

    pub(crate) fn bound(mut self, variable: usize, low: f64, high: f64) -> Self {
        self.bounds[variable] = Bounds { low, high };
        self
    }

    fn indices(&self, state: Option<usize>) -> Vec<usize> {
        let own = state.map_or(0..0, |state| self.shape.own_range(state));
        (0..self.shape.shared).chain(own).collect()
    }

    fn gather(&self, state: Option<usize>, variables: &[f64]) -> Vec<C> {
        self.indices(state).iter().map(|&i| C::new(variables[i], 0.0)).collect()
    }

    fn call(&mut self, variables: &[f64]) -> Result<(), TestFault> {
        for (x, range) in variables.iter().zip(&self.bounds) {
            assert!((range.low..=range.high).contains(x), "{x} evaluated outside {range:?}");
        }
        self.calls += 1;
        if (self.faults)(self.calls, variables) { Err(TestFault(self.calls)) } else { Ok(()) }
    }
}

impl BlockProblem for TestProblem {
    type Fault = TestFault;

    fn shape(&self) -> &BlockShape {
        &self.shape
    }

    fn bounds(&self) -> &[Bounds] {
        &self.bounds
    }

    fn residuals(&mut self, variables: &[f64], out: &mut [f64]) -> Result<(), TestFault> {
        self.call(variables)?;
        let values = (0..self.states.len())
            .flat_map(|state| (self.states[state])(&self.gather(Some(state), variables)));
        for (out, value) in out.iter_mut().zip(values) {
            *out = value.re;
        }
        Ok(())
    }

    fn linearise(&mut self, variables: &[f64], out: &mut Linearisation) -> Result<(), TestFault> {
        self.call(variables)?;
        let shared = self.shape.shared;
        for (state, block) in out.states.iter_mut().enumerate() {
            let mut point = self.gather(Some(state), variables);
            for (row, value) in (self.states[state])(&point).iter().enumerate() {
                block.residuals[row] = value.re;
            }
            for column in 0..point.len() {
                point[column].im = STEP;
                for (row, value) in (self.states[state])(&point).iter().enumerate() {
                    if column < shared {
                        block.by_shared[(row, column)] = value.im / STEP;
                    } else {
                        block.by_own[(row, column - shared)] = value.im / STEP;
                    }
                }
                point[column].im = 0.0;
            }
        }
        out.limits.clear();
        for limit in &self.limits {
            let mut point = self.gather(limit.state, variables);
            let value = (limit.value)(&point).re;
            let mut gradient = vec![];
            for column in 0..point.len() {
                point[column].im = STEP;
                gradient.push((limit.value)(&point).im / STEP);
                point[column].im = 0.0;
            }
            out.limits.push(LimitRow {
                value,
                tolerance: self.tolerance,
                state: limit.state,
                by_own: DVector::from_vec(gradient.split_off(shared)),
                by_shared: DVector::from_vec(gradient),
            });
        }
        Ok(())
    }

    fn limits(&mut self, variables: &[f64], out: &mut Vec<f64>) -> Result<(), TestFault> {
        out.clear();
        for limit in &self.limits {
            out.push((limit.value)(&self.gather(limit.state, variables)).re);
        }
        Ok(())
    }
}
<<<<<<< HEAD:crates/driver/src/solve/test_problems.rs

/// Six curvatures shared, two spacings a state; exact meridional rays.
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
    // Thin-lens layout: powers of the groups, and the closed form of their spacings.
    let (entry, runner, exit): (f64, f64, f64) = (1.0 / 34.5, -1.0 / 13.8, 1.0 / 140.0);
    let bend = |power: f64, shape: f64| {
        let sum = power / (INDEX - 1.0);
        [sum * (1.0 + shape) / 2.0, -sum * (1.0 - shape) / 2.0]
    };
    let mut start: Vec<f64> = [bend(entry, -0.5), bend(runner, -0.3), bend(exit, -1.0)].concat();
    for &ratio in ratios {
        // u after the entry group: collimation and ratio fix both spacings.
        let a = (1.0 - ratio * (exit / entry)) / 1.0;
        let d1 = (1.0 + runner / entry).abs() * 10.0 - a.abs().min(1.0) - ratio;
        start.extend([d1.max(1.0), 110.0 + 3.0 * ratio]);
    }
    let mut state = seed;
    for value in &mut start {
        state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        *value *= 1.0 + upset * ((state >> 33) as f64 / f64::from(1_u32 << 30) - 1.0);
    }
    (problem, start)
}

fn wavefront(x: &[C], ratio: f64) -> Vec<C> {
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
=======
>>>>>>> 96400a6231dbc747b4fac655bc77c0536e2fd982:crates/driver/src/solve/tests/problems.rs
