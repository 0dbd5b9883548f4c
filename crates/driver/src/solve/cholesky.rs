//! Cholesky factors in place, for the small symmetric matrices of a step.
//!
//! nalgebra's own factorisation takes the matrix by value; a step factorises the same handful of
//! matrices once per damping, so these work in buffers that live as long as the solver. Only the
//! lower triangle is read and written.

use nalgebra::DMatrix;

/// A pivot smaller than this share of its diagonal entry is rounding, not information.
const SMALLEST_PIVOT: f64 = 1e-15;

/// The matrix is not positive definite to working precision.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("the matrix is not positive definite to working precision")]
pub(crate) struct NotPositiveDefinite;

/// Replaces the lower triangle of `matrix` by its factor `L`, `matrix = L Lᵀ`.
pub(crate) fn factorise(matrix: &mut DMatrix<f64>) -> Result<(), NotPositiveDefinite> {
    let size = matrix.nrows();
    let entries = matrix.as_mut_slice();
    for column in 0..size {
        let (done, rest) = entries.split_at_mut(column * size);
        let target = &mut rest[column..size];
        let diagonal = target[0];
        for earlier in done.chunks_exact(size) {
            let factor = earlier[column];
            subtract_scaled(target, factor, &earlier[column..]);
        }
        let pivot = target[0];
        // Written so that a NaN fails too.
        let sound = pivot > SMALLEST_PIVOT * diagonal && pivot.is_finite();
        if !sound {
            return Err(NotPositiveDefinite);
        }
        let root = pivot.sqrt();
        target[0] = root;
        target[1..].iter_mut().for_each(|entry| *entry /= root);
    }
    Ok(())
}

/// `x ← L⁻¹ x`.
pub(crate) fn solve_lower(factor: &DMatrix<f64>, x: &mut [f64]) {
    let size = factor.nrows();
    for (column, entries) in factor.as_slice().chunks_exact(size.max(1)).enumerate() {
        let (head, tail) = x.split_at_mut(column + 1);
        head[column] /= entries[column];
        subtract_scaled(tail, head[column], &entries[column + 1..]);
    }
}

/// `x ← L⁻ᵀ x`.
pub(crate) fn solve_upper(factor: &DMatrix<f64>, x: &mut [f64]) {
    let size = factor.nrows();
    for (column, entries) in factor.as_slice().chunks_exact(size.max(1)).enumerate().rev() {
        let (head, tail) = x.split_at_mut(column + 1);
        head[column] = (head[column] - dot(&entries[column + 1..], tail)) / entries[column];
    }
}

/// `Σ aᵢ bᵢ`, in four running sums so that it vectorises; always the same order.
pub(crate) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 4];
    let (a_chunks, b_chunks) = (a.chunks_exact(4), b.chunks_exact(4));
    let tail: f64 = a_chunks.remainder().iter().zip(b_chunks.remainder()).map(|(x, y)| x * y).sum();
    for (x, y) in a_chunks.zip(b_chunks) {
        for lane in 0..4 {
            sums[lane] += x[lane] * y[lane];
        }
    }
    (sums[0] + sums[1]) + (sums[2] + sums[3]) + tail
}

/// `y ← y − factor · x`.
pub(crate) fn subtract_scaled(y: &mut [f64], factor: f64, x: &[f64]) {
    y.iter_mut().zip(x).for_each(|(y, x)| *y -= factor * x);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn factors_a_matrix_worked_by_hand() {
        // [[4, 2], [2, 5]] = [[2, 0], [1, 2]] [[2, 1], [0, 2]]
        let mut matrix = DMatrix::from_row_slice(2, 2, &[4.0, 2.0, 2.0, 5.0]);
        factorise(&mut matrix).unwrap();
        assert_eq!((matrix[(0, 0)], matrix[(1, 0)], matrix[(1, 1)]), (2.0, 1.0, 2.0));
        let mut x = [8.0, 12.0];
        solve_lower(&matrix, &mut x);
        assert_eq!(x, [4.0, 4.0]);
        solve_upper(&matrix, &mut x);
        assert_eq!(x, [1.0, 2.0]);
    }

    #[test]
    fn refuses_what_is_not_positive_definite() {
        let mut singular = DMatrix::from_row_slice(2, 2, &[1.0, 1.0, 1.0, 1.0]);
        assert_eq!(factorise(&mut singular), Err(NotPositiveDefinite));
        let mut unknown = DMatrix::from_element(1, 1, f64::NAN);
        assert_eq!(factorise(&mut unknown), Err(NotPositiveDefinite));
        let mut endless = DMatrix::from_element(1, 1, f64::INFINITY);
        assert_eq!(factorise(&mut endless), Err(NotPositiveDefinite));
        let mut zero = DMatrix::from_element(1, 1, 0.0);
        assert_eq!(factorise(&mut zero), Err(NotPositiveDefinite));
    }

    #[test]
    fn nothing_is_a_matrix_too() {
        let mut empty = DMatrix::zeros(0, 0);
        factorise(&mut empty).unwrap();
        solve_lower(&empty, &mut []);
        solve_upper(&empty, &mut []);
        assert_eq!(dot(&[], &[]), 0.0);
    }

    #[test]
    fn dot_counts_every_entry_once() {
        let ones = [1.0; 11];
        assert_eq!(dot(&ones, &ones), 11.0);
    }
}
