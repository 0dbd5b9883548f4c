//! Limits of the design file, held against the points between the states.

use merit_function::assessment::LimitAssessment;
use merit_function::limits::LimitKind;

use super::document::Part;
use super::finding::{Finding, FindingKind};
use super::findings::Look;
use super::stretch::{Stretch, stretches};

impl Look<'_> {
    /// Limits that depend on where groups stand, and are crossed.
    pub(super) fn limits(&self) -> Vec<Finding> {
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
            let bad = stretches(self.points, |k| at_point[k].map(crossed));
            found.extend(bad.iter().map(|stretch| limit_finding(limit, place, stretch)));
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

    /// Slopes beyond the limit of the design file.
    pub(super) fn steeper_than_the_limit(&self) -> Vec<Finding> {
        let kind = LimitKind::SlopeMmPerRatio;
        let Some(range) = self.wishes.limits.range(kind) else { return Vec::new() };
        let mut found = Vec::new();
        for (g, group) in self.groups.iter().enumerate().filter(|(_, g)| g.part != Part::Still) {
            let bad = stretches(self.points, |k| {
                let slope = self.points[k].groups[g].slope_mm_per_ratio.abs();
                Some((slope - range.max - kind.tolerance(), slope))
            });
            let wanted = format!("at most {}", range.max);
            found.extend(bad.iter().map(|stretch| crossing(kind, &group.name, stretch, &wanted)));
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

fn limit_finding(limit: &LimitAssessment, place: &str, stretch: &Stretch) -> Finding {
    let wanted = match (limit.min, limit.max) {
        (Some(min), _) if stretch.worst < min => format!("at least {min}"),
        (_, Some(max)) => format!("at most {max}"),
        (min, None) => format!("at least {}", min.unwrap_or(0.0)),
    };
    crossing(limit.limit, place, stretch, &wanted)
}

fn crossing(kind: LimitKind, place: &str, stretch: &Stretch, wanted: &str) -> Finding {
    let word = kind.word();
    Finding {
        kind: FindingKind::Limit,
        wrong: true,
        ratios: [stretch.from, stretch.to],
        what: format!("{word} {place}"),
        worst: Some(stretch.worst),
        told: told(kind, place, stretch, wanted),
    }
}

/// The finding as a sentence; no file asks for the ends of the tube by a key.
fn told(kind: LimitKind, place: &str, stretch: &Stretch, wanted: &str) -> String {
    let between = stretch.between();
    let at = if stretch.from == stretch.to {
        String::new()
    } else {
        format!(" at {:.4}x", stretch.worst_at)
    };
    let (word, worst) = (kind.word(), stretch.worst);
    match kind {
        LimitKind::HousingMm if worst < 0.0 => {
            format!("{between} a group reaches beyond an end of the tube, by {:.4} mm{at}", -worst)
        }
        _ => format!(
            "{between} the limit {word} of {place} is crossed: {worst:.4}{at} where {wanted} is \
             allowed"
        ),
    }
}
