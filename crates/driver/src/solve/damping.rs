//! The damping policy alone: how `λ` answers to the steps it brought about.
//!
//! A step that fails doubles the damping; one that succeeds divides it by five. Transtrum and
//! Sethna (arXiv:1201.5885, section on delayed gratification) give the reason for raising little
//! and lowering more: a step taken as soon as one is acceptable follows the floor of a curved
//! valley instead of bouncing off its walls. Failures in a row raise faster, `2, 4, 8, …`
//! (Nielsen, IMM-REP-1999-05, Technical University of Denmark), so that a hopeless region is left
//! in a few evaluations.

/// Smallest damping: below it the damped matrix is the undamped one to working precision.
const SMALLEST: f64 = 1e-16;
/// Largest damping: a step this short changes nothing in double precision.
const LARGEST: f64 = 1e20;
const LOWER_BY: f64 = 5.0;
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

    /// A step was accepted.
    pub(crate) fn lower(&mut self) {
        self.lambda = (self.lambda / LOWER_BY).max(SMALLEST);
        self.raise_by = RAISE_BY;
    }

    /// A step was rejected.
    pub(crate) fn raise(&mut self) {
        self.lambda *= self.raise_by;
        self.raise_by *= 2.0;
    }

    /// A step that was accepted had to be taken back: undoes the lowering and raises.
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
    fn success_divides_by_five_down_to_the_floor() {
        let mut damping = Damping::new(1.0);
        damping.lower();
        assert_eq!(damping.lambda(), 0.2);
        let mut least = Damping::new(SMALLEST);
        least.lower();
        assert_eq!(least.lambda(), SMALLEST);
    }

    #[test]
    fn failures_in_a_row_raise_faster_and_success_forgets_them() {
        let mut damping = Damping::new(1.0);
        damping.raise();
        assert_eq!(damping.lambda(), 2.0);
        damping.raise();
        assert_eq!(damping.lambda(), 8.0);
        damping.lower();
        damping.raise();
        assert_eq!(damping.lambda(), 3.2);
    }

    #[test]
    fn a_step_taken_back_leaves_more_damping_than_before_it() {
        let mut damping = Damping::new(1.0);
        damping.lower();
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
