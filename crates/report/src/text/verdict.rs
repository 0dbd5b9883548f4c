//! Goals held against what was reached, and the sentence an assessment ends with.

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, LimitAssessment, StateAssessment};
use merit_function::goals::Goals;
use merit_function::limits::LimitKind;

use super::limits::{allowed, margin, name, place};
use super::number::{as_written, counted, significant};
use super::states::at_temperature;

/// One goal in one state.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Mark {
    /// What the goal is about, with the state and, for a wavefront, the wavelength.
    pub(crate) what: String,
    /// The value reached; `None` where it has none.
    pub(crate) value: Option<f64>,
    /// What was wanted.
    pub(crate) within: f64,
    /// Its unit, with a space in front where one belongs.
    unit: &'static str,
}

impl Mark {
    /// Size of the value in units of what was wanted; infinite without a value.
    pub(crate) fn size(&self) -> f64 {
        self.value.map_or(f64::INFINITY, |value| (value / self.within).abs())
    }

    fn missed(&self) -> bool {
        missed(self.value, Some(self.within))
    }

    fn told(&self) -> String {
        let Self { what, within, unit, .. } = self;
        let within = as_written(*within);
        match self.value {
            Some(value) => {
                format!(
                    "the {what}, {}{unit} where {within}{unit} is wanted",
                    significant(value, 3)
                )
            }
            None => format!("the {what}, which cannot be measured"),
        }
    }
}

/// Whether a value misses a goal; one that is not asked for is never missed.
pub(crate) fn missed(value: Option<f64>, within: Option<f64>) -> bool {
    within.is_some_and(|within| value.is_none_or(|value| value.abs() / within > 1.0))
}

/// Every goal of every state.
pub(crate) fn marks(file: &DesignFile, assessment: &Assessment) -> Vec<Mark> {
    let states = file.wishes.states.iter().cycle().zip(assessment.all_states());
    let marks = states.flat_map(|(goals, (temperature_c, state))| {
        marks_of(goals, state, &at_temperature(&state.name, temperature_c))
    });
    marks.collect()
}

fn marks_of(goals: &Goals, state: &StateAssessment, name: &str) -> Vec<Mark> {
    let mut marks = Vec::new();
    if let Some(within) = goals.wavefront_rms_waves {
        marks.extend(state.wavefront.iter().map(|wavefront| Mark {
            what: format!("RMS wavefront of {name} at {} nm", as_written(wavefront.wavelength_nm)),
            value: wavefront.rms_waves,
            within,
            unit: " waves",
        }));
    }
    let mut push = |what: &str, value, within: Option<f64>, unit| {
        let what = format!("{what} of {name}");
        marks.extend(within.map(|within| Mark { what, value, within, unit }));
    };
    push("ratio error", state.ratio_error_percent, goals.ratio_percent, " %");
    push("exit slope", state.exit_slope_urad, goals.exit_slope_urad, " µrad");
    push("divergence", state.divergence_mrad, goals.divergence_mrad, " mrad");
    if let Some(goal) = goals.diameter_at_range_mm {
        let what = format!("error of the diameter at {} m", as_written(goal.range_m));
        let off = state.diameter_at_range_mm.map(|diameter| diameter - goal.wanted_mm);
        push(&what, off, Some(goal.within_mm), " mm");
    }
    let focus = goals.exit_focus_m.map(|goal| goal.within_m);
    push("error of the focus", state.exit_focus_error_m, focus, " m");
    marks
}

/// How near a quantity is to its limit when that is reached, in its unit: the tolerance to which
/// limits in mm are kept.
const REACHED: f64 = 1e-3;

/// The limits that are reached and not crossed. The ends of the tube are not told: a group fixed
/// there touches them always.
fn reached(limits: &[LimitAssessment]) -> Vec<&LimitAssessment> {
    let reached = |limit: &&LimitAssessment| {
        limit.limit != LimitKind::HousingMm && limit.met && margin(limit).abs() <= REACHED
    };
    limits.iter().filter(reached).collect()
}

/// Limits by their kind, in the order in which the kinds come.
fn kinds_of<'a>(limits: &[&'a LimitAssessment]) -> Vec<(LimitKind, Vec<&'a LimitAssessment>)> {
    let mut kinds: Vec<(LimitKind, Vec<&LimitAssessment>)> = Vec::new();
    for &limit in limits {
        match kinds.iter_mut().find(|(kind, _)| *kind == limit.limit) {
            Some((_, list)) => list.push(limit),
            None => kinds.push((limit.limit, vec![limit])),
        }
    }
    kinds
}

/// The worst of every kind that is crossed, a focus inside before everything else.
fn crossed_told(file: &DesignFile, crossed: &[&LimitAssessment]) -> String {
    let mut kinds = kinds_of(crossed);
    kinds.sort_by_key(|(kind, _)| *kind != LimitKind::InternalFocus);
    let worst = kinds.iter().filter_map(|(kind, list)| {
        let worst = list.iter().min_by(|a, b| margin(a).total_cmp(&margin(b)))?;
        let value = worst.value.map_or_else(|| "unknown".to_owned(), |v| significant(v, 4));
        let (allowed, at) = (allowed(worst), place(file, worst));
        let more = match list.len() - 1 {
            0 => String::new(),
            more => format!(", and {more} more"),
        };
        Some(format!("{} of {at}, {value} where {allowed} is allowed{more}", name(*kind)))
    });
    format!("; crossed: {}", worst.collect::<Vec<_>>().join("; "))
}

/// Whether the design does what it should, and what is worst about it.
pub(crate) fn closing_sentence(file: &DesignFile, assessment: &Assessment) -> String {
    let marks = marks(file, assessment);
    let missed: Vec<&Mark> = marks.iter().filter(|mark| mark.missed()).collect();
    let crossed: Vec<&LimitAssessment> =
        assessment.limits.iter().filter(|limit| !limit.met).collect();
    let worst = marks.iter().max_by(|a, b| a.size().total_cmp(&b.size()));
    let faults = assessment.states.iter().filter(|state| state.fault.is_some()).count();

    let mut told = match (missed.len(), crossed.len()) {
        (0, 0) if faults > 0 => format!("Rays fail in {}", counted(faults, "state")),
        (0, 0) if marks.is_empty() => "Every limit is kept; the file asks for no goal".to_owned(),
        (0, 0) => "The design meets every goal and keeps every limit".to_owned(),
        (goals, 0) => format!("The design misses {} of {}", goals, counted(marks.len(), "goal")),
        (0, limits) => {
            format!("The design meets every goal but crosses {}", counted(limits, "limit"))
        }
        (goals, limits) => format!(
            "The design misses {goals} of {} and crosses {}",
            counted(marks.len(), "goal"),
            counted(limits, "limit")
        ),
    };
    if let Some(worst) = worst {
        let which = if worst.missed() { "worst is" } else { "the closest call is" };
        told.push_str(&format!("; {which} {}", worst.told()));
        if worst.missed() && worst.value.is_some() {
            told.push_str(&format!(" ({} times)", significant(worst.size(), 2)));
        }
    }
    if !crossed.is_empty() {
        told.push_str(&crossed_told(file, &crossed));
    }
    let reached = reached(&assessment.limits);
    if missed.is_empty() && crossed.is_empty() && faults == 0 && !reached.is_empty() {
        let joint = if worst.is_some() { ", and" } else { ";" };
        let verb = if reached.len() == 1 { "is" } else { "are" };
        let kinds = kinds_of(&reached).into_iter().map(|(kind, list)| match list.len() {
            1 => name(kind).to_owned(),
            many => format!("{} {many} times", name(kind)),
        });
        told.push_str(&format!(
            "{joint} {} {verb} reached ({})",
            counted(reached.len(), "limit"),
            kinds.collect::<Vec<_>>().join(", ")
        ));
    }
    told.push('.');
    told
}
