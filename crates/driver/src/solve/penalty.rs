//! The merit by which a trial point is judged when limits are in play: the exact penalty
//!
//! ```text
//!   φ(x) = ½ |r(x)|² + Σᵢ μᵢ max(0, −gᵢ(x)),     μᵢ > uᵢ
//! ```
//!
//! Its minimum is the constrained minimum itself once every weight exceeds its multiplier (Han,
//! J. Optim. Theory Appl. 22, 297 (1977)). The weights follow Powell's rule (Lecture Notes in
//! Mathematics 630, 144 (1978)): never below the multiplier, and halfway back to it when it falls.

/// How far a weight is kept above its multiplier.
const MARGIN: f64 = 1.5;

/// The weights `μᵢ`.
#[derive(Debug, Clone, Default)]
pub(crate) struct Penalties {
    weights: Vec<f64>,
}

impl Penalties {
    /// Adapts the weights to the multipliers `(limit, u)` of a step; all others count as zero.
    pub(crate) fn cover(&mut self, limits: usize, multipliers: impl Iterator<Item = (usize, f64)>) {
        self.weights.resize(limits, 0.0);
        self.weights.iter_mut().for_each(|weight| *weight /= 2.0);
        for (limit, multiplier) in multipliers {
            let earlier = self.weights[limit];
            let least = MARGIN * multiplier;
            self.weights[limit] = least.max(earlier + least / 2.0);
        }
    }

    /// `Σ μᵢ max(0, −gᵢ)`.
    pub(crate) fn of(&self, limits: impl Iterator<Item = f64>) -> f64 {
        self.weights.iter().zip(limits).map(|(weight, value)| weight * (-value).max(0.0)).sum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn weights_rise_at_once_and_fall_by_halves() {
        let mut penalties = Penalties::default();
        penalties.cover(2, [(1, 4.0)].into_iter());
        assert_eq!(penalties.weights, [0.0, 6.0]);
        penalties.cover(2, [(1, 2.0)].into_iter());
        assert_eq!(penalties.weights, [0.0, 4.5]);
        penalties.cover(2, std::iter::empty());
        assert_eq!(penalties.weights, [0.0, 2.25]);
        assert_eq!(penalties.of([-7.0, -2.0].into_iter()), 4.5);
        assert_eq!(penalties.of([1.0, 2.0].into_iter()), 0.0);
    }
}
