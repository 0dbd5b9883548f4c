//! From optical paths to wavefront residuals: piston removed, weighted by the beam's power.
//!
//! xⱼ → scale √wⱼ (xⱼ − Σ wᵢxᵢ), for the residuals and for each column of their Jacobian alike.
//! The squares add up to scale² times the weighted variance.

use std::ops::Range;

use multiversion::multiversion;
use nalgebra::DMatrix;
use surface_model::bundle::{Bundle, PathDerivatives};
use surface_model::real::{LANES, Lanes, Real};

/// The weights of the rays, eight side by side; lanes without a ray weigh nothing.
#[derive(Debug, Clone)]
pub(crate) struct RayWeights {
    weights: Vec<Lanes>,
    roots: Vec<Lanes>,
}

impl RayWeights {
    /// Weights that add up to 1, one a ray.
    pub(crate) fn new(weights: &[f64]) -> Self {
        let weights: Vec<Lanes> = weights.chunks(LANES).map(padded).collect();
        let roots = weights.iter().map(|weights| weights.sqrt()).collect();
        Self { weights, roots }
    }

    /// Residuals from the optical paths of the rays.
    pub(crate) fn residuals(&self, paths: &[f64], scale: f64, out: &mut [f64]) {
        let blocks = paths.chunks(LANES).map(padded);
        let mean: f64 = self.weights.iter().zip(blocks.clone()).map(|(w, x)| (*w * x).sum()).sum();
        self.centre(blocks, mean, scale, out);
    }

    /// Columns of the Jacobian, written to the `rows` of the rays of one train: for each variable,
    /// the quantities of the train that follow it, with factors.
    pub(crate) fn columns(
        &self,
        (bundle, train): (&Bundle, usize),
        columns: &[Vec<(usize, f64)>],
        scale: f64,
        (rows, out): (Range<usize>, &mut DMatrix<f64>),
    ) {
        write_columns(self, (bundle, train), columns, scale, (rows, out));
    }

    #[inline(always)]
    fn centre(&self, blocks: impl Iterator<Item = Lanes>, mean: f64, scale: f64, out: &mut [f64]) {
        let (mean, scale) = (Lanes::splat(mean), Lanes::splat(scale));
        for ((root, x), out) in self.roots.iter().zip(blocks).zip(out.chunks_mut(LANES)) {
            put(scale * *root * (x - mean), out);
        }
    }
}

/// [`RayWeights::columns`] in the widest vectors the processor has.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl+avx2", "x86_64+avx2", "aarch64+neon"))]
fn write_columns(
    rays: &RayWeights,
    (bundle, train): (&Bundle, usize),
    columns: &[Vec<(usize, f64)>],
    scale: f64,
    (rows, out): (Range<usize>, &mut DMatrix<f64>),
) {
    let Some((first_weights, further_weights)) = rays.weights.split_first() else { return };
    let height = out.nrows();
    let first = bundle.path_derivative_vector(train, 0);
    // Without rows there are no columns to write, but a chunk must not be empty.
    let out = out.as_mut_slice().chunks_exact_mut(height.max(1));
    for (follows, out) in columns.iter().zip(out) {
        let along = |from: PathDerivatives<'_>| {
            let mut sum = Lanes::ZERO;
            for &(quantity, factor) in follows {
                sum = sum + Lanes::splat(factor) * from.by(quantity);
            }
            sum
        };
        // Most beams have no more rays than lanes: the first vector is not worked out twice.
        let here = along(first);
        let further = (1..rays.weights.len())
            .map(|vector| along(bundle.path_derivative_vector(train, vector)));
        let mut mean = (*first_weights * here).sum();
        for (weights, along) in further_weights.iter().zip(further.clone()) {
            mean += (*weights * along).sum();
        }
        let all = std::iter::once(here).chain(further);
        rays.centre(all, mean, scale, &mut out[rows.clone()]);
    }
}

/// Writes as many of the eight as there is room for, in pieces of fixed length.
#[inline(always)]
fn put(lanes: Lanes, out: &mut [f64]) {
    if let Some(out) = out.first_chunk_mut::<LANES>() {
        *out = lanes.0;
        return;
    }
    let mut lanes = &lanes.0[..];
    let mut rest = out;
    if rest.len() >= 4 {
        let (four, behind) = rest.split_at_mut(4);
        four.copy_from_slice(&lanes[..4]);
        (rest, lanes) = (behind, &lanes[4..]);
    }
    for (out, lane) in rest.iter_mut().zip(lanes) {
        *out = *lane;
    }
}

/// Up to eight numbers, with zeros behind them.
#[inline]
fn padded(numbers: &[f64]) -> Lanes {
    let mut lanes = Lanes::ZERO;
    lanes.0[..numbers.len()].copy_from_slice(numbers);
    lanes
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn squares_add_up_to_the_weighted_variance() {
        let weights: Vec<f64> = (1..=11).map(|i| f64::from(i) / 66.0).collect();
        let paths: Vec<f64> = (0..11).map(|i| (f64::from(i) * 0.7).sin() + 5.0).collect();
        let mut out = vec![0.0; 11];
        RayWeights::new(&weights).residuals(&paths, 3.0, &mut out);
        let mean: f64 = weights.iter().zip(&paths).map(|(w, x)| w * x).sum();
        let variance: f64 = weights.iter().zip(&paths).map(|(w, x)| w * (x - mean).powi(2)).sum();
        let squares: f64 = out.iter().map(|x| x * x).sum();
        assert!((squares - 9.0 * variance).abs() < 1e-14);
    }
}
