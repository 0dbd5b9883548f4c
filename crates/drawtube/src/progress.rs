//! Progress of the solver on standard error: a line that is redrawn, or a plain one now and then.

use std::ops::ControlFlow;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

use driver::solve::{Observer, Progress};
use driver::tolerance::Watcher;
use indicatif::{ProgressBar, ProgressStyle};

use crate::arguments::ProgressArgument;
use crate::console::Console;
use crate::failure::Failure;
use crate::progress_line::ProgressLine;

/// How often a line is redrawn.
const REDRAW: Duration = Duration::from_millis(100);

/// How progress is told, decided.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Manner {
    /// A line that is redrawn.
    Bar,
    /// A line every so often.
    Plain(Duration),
    /// Nothing.
    Nothing,
}

impl Manner {
    /// What suits the terminal, or what was asked for.
    pub(crate) fn of(asked: ProgressArgument, every: Duration, console: &Console) -> Self {
        match asked {
            ProgressArgument::None => Self::Nothing,
            ProgressArgument::Plain => Self::Plain(every),
            ProgressArgument::Auto if !console.can_redraw() => Self::Plain(every),
            ProgressArgument::Auto | ProgressArgument::Bar => Self::Bar,
        }
    }
}

/// A time given with an option, in units of so many seconds.
pub(crate) fn duration(
    option: &'static str,
    value: f64,
    seconds: f64,
) -> Result<Duration, Failure> {
    Duration::try_from_secs_f64(value * seconds).map_err(|_| Failure::Argument {
        option,
        found: value.to_string(),
        constraint: ZERO_OR_MORE,
    })
}

/// What a time or a merit given with an option has to be.
pub(crate) const ZERO_OR_MORE: &str = "a number, zero or positive";

/// How the merit fell: iteration and merit.
pub(crate) type MeritHistory = Vec<(u64, f64)>;

/// Tells how far the solver is, and passes on the wish to stop.
pub(crate) struct Teller<'a> {
    line: ProgressLine<'a>,
    stop: &'a AtomicBool,
    began: Instant,
    iterations: u64,
    /// Iteration and merit, for a picture; the latest run last.
    history: Vec<MeritHistory>,
}

impl<'a> Teller<'a> {
    pub(crate) fn new(manner: Manner, console: &'a Console, stop: &'a AtomicBool) -> Self {
        let line = ProgressLine::new(manner, console, spinner, REDRAW);
        Self { line, stop, began: Instant::now(), iterations: 0, history: Vec::new() }
    }

    /// A new run of a method begins.
    pub(crate) fn begin(&mut self) {
        self.history.push(Vec::new());
    }

    /// Iteration and merit of every run.
    pub(crate) fn into_history(self) -> Vec<MeritHistory> {
        self.history
    }

    /// Takes the line off the terminal.
    pub(crate) fn finish(&self) {
        self.line.finish();
    }

    fn tell(&self, progress: &Progress<'_>) {
        let seconds = self.began.elapsed().as_secs_f64();
        let rate = self.iterations as f64 / seconds.max(1e-9);
        let crossed = if progress.violation > 1.0 { ", limits crossed" } else { "" };
        let told = format!(
            "{} iterations, {rate:.0} a second, merit {:.6e}{crossed}",
            self.iterations, progress.sum_of_squares
        );
        self.line.tell(&format!("{seconds:.0} s"), &told);
    }
}

fn spinner() -> ProgressBar {
    let bar = ProgressBar::new_spinner();
    if let Ok(style) = ProgressStyle::with_template("{spinner} {elapsed} {wide_msg}") {
        bar.set_style(style);
    }
    bar
}

impl Observer for Teller<'_> {
    fn observe(&mut self, progress: &Progress<'_>) -> ControlFlow<()> {
        self.iterations += 1;
        if let Some(run) = self.history.last_mut() {
            run.push((self.iterations, progress.sum_of_squares));
        }
        if self.line.is_due() {
            self.tell(progress);
        }
        ControlFlow::Continue(())
    }

    fn interrupted(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }
}

/// Tells how many of a known number of things are done, and passes on the wish to stop.
pub(crate) struct Counter<'a> {
    things: &'static str,
    line: ProgressLine<'a>,
    stop: &'a AtomicBool,
    began: Instant,
}

impl<'a> Counter<'a> {
    pub(crate) fn new(
        things: &'static str,
        manner: Manner,
        console: &'a Console,
        stop: &'a AtomicBool,
    ) -> Self {
        let line = ProgressLine::new(manner, console, spinner, REDRAW);
        Self { things, line, stop, began: Instant::now() }
    }

    /// Takes the line off the terminal.
    pub(crate) fn finish(&self) {
        self.line.finish();
    }
}

impl Watcher for Counter<'_> {
    fn built(&mut self, done: u64, of: u64) -> ControlFlow<()> {
        if self.line.is_due() {
            let seconds = self.began.elapsed().as_secs_f64();
            self.line.tell(&format!("{seconds:.0} s"), &format!("{done} of {of} {}", self.things));
        }
        if self.stop.load(Ordering::Relaxed) {
            ControlFlow::Break(())
        } else {
            ControlFlow::Continue(())
        }
    }
}
