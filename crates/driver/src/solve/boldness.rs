//! Steps uphill: when to take one, and when to go back.
//!
//! A narrow valley with a bend in it is left by every step of a useful length: the merit rises by a
//! little on the far side, the step is rejected, the damping grows, and the method creeps. Transtrum
//! and Sethna (arXiv:1201.5885) take such a step all the same if it goes on in the direction of the
//! last one. With `β` the cosine of the angle between the two in the metric `D` and `φ_best` the
//! least merit so far,
//!
//! ```text
//!   (1 − β)² φ(x + p) ≤ φ_best        and, here,        φ(x + p) ≤ 4 φ_best.
//! ```
//!
//! Their first condition alone lets a step straight on climb to any height. From poor starts that
//! led over passes into other valleys (MGH09 and MGH17 of NIST's certified regressions were lost);
//! on beam expanders such heights gain little.
//!
//! Near the minimum plain steps converge by themselves: a step that promises less than
//! [`WORTHWHILE`] of the merit is not taken uphill. Without that the last steps went astray, and
//! whole runs took longer than without steps uphill at all.
//!
//! What was best is kept: the point, the column lengths the scaling remembers, and the damping.
//! After [`PATIENCE`] steps in a row without improving on it the method goes back there, as if the
//! first step uphill had been rejected, and takes no other until it has improved (the watchdog of
//! Chamberlain, Powell, Lemaréchal and Pedersen, Math. Programming Study 16, 1 (1982)). So the best
//! merits fall without end as those of the cautious method do.

use super::convergence::Reduction;

/// Steps that may pass without improving on the best merit.
const PATIENCE: u32 = 20;

/// How far up, over the best merit: residuals twice as large.
const HIGHEST: f64 = 4.0;

/// Least promise of a step uphill, as a share of the merit where it starts.
const WORTHWHILE: f64 = 1e-4;

/// Below this merit no step goes uphill: with residuals in units of what is wanted, every goal is
/// then met to a ten-thousandth, and a long way round would gain what nobody can see.
const LEAST_MERIT: f64 = 1e-8;

/// Whether steps uphill are allowed, and for how long yet.
#[derive(Debug, Clone, Default)]
pub(crate) struct Boldness {
    /// Steps taken since the best merit was last improved on.
    since_best: u32,
    /// After it has gone back: no steps uphill before the best merit is improved on.
    chastened: bool,
}

impl Boldness {
    /// Whether a step may be taken although it brings the merit up; `cosine` is that of its angle
    /// to the last step taken.
    pub(crate) fn allows(&self, cosine: f64, reduction: Reduction, best: f64) -> bool {
        let onward = 1.0 - cosine;
        let merit = reduction.merit - reduction.actual;
        !self.chastened
            && best > LEAST_MERIT
            && reduction.predicted >= WORTHWHILE * reduction.merit
            && merit <= HIGHEST * best
            && onward * onward * merit <= best
    }

    /// A step was taken.
    pub(crate) fn took_step(&mut self, improved_on_best: bool) {
        if improved_on_best {
            *self = Self::default();
        } else {
            self.since_best += 1;
        }
    }

    /// Whether the best merit is to be returned to.
    pub(crate) fn is_spent(&self) -> bool {
        self.since_best >= PATIENCE
    }

    /// The best point was returned to.
    pub(crate) fn went_back(&mut self) {
        *self = Self { since_best: 0, chastened: true };
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// From the best merit, 1, to `merit`, with half of it promised.
    fn to(merit: f64) -> Reduction {
        Reduction { merit: 1.0, predicted: 0.5, actual: 1.0 - merit }
    }

    #[test]
    fn uphill_only_onward_and_not_too_high() {
        let boldness = Boldness::default();
        // (1 − 0.5)² · 4 = 1.
        assert!(boldness.allows(0.5, to(4.0), 1.0));
        assert!(!boldness.allows(0.49, to(4.0), 1.0));
        assert!(!boldness.allows(1.0, to(4.1), 1.0), "however straight on");
        assert!(!boldness.allows(-0.2, to(1.0), 1.0), "never on turning round");
        assert!(!boldness.allows(f64::NAN, to(1.0), 1.0), "never on the first step");
    }

    #[test]
    fn uphill_only_for_something() {
        let boldness = Boldness::default();
        let promising = |predicted| Reduction { merit: 1.0, predicted, actual: -0.5 };
        assert!(boldness.allows(1.0, promising(1.1e-4), 1.0));
        assert!(!boldness.allows(1.0, promising(0.9e-4), 1.0));
        let little = Reduction { merit: 1e-9, predicted: 1e-9, actual: 0.0 };
        assert!(!boldness.allows(1.0, little, 1e-9));
    }

    #[test]
    fn patience_ends_and_boldness_is_earned_anew() {
        let mut boldness = Boldness::default();
        (1..PATIENCE).for_each(|_| boldness.took_step(false));
        assert!(!boldness.is_spent());
        boldness.took_step(false);
        assert!(boldness.is_spent());
        boldness.went_back();
        assert!(!boldness.is_spent() && !boldness.allows(1.0, to(1.0), 1.0));
        boldness.took_step(true);
        assert!(boldness.allows(1.0, to(1.0), 1.0));
    }
}
