//! The results of a sweep: which there are, as a table, and the best trade between two.

use std::collections::BTreeSet;

use serde::Serialize;
use serde_json::Value;
use surface_model::document::{
    Address, Complaint, Place, did_you_mean, layout, nearest, one_of, quoted,
};

use super::plan::Plan;
use super::point::{PointResult, Reached};
use super::subject::Subject;
use crate::front::front;
use crate::run::ResultFile;

/// How many designs are kept as files of their own.
const BEST_KEPT: usize = 10;

/// A result by its word.
type Named = (&'static str, fn(&Reached) -> Option<f64>);

/// The results that have words of their own.
const NAMED: [Named; 5] = [
    ("merit", |reached| Some(reached.merit)),
    ("worst_rms_waves", |reached| reached.worst_rms_waves),
    ("worst_ratio_error_percent", |reached| reached.worst_ratio_error_percent),
    ("worst_exit_slope_urad", |reached| reached.worst_exit_slope_urad),
    ("track_mm", |reached| Some(reached.track_mm)),
];

/// A number of a point: a result, the value of an axis, or what stands at an address of its design.
#[derive(Debug, Clone)]
pub struct Figure {
    /// Its word, or its address.
    pub(crate) word: String,
    what: What,
}

#[derive(Debug, Clone)]
enum What {
    Result(fn(&Reached) -> Option<f64>),
    /// The value of the axis with this index.
    Axis(usize),
    Number(Address),
}

impl Figure {
    /// The merit.
    #[must_use]
    pub fn merit() -> Self {
        Self { word: "merit".to_owned(), what: What::Result(NAMED[0].1) }
    }

    /// Reads a word, the address of one of the axes, or of a number of a design: a brief says
    /// nothing of the designs that answer it.
    pub(super) fn read(word: &str, subject: &Subject, axes: &[&str]) -> Result<Self, Complaint> {
        let refuse = |found: String, advice| Complaint {
            place: Place::File,
            found,
            expected: Some(format!(
                "{}, or the address of {}",
                one_of(NAMED.map(|(word, _)| word)),
                match subject {
                    Subject::Design(_) => "a number",
                    Subject::Brief(_) => "an axis",
                }
            )),
            advice,
        };
        if let Some((_, value)) = NAMED.iter().find(|(known, _)| *known == word) {
            return Ok(Self { word: word.to_owned(), what: What::Result(*value) });
        }
        if !word.starts_with('/') {
            let near = nearest(word, NAMED.map(|(word, _)| word)).map(did_you_mean);
            return Err(refuse(format!("{} is not a result of a sweep", quoted(word)), near));
        }
        let address: Address =
            word.parse().map_err(|error: surface_model::document::AddressSyntaxError| {
                error.complaint(Place::File)
            })?;
        if let (Subject::Brief(_), Some(axis)) = (subject, axes.iter().position(|at| *at == word)) {
            return Ok(Self { word: word.to_owned(), what: What::Axis(axis) });
        }
        let file = subject.document().value();
        let found = address.resolve(file).map_err(|error| error.complaint(Place::File))?;
        match found.as_slice() {
            [_] if matches!(subject, Subject::Brief(_)) => {
                Err(refuse(format!("{word} is no axis of the plan"), None))
            }
            [only] if only.get(file).is_some_and(Value::is_number) => {
                Ok(Self { word: word.to_owned(), what: What::Number(address) })
            }
            [_] => Err(refuse(format!("what is at {word} is not a number"), None)),
            _ => Err(refuse(format!("{word} means {} places", found.len()), None)),
        }
    }

    /// Its value in a point, if it has one.
    #[must_use]
    pub fn of(&self, point: &PointResult) -> Option<f64> {
        let reached = point.reached.as_ref()?;
        match &self.what {
            What::Result(value) => value(reached),
            What::Axis(axis) => point.values.get(*axis)?.as_f64(),
            What::Number(address) => {
                let at = address.resolve(&reached.design).ok()?;
                at.first()?.get(&reached.design)?.as_f64()
            }
        }
    }
}

/// Both figures of every point that has them, by its number.
fn weighed(points: &[PointResult], by: &[Figure; 2]) -> Vec<(u64, [f64; 2])> {
    let both = |point| Some([by[0].of(point)?, by[1].of(point)?]);
    points.iter().filter_map(|point| Some((point.number, both(point)?))).collect()
}

/// A sweep with its results, as JSON and as a table. Points stand in the order of their numbers.
#[derive(Debug, Clone, Serialize)]
pub struct SweepResults {
    /// Always `drawtube-sweep/1`.
    pub format: &'static str,
    /// What the sweep is for.
    pub title: String,
    /// The axes' addresses.
    pub axes: Vec<Address>,
    /// Points of the plan.
    pub points_of_plan: usize,
    /// Points whose optimisation failed.
    pub failed: usize,
    /// Points whose brief has no layout.
    #[serde(skip_serializing_if = "is_zero")]
    pub without_layout: usize,
    /// The two results weighed against each other.
    pub front_of: Option<[String; 2]>,
    /// Numbers of the points that are no worse in both than any other.
    pub front: Vec<u64>,
    /// Every finished point.
    pub points: Vec<PointResult>,
    /// By number, the two results weighed against each other, of the points that have both.
    #[serde(skip)]
    pub weighed: Vec<(u64, [f64; 2])>,
}

impl SweepResults {
    /// Of the points that are finished, in order of their numbers.
    #[must_use]
    pub fn new(plan: &Plan, points: Vec<PointResult>) -> Self {
        let weighed = plan.front.as_ref().map(|by| weighed(&points, by)).unwrap_or_default();
        let both: Vec<[f64; 2]> = weighed.iter().map(|(_, both)| *both).collect();
        Self {
            front: front(&both).into_iter().map(|k| weighed[k].0).collect(),
            weighed,
            format: "drawtube-sweep/1",
            title: plan.title.clone(),
            axes: plan.axes.clone(),
            points_of_plan: plan.points.len(),
            failed: points.iter().filter(|point| point.fault.is_some()).count(),
            without_layout: points.iter().filter(|point| point.no_layout.is_some()).count(),
            front_of: plan.front.as_ref().map(|by| by.each_ref().map(|q| q.word.clone())),
            points,
        }
    }

    /// The finished point with the lowest merit, the first of equals.
    #[must_use]
    pub fn best(&self) -> Option<&PointResult> {
        let merit = |point: &PointResult| {
            point.reached.as_ref().map_or(f64::INFINITY, |reached| reached.merit)
        };
        let reached = self.points.iter().filter(|point| point.reached.is_some());
        reached.min_by(|a, b| merit(a).total_cmp(&merit(b)))
    }

    /// Whether every point meets every goal and limit.
    #[must_use]
    pub fn meet(&self) -> bool {
        self.points.iter().all(|point| point.reached.as_ref().is_some_and(|reached| reached.meets))
    }

    /// The files of the results: the best designs, all points as a table and as JSON.
    ///
    /// # Errors
    /// They cannot be laid out.
    pub fn files(&self) -> Result<Vec<ResultFile>, Box<dyn std::error::Error + Send + Sync>> {
        let mut reached: Vec<&Reached> =
            self.points.iter().filter_map(|point| point.reached.as_ref()).collect();
        reached.sort_by(|a, b| a.merit.total_cmp(&b.merit));
        let best = reached.iter().take(BEST_KEPT).enumerate();
        let mut files: Vec<ResultFile> = best
            .map(|(rank, reached)| ResultFile::best(rank + 1, layout(&reached.design)))
            .collect();
        let mut json = serde_json::to_vec_pretty(self)?;
        json.push(b'\n');
        files.extend([ResultFile::points_table(self.table()?), ResultFile::points(json)]);
        Ok(files)
    }

    /// As a table (RFC 4180): a line a point, designs left out.
    ///
    /// # Errors
    /// It cannot be laid out.
    pub fn table(&self) -> Result<Vec<u8>, Box<dyn std::error::Error + Send + Sync>> {
        let mut table = csv::Writer::from_writer(Vec::new());
        let mut heads = vec!["point".to_owned()];
        heads.extend(self.axes.iter().map(Address::to_string));
        heads.extend(NAMED.map(|(word, _)| word.to_owned()));
        heads.extend(["meets", "limits_crossed", "on_front", "fault"].map(str::to_owned));
        table.write_record(&heads)?;
        let front: BTreeSet<u64> = self.front.iter().copied().collect();
        for point in &self.points {
            let mut row = vec![point.number.to_string()];
            row.extend(point.values.iter().map(plain));
            let reached = point.reached.as_ref();
            let number =
                |value: Option<f64>| value.map_or_else(String::new, |value| value.to_string());
            row.extend(NAMED.map(|(_, of)| number(reached.and_then(of))));
            let word = |yes: bool| if yes { "yes" } else { "no" }.to_owned();
            row.push(reached.map_or_else(String::new, |reached| word(reached.meets)));
            row.push(
                reached.map_or_else(String::new, |reached| reached.limits_crossed.to_string()),
            );
            row.push(word(front.contains(&point.number)));
            let no_layout = point.no_layout.as_ref().map(|reason| format!("no layout: {reason}"));
            row.push(point.fault.clone().or(no_layout).unwrap_or_default());
            table.write_record(&row)?;
        }
        Ok(table.into_inner().map_err(csv::IntoInnerError::into_error)?)
    }
}

fn is_zero(count: &usize) -> bool {
    *count == 0
}

/// A value as a cell holds it: a word without quotes.
fn plain(value: &Value) -> String {
    match value {
        Value::String(text) => text.clone(),
        other => other.to_string(),
    }
}
