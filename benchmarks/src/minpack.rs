//! The `levenberg-marquardt` crate, a port of MINPACK's `lmder`, on our residuals and our whole
//! Jacobian.
//!
//! It knows no bounds, so it is given the problem without them: whatever it gains by stepping
//! outside counts in its favour. A point that cannot be evaluated costs an enormous sum of
//! squares, which it takes for a step that failed.

use std::cell::RefCell;
use std::time::{Duration, Instant};

use levenberg_marquardt::{LeastSquaresProblem, LevenbergMarquardt};
use merit_function::block::{BlockProblem, BlockShape, Linearisation};
use merit_function::problem::MeritFunction;
use nalgebra::storage::Owned;
use nalgebra::{DMatrix, DVector, Dyn};

/// Residual of a point that cannot be evaluated.
const FAULTY: f64 = 1e8;

/// Where it ended.
pub(crate) struct Ended {
    /// Smallest sum of squares seen.
    pub(crate) merit: f64,
    pub(crate) time: Duration,
}

struct Dense<'m> {
    merit: RefCell<&'m mut MeritFunction>,
    linear: RefCell<Linearisation>,
    best: RefCell<f64>,
    shape: BlockShape,
    at: DVector<f64>,
    target: f64,
}

impl LeastSquaresProblem<f64, Dyn, Dyn> for Dense<'_> {
    type ResidualStorage = Owned<f64, Dyn>;
    type JacobianStorage = Owned<f64, Dyn, Dyn>;
    type ParameterStorage = Owned<f64, Dyn>;

    fn set_params(&mut self, x: &DVector<f64>) {
        self.at.copy_from(x);
    }

    fn params(&self) -> DVector<f64> {
        self.at.clone()
    }

    fn residuals(&self) -> Option<DVector<f64>> {
        let mut residuals = DVector::zeros(self.shape.residuals());
        let mut merit = self.merit.borrow_mut();
        if merit.residuals(self.at.as_slice(), residuals.as_mut_slice()).is_err() {
            residuals.fill(FAULTY);
        }
        let squares = residuals.norm_squared();
        let mut best = self.best.borrow_mut();
        *best = best.min(squares);
        // Ends the run: the target is reached.
        (squares > self.target).then_some(residuals)
    }

    fn jacobian(&self) -> Option<DMatrix<f64>> {
        let mut linear = self.linear.borrow_mut();
        self.merit.borrow_mut().linearise(self.at.as_slice(), &mut linear).ok()?;
        let mut whole = DMatrix::zeros(self.shape.residuals(), self.shape.variables());
        let mut row = 0;
        for (k, block) in linear.states.iter().enumerate() {
            let (rows, own) = (block.residuals.len(), self.shape.own_range(k));
            whole.view_mut((row, 0), (rows, self.shape.shared)).copy_from(&block.by_shared);
            whole.view_mut((row, own.start), (rows, own.len())).copy_from(&block.by_own);
            row += rows;
        }
        Some(whole)
    }
}

/// Minimises from `start` until the sum of squares is at or below `target`.
pub(crate) fn run(merit: &mut MeritFunction, start: &[f64], target: f64, step: f64) -> Ended {
    let shape = merit.shape().clone();
    let problem = Dense {
        linear: RefCell::new(Linearisation::zeros(&shape)),
        merit: RefCell::new(merit),
        best: RefCell::new(f64::INFINITY),
        shape,
        at: DVector::from_column_slice(start),
        target,
    };
    let solver = LevenbergMarquardt::new()
        .with_ftol(1e-15)
        .with_xtol(1e-15)
        .with_gtol(1e-15)
        .with_stepbound(step)
        .with_patience(1000);
    let began = Instant::now();
    let (problem, _) = solver.minimize(problem);
    let time = began.elapsed();
    Ended { merit: problem.best.into_inner(), time }
}
