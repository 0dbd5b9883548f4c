//! A published test function as a block problem of one state, its Jacobian by the complex step:
//! `∂f/∂xⱼ = Im f(x + i h eⱼ) / h`, exact to rounding (Squire and Trapp, SIAM Review 40, 110
//! (1998)).

use std::convert::Infallible;

use merit_function::block::{BlockProblem, BlockShape, Bounds, Linearisation};
use nalgebra::Complex;

/// A complex number.
pub type C = Complex<f64>;

const STEP: f64 = 1e-100;

/// A function from variables to residuals.
pub struct Smooth<F> {
    shape: BlockShape,
    bounds: Vec<Bounds>,
    function: F,
}

impl<F: Fn(&[C]) -> Vec<C>> Smooth<F> {
    /// Without bounds.
    pub fn new(start: &[f64], function: F) -> Self {
        let rows = function(&complex(start)).len();
        Self {
            shape: BlockShape { shared: start.len(), own: vec![0], rows: vec![rows] },
            bounds: vec![Bounds::FREE; start.len()],
            function,
        }
    }
}

fn complex(real: &[f64]) -> Vec<C> {
    real.iter().map(|&x| C::new(x, 0.0)).collect()
}

impl<F: Fn(&[C]) -> Vec<C>> BlockProblem for Smooth<F> {
    type Fault = Infallible;

    fn shape(&self) -> &BlockShape {
        &self.shape
    }

    fn bounds(&self) -> &[Bounds] {
        &self.bounds
    }

    fn residuals(&mut self, variables: &[f64], out: &mut [f64]) -> Result<(), Infallible> {
        for (out, value) in out.iter_mut().zip((self.function)(&complex(variables))) {
            *out = value.re;
        }
        Ok(())
    }

    fn linearise(&mut self, variables: &[f64], out: &mut Linearisation) -> Result<(), Infallible> {
        let block = &mut out.states[0];
        let mut point = complex(variables);
        self.residuals(variables, block.residuals.as_mut_slice())?;
        for column in 0..point.len() {
            point[column].im = STEP;
            for (row, value) in (self.function)(&point).iter().enumerate() {
                block.by_shared[(row, column)] = value.im / STEP;
            }
            point[column].im = 0.0;
        }
        Ok(())
    }

    fn limits(&mut self, _: &[f64], out: &mut Vec<f64>) -> Result<(), Infallible> {
        out.clear();
        Ok(())
    }
}
