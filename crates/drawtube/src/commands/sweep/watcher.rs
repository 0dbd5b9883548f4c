//! Watches a sweep: takes what the points come to, and tells how far it is.

use std::collections::BTreeMap;
use std::path::Path;
use std::sync::atomic::{AtomicBool, Ordering};

use driver::run::{Earlier, Finished, Saving, Tally, Watcher};
use driver::sweep::{PointResult, Sweep};

use super::request::Request;
use crate::run_progress::RunTeller;
use crate::told::Told;

/// Takes what the points come to.
pub(super) struct SweepWatch<'a> {
    teller: RunTeller<'a>,
    stop: &'a AtomicBool,
    sweep: &'a Sweep,
    points: BTreeMap<u64, PointResult>,
    best: Option<f64>,
    quiet: bool,
    run: String,
}

impl<'a> SweepWatch<'a> {
    pub(super) fn new(
        teller: RunTeller<'a>,
        stop: &'a AtomicBool,
        request: &'a Request,
        run: &Path,
    ) -> Self {
        Self {
            teller,
            stop,
            sweep: &request.sweep,
            points: BTreeMap::new(),
            best: None,
            quiet: request.run_as.told == Told::Nothing,
            run: run.display().to_string(),
        }
    }

    /// All finished points, in order of their numbers.
    pub(super) fn over(self) -> Vec<PointResult> {
        self.teller.finish();
        self.points.into_values().collect()
    }
}

impl Watcher<PointResult> for SweepWatch<'_> {
    fn earlier(&mut self, earlier: &Earlier) {
        self.teller.earlier(&self.run, earlier, self.quiet);
    }

    fn found(&mut self, finished: Finished<PointResult>) {
        let point = finished.done;
        self.sweep.note(&point);
        let merit = point.reached.as_ref().map(|reached| reached.merit);
        self.best = [self.best, merit].into_iter().flatten().reduce(f64::min);
        self.points.insert(point.number, point);
    }

    fn tick(&mut self, tally: &Tally) {
        let best = self.best;
        self.teller.tick(tally, || best.iter().map(|merit| format!("{merit:.4}")).collect());
    }

    fn saving(&mut self, saving: Saving<'_>) {
        self.teller.saving(&self.run, &saving, "the sweep");
    }

    fn interrupted(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }
}
