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
    /// Its values; none where points are drawn.
    pub(super) values: Vec<Value>,
    range: Option<RangeDocument>,
}

impl Axis {
    /// The number at a share (0 to 1) of the range.
    pub(super) fn at_share(&self, share: f64) -> f64 {
        self.range.map_or(f64::NAN, |range| between(&range, share))
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
    let (values, range) = match (&axis.values, &axis.range) {
        (Some(_), _) if drawn => {
            return refuse("values", "points are drawn from ranges, not from values", "a range");
        }
        (Some(values), None) => (values.clone(), None),
        (None, Some(range)) => (steps(here, range, drawn)?, Some(*range)),
        (Some(_), Some(_)) => return refuse("range", "the axis has values too", "one of the two"),
        (None, None) => return refuse("at", "the axis has no values", "\"values\" or \"range\""),
    };
    let axis = Axis { at, values, range };
    if axis.at.resolve(file).is_err() {
        try_key(&axis, here, subject)?;
    }
    Ok(axis)
}

/// A key that the file lacks is tried once: whether the format knows it shows then.
fn try_key(axis: &Axis, here: &Address, subject: &Subject) -> Result<(), Complaint> {
    let value = axis.values.first().cloned().unwrap_or_else(|| Value::from(axis.at_share(0.0)));
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

/// The numbers of a range; none where points are drawn.
fn steps(here: &Address, range: &RangeDocument, drawn: bool) -> Result<Vec<Value>, Complaint> {
    let at = here.clone().key("range");
    let refuse = |key: &str, found: String, expected: &str| {
        Err(complaint(at.clone().key(key), found, expected.to_owned()))
    };
    let RangeDocument { from, to, steps, scale } = *range;
    if !(from.is_finite() && to.is_finite()) {
        return refuse("from", "the range has no ends".to_owned(), "two numbers");
    }
    if scale == Some(ScaleDocument::Logarithmic) && from * to <= 0.0 {
        let found = format!("equal ratios do not lead from {from} to {to}");
        return refuse("scale", found, "two ends of the same sign, neither of them 0");
    }
    match steps {
        None if drawn => Ok(Vec::new()),
        Some(steps) if drawn => {
            refuse("steps", format!("{steps} steps, but points are drawn"), "no steps")
        }
        Some(steps) if (1..=MOST_POINTS).contains(&(steps as usize)) => {
            let last = f64::from(steps.max(2) - 1);
            Ok((0..steps).map(|i| Value::from(between(range, f64::from(i) / last))).collect())
        }
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
