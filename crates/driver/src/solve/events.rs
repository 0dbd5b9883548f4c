//! What the solvers tell whoever watches, and how the watcher asks them to stop.

use std::ops::ControlFlow;
use std::sync::atomic::{AtomicBool, Ordering};

/// One iteration is over.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Progress<'a> {
    /// Iterations done, this one included.
    pub iteration: u64,
    /// Sum of squares at [`Self::variables`].
    pub sum_of_squares: f64,
    /// Largest violation of a limit at [`Self::variables`], in units of its tolerance.
    pub violation: f64,
    /// The damping the iteration was made with; `None` for a method without one.
    pub damping: Option<f64>,
    /// Length of the step that was tried, in units of the variables' scales.
    pub step: f64,
    /// Whether the step was taken.
    pub accepted: bool,
    /// The best point so far.
    pub variables: &'a [f64],
}

/// Watches a solver at work.
pub trait Observer {
    /// Called after every iteration; `Break` stops the solver.
    fn observe(&mut self, progress: &Progress<'_>) -> ControlFlow<()>;

    /// Asked before every iteration, and between evaluations where they are slow: whether the
    /// user wants to stop.
    fn interrupted(&self) -> bool {
        false
    }
}

impl<F: FnMut(&Progress<'_>) -> ControlFlow<()>> Observer for F {
    fn observe(&mut self, progress: &Progress<'_>) -> ControlFlow<()> {
        self(progress)
    }
}

/// Watches nothing and never stops anything.
#[derive(Debug, Clone, Copy, Default)]
pub struct Unwatched;

impl Observer for Unwatched {
    fn observe(&mut self, _: &Progress<'_>) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }
}

/// Adds a stop flag, set from a signal handler or another thread, to an observer.
#[derive(Debug)]
pub(crate) struct Interruptible<'a, O> {
    /// Raised by whoever wants the solver to stop.
    pub(crate) stop: &'a AtomicBool,
    /// Watches.
    pub(crate) observer: O,
}

impl<O: Observer> Observer for Interruptible<'_, O> {
    fn observe(&mut self, progress: &Progress<'_>) -> ControlFlow<()> {
        self.observer.observe(progress)
    }

    fn interrupted(&self) -> bool {
        self.stop.load(Ordering::Relaxed) || self.observer.interrupted()
    }
}
