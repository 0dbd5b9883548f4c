//! The damping policy alone: how `λ` answers to the steps it brought about.
//!
//! Nielsen's rule (IMM-REP-1999-05, Technical University of Denmark): after an accepted step
//! with gain ratio `ρ` (actual over predicted reduction)
//!
//! ```text
//!   λ ← λ · max(1/5, 1 − (2ρ − 1)³)
//! ```
//!
//! which lowers it when the model was good, leaves it at `ρ = ½` and raises it up to twofold
//! below; after failures in a row it grows by 2, 4, 8, …. Nielsen's own floor is 1/3; 1/5 is
//! Transtrum and Sethna's (arXiv:1201.5885). Against doubling on failure and dividing by five on
//! success it took half the steps on beam expanders, because it does not run into a wall again
//! after every success.

/// Smallest damping: below it the damped matrix is the undamped one to working precision.
const SMALLEST: f64 = 1e-16;
/// Largest damping: a step this short changes nothing in double precision.
const LARGEST: f64 = 1e20;
/// Most by which one success lowers the damping.
const LOWER_BY: f64 = 5.0;
/// By how much the first failure raises it.
const RAISE_BY: f64 = 2.0;

/// The damping `λ`, dimensionless: a share of the squared column lengths.
#[derive(Debug, Clone)]
pub(crate) struct Damping {
    lambda: f64,
    raise_by: f64,
}

impl Damping {
    /// Starts at `lambda`.
    pub(crate) fn new(lambda: f64) -> Self {
        Self { lambda, raise_by: RAISE_BY }
    }

    /// `λ`.
    pub(crate) fn lambda(&self) -> f64 {
        self.lambda
    }

    /// A step was accepted, with this gain ratio.
    pub(crate) fn adapt(&mut self, gain: f64) {
        let factor = (1.0 - (2.0 * gain - 1.0).powi(3)).max(1.0 / LOWER_BY);
        self.lambda = (self.lambda * factor).max(SMALLEST);
        self.raise_by = RAISE_BY;
    }

    /// A step was rejected.
    pub(crate) fn raise(&mut self) {
        self.lambda *= self.raise_by;
        self.raise_by *= 2.0;
    }

    /// A step that was accepted had to be taken back: undoes the lowering, if any, and raises.
    pub(crate) fn retract(&mut self) {
        self.lambda *= LOWER_BY;
        self.raise();
    }

    /// Whether `λ` has grown beyond all use.
    pub(crate) fn has_overflowed(&self) -> bool {
        self.lambda > LARGEST
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_good_model_lowers_by_five_down_to_the_floor() {
        let mut damping = Damping::new(1.0);
        damping.adapt(1.0);
        assert_eq!(damping.lambda(), 0.2);
        damping.adapt(100.0);
        assert!((damping.lambda() - 0.04).abs() < 1e-16);
        let mut least = Damping::new(SMALLEST);
        least.adapt(1.0);
        assert_eq!(least.lambda(), SMALLEST);
    }

    #[test]
    fn a_middling_model_changes_nothing_and_a_poor_one_raises() {
        let mut damping = Damping::new(1.0);
        damping.adapt(0.5);
        assert_eq!(damping.lambda(), 1.0);
        damping.adapt(0.0);
        assert_eq!(damping.lambda(), 2.0);
    }

    #[test]
    fn failures_in_a_row_raise_faster_and_success_forgets_them() {
        let mut damping = Damping::new(1.0);
        damping.raise();
        assert_eq!(damping.lambda(), 2.0);
        damping.raise();
        assert_eq!(damping.lambda(), 8.0);
        damping.adapt(1.0);
        damping.raise();
        assert_eq!(damping.lambda(), 3.2);
    }

    #[test]
    fn a_step_taken_back_leaves_more_damping_than_before_it() {
        let mut damping = Damping::new(1.0);
        damping.adapt(1.0);
        damping.retract();
        assert_eq!(damping.lambda(), 2.0);
    }

    #[test]
    fn overflow_is_noticed() {
        let mut damping = Damping::new(LARGEST);
        assert!(!damping.has_overflowed());
        damping.raise();
        assert!(damping.has_overflowed());
    }
}
