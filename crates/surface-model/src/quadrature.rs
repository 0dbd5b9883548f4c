//! Gauss-Legendre quadrature, and the ray heights that follow from it.
//!
//! Rays are placed at the Gauss-Legendre nodes in q = r²: an even function of r, as every axial
//! aberration is, is then integrated over the disc with the highest order a given number of rays
//! can have (G. W. Forbes, J. Opt. Soc. Am. A 5, 1943 (1988)).

/// Nodes and weights of the `count`-point Gauss-Legendre rule on [0, 1]; the weights add up to 1.
///
/// Nodes are the roots of the Legendre polynomial, found by Newton's method from the usual
/// starting values (Abramowitz and Stegun, *Handbook of Mathematical Functions*, 22.16.6 and
/// 25.4.29).
#[must_use]
pub fn gauss_legendre(count: usize) -> Vec<(f64, f64)> {
    let n = count as f64;
    let mut rule = vec![(0.5, 0.0); count];
    for i in 0..count.div_ceil(2) {
        let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (n + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..100 {
            let (value, derivative) = legendre(count, x);
            slope = derivative;
            let step = value / derivative;
            x -= step;
            if step.abs() < 1e-15 {
                break;
            }
        }
        let weight = 1.0 / ((1.0 - x * x) * slope * slope);
        rule[i] = (0.5 * (1.0 - x), weight);
        rule[count - 1 - i] = (0.5 * (1.0 + x), weight);
    }
    rule
}

/// Legendre polynomial of degree `n` and its derivative at x, by the three-term recurrence.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    if n == 0 {
        return (1.0, 0.0);
    }
    for k in 2..=n {
        let k = k as f64;
        (before, value) = (value, ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k);
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

/// Rays across a beam: heights, and the share of the beam's power each stands for.
#[derive(Debug, Clone, PartialEq)]
pub struct BeamSample {
    /// Ray heights in mm, ascending.
    pub heights_mm: Vec<f64>,
    /// Weights, adding up to 1: exp(−2r²/w²) r dr over the heights traced.
    pub weights: Vec<f64>,
}

/// Rays at the `count` Gauss-Legendre nodes in r², from the axis to `reach` times the 1/e²
/// radius `radius_mm`, weighted by the Gaussian beam's intensity.
#[must_use]
pub fn beam_sample(radius_mm: f64, reach: f64, count: usize) -> BeamSample {
    let rule = gauss_legendre(count);
    let power: Vec<f64> =
        rule.iter().map(|&(q, weight)| weight * (-2.0 * q * reach * reach).exp()).collect();
    let total: f64 = power.iter().sum();
    BeamSample {
        heights_mm: rule.iter().map(|&(q, _)| q.sqrt() * reach * radius_mm).collect(),
        weights: power.iter().map(|power| power / total).collect(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn integrates_polynomials_up_to_twice_the_count() {
        for count in 1..=64 {
            let rule = gauss_legendre(count);
            for power in 0..(2 * count).min(40) {
                let sum: f64 = rule.iter().map(|&(x, w)| w * x.powi(power as i32)).sum();
                let exact = 1.0 / (power as f64 + 1.0);
                assert!((sum - exact).abs() < 1e-14, "{count} {power} {sum} {exact}");
            }
        }
    }

    #[test]
    fn agrees_with_the_handbook() {
        // Abramowitz and Stegun, table 25.4, n = 6 on [−1, 1]; value from memory.
        let rule = gauss_legendre(6);
        let (x, w) = (2.0 * rule[5].0 - 1.0, 2.0 * rule[5].1);
        assert!((x - 0.932_469_514_203_152).abs() < 1e-14);
        assert!((w - 0.171_324_492_379_170).abs() < 1e-14);
    }

    #[test]
    fn the_weights_share_the_beam() {
        let sample = beam_sample(1.2, 1.5, 12);
        // ∫ r² dP / ∫ dP over a Gaussian cut at t·w, with a = 2t²: w²/2 · (1 − a/(eᵃ − 1)).
        let mean: f64 = sample.heights_mm.iter().zip(&sample.weights).map(|(r, w)| r * r * w).sum();
        let a = 2.0 * 1.5 * 1.5_f64;
        let exact = 0.72 * (1.0 - a / (a.exp() - 1.0));
        assert!((mean - exact).abs() < 1e-12, "{mean} {exact}");
    }
}
