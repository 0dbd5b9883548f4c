//! One axis of a plan: where it is, and its values or its range.

use serde_json::Value;
use surface_model::document::{Address, Complaint, Place, Source};

use super::document::{AxisDocument, RangeDocument, ScaleDocument};
use super::plan::MOST_POINTS;
use super::subject::Subject;
use crate::change::Change;

/// One axis, read.
pub(super) struct Axis {
    pub(super) at: Address,
    values: AxisValues,
}

enum AxisValues {
    Listed(Vec<Value>),
    /// A range in so many steps; in none where points are drawn.
    Range(RangeDocument, usize),
}

impl Axis {
    /// How many values it has; none where points are drawn.
    pub(super) fn count(&self) -> usize {
        match &self.values {
            AxisValues::Listed(values) => values.len(),
            AxisValues::Range(_, steps) => *steps,
        }
    }

    /// One of its values.
    pub(super) fn value(&self, i: usize) -> Value {
        match &self.values {
            AxisValues::Listed(values) => values[i].clone(),
            AxisValues::Range(_, steps) => self.at_share(i as f64 / ((*steps).max(2) - 1) as f64),
        }
    }

    /// The number at a share (0 to 1) of the range.
    pub(super) fn at_share(&self, share: f64) -> Value {
        match &self.values {
            AxisValues::Listed(values) => values.first().cloned().unwrap_or_default(),
            AxisValues::Range(range, _) => between(range, share).into(),
        }
    }
}

fn between(range: &RangeDocument, share: f64) -> f64 {
    let RangeDocument { from, to, .. } = *range;
    if share <= 0.0 {
        return from;
    }
    if share >= 1.0 {
        return to;
    }
    match range.scale.unwrap_or_default() {
        ScaleDocument::Linear => from + (to - from) * share,
        ScaleDocument::Logarithmic => from * (to / from).powf(share),
    }
}

/// Reads the axis at `here` of a plan about `subject`, of which points are `drawn` or not.
pub(super) fn axis(
    here: &Address,
    axis: &AxisDocument,
    drawn: bool,
    subject: &Subject,
) -> Result<Axis, Complaint> {
    let place = || Place::Value(here.clone().key("at"));
    let at: Address = axis
        .at
        .parse()
        .map_err(|error: surface_model::document::AddressSyntaxError| error.complaint(place()))?;
    let file = subject.document().value();
    let known = at.resolve(file).map(|_| ());
    // A key that the file leaves out can be swept too, such as a limit.
    let addable = || {
        at.parent().is_some_and(|parent| {
            parent.resolve(file).is_ok_and(|found| {
                found.iter().all(|at| at.get(file).is_some_and(Value::is_object))
            })
        })
    };
    if let Err(error) = known
        && !addable()
    {
        return Err(error.complaint(place()));
    }
    let refuse = |key: &str, found: &str, expected: &str| {
        Err(complaint(here.clone().key(key), found.to_owned(), expected.to_owned()))
    };
    let values = match (&axis.values, &axis.range) {
        (Some(_), _) if drawn => {
            return refuse("values", "points are drawn from ranges, not from values", "a range");
        }
        (Some(values), None) => AxisValues::Listed(values.clone()),
        (None, Some(range)) => AxisValues::Range(*range, steps(here, range, drawn)?),
        (Some(_), Some(_)) => return refuse("range", "the axis has values too", "one of the two"),
        (None, None) => return refuse("at", "the axis has no values", "\"values\" or \"range\""),
    };
    let axis = Axis { at, values };
    if axis.at.resolve(file).is_err() {
        try_key(&axis, here, subject)?;
    }
    Ok(axis)
}

/// A key that the file lacks is tried once: whether the format knows it shows then.
fn try_key(axis: &Axis, here: &Address, subject: &Subject) -> Result<(), Complaint> {
    let value = axis.at_share(0.0);
    let source = Source { label: axis.at.to_string(), position: None };
    let Err(complaints) = subject.with(&[Change::new(axis.at.clone(), value, source)]) else {
        return Ok(());
    };
    match complaints.iter().find(|complaint| matches!(complaint.place, Place::Key(_))) {
        Some(complaint) => {
            let place = Place::Value(here.clone().key("at"));
            Err(Complaint { place, ..complaint.clone() })
        }
        // A value that does not fit is that point's affair.
        None => Ok(()),
    }
}

/// In how many steps a range is gone through; in none where points are drawn.
fn steps(here: &Address, range: &RangeDocument, drawn: bool) -> Result<usize, Complaint> {
    let at = here.clone().key("range");
    let refuse = |key: &str, found: String, expected: &str| {
        Err(complaint(at.clone().key(key), found, expected.to_owned()))
    };
    let RangeDocument { from, to, steps, scale } = *range;
    if !(from.is_finite() && to.is_finite()) {
        return refuse("from", "the range has no ends".to_owned(), "two numbers");
    }
    if scale == Some(ScaleDocument::Logarithmic) {
        if from == 0.0 || to == 0.0 || from.signum() != to.signum() {
            let found = format!("equal ratios do not lead from {from} to {to}");
            return refuse("scale", found, "two ends of the same sign, neither of them 0");
        }
        if !(to / from).is_normal() {
            let found = format!("the ratio of {from} and {to} is out of the range of numbers");
            return refuse("from", found, "two ends nearer to each other");
        }
    } else if !(to - from).is_finite() {
        let found = format!("from {from} to {to} is out of the range of numbers");
        return refuse("from", found, "two ends nearer to each other");
    }
    match steps {
        None if drawn => Ok(0),
        Some(steps) if drawn => {
            refuse("steps", format!("{steps} steps, but points are drawn"), "no steps")
        }
        Some(steps) if (1..=MOST_POINTS).contains(&(steps as usize)) => Ok(steps as usize),
        Some(steps) => refuse("steps", format!("{steps} steps"), "1 to 100000"),
        None => refuse(
            "from",
            "the range has no steps".to_owned(),
            "\"steps\", or a \"sample\" of the plan",
        ),
    }
}

/// A complaint about the value at a place of the plan.
pub(super) fn complaint(at: Address, found: String, expected: String) -> Complaint {
    Complaint { place: Place::Value(at), found, expected: Some(expected), advice: None }
}
