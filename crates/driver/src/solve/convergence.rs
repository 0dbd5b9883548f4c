//! When enough is enough: the tests that end a run of damped least squares, each with its
//! inequality.

use super::outcome::Stopped;
use super::settings::Settings;

/// Moré's second test, `|D p| ≤ SHORT · |D x|` (Lecture Notes in Mathematics 630, 105 (1978)).
const SHORT: f64 = 1e-12;

/// So many small steps in a row are the end: optical merit functions creep along flat valleys.
const IN_A_ROW: u32 = 3;

/// What one tried step promised and brought.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Reduction {
    /// The merit `φ` before the step.
    pub(crate) merit: f64,
    /// What the linear model promised.
    pub(crate) predicted: f64,
    /// What came of it; negative when the merit rose.
    pub(crate) actual: f64,
}

impl Reduction {
    /// Gain ratio: what came of what was promised.
    pub(crate) fn gain(self) -> f64 {
        self.actual / self.predicted
    }

    /// A step is taken when it brings a ten-thousandth of what it promised (Moré 1978).
    pub(crate) fn is_acceptable(self) -> bool {
        self.actual > 0.0 && self.actual >= 1e-4 * self.predicted
    }

    /// `predicted ≤ share · φ` and `|actual| ≤ share · φ`.
    fn is_quiet(self, share: f64) -> bool {
        let threshold = share * self.merit;
        self.predicted <= threshold && self.actual.abs() <= threshold
    }
}

/// Counts small steps in a row.
#[derive(Debug, Clone, Default)]
pub(crate) struct Convergence {
    quiet: u32,
    short: u32,
}

impl Convergence {
    /// Takes note of a tried step: its reduction, `|D p|` and `|D x|`.
    pub(crate) fn note(
        &mut self,
        settings: &Settings,
        reduction: Reduction,
        step: f64,
        point: f64,
    ) -> Option<Stopped> {
        self.quiet = if reduction.is_quiet(settings.reduction()) { self.quiet + 1 } else { 0 };
        self.short = if step <= SHORT * point { self.short + 1 } else { 0 };
        if self.quiet >= IN_A_ROW {
            Some(Stopped::MeritSettled)
        } else if self.short >= IN_A_ROW {
            Some(Stopped::StepSmall)
        } else {
            None
        }
    }
}

/// `|(Jᵀr − N u)ⱼ| ≤ share · |Jⱼ| |r|` for every variable.
pub(crate) fn is_stationary(
    leftover_gradient: &[f64],
    column_squares: &[f64],
    sum_of_squares: f64,
    share: f64,
) -> bool {
    leftover_gradient
        .iter()
        .zip(column_squares)
        .all(|(gradient, square)| gradient.abs() <= share * (square * sum_of_squares).sqrt())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn reduction(predicted: f64, actual: f64) -> Reduction {
        Reduction { merit: 1.0, predicted, actual }
    }

    #[test]
    fn one_quiet_step_is_not_the_end_but_three_in_a_row_are() {
        let settings = Settings::default();
        let mut convergence = Convergence::default();
        let mut note = |actual| convergence.note(&settings, reduction(1e-11, actual), 1.0, 1.0);
        assert_eq!(note(1e-11), None);
        assert_eq!(note(1e-11), None);
        assert_eq!(note(1e-3), None, "a lively step starts the count anew");
        assert_eq!(note(-1e-11), None);
        assert_eq!(note(1e-11), None);
        assert_eq!(note(1e-11), Some(Stopped::MeritSettled));
    }

    #[test]
    fn short_steps_in_a_row_are_the_end() {
        let settings = Settings::default();
        let mut convergence = Convergence::default();
        let mut note = |step| convergence.note(&settings, reduction(1.0, 0.5), step, 10.0);
        assert_eq!(note(1e-11), None);
        assert_eq!(note(1e-11), None);
        assert_eq!(note(1e-11), Some(Stopped::StepSmall));
    }

    #[test]
    fn a_step_must_bring_some_of_what_it_promised() {
        assert!(reduction(1.0, 1e-4).is_acceptable());
        assert!(!reduction(1.0, 0.9e-4).is_acceptable());
        assert!(!reduction(-1.0, -0.5).is_acceptable());
        assert!(!reduction(1.0, f64::NAN).is_acceptable());
    }

    #[test]
    fn stationary_means_orthogonal_to_every_column() {
        assert!(is_stationary(&[1e-11, 0.0], &[4.0, 0.0], 1.0, 1e-11));
        assert!(!is_stationary(&[1e-11, 1e-30], &[4.0, 0.0], 1.0, 1e-11));
    }
}
