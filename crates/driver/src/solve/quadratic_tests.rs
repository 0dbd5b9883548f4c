//! The dual method against hand-worked programs and against every active set in turn.

use merit_function::block::{BlockShape, LimitRow, Linearisation};
use nalgebra::{DMatrix, DVector};
use proptest::prelude::*;

use super::*;

/// A program over shared variables alone, with `H` given by a Jacobian and damping 1.
#[derive(Debug, Clone)]
struct Dense {
    normal: NormalEquations,
    hessian: DMatrix<f64>,
    gradient: Vec<f64>,
    free: Vec<f64>,
    low: Vec<f64>,
    high: Vec<f64>,
    limits: Vec<LimitRow>,
    required: Vec<f64>,
    scales: Vec<f64>,
}

impl Dense {
    fn new(jacobian: &DMatrix<f64>, gradient: &[f64]) -> Self {
        let variables = gradient.len();
        let shape = BlockShape { shared: variables, own: vec![0], rows: vec![jacobian.nrows()] };
        let mut linearisation = Linearisation::zeros(&shape);
        linearisation.states[0].by_shared.copy_from(jacobian);
        let mut normal = NormalEquations::new(&shape, vec![false; variables]);
        normal.form(&linearisation);
        normal.eliminate(1.0, &vec![1.0; variables]).unwrap();
        let mut free: Vec<f64> = gradient.iter().map(|g| -g).collect();
        normal.solve(&mut free);
        let hessian = jacobian.transpose() * jacobian + DMatrix::identity(variables, variables);
        Self {
            normal,
            hessian,
            gradient: gradient.to_vec(),
            free,
            low: vec![f64::NEG_INFINITY; variables],
            high: vec![f64::INFINITY; variables],
            limits: vec![],
            required: vec![],
            scales: vec![1.0; variables],
        }
    }

    fn limit(mut self, gradient: &[f64], required: f64) -> Self {
        self.limits.push(LimitRow {
            value: -required,
            tolerance: 1e-9,
            state: None,
            by_shared: DVector::from_column_slice(gradient),
            by_own: DVector::zeros(0),
        });
        self.required.push(required);
        self
    }

    fn program(&self) -> Program<'_> {
        Program {
            normal: &self.normal,
            scale_squares: &self.scales,
            free: &self.free,
            low: &self.low,
            high: &self.high,
            limits: &self.limits,
            required: &self.required,
        }
    }

    fn solve(&self) -> Result<(Vec<f64>, WorkingSet), Inconsistent> {
        let (mut working, mut step) = (WorkingSet::default(), vec![]);
        solve(&self.program(), &mut working, &mut step)?;
        Ok((step, working))
    }

    fn objective(&self, step: &DVector<f64>) -> f64 {
        0.5 * step.dot(&(&self.hessian * step))
            + step.dot(&DVector::from_column_slice(&self.gradient))
    }

    /// All constraints as rows `nᵀp ≥ b`.
    fn rows(&self) -> Vec<(DVector<f64>, f64)> {
        let program = self.program();
        program
            .constraints()
            .filter(|&c| program.level(c).is_finite())
            .map(|c| (DVector::from_vec(program.normal_parts(c).2), program.level(c)))
            .collect()
    }

    /// The least objective over all feasible points that some subset of the constraints, held
    /// with equality, singles out: the minimiser is among them.
    fn by_enumeration(&self) -> Option<f64> {
        let rows = self.rows();
        let variables = self.gradient.len();
        let mut best: Option<f64> = None;
        for subset in 0_u32..1 << rows.len() {
            let active: Vec<_> =
                rows.iter().enumerate().filter(|(i, _)| subset & 1 << i != 0).collect();
            if active.len() > variables {
                continue;
            }
            let size = variables + active.len();
            let mut system = DMatrix::zeros(size, size);
            let mut right = DVector::zeros(size);
            system.view_mut((0, 0), (variables, variables)).copy_from(&self.hessian);
            for (row, entry) in self.gradient.iter().enumerate() {
                right[row] = -entry;
            }
            for (k, (_, (normal, level))) in active.iter().enumerate() {
                system.view_mut((variables + k, 0), (1, variables)).copy_from(&normal.transpose());
                system.view_mut((0, variables + k), (variables, 1)).copy_from(&-normal);
                right[variables + k] = *level;
            }
            let Some(solution) = system.full_piv_lu().solve(&right) else { continue };
            let step = solution.rows(0, variables).into_owned();
            if rows.iter().all(|(normal, level)| normal.dot(&step) >= level - 1e-7) {
                let objective = self.objective(&step);
                best = Some(best.map_or(objective, |best| best.min(objective)));
            }
        }
        best
    }
}

fn assert_close(found: &[f64], expected: &[f64]) {
    assert_eq!(found.len(), expected.len());
    for (found, expected) in found.iter().zip(expected) {
        assert!((found - expected).abs() < 1e-14, "{found} is not {expected}");
    }
}

/// `H = 2 I`, so the free minimum is `−g/2`.
fn twice_identity(gradient: &[f64]) -> Dense {
    Dense::new(&DMatrix::identity(gradient.len(), gradient.len()), gradient)
}

#[test]
fn nothing_in_the_way_is_the_free_minimum() {
    let (step, working) = twice_identity(&[-4.0, 2.0]).solve().unwrap();
    assert_close(&step, &[2.0, -1.0]);
    assert_eq!(working.multipliers().count(), 0);
}

#[test]
fn a_bound_in_the_way_is_met_with_its_multiplier() {
    let mut program = twice_identity(&[-4.0, 2.0]);
    program.high[0] = 0.5;
    let (step, working) = program.solve().unwrap();
    assert_close(&step, &[0.5, -1.0]);
    // Stationarity: H p + g = N u, so 2·0.5 − 4 = −u.
    let (constraint, multiplier) = working.multipliers().next().unwrap();
    assert_eq!(constraint, Constraint::High(0));
    assert_close(&[multiplier], &[3.0]);
}

#[test]
fn a_limit_in_the_way_is_met() {
    // Minimise |p|² − 4p₁ − 4p₂ over p₁ + p₂ ≤ 2: by symmetry (1, 1), and 2 − 4 = −u.
    let (step, working) = twice_identity(&[-4.0, -4.0]).limit(&[-1.0, -1.0], -2.0).solve().unwrap();
    assert!((step[0] - 1.0).abs() < 1e-15 && (step[1] - 1.0).abs() < 1e-15);
    let (constraint, multiplier) = working.multipliers().next().unwrap();
    assert_eq!(constraint, Constraint::Limit(0));
    assert!((multiplier - 2.0).abs() < 1e-14);
}

#[test]
fn a_constraint_taken_in_early_is_let_go() {
    // The free minimum (0, 0) violates p₁ ≥ 1 less than p₁ + p₂ ≥ 3 … and 4 p₂ ≤ p₁ last.
    let program = twice_identity(&[0.0, 0.0]).limit(&[1.0, 0.0], 1.0).limit(&[1.0, 3.0], 1.2);
    let (step, _) = program.solve().unwrap();
    // On p₁ = 1: 1 + 3 p₂ ≥ 1.2 gives p₂ = 0.2/3.
    assert!((step[0] - 1.0).abs() < 1e-14 && (step[1] - 0.2 / 3.0).abs() < 1e-14, "{step:?}");
}

#[test]
fn contradictions_are_reported() {
    let program = twice_identity(&[0.0]).limit(&[1.0], 1.0).limit(&[-1.0], 0.0);
    assert_eq!(program.solve().err(), Some(Inconsistent));
    let no_gradient = twice_identity(&[0.0]).limit(&[0.0], 1.0);
    assert_eq!(no_gradient.solve().err(), Some(Inconsistent));
}

#[test]
fn many_constraints_through_one_corner_do_no_harm() {
    let mut program = twice_identity(&[2.0, 2.0]);
    program.low = vec![0.0, 0.0];
    let program = program
        .limit(&[1.0, 1.0], 0.0)
        .limit(&[2.0, 2.0], 0.0)
        .limit(&[1.0, 2.0], 0.0)
        .limit(&[2.0, 1.0], 0.0);
    let (step, _) = program.solve().unwrap();
    assert!(step.iter().all(|p| p.abs() < 1e-15), "{step:?}");
}

#[test]
fn resuming_the_right_working_set_changes_nothing() {
    let program = twice_identity(&[-4.0, -4.0]).limit(&[-1.0, -1.0], -2.0).limit(&[1.0, 0.0], 0.0);
    let (cold, mut working) = program.solve().unwrap();
    working.forget_columns();
    let mut warm = vec![];
    solve(&program.program(), &mut working, &mut warm).unwrap();
    assert_close(&cold, &warm);
    // And a set that is wrong altogether is let go.
    let other = twice_identity(&[4.0, 4.0]).limit(&[-1.0, -1.0], -2.0);
    working.forget_columns();
    solve(&other.program(), &mut working, &mut warm).unwrap();
    assert_close(&warm, &[-2.0, -2.0]);
}

prop_compose! {
    fn programs()(variables in 1_usize..4, limits in 0_usize..4)(
        jacobian in prop::collection::vec(-2.0_f64..2.0, 4 * variables),
        gradient in prop::collection::vec(-5.0_f64..5.0, variables),
        low in prop::collection::vec(-1.0_f64..0.0, variables),
        high in prop::collection::vec(0.0_f64..1.0, variables),
        // Small whole numbers make parallel and redundant limits common.
        normals in prop::collection::vec(prop::collection::vec(-2_i8..3, variables), limits),
        required in prop::collection::vec(-1.0_f64..0.5, limits),
        variables in Just(variables),
    ) -> Dense {
        let mut program = Dense::new(&DMatrix::from_vec(4, variables, jacobian), &gradient);
        program.low = low;
        program.high = high;
        for (normal, required) in normals.iter().zip(required) {
            let normal: Vec<f64> = normal.iter().map(|&entry| f64::from(entry)).collect();
            program = program.limit(&normal, required);
        }
        program
    }
}

proptest! {
    #[test]
    fn agrees_with_every_active_set_in_turn(program in programs()) {
        match (program.solve(), program.by_enumeration()) {
            (Ok((step, working)), Some(best)) => {
                let step = DVector::from_vec(step);
                for (normal, level) in program.rows() {
                    prop_assert!(normal.dot(&step) >= level - 1e-8);
                }
                let objective = program.objective(&step);
                prop_assert!((objective - best).abs() <= 1e-6 * (1.0 + best.abs()),
                    "{objective} against {best}");
                prop_assert!(working.multipliers().all(|(_, multiplier)| multiplier >= 0.0));
            }
            (Err(Inconsistent), None) => {}
            (solved, enumerated) => prop_assert!(false, "{solved:?} against {enumerated:?}"),
        }
    }
}
