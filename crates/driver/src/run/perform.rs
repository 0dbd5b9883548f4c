//! The run: units handed out in order, results recorded as they arrive, until the budget is used up
//! or the user wants to stop.

use std::any::Any;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::time::{Duration, Instant, SystemTime, UNIX_EPOCH};

use super::budget::Budget;
use super::dispenser::Dispenser;
use super::entry::{Begin, End, Entry, Unit};
use super::error::RunError;
use super::finished::FinishedUnits;
use super::folder::RunFolder;
use super::interrupt::{Interrupt, Interrupted};
use super::journal::{Journal, Kept};
use super::reading;
use super::share::Share;
use super::work::{Earlier, Finished, RunEnd, Saving, Stop, Tally, Watcher, Work};

/// Longest time between two looks at clock and user.
const TICK: Duration = Duration::from_millis(50);

/// Works on the units of a folder, on so many threads, until the budget is used up, a result
/// suffices, or the user wants to stop; goes on where earlier sessions ended.
///
/// # Errors
/// The journal is damaged, or cannot be opened; a unit broke off by a fault of the program, and the
/// journal has everything that was finished. A journal that cannot be written later on is told to
/// the watcher, and in the end.
pub fn perform<W: Work>(
    folder: &RunFolder,
    work: &W,
    budget: &Budget,
    threads: usize,
    watcher: &mut dyn Watcher<W::Done>,
) -> Result<RunEnd, RunError> {
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build()
        .map_err(|error| RunError::Threads(error.to_string()))?;
    let mut session = Session::take_up(folder, work, budget, watcher)?;
    if let Some(stop) = session.over(watcher) {
        // A session that was killed at its very end could not say that it was.
        if is_final(stop) && !session.told_complete {
            session.begin(folder)?;
            return Ok(session.close(stop, watcher));
        }
        return Ok(session.end(stop, None));
    }
    session.begin(folder)?;
    let dispenser = Dispenser::new(session.share, session.finished.clone(), session.end_nth());
    let interrupt = Interrupt::default();
    let stop = pool.in_place_scope(|scope| {
        let (sender, results) = channel();
        for _ in 0..threads.max(1) {
            let (sender, dispenser, interrupt) = (sender.clone(), &dispenser, &interrupt);
            scope.spawn(move |_| labour(work, dispenser, interrupt, &sender));
        }
        drop(sender);
        session.record(&results, &dispenser, &interrupt, watcher)
    });
    let end = session.close(stop, watcher);
    match session.broken_off {
        None => Ok(end),
        Some(BrokenOff { number, told }) => {
            let unit = work.called(number);
            Err(RunError::BrokenOff { path: folder.place().to_owned(), unit, told })
        }
    }
}

/// Whether nothing is left to do for the budget.
fn is_final(stop: Stop) -> bool {
    matches!(stop, Stop::Complete | Stop::Sufficed | Stop::RunTime)
}

/// What each thread does.
fn labour<W: Work>(
    work: &W,
    dispenser: &Dispenser,
    interrupt: &Interrupt,
    results: &Sender<Result<(u64, W::Done), BrokenOff>>,
) {
    while !interrupt.is_raised()
        && let Some(number) = dispenser.next()
    {
        // Nothing is begun after a unit that panicked, so whatever it left behind is not used.
        let performed = catch_unwind(AssertUnwindSafe(|| work.perform(number, interrupt)));
        let result = match performed {
            Ok(Ok(done)) => Ok((number, done)),
            Ok(Err(Interrupted)) => return,
            Err(panic) => {
                // The others stop, instead of letting hours pass.
                interrupt.raise();
                Err(BrokenOff { number, told: words_of(panic.as_ref()) })
            }
        };
        if results.send(result).is_err() {
            return;
        }
    }
}

/// A unit that ended in a panic.
struct BrokenOff {
    number: u64,
    /// What the panic said.
    told: String,
}

fn words_of(panic: &(dyn Any + Send)) -> String {
    let words = panic.downcast_ref::<&str>().map(|words| (*words).to_owned());
    let words = words.or_else(|| panic.downcast_ref::<String>().cloned());
    words.unwrap_or_else(|| "it did not say why".to_owned())
}

/// One session of a run.
struct Session<'a, W> {
    work: &'a W,
    budget: Budget,
    share: Share,
    began: Instant,
    /// Seconds of the run before this session.
    seconds_before: f64,
    /// Whether the last session said that nothing was left to do.
    told_complete: bool,
    finished: FinishedUnits,
    in_session: u64,
    /// The first unit known to suffice.
    sufficed: Option<u64>,
    /// The first unit known to have panicked.
    broken_off: Option<BrokenOff>,
    journal: Journal,
}

impl<'a, W: Work> Session<'a, W> {
    /// Reads the journal and opens it for more.
    fn take_up(
        folder: &RunFolder,
        work: &'a W,
        budget: &Budget,
        watcher: &mut dyn Watcher<W::Done>,
    ) -> Result<Self, RunError> {
        let path = folder.journal();
        let mut sufficed: Option<u64> = None;
        let mut strange: Option<u64> = None;
        let read = reading::read(&path, &folder.identity(), folder.share(), &mut |unit| {
            if !work.can_be(unit.number, &unit.done) {
                strange = strange.or(Some(unit.number));
                return;
            }
            if budget.is_reached_by(work.merit(&unit.done)) {
                sufficed = Some(sufficed.map_or(unit.number, |first| first.min(unit.number)));
            }
            watcher.found(unit);
        })?;
        if let Some(unit) = strange {
            return Err(RunError::another_result(&path, &work.called(unit)));
        }
        let journal = Journal::open(&path, read.valid_bytes)?;
        watcher.earlier(&Earlier {
            finished: read.facts.finished,
            sessions: read.facts.sessions,
            seconds: read.facts.seconds,
            dropped_bytes: read.facts.torn_bytes,
        });
        Ok(Self {
            work,
            budget: *budget,
            share: folder.share(),
            began: Instant::now(),
            seconds_before: read.facts.seconds,
            told_complete: read.facts.complete,
            finished: read.finished,
            in_session: 0,
            sufficed,
            broken_off: None,
            journal,
        })
    }

    /// The journal's first line of this session, safe on the disk.
    fn begin(&mut self, folder: &RunFolder) -> Result<(), RunError> {
        let since_1970 = SystemTime::now().duration_since(UNIX_EPOCH).unwrap_or_default();
        let begin = Entry::<W::Done>::Begin(Begin {
            run: folder.identity(),
            part: self.share,
            units: self.budget.units,
            target_merit: self.budget.target_merit,
            unix_seconds: since_1970.as_secs(),
        });
        // What could not be written at first is still there to be written now.
        let _ = self.journal.append(&begin);
        self.journal.finish().map_err(RunError::system(&folder.journal()))
    }

    /// Records results until the threads are done; says why they are.
    fn record(
        &mut self,
        results: &Receiver<Result<(u64, W::Done), BrokenOff>>,
        dispenser: &Dispenser,
        interrupt: &Interrupt,
        watcher: &mut dyn Watcher<W::Done>,
    ) -> Stop {
        let mut stop = None;
        loop {
            match results.recv_timeout(TICK) {
                Ok(Ok((number, done))) => self.found(number, done, dispenser, watcher),
                Ok(Err(broken_off)) => self.broken_off(broken_off),
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => break,
            }
            stop = stop.or_else(|| self.over(watcher));
            if stop.is_some() {
                interrupt.raise();
            }
            self.told(watcher, |journal| journal.tend());
            watcher.tick(&self.tally());
        }
        // What was still under way may have been all that was missing.
        self.all_done().or(stop).or_else(|| self.over(watcher)).unwrap_or(Stop::Interrupted)
    }

    fn found(
        &mut self,
        number: u64,
        done: W::Done,
        dispenser: &Dispenser,
        watcher: &mut dyn Watcher<W::Done>,
    ) {
        let reached = self.budget.is_reached_by(self.work.merit(&done));
        if reached && self.sufficed.is_none_or(|first| number < first) {
            self.sufficed = Some(number);
            dispenser.end_at(self.share.nth(number) + 1);
        }
        self.finished.insert(number);
        self.in_session += 1;
        let seconds = self.run_seconds();
        let entry = Entry::Unit(Unit { number, seconds, done });
        self.told(watcher, |journal| journal.append(&entry));
        if let Entry::Unit(Unit { number, seconds, done }) = entry {
            watcher.found(Finished { number, seconds, done });
        }
    }

    /// Of several the first is told.
    fn broken_off(&mut self, new: BrokenOff) {
        if self.broken_off.as_ref().is_none_or(|known| new.number < known.number) {
            self.broken_off = Some(new);
        }
    }

    fn told(
        &mut self,
        watcher: &mut dyn Watcher<W::Done>,
        write: impl FnOnce(&mut Journal) -> Kept,
    ) {
        match write(&mut self.journal) {
            Kept::Well => {}
            Kept::Failed(error) => watcher.saving(Saving::Failed(&error)),
            Kept::Again => watcher.saving(Saving::Recovered),
        }
    }

    /// Whether no unit is missing, and why no more are wanted.
    fn all_done(&self) -> Option<Stop> {
        let end = self.end_nth()?;
        let early = self.sufficed.is_some_and(|first| !self.beyond_budget(first));
        let stop = if early { Stop::Sufficed } else { Stop::Complete };
        self.finished.has_all_below(end).then_some(stop)
    }

    /// Why the session is over, if it is.
    fn over(&self, watcher: &dyn Watcher<W::Done>) -> Option<Stop> {
        let run_time = self.budget.run_time.map(|time| time.as_secs_f64());
        if let Some(stop) = self.all_done() {
            Some(stop)
        } else if watcher.interrupted() {
            Some(Stop::Interrupted)
        } else if run_time.is_some_and(|seconds| self.run_seconds() >= seconds) {
            Some(Stop::RunTime)
        } else if self.budget.session_time.is_some_and(|time| self.began.elapsed() >= time) {
            Some(Stop::SessionTime)
        } else {
            None
        }
    }

    fn beyond_budget(&self, number: u64) -> bool {
        self.budget.units.is_some_and(|units| number >= units)
    }

    /// Units from this number on do not count.
    fn counted_below(&self) -> Option<u64> {
        let sufficed = self.sufficed.map(|first| first + 1);
        [self.budget.units, sufficed].into_iter().flatten().min()
    }

    /// How many units of its own the part has to do.
    fn end_nth(&self) -> Option<u64> {
        self.counted_below().map(|below| self.share.count(below))
    }

    fn run_seconds(&self) -> f64 {
        self.seconds_before + self.began.elapsed().as_secs_f64()
    }

    fn tally(&self) -> Tally {
        let wanted = self.end_nth();
        Tally {
            finished: wanted.map_or(self.finished.count(), |end| self.finished.count_below(end)),
            in_session: self.in_session,
            wanted,
            run_seconds: self.run_seconds(),
            session: self.began.elapsed(),
        }
    }

    /// The journal's last line of this session.
    fn close(&mut self, stop: Stop, watcher: &mut dyn Watcher<W::Done>) -> RunEnd {
        let complete = is_final(stop);
        let end = Entry::<W::Done>::End(End { seconds: self.run_seconds(), complete });
        self.told(watcher, |journal| journal.append(&end));
        let unsaved = self.journal.finish().err();
        self.end(stop, unsaved)
    }

    fn end(&self, stop: Stop, unsaved: Option<std::io::Error>) -> RunEnd {
        RunEnd { stop, tally: self.tally(), unsaved, counted_below: self.counted_below() }
    }
}
