//! A changed document: what came back different from the glass works, the shop or the customer,
//! written as `ADDRESS=VALUE`, in the design file it is about.
//!
//! The value is JSON, or a bare word: `/housing/track_mm=160`,
//! `/groups/exit/elements/0/radii_mm/1=flat`. Beyond setting what is there:
//!
//! - `null` drops an entry of a list or a key (as RFC 7396 does): `/states/6x=null`;
//! - the step `-` is the place behind the last entry (as in RFC 6902): `/states/-={…}`;
//! - a key that is not there yet is added, if the format knows it;
//! - a glass may be given by measured indices or by a definition (`melt.rs`).
//!
//! Addresses are those of the design as it was, whatever other changes there are. A number that is
//! set is a fact from then on and no longer free: its address is added to `held`. Where fixed
//! groups leave a changed part no room, a spacing takes up the difference.
//!
//! Start reading at [`apply`].

mod attribution;
mod difference;
mod melt;
mod target;
mod written;

use serde_json::{Map, Value};
use surface_model::document::{Address, Complaint, Complaints, Document, Source};
use surface_model::housing::TakenUp;
use surface_model::optics_document::OpticsDocument;
use surface_model::place::Place;

use crate::brief::BriefFile;
use crate::design_file::{DesignFile, hold};
use target::{Edit, Target};

pub use difference::{Difference, differences};
pub use written::Change;
pub(crate) use written::value_of;

/// A design file with changes made.
#[derive(Debug, Clone)]
pub struct Changed {
    /// The file as it is now.
    pub file: DesignFile,
    /// Spacings that took up what fixed groups left no room for.
    pub taken_up: Vec<TakenUp>,
}

/// Makes changes in a design file.
///
/// # Errors
/// Everything that is wrong with them, each complaint with the source of the change it is about.
pub fn apply(file: &DesignFile, changes: &[Change]) -> Result<Changed, Complaints> {
    let before = file.document().value();
    let (mut targets, mut wrong) = aims(changes, before);
    let mut value = before.clone();
    for (number, target) in &mut targets {
        let change = &changes[*number];
        if let Err(complaint) = melt::define(change, target, file, &mut value) {
            wrong.push((change.source().clone(), complaint));
        }
    }
    if !wrong.is_empty() {
        return Err(Complaints::elsewhere(file.label(), wrong, before));
    }
    edit(&mut value, &mut targets);
    let facts: Vec<Address> = targets
        .iter()
        .filter(|(_, target)| target.is_number())
        .map(|(_, t)| t.at.clone())
        .collect();
    hold_numbers(&mut value, &facts);
    let taken_up = take_up(&mut value, file, &facts);
    match DesignFile::read(Document::from_value(file.label(), value.clone())) {
        Ok(file) => Ok(Changed { file, taken_up }),
        Err(complaints) => {
            Err(attribution::attribute(file.label(), &complaints, changes, &targets, &value))
        }
    }
}

/// Makes changes in a brief.
///
/// # Errors
/// As for [`apply`].
pub(crate) fn apply_to_brief(
    file: &BriefFile,
    changes: &[Change],
) -> Result<BriefFile, Complaints> {
    let before = file.document().value();
    let (mut targets, wrong) = aims(changes, before);
    if !wrong.is_empty() {
        return Err(Complaints::elsewhere(file.label(), wrong, before));
    }
    let mut value = before.clone();
    edit(&mut value, &mut targets);
    BriefFile::read(Document::from_value(file.label(), value.clone())).map_err(|complaints| {
        attribution::attribute(file.label(), &complaints, changes, &targets, &value)
    })
}

/// Places, each with the number of the change it is of, and complaints about other changes.
type Aims = (Vec<(usize, Target)>, Vec<(Source, Complaint)>);

/// The places that changes are about, each with the number of its change, and what is wrong with
/// the others.
fn aims(changes: &[Change], before: &Value) -> Aims {
    let (mut targets, mut wrong) = (Vec::new(), Vec::new());
    for (number, change) in changes.iter().enumerate() {
        match target::targets(change, before) {
            Ok(found) => targets.extend(found.into_iter().map(|target| (number, target))),
            Err(complaint) => wrong.push((change.source().clone(), complaint)),
        }
    }
    (targets, wrong)
}

/// Sets first, drops then, from the back, so that every address still means what it meant; entries
/// are added last. Afterwards each target's address is where it stands in the result.
fn edit(value: &mut Value, targets: &mut [(usize, Target)]) {
    for (_, target) in targets.iter() {
        match &target.edit {
            Edit::Set(new) => {
                if let Some(slot) = target.at.get_mut(value) {
                    slot.clone_from(new);
                }
            }
            Edit::Insert(new) => {
                if let (Some(Value::Object(map)), Some(key)) =
                    (entries(&target.at, value), target.at.last())
                {
                    map.insert(key.to_owned(), new.clone());
                }
            }
            Edit::Drop | Edit::Append(_) => {}
        }
    }
    let mut dropped: Vec<Address> = targets
        .iter()
        .filter(|(_, target)| matches!(target.edit, Edit::Drop))
        .map(|(_, target)| target.at.clone())
        .collect();
    dropped.sort_by_key(|at| std::cmp::Reverse((at.steps().len(), index_of(at))));
    dropped.dedup();
    for at in &dropped {
        match (entries(at, value), index_of(at), at.last()) {
            (Some(Value::Array(list)), Some(index), _) if index < list.len() => {
                list.remove(index);
            }
            (Some(Value::Object(map)), _, Some(key)) => {
                map.shift_remove(key);
            }
            _ => {}
        }
    }
    for (_, target) in targets {
        if dropped.iter().any(|gone| gone.contains(&target.at)) {
            target.edit = Edit::Drop;
        } else {
            target.at = dropped.iter().fold(target.at.clone(), after_drop);
        }
        if let Edit::Append(new) = &target.edit
            && let Some(Value::Array(list)) = target.at.get_mut(value)
        {
            let new = with_spacings(new.clone(), &target.at, list);
            list.push(new);
            target.at = target.at.clone().index(list.len() - 1);
        }
    }
}

/// The list or object that holds the entry at an address.
fn entries<'v>(at: &Address, value: &'v mut Value) -> Option<&'v mut Value> {
    at.parent()?.get_mut(value)
}

fn index_of(at: &Address) -> Option<usize> {
    at.last()?.parse().ok()
}

/// Where something stands once the entry at `dropped` of a list is gone.
fn after_drop(at: Address, dropped: &Address) -> Address {
    let (Some(list), Some(gone)) = (dropped.parent(), index_of(dropped)) else { return at };
    let depth = list.steps().len();
    let steps = at.steps();
    let index = steps.get(depth).and_then(|step| step.parse::<usize>().ok());
    match index {
        Some(index) if list.contains(&at) && index > gone => {
            let moved = steps.iter().enumerate().map(|(place, step)| {
                if place == depth { (index - 1).to_string() } else { (*step).to_owned() }
            });
            moved.fold(Address::root(), Address::key)
        }
        _ => at,
    }
}

/// A state that is added without spacings begins with those of the state whose ratio is nearest.
fn with_spacings(mut new: Value, list_at: &Address, states: &[Value]) -> Value {
    if list_at.steps() != ["states"] {
        return new;
    }
    let ratio = |state: &Value| state.get("ratio").and_then(Value::as_f64);
    let Some(wanted) = ratio(&new) else { return new };
    let off =
        |state: &Value| ratio(state).map_or(f64::INFINITY, |ratio| (ratio / wanted - 1.0).abs());
    let nearest = states.iter().min_by(|a, b| off(a).total_cmp(&off(b)));
    if let (Some(nearest), Value::Object(map)) = (nearest, &mut new)
        && !map.contains_key("spacings_mm")
        && let Some(spacings) = nearest.get("spacings_mm")
    {
        map.insert("spacings_mm".to_owned(), spacings.clone());
    }
    new
}

/// Adds those addresses to `held` that the optimiser could otherwise move.
fn hold_numbers(value: &mut Value, facts: &[Address]) {
    let movable = |at: &&Address| {
        matches!(
            at.steps().as_slice(),
            ["groups", _, "elements", _, "radii_mm" | "thicknesses_mm" | "shapes", ..]
                | ["groups", _, "airs_mm", ..]
                | ["states", _, "spacings_mm", ..]
        )
    };
    let held: Vec<Address> = facts.iter().filter(movable).cloned().collect();
    hold(value, &held);
}

/// Fits spacings to the fixed groups. What cannot be read yet is left for [`DesignFile::read`] to
/// complain about.
fn take_up(value: &mut Value, file: &DesignFile, facts: &[Address]) -> Vec<TakenUp> {
    let document = Document::from_value(file.label(), value.clone());
    let Ok(optics) = document.read::<OpticsDocument>() else { return Vec::new() };
    let Ok(mut design) = optics.resolve_unfitted() else { return Vec::new() };
    let place = |state, after| Place::Spacing { state, after };
    let is_fact = |state, after| {
        let at = place(state, after).address();
        facts.iter().any(|fact| fact.contains(&at))
    };
    let taken_up = design
        .fit_to_housing(|state, mut spacings| spacings.rfind(|&after| !is_fact(state, after)));
    for taken in &taken_up {
        let place = place(taken.state, taken.after);
        if let Some(slot) = place.address().get_mut(value) {
            *slot = Value::from(place.value(&design));
        }
    }
    taken_up
}

/// The `glasses` section, made if there is none.
fn glasses_of(value: &mut Value) -> Option<&mut Map<String, Value>> {
    let Value::Object(map) = value else { return None };
    match map.entry("glasses").or_insert_with(|| Value::Object(Map::new())) {
        Value::Object(glasses) => Some(glasses),
        _ => None,
    }
}

#[cfg(test)]
mod tests;
