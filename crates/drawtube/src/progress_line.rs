//! The line that tells progress on standard error: redrawn, or a plain one now and then.

use std::time::{Duration, Instant};

use indicatif::ProgressBar;

use crate::console::Console;
use crate::progress::Manner;

/// Tells progress when it is due.
pub(crate) struct ProgressLine<'a> {
    console: &'a Console,
    bar: Option<ProgressBar>,
    every: Option<Duration>,
    last: Instant,
}

impl<'a> ProgressLine<'a> {
    /// A line in this manner; a `bar` is redrawn as often as `redraw` says.
    pub(crate) fn new(
        manner: Manner,
        console: &'a Console,
        bar: impl FnOnce() -> ProgressBar,
        redraw: Duration,
    ) -> Self {
        let (bar, every) = match manner {
            Manner::Bar => (Some(bar()), Some(redraw)),
            Manner::Plain(every) => (None, Some(every)),
            Manner::Nothing => (None, None),
        };
        Self { console, bar, every, last: Instant::now() }
    }

    /// Whether it is time to tell again; if so, the next time is counted from now.
    pub(crate) fn is_due(&mut self) -> bool {
        let due = self.every.is_some_and(|every| self.last.elapsed() >= every);
        if due {
            self.last = Instant::now();
        }
        due
    }

    /// The bar, where there is one.
    pub(crate) fn bar(&self) -> Option<&ProgressBar> {
        self.bar.as_ref()
    }

    /// Tells how far it is: on the bar, or in a line that begins with the time.
    pub(crate) fn tell(&self, time: &str, told: &str) {
        match &self.bar {
            Some(bar) => bar.set_message(told.to_owned()),
            None => self.console.say(&format!("{time}: {told}")),
        }
    }

    /// Says something without spoiling the bar.
    pub(crate) fn say(&self, text: &str) {
        match &self.bar {
            Some(bar) => bar.suspend(|| self.console.say(text)),
            None => self.console.say(text),
        }
    }

    /// Takes the bar off the terminal.
    pub(crate) fn finish(&self) {
        if let Some(bar) = &self.bar {
            bar.finish_and_clear();
        }
    }
}
