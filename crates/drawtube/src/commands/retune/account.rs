//! What `retune` prints.

use driver::change::differences;
use driver::retune::Retuning;
use driver::retune::batch::{Totals, TunedUnit};
use report::text;
use serde_json::{Map, Value, json};

use super::Outcome;
use super::request::{Request, Task};
use crate::failure::Failure;

/// For people.
pub(super) fn text(request: &Request, outcome: &Outcome) -> String {
    let mut parts = Vec::new();
    if let Some(retuning) = &outcome.retuning {
        parts.push(text::retune::retuning(&request.file, retuning));
    }
    if let (Some(found), Task::Equivalents { glass, .. }) = (&outcome.replacements, &request.task) {
        parts.push(text::retune_lists::replacements(glass, found));
    }
    if let Some(done) = &outcome.tool_radii {
        parts.push(text::retune_lists::tool_radii(done));
    }
    parts.join("\n\n")
}

/// For machines: `drawtube-retune/1`.
pub(super) fn document(request: &Request, outcome: &Outcome) -> Result<String, Failure> {
    let mut document = head(request);
    if let Some(retuning) = &outcome.retuning {
        document.extend(stages(request, retuning));
    }
    if let Some(found) = &outcome.replacements {
        document.insert("equivalents".into(), json!(found));
    }
    if let Some(done) = &outcome.tool_radii {
        document.insert(
            "tool_radii".into(),
            json!({ "merit_before": done.merit_before, "moves": done.moves }),
        );
    }
    serde_json::to_string_pretty(&document).map_err(Failure::Document)
}

/// For machines: `drawtube-retune/1` of a batch.
pub(super) fn batch_document(request: &Request, units: &[TunedUnit]) -> Result<String, Failure> {
    let mut document = head(request);
    document.insert("totals".into(), json!(Totals::of(units)));
    document.insert("units".into(), json!(units));
    serde_json::to_string_pretty(&document).map_err(Failure::Document)
}

fn head(request: &Request) -> Map<String, Value> {
    let changes =
        request.changes.iter().map(|change| json!({ "at": change.at(), "value": change.value() }));
    let mut head = Map::new();
    head.insert("format".into(), json!("drawtube-retune/1"));
    head.insert("title".into(), json!(request.file.design.title));
    head.insert("changes".into(), changes.collect());
    head
}

fn stages(request: &Request, retuning: &Retuning) -> Map<String, Value> {
    let names = |at: &surface_model::document::Address| {
        let last = retuning.last().map(|stage| stage.file.document().value());
        last.map_or_else(|| at.clone(), |value| at.with_names(value))
    };
    let taken_up = retuning.taken_up.iter().map(|taken| {
        let state = request.file.design.states.get(taken.state).map(|state| state.name.clone());
        json!({ "state": state, "after": taken.after, "by_mm": taken.by_mm })
    });
    let mut before = request.file.document().value();
    let stages = retuning.stages.iter().map(|stage| {
        let moved = differences(before, stage.file.document().value());
        before = stage.file.document().value();
        json!({
            "moving": stage.moving,
            "merit": stage.assessment.merit,
            "recovered_percent": retuning.recovered_percent(stage),
            "solver": stage.solver,
            "differs": moved,
            "assessment": stage.assessment,
        })
    });
    let mut told = Map::new();
    told.insert("made".into(), json!(retuning.made.iter().map(names).collect::<Vec<_>>()));
    told.insert("taken_up".into(), taken_up.collect());
    told.insert("stages".into(), stages.collect());
    told.insert("costs".into(), json!(retuning.blame));
    told
}
