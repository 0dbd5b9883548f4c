//! The state of a run as its folder tells it, at work or ended; nothing in it is touched.

use std::path::Path;

use driver::overnight::{Gathering, RankedList};
use driver::run::Survey;
use report::text;
use serde_json::{Value, json};

use crate::arguments::OvernightArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::output_file::OutputFile;

/// What a run folder tells.
pub(super) struct State {
    survey: Survey,
    gathering: Gathering,
    list: RankedList,
}

pub(super) fn show(
    arguments: OvernightArguments,
    console: &Console,
) -> Result<ExitStatus, Failure> {
    let OvernightArguments { run, keep, json, picture, force, .. } = arguments;
    let output = picture.map(|path| OutputFile::picture(path, force)).transpose()?;
    let state = State::of(&run, usize::from(keep))?;
    if let Some(output) = output {
        super::picture::draw(&state.list, state.gathering.finds(), &output, console)?;
    }
    if json { console.print_json(&state.document()) } else { console.print(&state.text()) }?;
    Ok(ExitStatus::Done)
}

impl State {
    pub(super) fn of(run: &Path, keep: usize) -> Result<Self, Failure> {
        let surveys = [Survey::of(run)?];
        let gathering = Gathering::of(&surveys, keep)?;
        let [survey] = surveys;
        let list = gathering.list();
        Ok(Self { survey, gathering, list })
    }

    fn seconds(&self) -> f64 {
        self.gathering.facts().values().map(|facts| facts.seconds).sum()
    }

    fn sessions(&self) -> u64 {
        self.gathering.facts().values().map(|facts| facts.sessions).sum()
    }

    /// Whether a process is at work, all is done, or neither.
    fn status(&self) -> &'static str {
        if !self.gathering.running().is_empty() {
            "running"
        } else if self.gathering.missing().is_empty() {
            "complete"
        } else {
            "stopped"
        }
    }

    /// For machines: `drawtube-overnight/1`.
    pub(super) fn document(&self) -> Value {
        let run = &self.survey.run;
        let parts = self.gathering.facts().iter().map(|(share, facts)| {
            json!({
                "part": share.to_string(),
                "starts": facts.finished,
                "seconds": facts.seconds,
                "sessions": facts.sessions,
                "complete": facts.complete,
            })
        });
        let running = self
            .gathering
            .running()
            .iter()
            .map(|(share, holder)| json!({ "part": share.to_string(), "process": holder }));
        let missing = self.gathering.missing();
        json!({
            "format": "drawtube-overnight/1",
            "folder": self.survey.path.display().to_string(),
            "asked": run.asked,
            "seed": run.seed,
            "settings": run.settings,
            "version": run.version,
            "status": self.status(),
            "running": running.collect::<Value>(),
            "parts": parts.collect::<Value>(),
            "missing": missing.iter().map(|part| part.share.to_string()).collect::<Value>(),
            "starts_wanted": self.gathering.units(),
            "seconds": self.seconds(),
            "sessions": self.sessions(),
            "merit_falls": self.gathering.finds().falls(),
            "ranking": self.list,
        })
    }

    /// For people.
    fn text(&self) -> String {
        let falls = text::overnight::falls(&self.gathering.finds().falls());
        let mut told = format!("{}\n\n{}", self.heading(), text::overnight::ranking(&self.list));
        if !falls.is_empty() {
            told.push_str(&format!("\n\n{falls}"));
        }
        told
    }

    fn heading(&self) -> String {
        let run = &self.survey.run;
        let wanted =
            self.gathering.units().map_or_else(String::new, |units| format!(" of {units}"));
        let at_work = match self.gathering.running() {
            [] => self.status().to_owned(),
            [(_, holder)] => format!("running, {holder}"),
            several => format!("running, {} processes", several.len()),
        };
        let split = match self.gathering.of_parts() {
            1 => String::new(),
            parts => format!(" in {} of {parts} parts", self.gathering.facts().len()),
        };
        let told = format!(
            "{} about {}, seed {}: {at_work}. {}{wanted} starts are done{split}, in {} and {} \
             session{}.",
            self.survey.path.display(),
            run.asked.name,
            run.seed,
            self.list.starts,
            text::overnight::time(self.seconds()),
            self.sessions(),
            if self.sessions() == 1 { "" } else { "s" },
        );
        text::paragraph(&told, text::WIDTH, "")
    }
}
