//! Bounds hold to the last bit: at every evaluation (the test problem checks) and at the end.

use proptest::prelude::*;

use super::problems::{C, TestProblem};
use super::solve;
use crate::solve::Stopped;

fn rosenbrock() -> TestProblem {
    TestProblem::dense(2, |x| vec![(x[1] - x[0] * x[0]) * 10.0, C::new(1.0, 0.0) - x[0]])
}

#[test]
fn a_bound_in_the_way_is_met_exactly() {
    // Hock and Schittkowski, Lecture Notes in Economics 187 (1981), problem 2 and its minimum
    // (values from memory): x₂ ≥ 1.5 and f = 0.0504261879.
    let outcome = solve(&mut rosenbrock().bound(1, 1.5, f64::INFINITY), &[2.0, 3.0]);
    assert_eq!(outcome.variables[1], 1.5);
    assert!((outcome.variables[0] - 1.224370749).abs() < 1e-6, "{:?}", outcome.variables);
    assert!((outcome.sum_of_squares - 0.0504261879).abs() < 1e-8);
    assert!(outcome.stopped.was_successful());
}

#[test]
fn starts_on_outside_and_one_step_of_rounding_off_a_bound_all_end_well() {
    for start in [0.25, -7.0, 9.0, 0.25_f64.next_up(), 0.25_f64.next_down(), 0.75] {
        let mut problem = rosenbrock().bound(0, 0.25, 0.75);
        let outcome = solve(&mut problem, &[start, -1.0]);
        assert_eq!(outcome.variables[0], 0.75, "from {start}");
        assert!((outcome.variables[1] - 0.5625).abs() < 1e-7, "{:?}", outcome.variables);
    }
}

#[test]
fn a_variable_without_room_stays() {
    let mut problem = rosenbrock().bound(1, 0.81, 0.81);
    let outcome = solve(&mut problem, &[-0.3, 5.0]);
    assert_eq!(outcome.variables[1], 0.81);
    assert!(outcome.stopped.was_successful());
    let all_held = solve(&mut rosenbrock().bound(0, 0.0, 0.0).bound(1, 0.5, 0.5), &[0.0, 0.0]);
    assert_eq!(all_held.variables, [0.0, 0.5]);
    assert_eq!(all_held.stopped, Stopped::GradientSmall);
}

#[test]
fn the_widest_finite_bounds_do_no_harm() {
    let mut problem = rosenbrock().bound(0, f64::MIN, f64::MAX).bound(1, f64::MIN, f64::MAX);
    let outcome = solve(&mut problem, &[-1.2, 1.0]);
    assert_eq!(outcome.stopped, Stopped::TargetReached);
}

proptest! {
    #[test]
    fn no_neighbour_within_the_bounds_is_better(
        low in prop::collection::vec(-2.0_f64..1.0, 3),
        width in prop::collection::vec(0.0_f64..2.0, 3),
        target in prop::collection::vec(-2.0_f64..2.0, 3),
    ) {
        // Convex in each variable up to mild coupling: one minimum, which bounds cut off.
        let residuals = move |x: &[C]| vec![
            x[0] - target[0] + x[1] * 0.3,
            x[1] - target[1] - x[2] * 0.2,
            x[2] - target[2] + x[0] * x[0] * 0.05,
        ];
        let mut problem = TestProblem::dense(3, residuals);
        for j in 0..3 {
            problem = problem.bound(j, low[j], low[j] + width[j]);
        }
        let outcome = solve(&mut problem, &[0.0; 3]);
        prop_assert!(outcome.stopped.was_successful(), "{}", outcome.stopped);
        for j in 0..3 {
            for shift in [-1e-3, 1e-3] {
                let mut near = outcome.variables.clone();
                near[j] = problem.bounds[j].clamp(near[j] + shift);
                let mut residuals = [0.0; 3];
                merit_function::block::BlockProblem::residuals(&mut problem, &near, &mut residuals)
                    .unwrap();
                let squares: f64 = residuals.iter().map(|r| r * r).sum();
                prop_assert!(squares >= outcome.sum_of_squares * (1.0 - 1e-9));
            }
        }
    }
}
