//! Faults, infinities and requests to stop.

use std::ops::ControlFlow;
use std::sync::atomic::AtomicBool;

use super::problems::{C, TestProblem};
use super::solve;
use crate::solve::{
    Interruptible, Method, Progress, Settings, SolveError, Stopped, Unwatched, run,
};

fn rosenbrock() -> TestProblem {
    TestProblem::dense(2, |x| vec![(x[1] - x[0] * x[0]) * 10.0, C::new(1.0, 0.0) - x[0]])
}

const START: [f64; 2] = [-1.2, 1.0];

fn start_error(mut problem: TestProblem, start: &[f64]) -> SolveError {
    run(&mut problem, start, &Settings::default(), &mut Unwatched).unwrap_err()
}

#[test]
fn a_fault_at_any_evaluation_but_the_first_is_only_a_rejected_step() {
    for number in 2..40 {
        let mut problem = rosenbrock();
        problem.faults = Box::new(move |call, _| call == number);
        let outcome = solve(&mut problem, &START);
        assert_eq!(outcome.stopped, Stopped::TargetReached, "fault at {number}");
    }
}

#[test]
fn a_wall_of_faults_is_walked_along() {
    let mut problem = rosenbrock();
    problem.faults = Box::new(|_, x| x[0] > 0.8);
    let outcome = solve(&mut problem, &START);
    assert!(outcome.variables[0] > 0.79 && outcome.variables[0] <= 0.8, "{outcome:?}");
    assert!(outcome.sum_of_squares.is_finite());
}

#[test]
fn faults_everywhere_but_at_the_start_end_the_run() {
    let mut problem = rosenbrock();
    problem.faults = Box::new(|_, x| x != START);
    let outcome = solve(&mut problem, &START);
    assert_eq!(outcome.stopped, Stopped::NoProgress);
    assert_eq!(outcome.variables, START);
    assert!((outcome.sum_of_squares - 24.2).abs() < 1e-12);
}

#[test]
fn numbers_that_are_not_finite_count_as_faults() {
    for poison in [f64::NAN, f64::INFINITY, 1e308] {
        let mut problem = TestProblem::dense(2, move |x| {
            let spoilt = if x[0].re > 0.8 { poison } else { 0.0 };
            vec![(x[1] - x[0] * x[0]) * 10.0, C::new(1.0, 0.0) - x[0] + spoilt]
        });
        let outcome = solve(&mut problem, &START);
        assert!(outcome.sum_of_squares.is_finite() && outcome.sum_of_squares < 0.05);
        assert!(outcome.variables[0] <= 0.8 && outcome.variables[0] > 0.79, "{outcome:?}");
    }
}

#[test]
fn starts_that_will_not_do_are_errors_that_say_why() {
    let mut faulty = rosenbrock();
    faulty.faults = Box::new(|call, _| call == 1);
    let not_finite = TestProblem::dense(1, |_| vec![C::new(1e200, 0.0)]);
    let errors = [
        start_error(rosenbrock(), &[1.0]),
        start_error(rosenbrock(), &[f64::NAN, 0.0]),
        start_error(rosenbrock().bound(1, 2.0, 1.0), &START),
        start_error(rosenbrock().bound(1, f64::NAN, 1.0), &START),
        start_error(rosenbrock().bound(1, f64::INFINITY, f64::INFINITY), &START),
        start_error(faulty, &START),
        start_error(not_finite, &[0.0]),
        start_error(TestProblem::dense(0, |_| vec![]), &[]),
    ]
    .map(|error| error.to_string());
    insta::assert_snapshot!(errors.join("\n"), @r"
    the start has 1 variables where the problem has 2
    variable 0 of the start is NaN, not a finite number
    variable 1 is to lie between 2 and 1, which is no range
    variable 1 is to lie between NaN and 1, which is no range
    variable 1 is to lie between inf and inf, which is no range
    the start cannot be evaluated
    the start evaluates to numbers that are not finite
    the problem has no variables
    ");
}

#[test]
fn the_observer_sees_every_iteration_and_can_stop() {
    for method in [Method::DampedLeastSquares, Method::NelderMead] {
        let mut seen = vec![];
        let mut watch = |progress: &Progress<'_>| {
            seen.push((progress.iteration, progress.sum_of_squares));
            if progress.iteration == 5 { ControlFlow::Break(()) } else { ControlFlow::Continue(()) }
        };
        let settings = Settings::new(method);
        let outcome = run(&mut rosenbrock(), &START, &settings, &mut watch).unwrap();
        assert_eq!(outcome.stopped, Stopped::Observer);
        assert_eq!(outcome.iterations, 5);
        assert_eq!(
            seen.iter().map(|(iteration, _)| *iteration).collect::<Vec<_>>(),
            [1, 2, 3, 4, 5]
        );
        assert!(seen.windows(2).all(|pair| pair[1].1 <= pair[0].1));
        assert_eq!(seen[4].1, outcome.sum_of_squares);
    }
}

#[test]
fn a_raised_flag_stops_before_the_first_step() {
    for method in [Method::DampedLeastSquares, Method::NelderMead] {
        let stop = AtomicBool::new(true);
        let mut observer = Interruptible { stop: &stop, observer: Unwatched };
        let outcome =
            run(&mut rosenbrock(), &START, &Settings::new(method), &mut observer).unwrap();
        assert_eq!(outcome.stopped, Stopped::Interrupted);
        assert_eq!(outcome.iterations, 0);
        assert!(outcome.sum_of_squares <= 24.2 + 1e-12);
    }
}

#[test]
fn the_iteration_limit_is_kept() {
    let settings = Settings::default().with_max_iterations(3).unwrap();
    let outcome = run(&mut rosenbrock(), &START, &settings, &mut Unwatched).unwrap();
    assert_eq!((outcome.stopped, outcome.iterations), (Stopped::IterationLimit, 3));
}

#[test]
fn a_start_that_meets_the_target_is_left_alone() {
    let outcome = solve(&mut rosenbrock(), &[1.0, 1.0]);
    assert_eq!((outcome.stopped, outcome.iterations), (Stopped::TargetReached, 0));
    assert_eq!(outcome.variables, [1.0, 1.0]);
}

#[test]
fn variables_that_matter_to_nothing_stay_where_they_are() {
    let mut problem = TestProblem::dense(3, |x| vec![x[0] - 2.0, x[0] * x[0] - 5.0]);
    let outcome = solve(&mut problem, &[1.0, 7.0, -3.0]);
    assert!(outcome.stopped.was_successful());
    assert_eq!(outcome.variables[1..], [7.0, -3.0]);
}

#[test]
fn a_linear_dependence_between_variables_is_survived() {
    let mut problem = TestProblem::dense(2, |x| vec![x[0] + x[1] - 3.0, (x[0] + x[1]) * 2.0 - 5.0]);
    let outcome = solve(&mut problem, &[0.0, 0.0]);
    // Least squares over s = x₁ + x₂: (s − 3) + 2 (2 s − 5) = 0, s = 13/5.
    assert!(outcome.stopped.was_successful());
    assert!((outcome.variables[0] + outcome.variables[1] - 2.6).abs() < 1e-8);
}
