//! A sweep plan, read and checked against its design: every point with its values and the points it
//! may start from.

use serde_json::Value;
use surface_model::document::{Address, Complaint, Complaints, Document, Place, Source, quoted};

use super::document::{
    AxisDocument, PlanDocument, RangeDocument, SampleDocument, SampleKind, ScaleDocument,
    plan_schema,
};
use super::lattice::{Lattice, Neighbourhood};
use super::results::Quantity;
use crate::change::{Change, apply};
use crate::design_file::DesignFile;
use crate::document_kind::PLAN;
use crate::sampling::{LatinHypercube, Sobol};

/// Most points of a sweep.
pub const MOST_POINTS: usize = 100_000;

/// Most values of all axes in all points: some hundred megabytes.
const MOST_VALUES: usize = 1_000_000;

/// Most starts of a point.
const MOST_STARTS: u32 = 1000;

/// A plan before its design is read.
#[derive(Debug, Clone)]
pub struct PlanFile {
    document: Document,
    written: PlanDocument,
}

impl PlanFile {
    /// Reads a plan.
    ///
    /// # Errors
    /// Everything that is wrong with it by itself, placed in its text.
    pub fn read(document: Document) -> Result<Self, Complaints> {
        PLAN.refuse_others(&document)?;
        document.check(&plan_schema())?;
        let written = document.read()?;
        Ok(Self { document, written })
    }

    /// The design file, as the plan names it.
    #[must_use]
    pub fn design(&self) -> &str {
        &self.written.design
    }

    /// The plan as it was written.
    #[must_use]
    pub fn document(&self) -> &Document {
        &self.document
    }

    /// Works out the points for the design.
    ///
    /// # Errors
    /// Addresses that lead nowhere, axes without values, too many points: placed in the plan's
    /// text.
    pub fn resolve(&self, design: &DesignFile) -> Result<Plan, Complaints> {
        let mut wrong = Vec::new();
        let drawn = self.written.sample.is_some();
        let mut axes = Vec::new();
        for (number, axis) in self.written.axes.iter().enumerate() {
            let at = Address::root().key("axes").index(number);
            match self::axis(&at, axis, drawn, design) {
                Ok(axis) => axes.push(axis),
                Err(complaint) => wrong.push(complaint),
            }
        }
        let starts = self.written.starts.unwrap_or(1);
        if !(1..=MOST_STARTS).contains(&starts) {
            let at = Address::root().key("starts");
            wrong.push(complaint(at, format!("{starts} starts"), format!("1 to {MOST_STARTS}")));
        }
        let front = self.front(design, &mut wrong);
        if !wrong.is_empty() {
            return Err(self.document.refuse(wrong));
        }
        let seed = self.written.seed.unwrap_or(0);
        let (points, neighbours) = self.points(&axes, seed)?;
        let addresses = axes.into_iter().map(|axis| axis.at).collect();
        let title = self.written.title.clone();
        Ok(Plan { title, axes: addresses, points, neighbours, starts, seed, front })
    }

    fn front(&self, design: &DesignFile, wrong: &mut Vec<Complaint>) -> Option<[Quantity; 2]> {
        let words = self.written.front.as_ref()?;
        let at = |number: usize| Address::root().key("front").index(number);
        let mut read = |number: usize| {
            let found = Quantity::read(&words[number], design);
            found
                .map_err(|error| wrong.push(Complaint { place: Place::Value(at(number)), ..error }))
                .ok()
        };
        Some([read(0)?, read(1)?])
    }

    /// The values of every point, in the order in which points are numbered, and the points each
    /// may start from.
    fn points(
        &self,
        axes: &[Axis],
        seed: u64,
    ) -> Result<(Vec<Vec<Value>>, Neighbourhood), Complaints> {
        match self.written.sample {
            None => {
                let counts: Vec<usize> = axes.iter().map(Axis::count).collect();
                let total =
                    counts.iter().try_fold(1_usize, |total, &count| total.checked_mul(count));
                self.admit(total, axes.len(), Address::root().key("axes"))?;
                let lattice = Lattice::new(&counts);
                let value = |index: &Vec<usize>| {
                    index.iter().zip(axes).map(|(&i, axis)| axis.value(i)).collect()
                };
                let neighbours = Neighbourhood::Grid(lattice.neighbours());
                Ok((lattice.points().iter().map(value).collect(), neighbours))
            }
            Some(sample) => {
                let at = Address::root().key("sample");
                let points = Some(sample.points as usize);
                self.admit(points, axes.len(), at.clone().key("points"))?;
                let cube = drawn(sample, axes.len(), seed)
                    .map_err(|error| self.document.refuse([complaint(at, error.0, error.1)]))?;
                let value = |point: &Vec<f64>| {
                    point.iter().zip(axes).map(|(&t, axis)| axis.at_share(t)).collect()
                };
                Ok((cube.iter().map(value).collect(), Neighbourhood::Cloud(cube)))
            }
        }
    }

    fn admit(&self, points: Option<usize>, axes: usize, at: Address) -> Result<(), Complaints> {
        let Some(count) = points.filter(|points| (1..=MOST_POINTS).contains(points)) else {
            let found = points.map_or_else(
                || "more points than can be counted".to_owned(),
                |points| format!("{points} points"),
            );
            return Err(self.document.refuse([complaint(
                at,
                found,
                format!("1 to {MOST_POINTS}"),
            )]));
        };
        if count.checked_mul(axes).is_some_and(|values| values <= MOST_VALUES) {
            return Ok(());
        }
        let found = format!("{count} points of {axes} axes each");
        let expected = format!("fewer of either: {MOST_VALUES} values in all at most");
        Err(self.document.refuse([complaint(at, found, expected)]))
    }
}

fn drawn(
    sample: SampleDocument,
    dimensions: usize,
    seed: u64,
) -> Result<Vec<Vec<f64>>, (String, String)> {
    let points = sample.points as usize;
    match sample.kind {
        SampleKind::LatinHypercube => {
            Ok(LatinHypercube::new(points, dimensions, seed).points().to_vec())
        }
        SampleKind::Sobol => {
            let sobol = Sobol::new(dimensions).map_err(|error| {
                (error.to_string(), "fewer axes, or a Latin hypercube".to_owned())
            })?;
            Ok((0..sample.points.into()).map(|number| sobol.point(number)).collect())
        }
    }
}

/// A plan and its points.
#[derive(Debug, Clone)]
pub struct Plan {
    /// What the sweep is for.
    pub title: String,
    /// The axes' addresses, as written.
    pub axes: Vec<Address>,
    /// The values of every point by its number, one an axis.
    pub points: Vec<Vec<Value>>,
    pub(super) neighbours: Neighbourhood,
    pub(super) starts: u32,
    pub(super) seed: u64,
    /// Two results to weigh against each other.
    pub front: Option<[Quantity; 2]>,
}

/// One axis, read.
struct Axis {
    at: Address,
    values: AxisValues,
}

enum AxisValues {
    Listed(Vec<Value>),
    /// A range in so many steps; in none where points are drawn.
    Range(RangeDocument, usize),
}

impl Axis {
    fn count(&self) -> usize {
        match &self.values {
            AxisValues::Listed(values) => values.len(),
            AxisValues::Range(_, steps) => *steps,
        }
    }

    /// One of its values.
    fn value(&self, i: usize) -> Value {
        match &self.values {
            AxisValues::Listed(values) => values[i].clone(),
            AxisValues::Range(_, steps) => self.at_share(i as f64 / ((*steps).max(2) - 1) as f64),
        }
    }

    /// The number at a share (0 to 1) of the range.
    fn at_share(&self, share: f64) -> Value {
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

fn axis(
    here: &Address,
    axis: &AxisDocument,
    drawn: bool,
    design: &DesignFile,
) -> Result<Axis, Complaint> {
    let place = || Place::Value(here.clone().key("at"));
    let at: Address = axis
        .at
        .parse()
        .map_err(|error: surface_model::document::AddressSyntaxError| error.complaint(place()))?;
    let file = design.document().value();
    let known = at.resolve(file).map(|_| ());
    // A key that the design leaves out can be swept too, such as a limit.
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
        try_key(&axis, here, design)?;
    }
    Ok(axis)
}

/// A key that the design lacks is tried once: whether the format knows it shows then.
fn try_key(axis: &Axis, here: &Address, design: &DesignFile) -> Result<(), Complaint> {
    let value = axis.at_share(0.0);
    let source = Source { label: axis.at.to_string(), position: None };
    let Err(complaints) = apply(design, &[Change::new(axis.at.clone(), value, source)]) else {
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

fn complaint(at: Address, found: String, expected: String) -> Complaint {
    Complaint { place: Place::Value(at), found, expected: Some(expected), advice: None }
}

/// A word of the plan in quotes, for messages.
pub(super) fn shown(word: &str) -> String {
    quoted(word)
}
