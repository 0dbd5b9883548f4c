//! What an optimisation has to tell, over all its methods.

use std::time::Duration;

use driver::design_file::DesignFile;
use driver::optimise::{Optimisation, OptimisationReport};
use driver::solve::Stopped;
use merit_function::assessment::Assessment;
use report::text;
use serde_json::{Value, json};

use crate::destination::Destination;
use crate::failure::Failure;
use crate::progress::MeritHistory;

/// One or more methods run one after the other.
pub(super) struct Account<'a> {
    before: &'a DesignFile,
    start: Assessment,
    stages: Vec<OptimisationReport>,
    stopped: Stopped,
    after: DesignFile,
    /// How the merit went in each stage.
    history: Vec<MeritHistory>,
}

impl<'a> Account<'a> {
    /// The account of at least one stage.
    pub(super) fn new(
        before: &'a DesignFile,
        stages: Vec<Optimisation>,
        history: Vec<MeritHistory>,
    ) -> Result<Self, Failure> {
        let mut reports = Vec::with_capacity(stages.len());
        let mut last = None;
        for stage in stages {
            reports.push(stage.report);
            last = Some((stage.stopped, stage.file));
        }
        let Some((stopped, after)) = last else { return Err(Failure::NoStage) };
        let start = reports[0].start.clone();
        Ok(Self { before, start, stages: reports, stopped, after, history })
    }

    /// The optimised design.
    pub(super) fn result(&self) -> &DesignFile {
        &self.after
    }

    /// How the merit went, a list of iteration and merit a method.
    pub(super) fn merit_runs(&self) -> Vec<(String, MeritHistory)> {
        let methods = self.stages.iter().map(|stage| stage.method.to_owned());
        methods.zip(self.history.iter().cloned()).collect()
    }

    fn end(&self) -> &Assessment {
        self.stages.last().map_or(&self.start, |stage| &stage.end)
    }

    /// Whether every goal and limit is met at the end.
    pub(super) fn meets(&self) -> bool {
        self.end().meets
    }

    fn iterations(&self) -> u64 {
        self.stages.iter().map(|stage| stage.iterations).sum()
    }

    fn evaluations(&self) -> u64 {
        self.stages.iter().map(|stage| stage.evaluations).sum()
    }

    fn seconds(&self) -> f64 {
        self.stages.iter().map(|stage| stage.solve_seconds).sum()
    }

    /// For machines: `drawtube-optimisation/1`. With several methods it also lists each of them
    /// under `stages`.
    pub(super) fn document(&self) -> Result<String, Failure> {
        let mut document = json!(self.stages.last());
        if let (Value::Object(map), true) = (&mut document, self.stages.len() > 1) {
            let methods: Vec<&str> = self.stages.iter().map(|stage| stage.method).collect();
            map.insert("method".into(), json!(methods.join(", then ")));
            map.insert("iterations".into(), json!(self.iterations()));
            map.insert("evaluations".into(), json!(self.evaluations()));
            map.insert("solve_seconds".into(), json!(self.seconds()));
            map.insert("start".into(), json!(self.start));
            let stages = self.stages.iter().map(|stage| {
                json!({
                    "method": stage.method,
                    "stopped": stage.stopped,
                    "iterations": stage.iterations,
                    "evaluations": stage.evaluations,
                    "solve_seconds": stage.solve_seconds,
                    "merit": stage.end.merit,
                })
            });
            map.insert("stages".into(), stages.collect());
        }
        if let Value::Object(map) = &mut document {
            let runs = self.merit_runs().into_iter();
            let runs = runs
                .map(|(method, points)| json!({ "method": method, "iteration_and_merit": points }));
            map.insert("version".into(), json!(env!("CARGO_PKG_VERSION")));
            map.insert("merit_history".into(), runs.collect());
        }
        serde_json::to_string_pretty(&document).map_err(Failure::Document)
    }

    /// For people.
    pub(super) fn text(&self, destination: &Destination, saved: bool) -> String {
        let stages = self.stages.iter().map(|stage| (stage.method, stage.stopped.clone()));
        let told = text::optimisation::optimisation(&text::optimisation::Told {
            before: self.before,
            start: &self.start,
            after: &self.after,
            end: self.end(),
            stages: stages.collect(),
            iterations: self.iterations(),
            evaluations: self.evaluations(),
            solving: Duration::try_from_secs_f64(self.seconds()).unwrap_or_default(),
            warnings: self.warnings(),
            notes: self.notes(),
        });
        if saved { format!("{told}\n{}", destination.told("design")) } else { told }
    }

    /// The variables that ended on a bound.
    fn on_bounds(&self) -> Option<String> {
        let last = self.stages.last()?;
        text::bounds::ended_on_bounds(&last.on_bounds, last.variables)
    }

    /// A bound is no reason to worry where everything is met.
    fn notes(&self) -> Vec<String> {
        let told = self.on_bounds().filter(|_| self.end().meets);
        let told = told.map(|told| format!("{told}: a wider limit or range may do still better"));
        told.into_iter().collect()
    }

    fn warnings(&self) -> Vec<String> {
        let mut warnings = Vec::new();
        if let Some(told) = self.on_bounds().filter(|_| !self.end().meets) {
            warnings.push(format!(
                "{told}: widen the limits or ranges that hold them, if the design can bear it, and \
                 optimise again"
            ));
        }
        match self.stopped {
            Stopped::IterationLimit => warnings.push(
                "the merit was still moving: give more --iterations, or optimise the result again"
                    .to_owned(),
            ),
            Stopped::LimitsContradict => warnings.push(
                "no design nearby keeps every limit: relax one of those crossed, or free more \
                 numbers"
                    .to_owned(),
            ),
            Stopped::NoProgress => warnings.push(
                "the solver got stuck: another method (--then nelder-mead) may find a way on"
                    .to_owned(),
            ),
            _ => {}
        }
        warnings
    }
}
