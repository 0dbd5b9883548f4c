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
