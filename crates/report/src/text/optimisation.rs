//! What `optimise` prints for people: before and after, side by side.

use std::time::Duration;

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, StateAssessment};

use super::number::{
    as_written, counted, fixed_or_dash, fixed_or_less, significant_or_dash, wavefront,
};
use super::states::{about, at_temperature};
use super::table::{ARROW, Column, Table};
use super::{WIDTH, assessment, hazards, notes, optimised, paragraph, sections, warnings};

/// What is told about an optimisation.
#[derive(Debug)]
pub struct Told<'a> {
    /// The file as it was.
    pub before: &'a DesignFile,
    /// Its assessment.
    pub start: &'a Assessment,
    /// The file as it is now.
    pub after: &'a DesignFile,
    /// Its assessment.
    pub end: &'a Assessment,
    /// Methods in order, and why each stopped.
    pub stages: Vec<(&'static str, String)>,
    /// Steps tried.
    pub iterations: u64,
    /// Evaluations of all residuals.
    pub evaluations: u64,
    /// Time of the solver alone.
    pub solving: Duration,
    /// Warnings beside those of the assessment.
    pub warnings: Vec<String>,
    /// What is well and could be better.
    pub notes: Vec<String>,
}

/// The whole account of an optimisation.
#[must_use]
pub fn optimisation(told: &Told<'_>) -> String {
    let mut parts =
        vec![assessment::heading(told.before), states(told), of_the_beam(told), totals(told)];
    parts.extend(optimised::moved(told.before, told.after));
    parts.push(how(told));
    let all: Vec<String> = told.warnings.iter().chain(&told.end.warnings).cloned().collect();
    parts.push(warnings(&all));
    parts.push(notes(&told.notes));
    parts.push(hazards::first_caution(told.end));
    parts.push(assessment::closing(told.after, told.end));
    sections(parts)
}

fn states(told: &Told<'_>) -> String {
    let mut table = Table::new([
        (Column::Left, "state"),
        (Column::Right, "wave-\nlength nm"),
        (Column::From, "RMS\nwaves\nbefore"),
        (Column::Arrow, ""),
        (Column::Right, "after"),
        (Column::From, "ratio\nerror %\nbefore"),
        (Column::Arrow, ""),
        (Column::Right, "after"),
        (Column::From, "exit slope\nµrad\nbefore"),
        (Column::Arrow, ""),
        (Column::Right, "after"),
    ]);
    for ((_, before), (temperature_c, after)) in told.start.all_states().zip(told.end.all_states())
    {
        for k in 0..after.wavefront.len() {
            table.row(row(before, after, temperature_c, k));
        }
    }
    table.text()
}

fn row(
    before: &StateAssessment,
    after: &StateAssessment,
    temperature_c: Option<f64>,
    k: usize,
) -> Vec<String> {
    let arrow = || ARROW.to_owned();
    let rms = |state: &StateAssessment| {
        wavefront(state.wavefront.get(k).and_then(|wavefront| wavefront.rms_waves))
    };
    let nm = after.wavefront.get(k).map_or_else(String::new, |w| as_written(w.wavelength_nm));
    let name = if k == 0 { at_temperature(&after.name, temperature_c) } else { String::new() };
    let mut row = vec![name, nm, rms(before), arrow(), rms(after)];
    if k == 0 {
        let error = |state: &StateAssessment| fixed_or_less(state.ratio_error_percent, 4);
        let slope = |state: &StateAssessment| fixed_or_dash(state.exit_slope_urad, 2);
        row.extend([error(before), arrow(), error(after), slope(before), arrow(), slope(after)]);
    } else {
        row.resize(11, String::new());
    }
    row
}

/// The goals about the real beam, one a line; empty if there are none.
fn of_the_beam(told: &Told<'_>) -> String {
    let mut table = Table::new([
        (Column::Left, "state"),
        (Column::Left, "goal of the real beam"),
        (Column::From, "before"),
        (Column::Arrow, ""),
        (Column::Right, "after"),
    ]);
    let states = told.start.states.iter().zip(&told.end.states);
    for (goals, (before, after)) in told.after.wishes.states.iter().zip(states) {
        let mut row = |what: String, of: &dyn Fn(&StateAssessment) -> Option<f64>| {
            let value = |state| significant_or_dash(of(state), 5);
            let arrow = ARROW.to_owned();
            table.row([after.name.clone(), what, value(before), arrow, value(after)]);
        };
        if let Some(within) = goals.divergence_mrad {
            let what = format!("divergence mrad, ≤ {}", as_written(within));
            row(what, &|state| state.divergence_mrad);
        }
        if let Some(goal) = goals.diameter_at_range_mm {
            let wanted = about(goal.wanted_mm, goal.within_mm);
            let what = format!("diameter mm at {} m, {wanted}", as_written(goal.range_m));
            row(what, &|state| state.diameter_at_range_mm);
        }
        if let Some(goal) = goals.exit_focus_m {
            let what = format!("focus at m, {}", about(goal.wanted_m, goal.within_m));
            row(what, &|state| state.exit_focus_m);
        }
    }
    table.text()
}

fn totals(told: &Told<'_>) -> String {
    let crossed = |assessment: &Assessment| {
        assessment.limits.iter().filter(|limit| !limit.met).count().to_string()
    };
    let merit = |assessment: &Assessment| significant_or_dash(assessment.merit.total, 4);
    let mut table = Table::new([
        (Column::Left, ""),
        (Column::From, "before"),
        (Column::Arrow, ""),
        (Column::Right, "after"),
    ]);
    let mut row = |what: &str, of: &dyn Fn(&Assessment) -> String| {
        table.row([what.to_owned(), of(told.start), ARROW.to_owned(), of(told.end)]);
    };
    row("merit", &merit);
    row("limits crossed", &crossed);
    table.text()
}

fn how(told: &Told<'_>) -> String {
    let stages = told.stages.iter().map(|(method, stopped)| {
        let mut method = (*method).to_owned();
        if let Some(first) = method.get_mut(..1) {
            first.make_ascii_uppercase();
        }
        paragraph(&format!("{method}: {stopped}."), WIDTH, "")
    });
    let effort = format!(
        "{}, {}, {} of solving.",
        counted(usize::try_from(told.iterations).unwrap_or(usize::MAX), "iteration"),
        counted(usize::try_from(told.evaluations).unwrap_or(usize::MAX), "evaluation"),
        duration(told.solving)
    );
    stages.chain([effort]).collect::<Vec<_>>().join("\n")
}

/// A time as people say it.
fn duration(time: Duration) -> String {
    let seconds = time.as_secs_f64();
    match seconds {
        _ if seconds < 1.0 => format!("{:.1} ms", seconds * 1e3),
        _ if seconds < 100.0 => format!("{seconds:.1} s"),
        _ => format!("{} min {} s", time.as_secs() / 60, time.as_secs() % 60),
    }
}
