//! The working set of the dual active-set method: which constraints hold with equality, their
//! multipliers, and the small dense matrix `NᵀH⁻¹N` over them.

use super::growing_cholesky::GrowingCholesky;
use super::normal::HalfSolved;
use super::quadratic::{Constraint, Inconsistent, Program};

/// Constraints held with equality, with multipliers `u ≥ 0`.
#[derive(Debug, Clone, Default)]
pub(crate) struct WorkingSet {
    members: Vec<Member>,
    /// Normals half-solved with the present factors, of any constraint that entered so far.
    solved: Vec<Column>,
    /// `NᵀH⁻¹N` over the members.
    gram: GrowingCholesky,
}

#[derive(Debug, Clone, Copy)]
struct Member {
    constraint: Constraint,
    multiplier: f64,
    /// Index into `solved`.
    column: usize,
}

#[derive(Debug, Clone)]
struct Column {
    constraint: Constraint,
    /// `L⁻¹n`.
    half: HalfSolved,
    /// `nᵀH⁻¹n`.
    curvature: f64,
}

impl WorkingSet {
    /// Whether the constraint is held with equality.
    pub(crate) fn contains(&self, constraint: Constraint) -> bool {
        self.members.iter().any(|member| member.constraint == constraint)
    }

    /// The constraints held with equality and their multipliers.
    pub(crate) fn multipliers(&self) -> impl Iterator<Item = (Constraint, f64)> + '_ {
        self.members.iter().map(|member| (member.constraint, member.multiplier))
    }

    /// Holds nothing.
    pub(crate) fn clear(&mut self) {
        self.members.clear();
        self.gram.clear();
    }

    /// Forgets the solved columns: the factors of `H` or the gradients of the limits changed.
    pub(crate) fn forget_columns(&mut self) {
        self.solved.clear();
    }

    /// Takes up the members left from an earlier program as far as they fit this one: those
    /// dependent on others are left out, and those with a negative multiplier are let go until what
    /// is left is a point the dual method may start from.
    pub(crate) fn resume(&mut self, program: &Program<'_>) {
        let earlier = std::mem::take(&mut self.members);
        self.gram.clear();
        for member in earlier {
            let still_there = match member.constraint {
                Constraint::Low(_) | Constraint::High(_) => true,
                Constraint::Limit(i) => i < program.limits.len(),
            };
            if still_there {
                let column = self.column(program, member.constraint);
                self.push(member.constraint, column, 0.0);
            }
        }
        self.settle(program);
    }

    /// Takes in all of these at once, then lets go of what turns out not to hold the step back.
    pub(crate) fn guess(&mut self, program: &Program<'_>, constraints: &[Constraint]) {
        for &constraint in constraints {
            let column = self.column(program, constraint);
            self.push(constraint, column, 0.0);
        }
        self.settle(program);
    }

    /// Lets go of the members whose multiplier is negative until none is. All of them go at once:
    /// any set left with positive multipliers will do to start from, and a large guess is sifted
    /// in a few rounds.
    fn settle(&mut self, program: &Program<'_>) {
        loop {
            self.find_multipliers(program);
            let before = self.members.len();
            let kept: Vec<Member> =
                self.members.iter().copied().filter(|member| member.multiplier >= 0.0).collect();
            if kept.len() == before {
                return;
            }
            self.clear();
            for member in kept {
                self.push(member.constraint, member.column, 0.0);
            }
        }
    }

    /// Multipliers and step of the present members anew, which sheds the rounding that changes
    /// piled up.
    pub(crate) fn polish(&mut self, program: &Program<'_>, step: &mut Vec<f64>) {
        self.find_multipliers(program);
        for member in &mut self.members {
            member.multiplier = member.multiplier.max(0.0);
        }
        self.step(program, step);
    }

    /// `(NᵀH⁻¹N) u = b − Nᵀp₀`.
    fn find_multipliers(&mut self, program: &Program<'_>) {
        let mut multipliers: Vec<f64> = self
            .members
            .iter()
            .map(|m| program.level(m.constraint) - program.along(m.constraint, program.free))
            .collect();
        self.gram.solve(&mut multipliers);
        for (member, multiplier) in self.members.iter_mut().zip(multipliers) {
            member.multiplier = multiplier;
        }
    }

    /// `p = p₀ + H⁻¹N u`.
    pub(crate) fn step(&self, program: &Program<'_>, step: &mut Vec<f64>) {
        step.clear();
        step.extend_from_slice(program.free);
        if !self.members.is_empty() {
            self.move_along(program, step, self.members.iter().map(|m| (m.column, m.multiplier)));
        }
    }

    /// `p ← p + H⁻¹ Σ factorᵢ nᵢ`, over solved columns and their factors.
    fn move_along(
        &self,
        program: &Program<'_>,
        step: &mut [f64],
        columns: impl Iterator<Item = (usize, f64)>,
    ) {
        let mut change = vec![0.0; step.len()];
        for (column, factor) in columns {
            program.normal.add_scaled(&mut change, factor, &self.solved[column].half);
        }
        program.normal.solve_back(&mut change);
        step.iter_mut().zip(&change).for_each(|(p, change)| *p += change);
    }

    /// Takes in a violated constraint, letting go of members whose multiplier would turn
    /// negative on the way (step 2 of the algorithm in Goldfarb and Idnani).
    pub(crate) fn take_in(
        &mut self,
        program: &Program<'_>,
        entering: Constraint,
        step: &mut [f64],
    ) -> Result<(), Inconsistent> {
        let column = self.column(program, entering);
        let mut multiplier = 0.0;
        loop {
            let products = self.products(column);
            let outside = self.gram.outside_span(&products, self.solved[column].curvature);
            let direction = self.dual_direction(products);
            let (blocking, dual_length) = self.blocking(&direction);
            let shortfall = program.level(entering) - program.along(entering, step);
            let primal_length = outside.map_or(f64::INFINITY, |outside| shortfall / outside);
            let length = dual_length.min(primal_length);
            if length == f64::INFINITY {
                return Err(Inconsistent);
            }
            for (member, r) in self.members.iter_mut().zip(&direction) {
                member.multiplier -= length * r;
            }
            multiplier += length;
            if outside.is_some() {
                let members = self.members.iter().zip(&direction);
                let leaving = members.map(|(member, r)| (member.column, -length * r));
                self.move_along(program, step, leaving.chain([(column, length)]));
            }
            match blocking {
                Some(position) if dual_length < primal_length => self.let_go(position),
                _ => {
                    self.push(entering, column, multiplier);
                    return Ok(());
                }
            }
        }
    }

    /// `r = (NᵀH⁻¹N)⁻¹ NᵀH⁻¹n`: how the multipliers give way to an entering normal.
    fn dual_direction(&self, products: Vec<f64>) -> Vec<f64> {
        let mut direction = products;
        self.gram.solve(&mut direction);
        direction
    }

    /// The member whose multiplier first reaches zero along `−direction`, and after what length.
    fn blocking(&self, direction: &[f64]) -> (Option<usize>, f64) {
        let largest = direction.iter().fold(0.0, |largest: f64, r| largest.max(r.abs()));
        let mut first = (None, f64::INFINITY);
        for (position, (member, &r)) in self.members.iter().zip(direction).enumerate() {
            if r > 1e-13 * largest {
                let length = member.multiplier.max(0.0) / r;
                if length < first.1 {
                    first = (Some(position), length);
                }
            }
        }
        first
    }

    /// `NᵀH⁻¹n` for a solved column.
    fn products(&self, column: usize) -> Vec<f64> {
        let half = &self.solved[column].half;
        self.members.iter().map(|m| self.solved[m.column].half.product(half)).collect()
    }

    /// Adds a member unless its normal depends on those of the others.
    fn push(&mut self, constraint: Constraint, column: usize, multiplier: f64) {
        let products = self.products(column);
        if self.gram.push(products, self.solved[column].curvature) {
            self.members.push(Member { constraint, multiplier, column });
        }
    }

    fn let_go(&mut self, position: usize) {
        self.members.remove(position);
        self.gram.remove(position);
    }

    /// Index of the solved column of a constraint, solved now if it is new.
    fn column(&mut self, program: &Program<'_>, constraint: Constraint) -> usize {
        let known = self.solved.iter().position(|column| column.constraint == constraint);
        known.unwrap_or_else(|| {
            let half = program.half_solved(constraint);
            let curvature = half.product(&half);
            self.solved.push(Column { constraint, half, curvature });
            self.solved.len() - 1
        })
    }
}
