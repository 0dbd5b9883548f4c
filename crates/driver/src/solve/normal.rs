//! The damped normal equations of a step, `H p = b` with `H = JᵀJ + λ D²`, in blocks.
//!
//! With the own variables of state `k` written `pₖ` and the shared ones `pₛ`, row `k` of the
//! system reads `(OₖᵀOₖ + λ Dₖ²) pₖ + OₖᵀSₖ pₛ = bₖ`. Each is eliminated by a Cholesky step of
//! its own (`Lₖ Lₖᵀ`, size: the state's own variables), which leaves the Schur complement
//!
//! ```text
//!   ( Σₖ SₖᵀSₖ + λ Dₛ² − Σₖ WₖᵀWₖ ) pₛ = bₛ − Σₖ Wₖᵀ Lₖ⁻¹ bₖ,     Wₖ = Lₖ⁻¹ OₖᵀSₖ
//! ```
//!
//! for the shared variables alone. Work and memory grow in proportion to the number of states.
//! (Triggs, McLauchlan, Hartley and Fitzgibbon, "Bundle adjustment, a modern synthesis", LNCS
//! 1883 (2000), call it the primary structure reduction.) Sums run in state order, so the same
//! input gives the same bits.

use std::ops::Range;

use merit_function::block::{BlockShape, Linearisation};
use nalgebra::DMatrix;

use super::cholesky::{
    NotPositiveDefinite, dot, factorise, solve_lower, solve_upper, subtract_scaled,
};

/// One state's share of the normal equations, and its elimination for the present damping.
#[derive(Debug, Clone)]
struct StateNormal {
    range: Range<usize>,
    /// `OₖᵀOₖ`, lower triangle.
    own_gram: DMatrix<f64>,
    /// `OₖᵀSₖ`.
    coupling: DMatrix<f64>,
    /// `Lₖ`.
    factor: DMatrix<f64>,
    /// `Wₖ = Lₖ⁻¹ OₖᵀSₖ`.
    eliminated: DMatrix<f64>,
}

/// `L⁻¹n` for a normal `n` that touches the shared variables and one state at most, where
/// `L Lᵀ = H` is the block factor: as sparse as the normal itself, and all that products
/// `nᵀH⁻¹m` need.
#[derive(Debug, Clone)]
pub(crate) struct HalfSolved {
    state: Option<usize>,
    own: Vec<f64>,
    shared: Vec<f64>,
}

impl HalfSolved {
    /// `nᵀH⁻¹m`.
    pub(crate) fn product(&self, other: &Self) -> f64 {
        let own = if self.state == other.state { dot(&self.own, &other.own) } else { 0.0 };
        own + dot(&self.shared, &other.shared)
    }
}

/// Gram blocks and gradient of one linearisation, and their factors for one damping.
#[derive(Debug, Clone)]
pub(crate) struct NormalEquations {
    shared: usize,
    states: Vec<StateNormal>,
    /// `Σₖ SₖᵀSₖ`, lower triangle.
    shared_gram: DMatrix<f64>,
    /// Cholesky factor of the Schur complement.
    shared_factor: DMatrix<f64>,
    gradient: Vec<f64>,
    column_squares: Vec<f64>,
    /// Variables whose bounds leave them no room: their columns count as zero.
    fixed: Vec<bool>,
    /// The state each own variable belongs to, from the first own variable on.
    owner: Vec<usize>,
}

impl NormalEquations {
    /// Room for a problem of this shape; `fixed` marks the variables that cannot move.
    pub(crate) fn new(shape: &BlockShape, fixed: Vec<bool>) -> Self {
        let state = |index: usize| {
            let own = shape.own[index];
            StateNormal {
                range: shape.own_range(index),
                own_gram: DMatrix::zeros(own, own),
                coupling: DMatrix::zeros(own, shape.shared),
                factor: DMatrix::zeros(own, own),
                eliminated: DMatrix::zeros(own, shape.shared),
            }
        };
        Self {
            shared: shape.shared,
            states: (0..shape.states()).map(state).collect(),
            shared_gram: DMatrix::zeros(shape.shared, shape.shared),
            shared_factor: DMatrix::zeros(shape.shared, shape.shared),
            gradient: vec![0.0; shape.variables()],
            column_squares: vec![0.0; shape.variables()],
            fixed,
            owner: (0..shape.states()).flat_map(|k| std::iter::repeat_n(k, shape.own[k])).collect(),
        }
    }

    /// Forms the Gram blocks and the gradient `Jᵀr` of a linearisation, state by state.
    pub(crate) fn form(&mut self, linearisation: &Linearisation) {
        self.shared_gram.fill(0.0);
        self.gradient.fill(0.0);
        for (normal, block) in self.states.iter_mut().zip(&linearisation.states) {
            let rows = block.residuals.len();
            let residuals = block.residuals.as_slice();
            let shared_columns = || columns(block.by_shared.as_slice(), rows);
            let own_columns = || columns(block.by_own.as_slice(), rows);
            for (i, left) in shared_columns().enumerate() {
                self.gradient[i] += dot(left, residuals);
                for (j, right) in shared_columns().enumerate().take(i + 1) {
                    self.shared_gram[(i, j)] += dot(left, right);
                }
                for (j, own) in own_columns().enumerate() {
                    normal.coupling[(j, i)] = dot(own, left);
                }
            }
            for (i, left) in own_columns().enumerate() {
                self.gradient[normal.range.start + i] = dot(left, residuals);
                for (j, right) in own_columns().enumerate().take(i + 1) {
                    normal.own_gram[(i, j)] = dot(left, right);
                }
            }
        }
        self.hold_fixed();
        self.read_diagonal();
    }

    /// Takes the columns of fixed variables out, so that every step leaves them where they are.
    fn hold_fixed(&mut self) {
        let (shared_fixed, own_fixed) = self.fixed.split_at(self.shared);
        for index in (0..self.shared).filter(|&index| shared_fixed[index]) {
            self.gradient[index] = 0.0;
            self.shared_gram.row_mut(index).fill(0.0);
            self.shared_gram.column_mut(index).fill(0.0);
            self.states.iter_mut().for_each(|state| state.coupling.column_mut(index).fill(0.0));
        }
        for state in &mut self.states {
            for (own, index) in state.range.clone().enumerate() {
                if own_fixed[index - self.shared] {
                    self.gradient[index] = 0.0;
                    state.own_gram.row_mut(own).fill(0.0);
                    state.own_gram.column_mut(own).fill(0.0);
                    state.coupling.row_mut(own).fill(0.0);
                }
            }
        }
    }

    fn read_diagonal(&mut self) {
        for index in 0..self.shared {
            self.column_squares[index] = self.shared_gram[(index, index)];
        }
        for state in &self.states {
            for (own, index) in state.range.clone().enumerate() {
                self.column_squares[index] = state.own_gram[(own, own)];
            }
        }
    }

    /// `Jᵀr`.
    pub(crate) fn gradient(&self) -> &[f64] {
        &self.gradient
    }

    /// Squared length of every column of `J`: the diagonal of `JᵀJ`.
    pub(crate) fn column_squares(&self) -> &[f64] {
        &self.column_squares
    }

    /// Number of shared variables.
    pub(crate) fn shared(&self) -> usize {
        self.shared
    }

    /// Where in the packed vector the own variables of `state` stand.
    pub(crate) fn own_range(&self, state: usize) -> Range<usize> {
        self.states[state].range.clone()
    }

    /// The state a variable belongs to; `None` for a shared one.
    pub(crate) fn owner(&self, variable: usize) -> Option<usize> {
        variable.checked_sub(self.shared).map(|own| self.owner[own])
    }

    /// Whether the variable's bounds leave it no room.
    pub(crate) fn is_fixed(&self, variable: usize) -> bool {
        self.fixed[variable]
    }

    /// Eliminates the states and factorises the Schur complement, for the damping `lambda` and
    /// the squared scales `D²`.
    ///
    /// # Errors
    /// Some pivot vanishes: the damping is too small for this Jacobian.
    pub(crate) fn eliminate(
        &mut self,
        lambda: f64,
        scale_squares: &[f64],
    ) -> Result<(), NotPositiveDefinite> {
        self.shared_factor.copy_from(&self.shared_gram);
        for (index, square) in scale_squares[..self.shared].iter().enumerate() {
            self.shared_factor[(index, index)] += lambda * square;
        }
        for state in &mut self.states {
            state.factor.copy_from(&state.own_gram);
            for (own, square) in scale_squares[state.range.clone()].iter().enumerate() {
                state.factor[(own, own)] += lambda * square;
            }
            factorise(&mut state.factor)?;
            state.eliminated.copy_from(&state.coupling);
            let own = state.range.len();
            if own == 0 {
                continue;
            }
            for column in state.eliminated.as_mut_slice().chunks_exact_mut(own) {
                solve_lower(&state.factor, column);
            }
            let eliminated = state.eliminated.as_slice();
            for (j, right) in eliminated.chunks_exact(own).enumerate() {
                for (i, left) in eliminated.chunks_exact(own).enumerate().skip(j) {
                    self.shared_factor[(i, j)] -= dot(left, right);
                }
            }
        }
        factorise(&mut self.shared_factor)
    }

    /// `x ← H⁻¹ x` with the factors of the last [`Self::eliminate`].
    pub(crate) fn solve(&self, x: &mut [f64]) {
        let (shared, own) = x.split_at_mut(self.shared);
        for state in &self.states {
            let part = own_part(own, state, self.shared);
            state.solve_lower(part, shared);
        }
        solve_lower(&self.shared_factor, shared);
        self.solve_back(x);
    }

    /// `L⁻¹n` for the normal with these parts, entries of fixed variables zero.
    pub(crate) fn half_solve(
        &self,
        state: Option<usize>,
        mut own: Vec<f64>,
        mut shared: Vec<f64>,
    ) -> HalfSolved {
        if let Some(state) = state {
            self.states[state].solve_lower(&mut own, &mut shared);
        }
        solve_lower(&self.shared_factor, &mut shared);
        HalfSolved { state, own, shared }
    }

    /// `x ← x + factor · L⁻¹n`, packed.
    pub(crate) fn add_scaled(&self, x: &mut [f64], factor: f64, half: &HalfSolved) {
        subtract_scaled(&mut x[..self.shared], -factor, &half.shared);
        if let Some(state) = half.state {
            subtract_scaled(&mut x[self.own_range(state)], -factor, &half.own);
        }
    }

    /// `x ← L⁻ᵀ x`.
    pub(crate) fn solve_back(&self, x: &mut [f64]) {
        let (shared, own) = x.split_at_mut(self.shared);
        solve_upper(&self.shared_factor, shared);
        for state in &self.states {
            let part = own_part(own, state, self.shared);
            if part.is_empty() {
                continue;
            }
            for (entry, column) in
                shared.iter().zip(state.eliminated.as_slice().chunks_exact(part.len()))
            {
                subtract_scaled(part, *entry, column);
            }
            solve_upper(&state.factor, part);
        }
    }
}

impl StateNormal {
    /// Forward substitution through this state: `own ← Lₖ⁻¹ own`, `shared ← shared − Wₖᵀ own`.
    fn solve_lower(&self, own: &mut [f64], shared: &mut [f64]) {
        if own.is_empty() {
            return;
        }
        solve_lower(&self.factor, own);
        for (entry, column) in
            shared.iter_mut().zip(self.eliminated.as_slice().chunks_exact(own.len()))
        {
            *entry -= dot(column, own);
        }
    }
}

/// `J p`, packed in state order, written to `out`.
pub(crate) fn jacobian_times(
    linearisation: &Linearisation,
    shape: &BlockShape,
    step: &[f64],
    out: &mut [f64],
) {
    out.fill(0.0);
    let (mut first_row, mut first_own) = (0, shape.shared);
    for block in &linearisation.states {
        let rows = block.residuals.len();
        let part = &mut out[first_row..first_row + rows];
        let own = block.by_own.ncols();
        for (column, p) in columns(block.by_shared.as_slice(), rows).zip(&step[..shape.shared]) {
            subtract_scaled(part, -p, column);
        }
        for (column, p) in columns(block.by_own.as_slice(), rows).zip(&step[first_own..]) {
            subtract_scaled(part, -p, column);
        }
        first_row += rows;
        first_own += own;
    }
}

/// `Jᵀ r` for any packed residuals, written to `out`.
pub(crate) fn transpose_times(
    linearisation: &Linearisation,
    shape: &BlockShape,
    residuals: &[f64],
    out: &mut [f64],
) {
    out.fill(0.0);
    let (mut first_row, mut first_own) = (0, shape.shared);
    for block in &linearisation.states {
        let rows = block.residuals.len();
        let part = &residuals[first_row..first_row + rows];
        let own = block.by_own.ncols();
        for (entry, column) in
            out[..shape.shared].iter_mut().zip(columns(block.by_shared.as_slice(), rows))
        {
            *entry += dot(column, part);
        }
        for (entry, column) in
            out[first_own..].iter_mut().zip(columns(block.by_own.as_slice(), rows))
        {
            *entry = dot(column, part);
        }
        first_row += rows;
        first_own += own;
    }
}

fn columns(entries: &[f64], rows: usize) -> std::slice::ChunksExact<'_, f64> {
    // A state without residuals has no columns worth visiting; the chunk size must not be zero.
    entries.chunks_exact(rows.max(1))
}

fn own_part<'a>(own: &'a mut [f64], state: &StateNormal, shared: usize) -> &'a mut [f64] {
    &mut own[state.range.start - shared..state.range.end - shared]
}

#[cfg(test)]
#[path = "normal_tests.rs"]
mod tests;
