//! Block elimination against a dense solve of the same system.

use merit_function::block::{BlockShape, Linearisation};
use nalgebra::{DMatrix, DVector};
use proptest::prelude::*;

use super::*;

fn dense_jacobian(shape: &BlockShape, linearisation: &Linearisation) -> DMatrix<f64> {
    let mut jacobian = DMatrix::zeros(shape.residuals(), shape.variables());
    let mut row = 0;
    for (state, block) in linearisation.states.iter().enumerate() {
        let rows = shape.rows[state];
        jacobian.view_mut((row, 0), (rows, shape.shared)).copy_from(&block.by_shared);
        jacobian
            .view_mut((row, shape.own_range(state).start), (rows, shape.own[state]))
            .copy_from(&block.by_own);
        row += rows;
    }
    jacobian
}

prop_compose! {
    fn blocks()(
        shared in 1_usize..5,
        own in prop::collection::vec(0_usize..4, 1..5),
    )(
        entries in prop::collection::vec(
            -2.0_f64..2.0,
            own.iter().map(|own| (own + 3) * (shared + own + 1)).sum::<usize>(),
        ),
        shared in Just(shared),
        own in Just(own),
    ) -> (BlockShape, Linearisation) {
        let rows = own.iter().map(|own| own + 3).collect();
        let shape = BlockShape { shared, own, rows };
        let mut linearisation = Linearisation::zeros(&shape);
        let mut entries = entries.into_iter();
        for block in &mut linearisation.states {
            for entry in block.residuals.iter_mut()
                .chain(block.by_shared.iter_mut())
                .chain(block.by_own.iter_mut())
            {
                *entry = entries.next().unwrap_or_default();
            }
        }
        (shape, linearisation)
    }
}

proptest! {
    #[test]
    fn elimination_is_the_dense_solve((shape, linearisation) in blocks(), lambda in 1e-3..10.0_f64) {
        let variables = shape.variables();
        let mut normal = NormalEquations::new(&shape, vec![false; variables]);
        normal.form(&linearisation);
        let scales: Vec<f64> = (0..variables).map(|j| 1.0 + j as f64).collect();
        normal.eliminate(lambda, &scales).unwrap();

        let jacobian = dense_jacobian(&shape, &linearisation);
        let residuals = DVector::from_iterator(
            shape.residuals(),
            linearisation.states.iter().flat_map(|block| block.residuals.iter().copied()),
        );
        let gradient = jacobian.transpose() * &residuals;
        let damped = jacobian.transpose() * &jacobian
            + DMatrix::from_diagonal(&(DVector::from_vec(scales) * lambda));
        let expected = damped.lu().solve(&gradient).unwrap();

        let mut solved = normal.gradient().to_vec();
        normal.solve(&mut solved);
        for (block, dense) in solved.iter().zip(expected.iter()) {
            prop_assert!((block - dense).abs() <= 1e-8 * (1.0 + dense.abs()), "{block} {dense}");
        }

        let mut product = vec![0.0; shape.residuals()];
        jacobian_times(&linearisation, &shape, &solved, &mut product);
        let dense = &jacobian * DVector::from_column_slice(&solved);
        prop_assert!((DVector::from_vec(product) - dense).amax() < 1e-10);

        let mut back = vec![0.0; variables];
        transpose_times(&linearisation, &shape, residuals.as_slice(), &mut back);
        for (a, b) in back.iter().zip(gradient.iter()) {
            prop_assert!((a - b).abs() < 1e-10);
        }
    }
}

#[test]
fn a_fixed_variable_is_not_moved_and_moves_nothing() {
    let shape = BlockShape { shared: 1, own: vec![1], rows: vec![2] };
    let mut linearisation = Linearisation::zeros(&shape);
    linearisation.states[0].residuals = DVector::from_vec(vec![1.0, 2.0]);
    linearisation.states[0].by_shared = DMatrix::from_vec(2, 1, vec![1.0, 1.0]);
    linearisation.states[0].by_own = DMatrix::from_vec(2, 1, vec![0.0, 2.0]);
    let mut normal = NormalEquations::new(&shape, vec![true, false]);
    normal.form(&linearisation);
    assert_eq!(normal.gradient(), [0.0, 4.0]);
    assert_eq!(normal.column_squares(), [0.0, 4.0]);
    normal.eliminate(1.0, &[1.0, 4.0]).unwrap();
    let mut step = normal.gradient().to_vec();
    normal.solve(&mut step);
    assert_eq!(step[0], 0.0);
    assert!((step[1] - 0.5).abs() < 1e-15);
}

#[test]
fn without_damping_a_rank_deficient_jacobian_is_refused() {
    let shape = BlockShape { shared: 2, own: vec![], rows: vec![] };
    let mut normal = NormalEquations::new(&shape, vec![false; 2]);
    normal.form(&Linearisation::zeros(&shape));
    assert_eq!(normal.eliminate(0.0, &[1.0, 1.0]), Err(NotPositiveDefinite));
    assert_eq!(normal.eliminate(1.0, &[1.0, 1.0]), Ok(()));
}
