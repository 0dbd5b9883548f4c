//! What is wrong along a movement curve, and what a cam maker should know of it.

use merit_function::assessment::{Assessment, LimitAssessment};
use merit_function::limits::LimitKind;
use merit_function::wishes::Wishes;
use serde::Serialize;
use surface_model::design::Design;
use surface_model::solid::Solid;

use super::document::{CurvePoint, GroupWay, Part};
use super::settings::CamSettings;

/// Kinds of finding.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum FindingKind {
    /// Two neighbouring states lie on different curves, or the curve turns back between them.
    BranchChange,
    /// Rays do not get through.
    Fault,
    /// Two groups touch, on axis or at the edge.
    Collision,
    /// A limit of the design file is crossed between the states.
    Limit,
    /// A goal of the design file is missed between the states.
    Goal,
    /// A slope or pressure angle is steeper than allowed.
    Steep,
    /// A group turns back.
    Reversal,
    /// The curve does not go through a state.
    LeftOut,
}

/// One finding.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Finding {
    /// What kind.
    pub kind: FindingKind,
    /// Whether it is wrong, and not only to be known.
    pub wrong: bool,
    /// The ratios it is about, from and to.
    pub ratios: [f64; 2],
    /// What it is about: a group, a limit, a goal.
    pub what: String,
    /// The worst value met, in the unit that `told` names; `None` where there is none.
    pub worst: Option<f64>,
    /// The whole of it as a sentence.
    pub told: String,
}

/// A run of neighbouring points at which something holds, and the worst of it.
struct Run {
    from: f64,
    to: f64,
    worst: f64,
    worst_at: f64,
}

/// Runs of neighbouring points where `badness` is above zero; the worst has the greatest.
fn runs(points: &[CurvePoint], badness: impl Fn(usize) -> Option<(f64, f64)>) -> Vec<Run> {
    let mut runs: Vec<Run> = Vec::new();
    let mut open: Option<(Run, f64)> = None;
    for (k, point) in points.iter().enumerate() {
        match badness(k).filter(|(bad, _)| *bad > 0.0) {
            Some((bad, value)) => {
                let (run, worst) = open.get_or_insert_with(|| {
                    let at = point.ratio;
                    (Run { from: at, to: at, worst: value, worst_at: at }, bad)
                });
                run.to = point.ratio;
                if bad > *worst {
                    *worst = bad;
                    (run.worst, run.worst_at) = (value, point.ratio);
                }
            }
            None => runs.extend(open.take().map(|(run, _)| run)),
        }
    }
    runs.extend(open.map(|(run, _)| run));
    runs
}

/// Everything that can be found at the points of a curve.
pub(super) struct Look<'a> {
    pub(super) design: &'a Design,
    pub(super) wishes: &'a Wishes,
    pub(super) settings: &'a CamSettings,
    /// The states that the curve goes through.
    pub(super) knots: &'a [usize],
    pub(super) groups: &'a [GroupWay],
    pub(super) points: &'a [CurvePoint],
    /// The points as zoom states of the design, assessed; state k is point k and is called so.
    pub(super) assessment: &'a Assessment,
}

impl Look<'_> {
    pub(super) fn findings(&self) -> Vec<Finding> {
        let mut found = self.faults();
        found.extend(self.collisions());
        found.extend(self.limits());
        found.extend(self.goals());
        found.extend(self.steep());
        found.extend(self.steeper_than_the_limit());
        found.extend(self.reversals());
        found
    }

    fn faults(&self) -> Vec<Finding> {
        let fault = |k: usize| self.assessment.states[k].fault.as_deref();
        let bad = runs(self.points, |k| fault(k).map(|_| (1.0, 0.0)));
        bad.iter()
            .map(|run| Finding {
                kind: FindingKind::Fault,
                wrong: true,
                ratios: [run.from, run.to],
                what: "rays".into(),
                worst: None,
                told: format!("{} rays fail", between(run)),
            })
            .collect()
    }

    fn names(&self, after: usize) -> (&str, &str) {
        (&self.design.groups[after].name, &self.design.groups[after + 1].name)
    }

    fn collisions(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        for after in 0..self.design.groups.len().saturating_sub(1) {
            let (left, right) = self.names(after);
            let axis = runs(self.points, |k| {
                let spacing = self.points[k].spacings_mm[after];
                Some((-spacing, spacing))
            });
            let edge = runs(self.points, |k| {
                let gap = self.edge_gap_mm(after, self.points[k].spacings_mm[after])?;
                Some((-gap, gap))
            });
            for (place, run) in axis
                .iter()
                .map(|run| ("on axis", run))
                .chain(edge.iter().map(|run| ("at the edge", run)))
            {
                found.push(Finding {
                    kind: FindingKind::Collision,
                    wrong: true,
                    ratios: [run.from, run.to],
                    what: format!("{left}, {right}"),
                    worst: Some(run.worst),
                    told: format!(
                        "{} {left} and {right} overlap {place}, by up to {:.3} mm at {:.4}x",
                        between(run),
                        -run.worst,
                        run.worst_at
                    ),
                });
            }
        }
        found
    }

    /// Air at the smaller clear radius of the two facing surfaces, mm.
    fn edge_gap_mm(&self, after: usize, axial_mm: f64) -> Option<f64> {
        let front = self.design.groups[after].elements.last()?.surfaces.last()?;
        let back = self.design.groups[after + 1].elements.first()?.surfaces.first()?;
        let height_mm = front.semi_diameter.min(back.semi_diameter);
        Solid { front, back, axial_mm }.thickness(height_mm).ok()
    }

    fn limits(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        let mut seen: Vec<(LimitKind, String)> = Vec::new();
        let moving = self.assessment.limits.iter().filter(|limit| depends_on_movement(limit.limit));
        let placed: Vec<(&LimitAssessment, Option<usize>, String)> =
            moving.map(|limit| (limit, self.state_of(limit), self.place_of(limit))).collect();
        for (limit, _, place) in &placed {
            let key = (limit.limit, place.clone());
            if seen.contains(&key) {
                continue;
            }
            seen.push(key);
            let mut at_point: Vec<Option<&LimitAssessment>> = vec![None; self.points.len()];
            for (other, state, other_place) in &placed {
                if other.limit == limit.limit && other_place == place {
                    match state {
                        Some(k) if *k < at_point.len() => at_point[*k] = Some(other),
                        _ => at_point.fill(Some(other)),
                    }
                }
            }
            let bad = runs(self.points, |k| at_point[k].map(crossed));
            found.extend(bad.iter().map(|run| limit_finding(limit, place, run)));
        }
        found
    }

    /// The point that a limit's value is measured at.
    fn state_of(&self, limit: &LimitAssessment) -> Option<usize> {
        let steps = limit.at.steps();
        let from_address = match steps.as_slice() {
            [first, state, ..] if *first == "states" => state.parse().ok(),
            _ => None,
        };
        from_address.or_else(|| limit.state.as_ref()?.parse().ok())
    }

    /// What a limit is about, the same at all points.
    fn place_of(&self, limit: &LimitAssessment) -> String {
        let steps = limit.at.steps();
        match steps.as_slice() {
            ["states", _, "spacings_mm", after] => match after.parse::<usize>() {
                Ok(after) if after + 1 < self.design.groups.len() => {
                    let (left, right) = self.names(after);
                    format!("{left} to {right}")
                }
                _ => limit.at.to_string(),
            },
            ["states", ..] => "the whole".into(),
            ["groups", group] => match group.parse::<usize>() {
                Ok(group) if group < self.design.groups.len() => {
                    self.design.groups[group].name.clone()
                }
                _ => limit.at.to_string(),
            },
            _ => limit.at.to_string(),
        }
    }

    fn goals(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        let wavelengths = self.points.first().map_or(0, |point| point.wavefront.len());
        for w in 0..wavelengths {
            let bad = runs(self.points, |k| {
                let rms = self.points[k].wavefront[w].rms_waves?;
                let within = self.goals_at(k)?.wavefront_rms_waves?;
                Some((rms / within - 1.0, rms))
            });
            let nm = self.points[0].wavefront[w].wavelength_nm;
            let name = format!("the RMS wavefront at {nm} nm");
            found.extend(bad.iter().map(|run| goal_finding(&name, run, "waves")));
        }
        let bad = runs(self.points, |k| {
            let slope = self.points[k].exit_slope_urad?.abs();
            Some((slope / self.goals_at(k)?.exit_slope_urad? - 1.0, slope))
        });
        found.extend(bad.iter().map(|run| goal_finding("the paraxial exit slope", run, "µrad")));
        let bad = runs(self.points, |k| {
            let off = self.assessment.states[k].exit_focus_error_m?.abs();
            Some((off / self.goals_at(k)?.exit_focus_m?.within_m - 1.0, off))
        });
        found.extend(bad.iter().map(|run| goal_finding("the paraxial focus", run, "m off")));
        found
    }

    /// The goals of the state nearest in ratio, of those that the curve goes through.
    fn goals_at(&self, k: usize) -> Option<&merit_function::goals::Goals> {
        let ratio = self.points[k].ratio;
        let away = |state: usize| (self.design.states[state].ratio - ratio).abs();
        let nearest = self.knots.iter().copied().min_by(|&a, &b| away(a).total_cmp(&away(b)))?;
        self.wishes.states.get(nearest)
    }

    fn steep(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        for (g, group) in self.groups.iter().enumerate().filter(|(_, g)| g.part != Part::Still) {
            let mut push =
                |limit: Option<f64>, unit: &str, value: &dyn Fn(usize) -> Option<f64>| {
                    let Some(allowed) = limit else { return };
                    let bad = runs(self.points, |k| value(k).map(|value| (value - allowed, value)));
                    found.extend(bad.iter().map(|run| Finding {
                        kind: FindingKind::Steep,
                        wrong: true,
                        ratios: [run.from, run.to],
                        what: group.name.clone(),
                        worst: Some(run.worst),
                        told: format!(
                            "{} {} is steeper than {allowed} {unit}: {:.3} at {:.4}x",
                            between(run),
                            group.name,
                            run.worst,
                            run.worst_at
                        ),
                    }));
                };
            let at = |k: usize| &self.points[k].groups[g];
            push(self.settings.steepest_mm, "mm a unit of ratio", &|k| {
                Some(at(k).slope_mm_per_ratio.abs())
            });
            push(self.settings.steepest_deg, "° of pressure angle", &|k| {
                at(k).groove.map(|groove| groove.pressure_deg)
            });
        }
        found
    }

    /// Slopes beyond the limit of the design file.
    fn steeper_than_the_limit(&self) -> Vec<Finding> {
        let kind = LimitKind::SlopeMmPerRatio;
        let Some(range) = self.wishes.limits.range(kind) else { return Vec::new() };
        let mut found = Vec::new();
        for (g, group) in self.groups.iter().enumerate().filter(|(_, g)| g.part != Part::Still) {
            let bad = runs(self.points, |k| {
                let slope = self.points[k].groups[g].slope_mm_per_ratio.abs();
                Some((slope - range.max - kind.tolerance(), slope))
            });
            let wanted = format!("at most {}", range.max);
            found.extend(bad.iter().map(|run| crossing(kind, &group.name, run, &wanted)));
        }
        found
    }

    fn reversals(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        for (g, group) in self.groups.iter().enumerate() {
            // A way of a micrometre is no movement.
            if group.part == Part::Still || group.travel_mm < 1e-3 {
                continue;
            }
            for pair in self.points.windows(2) {
                let slope = |point: &CurvePoint| point.groups[g].slope_mm_per_ratio;
                let (before, behind) = (slope(&pair[0]), slope(&pair[1]));
                if before * behind >= 0.0 {
                    continue;
                }
                let share = before / (before - behind);
                let at = pair[0].ratio + share * (pair[1].ratio - pair[0].ratio);
                let must_not = self.wishes.limits.is_monotonic(self.design, g);
                found.push(Finding {
                    kind: FindingKind::Reversal,
                    wrong: must_not,
                    ratios: [at, at],
                    what: group.name.clone(),
                    worst: None,
                    told: format!(
                        "{} turns back at {at:.4}x{}",
                        group.name,
                        if must_not { ", which the limit monotonic does not allow" } else { "" }
                    ),
                });
            }
        }
        found
    }
}

fn depends_on_movement(kind: LimitKind) -> bool {
    matches!(
        kind,
        LimitKind::SpacingMm
            | LimitKind::EdgeGapMm
            | LimitKind::TravelMm
            | LimitKind::IncidenceDeg
            | LimitKind::TrackMm
            | LimitKind::InternalFocus
            | LimitKind::HousingMm
    )
}

/// By how much a limit is crossed, beyond its tolerance; and its value.
fn crossed(limit: &LimitAssessment) -> (f64, f64) {
    let Some(value) = limit.value else { return (0.0, 0.0) };
    let below = limit.min.map_or(f64::NEG_INFINITY, |min| min - value);
    let above = limit.max.map_or(f64::NEG_INFINITY, |max| value - max);
    (below.max(above) - limit.limit.tolerance(), value)
}

fn limit_finding(limit: &LimitAssessment, place: &str, run: &Run) -> Finding {
    let wanted = match (limit.min, limit.max) {
        (Some(min), _) if run.worst < min => format!("at least {min}"),
        (_, Some(max)) => format!("at most {max}"),
        (min, None) => format!("at least {}", min.unwrap_or(0.0)),
    };
    crossing(limit.limit, place, run, &wanted)
}

fn crossing(kind: LimitKind, place: &str, run: &Run, wanted: &str) -> Finding {
    let word = kind.word();
    Finding {
        kind: FindingKind::Limit,
        wrong: true,
        ratios: [run.from, run.to],
        what: format!("{word} {place}"),
        worst: Some(run.worst),
        told: format!(
            "{} the limit {word} of {place} is crossed: {:.4} at {:.4}x where {wanted} is allowed",
            between(run),
            run.worst,
            run.worst_at
        ),
    }
}

fn goal_finding(name: &str, run: &Run, unit: &str) -> Finding {
    Finding {
        kind: FindingKind::Goal,
        wrong: true,
        ratios: [run.from, run.to],
        what: name.into(),
        worst: Some(run.worst),
        told: format!(
            "{} {name} misses its goal: {:.3} {unit} at {:.4}x",
            between(run),
            run.worst,
            run.worst_at
        ),
    }
}

fn between(run: &Run) -> String {
    if run.from == run.to {
        format!("at {:.4}x", run.from)
    } else {
        format!("from {:.4}x to {:.4}x", run.from, run.to)
    }
}
