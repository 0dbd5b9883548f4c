//! What `cam` prints for people.

use driver::cam::{CurvePoint, Finding, FindingKind, Hold, MovementCurve, Part};
use driver::design_file::DesignFile;

use super::number::{
    NONE, as_written, counted, fixed, fixed_or_dash, significant, significant_or_dash,
};
use super::table::{Column, Table};
use super::{WIDTH, paragraph, sections};

/// Columns of numbers that stand beside the ratio in one table.
const COLUMNS: usize = 6;
/// A head is broken into lines about as wide as its numbers.
const HEAD_WIDTH: usize = 10;

/// The whole account of a movement curve.
#[must_use]
pub fn cam(file: &DesignFile, curve: &MovementCurve) -> String {
    let mut parts = vec![heading(file, curve)];
    parts.extend(movement(curve));
    parts.push(performance(curve));
    parts.extend(sensitivity(curve));
    parts.push(ways(curve));
    parts.push(beside_the_design(curve));
    parts.push(findings(&curve.findings));
    parts.push(closing(curve));
    sections(parts)
}

fn heading(file: &DesignFile, curve: &MovementCurve) -> String {
    let held = held(curve);
    let guided: Vec<&str> = curve
        .groups
        .iter()
        .filter(|group| group.part == Part::Guided)
        .map(|group| group.name.as_str())
        .collect();
    let guided = if guided.is_empty() {
        String::new()
    } else {
        format!("; {} interpolated smoothly between the states", guided.join(" and "))
    };
    let [low, high] = curve.ends();
    let told = format!(
        "Movement from {}x to {}x at {} nm: {held}{guided}. Positions are of first vertices from \
         the front datum, slopes d position/d ratio.",
        as_written(low),
        as_written(high),
        as_written(curve.wavelength_nm),
    );
    let told = paragraph(&told, WIDTH, "");
    let title = &file.design.title;
    if title.is_empty() { told } else { format!("{}\n{told}", paragraph(title, WIDTH, "")) }
}

/// What is held along the curve.
pub(crate) fn held(curve: &MovementCurve) -> String {
    let focus = curve.exit_focus_m.map(|focus_m| format!("a focus at {} m", as_written(focus_m)));
    let exit = focus.as_deref().unwrap_or("collimation");
    match (curve.held, &focus) {
        (Hold::Ratio, _) => {
            format!("only one group moves, so the ratio is held and {exit} is what comes of it")
        }
        (_, Some(_)) => format!("ratio and {exit} behind the last vertex are held"),
        (_, None) => "ratio and collimation are held".to_owned(),
    }
}

/// What the slopes at the 1/e² radius are told against, for heads.
pub(crate) fn off_word(curve: &MovementCurve) -> &'static str {
    if curve.exit_focus_m.is_some() { "off focus" } else { "collimation" }
}

/// One column of numbers.
type Cells<'a> = (String, Box<dyn Fn(&CurvePoint) -> String + 'a>);

/// Tables of so many columns that each fits.
fn tables(curve: &MovementCurve, columns: Vec<Cells<'_>>) -> Vec<String> {
    columns.chunks(COLUMNS).map(|columns| table(curve, columns)).collect()
}

fn table(curve: &MovementCurve, columns: &[Cells<'_>]) -> String {
    let mut heads = vec![(Column::Right, "ratio"), (Column::Left, "state")];
    heads.extend(columns.iter().map(|(head, _)| (Column::Right, head.as_str())));
    let mut table = Table::new(heads);
    for point in &curve.points {
        let mut row = vec![fixed(point.ratio, 4), point.state.clone().unwrap_or_default()];
        row.extend(columns.iter().map(|(_, cell)| cell(point)));
        table.row(row);
    }
    table.text()
}

fn head(group: &str, unit: &str) -> String {
    paragraph(&format!("{group} {unit}"), HEAD_WIDTH, "")
}

fn movement(curve: &MovementCurve) -> Vec<String> {
    let name = |g: usize| curve.groups[g].name.as_str();
    let mut columns: Vec<Cells<'_>> = Vec::new();
    for g in curve.moving() {
        let cell = move |point: &CurvePoint| fixed(point.groups[g].position_mm, 4);
        columns.push((head(name(g), "at mm"), Box::new(cell)));
    }
    for g in curve.moving() {
        let cell = move |point: &CurvePoint| fixed(point.groups[g].slope_mm_per_ratio, 4);
        columns.push((head(name(g), "slope mm"), Box::new(cell)));
    }
    let mut told = tables(curve, columns);
    if let Some(barrel) = &curve.barrel {
        let turned: Cells<'_> =
            ("barrel\n°".into(), Box::new(|point| fixed_or_dash(point.barrel_deg, 2)));
        let grooves = curve.moving().map(|g| -> Cells<'_> {
            let cell = move |point: &CurvePoint| {
                fixed_or_dash(point.groups[g].groove.map(|groove| groove.groove_deg), 2)
            };
            (head(name(g), "groove °"), Box::new(cell))
        });
        let columns = std::iter::once(turned).chain(grooves).collect();
        let note = format!(
            "Barrel of radius {} mm that turns {}° in proportion to the ratio. The groove angle is \
             that to the circumference; without its sign it is the pressure angle.",
            as_written(barrel.radius_mm),
            as_written(barrel.turn_deg)
        );
        told.push(format!(
            "{}\n{}",
            paragraph(&note, WIDTH, ""),
            tables(curve, columns).join("\n\n")
        ));
    }
    told
}

fn performance(curve: &MovementCurve) -> String {
    let mut columns: Vec<Cells<'_>> = vec![
        ("ratio\nerror %".into(), Box::new(|point| fixed_or_dash(point.ratio_error_percent, 4))),
        (format!("{}\nµrad", off_word(curve)), Box::new(|point| fixed(point.collimation_urad, 2))),
        ("paraxial\nµrad".into(), Box::new(|point| fixed_or_dash(point.paraxial_off_urad, 2))),
    ];
    if curve.exit_focus_m.is_some() {
        let cell = |point: &CurvePoint| significant_or_dash(point.exit_focus_m, 4);
        columns.push(("paraxial\nfocus m".into(), Box::new(cell)));
    }
    let wavelengths = curve.points.first().map_or(&[][..], |point| &point.wavefront);
    for (w, at) in wavelengths.iter().enumerate() {
        let head = format!("RMS waves\n{} nm", as_written(at.wavelength_nm));
        let cell = move |point: &CurvePoint| {
            significant_or_dash(point.wavefront.get(w).and_then(|w| w.rms_waves), 3)
        };
        columns.push((head, Box::new(cell)));
    }
    tables(curve, columns).join("\n\n")
}

fn sensitivity(curve: &MovementCurve) -> Vec<String> {
    let changes = match curve.exit_focus_m {
        None => "collimation changes,\nµrad per µm: from",
        Some(_) => "exit slope changes,\nµrad per µm: from",
    };
    let mut table = Table::new([
        (Column::Left, "group alone\nout of place"),
        (Column::Right, changes),
        (Column::Right, "\nto"),
    ]);
    for (g, group) in curve.groups.iter().enumerate() {
        let values = curve.fine.iter().map(|point| point.groups[g].collimation_urad_per_um);
        let ends = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), value| {
            (low.min(value), high.max(value))
        });
        table.row([group.name.clone(), fixed(ends.0, 3), fixed(ends.1, 3)]);
    }
    vec![table.text()]
}

fn ways(curve: &MovementCurve) -> String {
    let mut table = Table::new([
        (Column::Left, "group"),
        (Column::Left, "moves"),
        (Column::Right, "foremost\nmm"),
        (Column::Right, "rearmost\nmm"),
        (Column::Right, "travel\nmm"),
        (Column::Right, "steepest\nmm a ratio"),
    ]);
    for group in &curve.groups {
        let moves = match group.part {
            Part::Still => "not",
            Part::Solved if curve.held == Hold::Ratio => "to hold the ratio",
            Part::Solved => "to hold ratio and beam",
            Part::Guided => "on a smooth path",
        };
        let [from, to] = group.from_to_mm;
        table.row([
            group.name.clone(),
            moves.to_owned(),
            fixed(from, 4),
            fixed(to, 4),
            fixed(group.travel_mm, 4),
            fixed(group.steepest_mm_per_ratio, 4),
        ]);
    }
    table.text()
}

/// How far the designed positions are from the curve.
fn beside_the_design(curve: &MovementCurve) -> String {
    let off = |state: &driver::cam::DesignedState| {
        state.curve_less_design_mm.iter().map(|by| by.abs()).fold(0.0, f64::max)
    };
    let worst = curve.states.iter().max_by(|a, b| off(a).total_cmp(&off(b)));
    let Some(worst) = worst else { return NONE.to_owned() };
    let told = format!(
        "At the designed states the curve is at most {} mm off their positions (state {}).",
        fixed(off(worst), 4),
        worst.name
    );
    paragraph(&told, WIDTH, "")
}

fn findings(findings: &[Finding]) -> String {
    let lines = findings.iter().map(|finding| {
        let sign = if finding.wrong { "! " } else { "- " };
        paragraph(&format!("{sign}{}", finding.told), WIDTH, "  ")
    });
    lines.collect::<Vec<_>>().join("\n")
}

fn closing(curve: &MovementCurve) -> String {
    let wrong = curve.findings.iter().filter(|finding| finding.wrong).count();
    let told = if wrong == 0 {
        "Between the states no goal is missed, no limit is crossed and no groups meet.".to_owned()
    } else {
        format!(
            "{} wrong along the curve, marked with !.",
            match wrong {
                1 => "1 thing is".to_owned(),
                many => format!("{} are", counted(many, "thing")),
            }
        )
    };
    let told = [Some(told), remedy(curve)].into_iter().flatten().collect::<Vec<_>>().join(" ");
    paragraph(&told, WIDTH, "")
}

/// Limits that `between_states` keeps along the curve, by their words.
const KEPT: [&str; 5] = ["housing_mm", "spacing_mm", "edge_gap_mm", "travel_mm", "track_mm"];

/// What can be done about limits crossed between the states.
fn remedy(curve: &MovementCurve) -> Option<String> {
    let wrong = |kind| curve.findings.iter().find(move |one| one.wrong && one.kind == kind);
    let collision = wrong(FindingKind::Collision);
    let crossed = collision.or_else(|| wrong(FindingKind::Limit))?;
    let limit = crossed.what.split(' ').next().unwrap_or_default();
    let guided = curve.groups.iter().any(|group| group.part == Part::Guided);
    if !guided && (collision.is_some() || KEPT.contains(&limit)) {
        return Some(
            "With \"between_states\": \"keep\" among the limits, optimise keeps to the tube, \
             spacings and travel along the curve."
                .to_owned(),
        );
    }
    let ratio = significant(0.5 * (crossed.ratios[0] + crossed.ratios[1]), 3);
    Some(format!("A further state, at {ratio}x or so, would hold optimise to its limits there."))
}
