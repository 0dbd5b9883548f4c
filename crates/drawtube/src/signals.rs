//! SIGINT and SIGTERM: the first asks the work to stop, the second ends the program at once.

use std::io;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};

use signal_hook::consts::{SIGINT, SIGTERM};
use signal_hook::flag;

use crate::exit_status::ExitStatus;

/// Whether and by what the program was asked to stop.
#[derive(Debug, Default)]
pub(crate) struct StopSignal {
    stop: Arc<AtomicBool>,
    last: Arc<AtomicUsize>,
}

impl StopSignal {
    /// Begins to listen.
    pub(crate) fn listen() -> io::Result<Self> {
        let signals = Self::default();
        for (signal, status) in
            [(SIGINT, ExitStatus::Interrupted), (SIGTERM, ExitStatus::Terminated)]
        {
            // In this order: the first signal finds the flag down and only raises it.
            flag::register_conditional_shutdown(signal, status as i32, Arc::clone(&signals.stop))?;
            flag::register_usize(signal, Arc::clone(&signals.last), signal as usize)?;
            flag::register(signal, Arc::clone(&signals.stop))?;
        }
        Ok(signals)
    }

    /// The flag that is raised by a signal.
    pub(crate) fn flag(&self) -> &AtomicBool {
        &self.stop
    }

    /// The exit status, if a signal came.
    pub(crate) fn status(&self) -> Option<ExitStatus> {
        if !self.stop.load(Ordering::Relaxed) {
            return None;
        }
        let terminated = self.last.load(Ordering::Relaxed) == SIGTERM as usize;
        Some(if terminated { ExitStatus::Terminated } else { ExitStatus::Interrupted })
    }
}
