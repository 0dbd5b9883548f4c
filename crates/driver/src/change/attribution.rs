//! Which change a complaint about the changed document is about.

use serde_json::Value;
use surface_model::document::{Address, Complaints, Place, Source};

use super::target::Target;
use super::written::Change;

/// The complaints with the sources of the changes they are about. Lines and columns of a changed
/// document are nobody's; what no change is about is told of the file as changed.
pub(super) fn attribute(
    label: &str,
    complaints: &Complaints,
    changes: &[Change],
    targets: &[(usize, Target)],
    changed: &Value,
) -> Complaints {
    let whole = format!("{label} as changed");
    let list = complaints.iter().map(|complaint| {
        let at = match &complaint.place {
            Place::Value(at) | Place::Key(at) => Some(at),
            Place::Position(_) | Place::File => None,
        };
        let change = at.and_then(|at| about(at, targets)).or((changes.len() == 1).then_some(0));
        let source = match change.and_then(|number| changes.get(number)) {
            Some(change) => change.source().clone(),
            None => Source { label: whole.clone(), position: None },
        };
        (source, complaint.clone())
    });
    Complaints::elsewhere(&whole, list.collect(), changed)
}

/// The last change that reaches the place, or the last within it.
fn about(at: &Address, targets: &[(usize, Target)]) -> Option<usize> {
    let reaches = |target: &Target| target.at.contains(at) || at.contains(&target.at);
    targets.iter().rev().find(|(_, target)| reaches(target)).map(|&(number, _)| number)
}
