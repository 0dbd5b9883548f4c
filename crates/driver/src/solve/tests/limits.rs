//! Limits: problems of Hock and Schittkowski, Lecture Notes in Economics and Mathematical Systems
//! 187 (1981), that are sums of squares under inequalities; minima and standard starts from
//! memory, most of them checked by hand (a corner of the feasible region).

use super::problems::{C, TestProblem};
use super::solve;
use crate::solve::{Outcome, Stopped};

fn real(x: f64) -> C {
    C::new(x, 0.0)
}

fn rosenbrock() -> TestProblem {
    TestProblem::dense(2, |x| vec![(x[1] - x[0] * x[0]) * 10.0, real(1.0) - x[0]])
}

fn assert_minimum(outcome: &Outcome, squares: f64, variables: &[f64]) {
    assert!(outcome.stopped.was_successful(), "{}: {outcome:?}", outcome.stopped);
    assert!(outcome.limits_kept(), "{outcome:?}");
    let error = (outcome.sum_of_squares - squares).abs();
    assert!(error < 1e-6 * squares.max(1.0), "{outcome:?}");
    for (found, expected) in outcome.variables.iter().zip(variables) {
        assert!((found - expected).abs() < 2e-5 * expected.abs().max(1.0), "{outcome:?}");
    }
}

#[test]
fn problem_16() {
    let mut problem = rosenbrock()
        .limit(|x| x[0] + x[1] * x[1])
        .limit(|x| x[0] * x[0] + x[1])
        .bound(0, -2.0, 0.5)
        .bound(1, f64::NEG_INFINITY, 1.0);
    // From the standard start (−2, 1) the other minimum, 3.98 in the corner at x₁ < 0, is nearer.
    assert_minimum(&solve(&mut problem, &[0.0, 1.0]), 0.25, &[0.5, 0.25]);
}

#[test]
fn problem_18() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] * 0.1, x[1]])
        .limit(|x| x[0] * x[1] - 25.0)
        .limit(|x| x[0] * x[0] + x[1] * x[1] - 25.0)
        .bound(0, 2.0, 50.0)
        .bound(1, 0.0, 50.0);
    let outcome = solve(&mut problem, &[2.0, 2.0]);
    assert_minimum(&outcome, 5.0, &[250.0_f64.sqrt(), 2.5_f64.sqrt()]);
}

#[test]
fn problem_20() {
    let mut problem = rosenbrock()
        .limit(|x| x[0] + x[1] * x[1])
        .limit(|x| x[0] * x[0] + x[1])
        .limit(|x| x[0] * x[0] + x[1] * x[1] - 1.0)
        .bound(0, -0.5, 0.5);
    let expected = 81.5 - 25.0 * 3.0_f64.sqrt();
    // From the standard start (−2, 1) the mirrored minimum at x₁ = −0.5, 40.1987, is nearer.
    let mirrored = solve(&mut problem, &[-2.0, 1.0]);
    assert_minimum(&mirrored, 83.5 - 25.0 * 3.0_f64.sqrt(), &[-0.5]);
    assert_minimum(&solve(&mut problem, &[0.4, 1.0]), expected, &[0.5, 0.75_f64.sqrt()]);
}

#[test]
fn problem_22() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] - 2.0, x[1] - 1.0])
        .limit(|x| real(2.0) - x[0] - x[1])
        .limit(|x| x[1] - x[0] * x[0]);
    assert_minimum(&solve(&mut problem, &[2.0, 2.0]), 1.0, &[1.0, 1.0]);
}

#[test]
fn problem_23() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0], x[1]])
        .limit(|x| x[0] + x[1] - 1.0)
        .limit(|x| x[0] * x[0] + x[1] * x[1] - 1.0)
        .limit(|x| x[0] * x[0] * 9.0 + x[1] * x[1] - 9.0)
        .limit(|x| x[0] * x[0] - x[1])
        .limit(|x| x[1] * x[1] - x[0])
        .bound(0, -50.0, 50.0)
        .bound(1, -50.0, 50.0);
    assert_minimum(&solve(&mut problem, &[3.0, 1.0]), 2.0, &[1.0, 1.0]);
}

#[test]
fn problem_30() {
    let mut problem = TestProblem::dense(3, |x| x.to_vec())
        .limit(|x| x[0] * x[0] + x[1] * x[1] - 1.0)
        .bound(0, 1.0, 10.0)
        .bound(1, -10.0, 10.0)
        .bound(2, -10.0, 10.0);
    // The limit and the bound touch along x₂ = 0, so x₂ is flat there to second order.
    let outcome = solve(&mut problem, &[1.0, 1.0, 1.0]);
    assert_minimum(&outcome, 1.0, &[1.0]);
    assert!(outcome.variables[1].abs() < 1e-3 && outcome.variables[2].abs() < 1e-6);
}

#[test]
fn problem_65() {
    let mut problem =
        TestProblem::dense(3, |x| vec![x[0] - x[1], (x[0] + x[1] - 10.0) / 3.0, x[2] - 5.0])
            .limit(|x| real(48.0) - x[0] * x[0] - x[1] * x[1] - x[2] * x[2])
            .bound(0, -4.5, 4.5)
            .bound(1, -4.5, 4.5)
            .bound(2, -5.0, 5.0);
    let expected = [3.650461821, 3.65046168, 4.6204170507];
    assert_minimum(&solve(&mut problem, &[-5.0, 5.0, 0.0]), 0.9535288567, &expected);
}

/// The minimum on a curved limit, worked by hand: the point of the unit circle nearest (3, 4).
#[test]
fn a_curved_limit_is_kept_to_a_part_of_its_tolerance() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] - 3.0, x[1] - 4.0])
        .limit(|x| real(1.0) - x[0] * x[0] - x[1] * x[1]);
    let outcome = solve(&mut problem, &[1.0, 0.0]);
    assert_minimum(&outcome, 16.0, &[0.6, 0.8]);
    assert!(outcome.violation < 0.1, "{}", outcome.violation);
}

#[test]
fn a_start_far_outside_a_limit_comes_in() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] - 3.0, x[1] - 4.0])
        .limit(|x| real(1.0) - x[0] * x[0] - x[1] * x[1]);
    assert_minimum(&solve(&mut problem, &[-40.0, 25.0]), 16.0, &[0.6, 0.8]);
}

#[test]
fn limits_that_contradict_are_reported_and_the_point_is_still_finite() {
    let mut problem =
        TestProblem::dense(1, |x| vec![x[0]]).limit(|x| x[0] - 1.0).limit(|x| -x[0] - 1.0);
    let outcome = solve(&mut problem, &[3.0]);
    assert!(!outcome.limits_kept());
    assert!(!outcome.stopped.was_successful());
    assert_eq!(outcome.stopped, Stopped::LimitsContradict);
    assert!(outcome.sum_of_squares.is_finite());
    assert!(outcome.variables[0].abs() <= 3.0, "{outcome:?}");
}

#[test]
fn a_limit_that_nothing_can_move_is_reported() {
    let mut problem = TestProblem::dense(1, |x| vec![x[0] - 1.0]).limit(|_| real(-1.0));
    let outcome = solve(&mut problem, &[3.0]);
    assert_eq!(outcome.stopped, Stopped::LimitsContradict);
    assert!((outcome.variables[0] - 1.0).abs() < 1e-6, "{outcome:?}");
}
