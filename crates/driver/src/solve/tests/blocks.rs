//! Many states in blocks, and the same problem as one dense block: the same iterates.

use merit_function::block::BlockShape;

use super::problems::{C, Functions, TestLimit, TestProblem};
use crate::solve::{Progress, Settings, run};

const STATES: usize = 24;

/// Residuals of state `k` in two shared and two own variables, curved in all of them.
fn state_residuals(k: usize, x: &[C]) -> Vec<C> {
    let k = k as f64;
    let target = 1.0 + 0.1 * k;
    vec![
        x[0] * x[2] - target,
        x[1] * x[1] + x[3] - (2.0 - 0.05 * k),
        (x[2] * 0.3).exp() - x[3],
        x[0] + x[1] * x[3] - target.sqrt(),
        x[2] * x[3] * 0.2,
    ]
}

fn in_blocks() -> TestProblem {
    let shape = BlockShape { shared: 2, own: vec![2; STATES], rows: vec![5; STATES] };
    let states = (0..STATES).map(|k| -> Functions { Box::new(move |x| state_residuals(k, x)) });
    let mut problem = TestProblem::blocks(shape, states.collect());
    for k in 0..STATES {
        let value = Box::new(|x: &[C]| C::new(2.5, 0.0) - x[2] * x[2] - x[3]);
        problem.limits.push(TestLimit { state: Some(k), value });
        problem = problem.bound(2 + 2 * k, 0.2, f64::INFINITY);
    }
    problem
}

fn in_one_piece() -> TestProblem {
    let variables = 2 + 2 * STATES;
    let local = |x: &[C], k: usize| [x[0], x[1], x[2 + 2 * k], x[3 + 2 * k]];
    let mut problem = TestProblem::dense(variables, move |x| {
        (0..STATES).flat_map(|k| state_residuals(k, &local(x, k))).collect()
    });
    for k in 0..STATES {
        problem = problem
            .limit(move |x| {
                let x = local(x, k);
                C::new(2.5, 0.0) - x[2] * x[2] - x[3]
            })
            .bound(2 + 2 * k, 0.2, f64::INFINITY);
    }
    problem
}

fn iterates(mut problem: TestProblem) -> (Vec<Vec<f64>>, f64) {
    let mut iterates = vec![];
    let mut watch = |progress: &Progress<'_>| {
        iterates.push(progress.variables.to_vec());
        std::ops::ControlFlow::Continue(())
    };
    let start: Vec<f64> = (0..2 + 2 * STATES).map(|j| 0.7 + 0.01 * j as f64).collect();
    let outcome = run(&mut problem, &start, &Settings::default(), &mut watch).unwrap();
    assert!(outcome.stopped.was_successful(), "{}", outcome.stopped);
    assert!(outcome.limits_kept(), "{}", outcome.violation);
    (iterates, outcome.sum_of_squares)
}

#[test]
fn blocks_and_one_piece_take_the_same_way() {
    let (blocks, blocks_squares) = iterates(in_blocks());
    let (dense, dense_squares) = iterates(in_one_piece());
    assert!((blocks_squares - dense_squares).abs() < 1e-9 * dense_squares);
    // The last steps are rounding on both sides.
    let common = blocks.len().min(dense.len());
    assert!(blocks.len().abs_diff(dense.len()) <= 3, "{} {}", blocks.len(), dense.len());
    assert!(common > 5, "{common}");
    for (step, (blocks, dense)) in blocks.iter().zip(&dense).enumerate() {
        for (a, b) in blocks.iter().zip(dense) {
            assert!((a - b).abs() < 1e-6 * (1.0 + b.abs()), "step {step}: {a} against {b}");
        }
    }
}
