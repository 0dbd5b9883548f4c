//! From optical paths to wavefront residuals: piston removed, weighted by the beam's power.
//!
//! xⱼ → scale √wⱼ (xⱼ − Σ wᵢxᵢ), for the residuals and for each column of their Jacobian alike.
//! The squares add up to scale² times the weighted variance.

use nalgebra::{Dyn, MatrixViewMut, U1};
use surface_model::bundle::Bundle;
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

    /// Columns of the Jacobian for the rays of one train: for each variable, the quantities of the train that follow it,
    /// with factors.
    pub(crate) fn columns(
        &self,
        (bundle, train): (&Bundle, usize),
        columns: &[Vec<(usize, f64)>],
        scale: f64,
        out: &mut MatrixViewMut<'_, f64, Dyn, Dyn, U1, Dyn>,
    ) {
        for (column, follows) in columns.iter().enumerate() {
            let block = |block: usize| {
                let mut sum = Lanes::ZERO;
                for &(quantity, factor) in follows {
                    let by = bundle.path_derivative_vector(train, block, quantity);
                    sum = sum + Lanes::splat(factor) * by;
                }
                sum
            };
            let blocks = (0..self.weights.len()).map(block);
            let products = self.weights.iter().zip(blocks.clone());
            let mean: f64 = products.map(|(w, x)| (*w * x).sum()).sum();
            let mut into = out.column_mut(column);
            self.centre(blocks, mean, scale, into.as_mut_slice());
        }
    }

    #[inline]
    fn centre(&self, blocks: impl Iterator<Item = Lanes>, mean: f64, scale: f64, out: &mut [f64]) {
        let (mean, scale) = (Lanes::splat(mean), Lanes::splat(scale));
        for ((root, x), out) in self.roots.iter().zip(blocks).zip(out.chunks_mut(LANES)) {
            let centred = scale * *root * (x - mean);
            out.copy_from_slice(&centred.0[..out.len()]);
        }
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
