//! Nelder-Mead on problems with bounds, limits and faults.

use super::problems::{C, TestProblem};
use crate::solve::{Method, Outcome, Settings, Stopped, Unwatched, run};

fn simplex(problem: &mut TestProblem, start: &[f64]) -> Outcome {
    run(problem, start, &Settings::new(Method::NelderMead), &mut Unwatched).unwrap()
}

fn rosenbrock() -> TestProblem {
    TestProblem::dense(2, |x| vec![(x[1] - x[0] * x[0]) * 10.0, C::new(1.0, 0.0) - x[0]])
}

#[test]
fn finds_a_free_minimum() {
    let outcome = simplex(&mut rosenbrock(), &[-1.2, 1.0]);
    assert_eq!(outcome.stopped, Stopped::MeritSettled);
    assert!(outcome.sum_of_squares < 1e-8, "{outcome:?}");
    assert_eq!(outcome.linearisations, 1);
}

#[test]
fn keeps_bounds_and_fixed_variables_exactly() {
    let mut problem = rosenbrock().bound(0, -2.0, 0.5);
    let outcome = simplex(&mut problem, &[-1.2, 1.0]);
    assert_eq!(outcome.variables[0], 0.5);
    assert!((outcome.sum_of_squares - 0.25).abs() < 1e-6, "{outcome:?}");
    let held = simplex(&mut rosenbrock().bound(1, 0.25, 0.25), &[0.0, 9.0]);
    assert_eq!(held.variables[1], 0.25);
    let nothing = simplex(&mut rosenbrock().bound(0, 0.0, 0.0).bound(1, 1.0, 1.0), &[0.0, 1.0]);
    assert_eq!(nothing.variables, [0.0, 1.0]);
}

#[test]
fn keeps_limits_and_walks_around_faults() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] - 3.0, x[1] - 4.0])
        .limit(|x| C::new(1.0, 0.0) - x[0] * x[0] - x[1] * x[1]);
    problem.faults = Box::new(|_, x| x[0] < -0.5);
    let outcome = simplex(&mut problem, &[-0.4, 0.1]);
    assert!(outcome.limits_kept(), "{outcome:?}");
    // The wall at the limit flattens the simplex before it has slid all the way.
    assert!((outcome.sum_of_squares / 16.0 - 1.0).abs() < 1e-2, "{outcome:?}");
}

#[test]
fn a_start_outside_the_limits_comes_in() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] - 3.0, x[1] - 4.0])
        .limit(|x| C::new(1.0, 0.0) - x[0] * x[0] - x[1] * x[1]);
    let outcome = simplex(&mut problem, &[5.0, 5.0]);
    assert!(outcome.limits_kept(), "{outcome:?}");
}
