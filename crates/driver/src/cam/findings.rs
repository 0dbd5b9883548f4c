//! What is wrong along a movement curve, and what a cam maker should know of it.

use merit_function::assessment::Assessment;
use merit_function::goals::Goals;
use merit_function::wishes::Wishes;
use surface_model::design::Design;
use surface_model::solid::Solid;

use super::document::{CurvePoint, GroupWay, Part};
use super::finding::{Finding, FindingKind};
use super::settings::CamSettings;
use super::stretch::{Stretch, stretches};

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
        let bad = stretches(self.points, |k| fault(k).map(|_| (1.0, 0.0)));
        bad.iter()
            .map(|stretch| Finding {
                kind: FindingKind::Fault,
                wrong: true,
                ratios: [stretch.from, stretch.to],
                what: "rays".into(),
                worst: None,
                told: format!("{} rays fail", stretch.between()),
            })
            .collect()
    }

    /// The two groups with the air number `after` between them.
    pub(super) fn names(&self, after: usize) -> (&str, &str) {
        (&self.design.groups[after].name, &self.design.groups[after + 1].name)
    }

    fn collisions(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        for after in 0..self.design.groups.len().saturating_sub(1) {
            let (left, right) = self.names(after);
            let axis = stretches(self.points, |k| {
                let spacing = self.points[k].spacings_mm[after];
                Some((-spacing, spacing))
            });
            let edge = stretches(self.points, |k| {
                let gap = self.edge_gap_mm(after, self.points[k].spacings_mm[after])?;
                Some((-gap, gap))
            });
            for (place, stretch) in axis
                .iter()
                .map(|stretch| ("on axis", stretch))
                .chain(edge.iter().map(|stretch| ("at the edge", stretch)))
            {
                found.push(Finding {
                    kind: FindingKind::Collision,
                    wrong: true,
                    ratios: [stretch.from, stretch.to],
                    what: format!("{left}, {right}"),
                    worst: Some(stretch.worst),
                    told: format!(
                        "{} {left} and {right} overlap {place}, by up to {:.3} mm at {:.4}x",
                        stretch.between(),
                        -stretch.worst,
                        stretch.worst_at
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

    fn goals(&self) -> Vec<Finding> {
        let mut found = Vec::new();
        let wavelengths = self.points.first().map_or(0, |point| point.wavefront.len());
        for w in 0..wavelengths {
            let bad = stretches(self.points, |k| {
                let rms = self.points[k].wavefront[w].rms_waves?;
                let within = self.goals_at(k)?.wavefront_rms_waves?;
                Some((rms / within - 1.0, rms))
            });
            let nm = self.points[0].wavefront[w].wavelength_nm;
            let name = format!("the RMS wavefront at {nm} nm");
            found.extend(bad.iter().map(|stretch| goal_finding(&name, stretch, "waves")));
        }
        let bad = stretches(self.points, |k| {
            let slope = self.points[k].exit_slope_urad?.abs();
            Some((slope / self.goals_at(k)?.exit_slope_urad? - 1.0, slope))
        });
        found.extend(
            bad.iter().map(|stretch| goal_finding("the paraxial exit slope", stretch, "µrad")),
        );
        let bad = stretches(self.points, |k| {
            let off = self.assessment.states[k].exit_focus_error_m?.abs();
            Some((off / self.goals_at(k)?.exit_focus_m?.within_m - 1.0, off))
        });
        found
            .extend(bad.iter().map(|stretch| goal_finding("the paraxial focus", stretch, "m off")));
        found
    }

    /// The goals of the state nearest in ratio, of those that the curve goes through.
    fn goals_at(&self, k: usize) -> Option<&Goals> {
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
                    let bad =
                        stretches(self.points, |k| value(k).map(|value| (value - allowed, value)));
                    found.extend(bad.iter().map(|stretch| Finding {
                        kind: FindingKind::Steep,
                        wrong: true,
                        ratios: [stretch.from, stretch.to],
                        what: group.name.clone(),
                        worst: Some(stretch.worst),
                        told: format!(
                            "{} {} is steeper than {allowed} {unit}: {:.3} at {:.4}x",
                            stretch.between(),
                            group.name,
                            stretch.worst,
                            stretch.worst_at
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

fn goal_finding(name: &str, stretch: &Stretch, unit: &str) -> Finding {
    Finding {
        kind: FindingKind::Goal,
        wrong: true,
        ratios: [stretch.from, stretch.to],
        what: name.into(),
        worst: Some(stretch.worst),
        told: format!(
            "{} {name} misses its goal: {:.3} {unit} at {:.4}x",
            stretch.between(),
            stretch.worst,
            stretch.worst_at
        ),
    }
}
