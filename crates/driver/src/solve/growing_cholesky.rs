//! A Cholesky factor that takes in and lets go of one row at a time: `NᵀH⁻¹N` of the working set.
//!
//! Taking in a row costs `O(w²)`; letting one go factors anew the rows behind it, which keeps
//! rounding from piling up.

use super::cholesky::{dot, subtract_scaled};

/// What of a new row lies outside the span of the others counts as nothing below this share.
const DEPENDENT: f64 = 1e-11;

/// A symmetric positive definite matrix and its factor `L`, lower triangles by rows.
#[derive(Debug, Clone, Default)]
pub(crate) struct GrowingCholesky {
    matrix: Vec<Vec<f64>>,
    factor: Vec<Vec<f64>>,
}

impl GrowingCholesky {
    /// Empties the matrix.
    pub(crate) fn clear(&mut self) {
        self.matrix.clear();
        self.factor.clear();
    }

    /// The new diagonal's part outside the span of the present rows, `d − cᵀM⁻¹c`; `None` when
    /// the row depends on them.
    pub(crate) fn outside_span(&self, row: &[f64], diagonal: f64) -> Option<f64> {
        let mut inside = row.to_vec();
        self.solve_lower(&mut inside);
        let outside = diagonal - dot(&inside, &inside);
        (outside > DEPENDENT * diagonal).then_some(outside)
    }

    /// Takes in a row that does not depend on the present ones; says whether it did.
    pub(crate) fn push(&mut self, mut row: Vec<f64>, diagonal: f64) -> bool {
        let Some(outside) = self.outside_span(&row, diagonal) else { return false };
        let mut factor = row.clone();
        self.solve_lower(&mut factor);
        factor.push(outside.sqrt());
        row.push(diagonal);
        self.factor.push(factor);
        self.matrix.push(row);
        true
    }

    /// Lets go of a row and its column.
    pub(crate) fn remove(&mut self, position: usize) {
        self.matrix.remove(position);
        self.factor.truncate(position);
        for index in position..self.matrix.len() {
            self.matrix[index].remove(position);
            let row = &self.matrix[index];
            let mut factor = row[..index].to_vec();
            self.solve_lower(&mut factor);
            // Fewer rows span less, so only rounding could make this small.
            let outside = (row[index] - dot(&factor, &factor)).max(DEPENDENT * row[index]);
            factor.push(outside.sqrt());
            self.factor.push(factor);
        }
    }

    /// `x ← M⁻¹ x`.
    pub(crate) fn solve(&self, x: &mut [f64]) {
        self.solve_lower(x);
        for (index, row) in self.factor.iter().enumerate().rev() {
            let (head, tail) = x.split_at_mut(index);
            tail[0] /= row[index];
            subtract_scaled(head, tail[0], &row[..index]);
        }
    }

    fn solve_lower(&self, x: &mut [f64]) {
        for (index, row) in self.factor.iter().enumerate() {
            let (head, tail) = x.split_at_mut(index);
            tail[0] = (tail[0] - dot(&row[..index], head)) / row[index];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn grows_shrinks_and_solves() {
        // M = [[4, 2, 0], [2, 5, 2], [0, 2, 5]], L = [[2, 0, 0], [1, 2, 0], [0, 1, 2]].
        let mut matrix = GrowingCholesky::default();
        assert!(matrix.push(vec![], 4.0));
        assert!(matrix.push(vec![2.0], 5.0));
        assert!(matrix.push(vec![0.0, 2.0], 5.0));
        assert_eq!(matrix.factor, [vec![2.0], vec![1.0, 2.0], vec![0.0, 1.0, 2.0]]);
        let mut x = [6.0, 9.0, 7.0];
        matrix.solve(&mut x);
        assert_eq!(x, [1.0, 1.0, 1.0]);
        // Without the first row and column: [[5, 2], [2, 5]] (1, 1) = (7, 7).
        matrix.remove(0);
        let mut x = [7.0, 7.0];
        matrix.solve(&mut x);
        assert!((x[0] - 1.0).abs() < 1e-15 && (x[1] - 1.0).abs() < 1e-15, "{x:?}");
        matrix.clear();
        matrix.solve(&mut []);
    }

    #[test]
    fn a_dependent_row_is_refused() {
        let mut matrix = GrowingCholesky::default();
        assert!(!matrix.push(vec![], 0.0), "a zero normal depends on nothing at all");
        assert!(matrix.push(vec![], 1.0));
        assert_eq!(matrix.outside_span(&[2.0], 4.0), None);
        assert!(!matrix.push(vec![2.0], 4.0));
        assert_eq!(matrix.outside_span(&[1.0], 4.0), Some(3.0));
    }
}
