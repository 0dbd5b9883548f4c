//! A sweep plan, read and checked against what it is about: every point with its values and the
//! points it may start from.

use serde_json::Value;
use surface_model::document::{Address, Complaint, Complaints, Document, Place};

use super::axis::{Axis, axis, complaint};
use super::document::{PlanDocument, SampleDocument, SampleKind, plan_schema};
use super::order::{Order, unfold};
use super::point::PointResult;
use super::results::Figure;
use super::subject::{BRIEF_KEY, DESIGN_KEY, Subject};
use crate::brief::BriefFile;
use crate::design_file::DesignFile;
use crate::document_kind::PLAN;
use crate::sampling::{LatinHypercube, Sobol};

/// Most points of a sweep.
pub(super) const MOST_POINTS: usize = 100_000;

/// Most values of all axes in all points: some hundred megabytes.
const MOST_VALUES: usize = 1_000_000;

/// Most starts of a point.
const MOST_STARTS: u32 = 1000;

/// A plan before the file it is about is read.
#[derive(Debug, Clone)]
pub struct PlanFile {
    document: Document,
    written: PlanDocument,
    about: About,
}

/// The file that a plan is about, as it names it.
#[derive(Debug, Clone)]
enum About {
    Design(String),
    Brief(String),
}

impl PlanFile {
    /// Reads a plan.
    ///
    /// # Errors
    /// Everything that is wrong with it by itself, placed in its text.
    pub fn read(document: Document) -> Result<Self, Complaints> {
        PLAN.refuse_others(&document)?;
        document.check(&plan_schema())?;
        let mut written: PlanDocument = document.read()?;
        let about = match (written.design.take(), written.brief.take()) {
            (Some(design), None) => About::Design(design),
            (None, Some(brief)) => About::Brief(brief),
            (both, _) => {
                let (at, found) = match both {
                    Some(_) => (Address::root().key("brief"), "the plan names a design too"),
                    None => (Address::root(), "the plan names neither a design nor a brief"),
                };
                let expected = "\"design\" or \"brief\"".to_owned();
                return Err(document.refuse([complaint(at, found.to_owned(), expected)]));
            }
        };
        Ok(Self { document, written, about })
    }

    /// The design or brief, as the plan names it: a file seen from the plan's folder.
    #[must_use]
    pub fn subject_name(&self) -> &str {
        match &self.about {
            About::Design(name) | About::Brief(name) => name,
        }
    }

    /// The key under which the plan, and the settings of a run, have it.
    #[must_use]
    pub fn subject_key(&self) -> &'static str {
        match self.about {
            About::Design(_) => DESIGN_KEY,
            About::Brief(_) => BRIEF_KEY,
        }
    }

    /// Reads what the plan is about.
    ///
    /// # Errors
    /// Everything that is wrong with it, placed in its text.
    pub fn read_subject(&self, document: Document) -> Result<Subject, Complaints> {
        Ok(match self.about {
            About::Design(_) => Subject::Design(Box::new(DesignFile::read(document)?)),
            About::Brief(_) => Subject::Brief(Box::new(BriefFile::read(document)?)),
        })
    }

    /// The plan as it was written.
    #[must_use]
    pub fn document(&self) -> &Document {
        &self.document
    }

    /// Works out the points.
    ///
    /// # Errors
    /// Addresses that lead nowhere, axes without values, too many points: placed in the plan's
    /// text.
    pub fn resolve(&self, subject: &Subject) -> Result<Plan, Complaints> {
        let mut wrong = Vec::new();
        let drawn = self.written.sample.is_some();
        let mut axes = Vec::new();
        for (number, axis) in self.written.axes.iter().enumerate() {
            let at = Address::root().key("axes").index(number);
            match self::axis(&at, axis, drawn, subject) {
                Ok(axis) => axes.push(axis),
                Err(complaint) => wrong.push(complaint),
            }
        }
        let starts = self.written.starts.unwrap_or(1);
        if !(1..=MOST_STARTS).contains(&starts) {
            let at = Address::root().key("starts");
            wrong.push(complaint(at, format!("{starts} starts"), format!("1 to {MOST_STARTS}")));
        }
        let front = self.front(subject, &mut wrong);
        if !wrong.is_empty() {
            return Err(self.document.refuse(wrong));
        }
        let seed = self.written.seed.unwrap_or(0);
        let (points, order) = self.points(&axes, seed)?;
        let addresses = axes.into_iter().map(|axis| axis.at).collect();
        let title = self.written.title.clone();
        Ok(Plan { title, axes: addresses, points, order, starts, seed, front })
    }

    fn front(&self, subject: &Subject, wrong: &mut Vec<Complaint>) -> Option<[Figure; 2]> {
        let words = self.written.front.as_ref()?;
        let axes: Vec<&str> = self.written.axes.iter().map(|axis| axis.at.as_str()).collect();
        let at = |number: usize| Address::root().key("front").index(number);
        let mut read = |number: usize| {
            let found = Figure::read(&words[number], subject, &axes);
            found
                .map_err(|error| wrong.push(Complaint { place: Place::Value(at(number)), ..error }))
                .ok()
        };
        Some([read(0)?, read(1)?])
    }

    /// The values of every point by its number, and the order that the numbers follow.
    fn points(&self, axes: &[Axis], seed: u64) -> Result<(Vec<Vec<Value>>, Order), Complaints> {
        match self.written.sample {
            None => {
                let counts: Vec<usize> = axes.iter().map(Axis::count).collect();
                let total =
                    counts.iter().try_fold(1_usize, |total, &count| total.checked_mul(count));
                self.admit(total, axes.len(), Address::root().key("axes"))?;
                let order = Order::of_grid(&counts);
                let values = |&point: &usize| {
                    let indices = unfold(point, &counts);
                    indices.iter().zip(axes).map(|(&i, axis)| axis.value(i)).collect()
                };
                Ok((order.points.iter().map(values).collect(), order))
            }
            Some(sample) => {
                let at = Address::root().key("sample");
                let points = Some(sample.points as usize);
                self.admit(points, axes.len(), at.clone().key("points"))?;
                let cube = drawn(sample, axes.len(), seed)
                    .map_err(|error| self.document.refuse([complaint(at, error.0, error.1)]))?;
                let order = Order::of(&cube);
                let values = |&point: &usize| {
                    let shares = cube[point].iter().zip(axes);
                    shares.map(|(&share, axis)| axis.at_share(share)).collect()
                };
                Ok((order.points.iter().map(values).collect(), order))
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

/// Points of the unit cube.
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
    pub(super) order: Order,
    pub(super) starts: u32,
    pub(super) seed: u64,
    /// Two results to weigh against each other.
    pub(crate) front: Option<[Figure; 2]>,
}

impl Plan {
    /// The number of the point that each unit of a run in so many parts is about.
    pub(super) fn units(&self, parts: u64) -> Vec<usize> {
        self.order.units(parts)
    }

    /// Whether a result can be that of the point with this number.
    pub(super) fn has(&self, number: usize, result: &PointResult) -> bool {
        result.number == number as u64 && self.points.get(number) == Some(&result.values)
    }
}
