//! Watches the night: takes what the starts find, and tells how far it is.

use std::sync::atomic::{AtomicBool, Ordering};

use driver::overnight::Finds;
use driver::run::{Earlier, Finished, Saving, Tally, Watcher};
use driver::search::StartResult;

use super::request::Request;
use crate::run_progress::RunTeller;
use crate::told::Told;

/// How many merits a line of progress tells.
const BEST_FEW: usize = 3;

/// Takes what the starts find.
pub(super) struct NightWatch<'a> {
    teller: RunTeller<'a>,
    stop: &'a AtomicBool,
    finds: Finds,
    quiet: bool,
    run: String,
}

impl<'a> NightWatch<'a> {
    pub(super) fn new(teller: RunTeller<'a>, stop: &'a AtomicBool, request: &Request) -> Self {
        Self {
            teller,
            stop,
            finds: Finds::new(usize::from(request.keep)),
            quiet: request.run_as.told == Told::Nothing,
            run: request.run.display().to_string(),
        }
    }

    /// What was found, when the run is over.
    pub(super) fn over(self) -> (Finds, RunTeller<'a>) {
        (self.finds, self.teller)
    }
}

impl Watcher<StartResult> for NightWatch<'_> {
    fn earlier(&mut self, earlier: &Earlier) {
        self.teller.earlier(&self.run, earlier, self.quiet);
    }

    fn found(&mut self, finished: Finished<StartResult>) {
        self.finds.insert(finished);
    }

    fn tick(&mut self, tally: &Tally) {
        let finds = &self.finds;
        self.teller.tick(tally, || {
            finds.best_merits(BEST_FEW).into_iter().map(|merit| format!("{merit:.4}")).collect()
        });
    }

    fn saving(&mut self, saving: Saving<'_>) {
        self.teller.saving(&self.run, &saving, "the search");
    }

    fn interrupted(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }
}
