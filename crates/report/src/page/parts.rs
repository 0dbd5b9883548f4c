//! Tables of the page.

use driver::cam::{MovementCurve, Part};
use driver::design_file::DesignFile;
use maud::{Markup, html};
use merit_function::assessment::{Assessment, LimitAssessment};
use merit_function::limits::LimitKind;
use surface_model::surface::{Surface, asphere_power};

use crate::text::cam::{held, off_word};
use crate::text::glass;
use crate::text::limits::{FOCUS, allowed, any_of, chosen, margin, name, place};
use crate::text::number::NONE;
use crate::text::states::of_the_beam;
use crate::text::table::{BLANK, Column, Table};
use crate::text::{Scope, as_written, fixed, significant, verdict};

/// A number with so many significant digits and a true minus.
pub(super) fn number(value: f64, digits: usize) -> String {
    significant(value, digits).replace('-', "\u{2212}")
}

fn decimals(value: f64, decimals: usize) -> String {
    fixed(value, decimals).replace('-', "\u{2212}")
}

/// A cell with a number: rounded for people, whole in `data-value`.
pub(super) fn value_cell(value: Option<f64>, told: String, missed: bool) -> Markup {
    let class = missed.then_some("missed");
    html! { td class=[class] data-value=[value] { (told) } }
}

fn cell(value: Option<f64>, places: usize, missed: bool) -> Markup {
    let told = value.map_or_else(|| "–".to_owned(), |value| decimals(value, places));
    value_cell(value, told, missed)
}

/// A table from heads and rows; the first column is words.
pub(super) fn table_of(heads: &[&str], rows: &[Vec<String>]) -> Markup {
    let class = |k: usize| (k == 0).then_some("word");
    html! {
        div.scroll { table {
            tr { @for (k, head) in heads.iter().enumerate() { th class=[class(k)] { (head) } } }
            @for row in rows {
                tr { @for (k, told) in row.iter().enumerate() { td class=[class(k)] { (told) } } }
            }
        } }
    }
}

/// A table of the terminal as a part of the page: heads in one line, a sign for what is missed.
pub(super) fn laid_out(table: &Table) -> Markup {
    let word = |column: Column| matches!(column, Column::Left | Column::Place).then_some("word");
    let columns: Vec<(Column, String)> =
        table.columns().map(|(column, head)| (column, one_line(head))).collect();
    html! {
        div.scroll { table {
            tr { @for (column, head) in &columns { th class=[word(*column)] { (head) } } }
            @for row in table.rows() {
                tr { @for ((column, _), told) in columns.iter().zip(row) {
                    @let told = told.trim_end_matches(BLANK);
                    @match (told.strip_suffix('!'), column) {
                        (_, Column::Left | Column::Place) => { td.word { (told) } }
                        (Some(told), _) => { td.missed { (true_minus(told)) } }
                        (None, _) => { td { (true_minus(told)) } }
                    }
                } }
            }
        } }
    }
}

/// The lines of a head as one; a word broken by a hyphen is put together.
fn one_line(head: &str) -> String {
    let lines = head.lines().map(str::trim).filter(|line| !line.is_empty());
    lines.fold(String::new(), |told, line| match told.strip_suffix('-') {
        Some(begun) if line.starts_with(char::is_lowercase) => format!("{begun}{line}"),
        _ if told.is_empty() => line.to_owned(),
        _ => format!("{told} {line}"),
    })
}

/// Numbers with a true minus; a lone dash says that there is none.
fn true_minus(told: &str) -> String {
    match told {
        NONE => "–".to_owned(),
        told => told.replace('-', "\u{2212}"),
    }
}

/// What every state reaches.
pub(super) fn states(file: &DesignFile, assessment: &Assessment) -> Markup {
    let groups = &file.design.groups;
    html! {
        div.scroll { table.states {
            tr {
                th.word { "state" } th { "ratio wanted" } th { "ratio" } th { "ratio error %" }
                th { "exit slope µrad" } th { "exit beam mm" } th { "wavelength nm" }
                th { "RMS waves" } th { "PV waves" }
            }
            @for (goals, state) in file.wishes.states.iter().zip(&assessment.states) {
                @for (k, wavefront) in state.wavefront.iter().enumerate() {
                    tr data-state=(state.name) data-wavelength=(wavefront.wavelength_nm) {
                        @if k == 0 {
                            td.word { (state.name) }
                            (value_cell(Some(state.ratio_wanted), as_written(state.ratio_wanted), false))
                            (cell(state.ratio, 4, false))
                            (cell(state.ratio_error_percent, 4,
                                verdict::missed(state.ratio_error_percent, goals.ratio_percent)))
                            (cell(state.exit_slope_urad, 2,
                                verdict::missed(state.exit_slope_urad, goals.exit_slope_urad)))
                            (cell(state.exit_diameter_mm, 2, false))
                        } @else { td.word { } td { } td { } td { } td { } td { } }
                        (value_cell(Some(wavefront.wavelength_nm), as_written(wavefront.wavelength_nm), false))
                        (value_cell(wavefront.rms_waves,
                            wavefront.rms_waves.map_or_else(|| "–".into(), |rms| number(rms, 3)),
                            verdict::missed(wavefront.rms_waves, goals.wavefront_rms_waves)))
                        (value_cell(wavefront.pv_waves,
                            wavefront.pv_waves.map_or_else(|| "–".into(), |pv| number(pv, 3)), false))
                    }
                }
            }
        } }
        @if let Some(table) = of_the_beam(file, assessment) { (laid_out(&table)) }
        @for state in assessment.states.iter() {
            @if let Some(fault) = &state.fault { p { (state.name) ": " (fault) } }
        }
        div.scroll { table.spacings {
            tr {
                th.word { "state" }
                @for pair in groups.windows(2) { th { (pair[0].name) " to " (pair[1].name) ", mm" } }
                @for group in groups { th { (group.name) " at mm" } }
                th { "first to last vertex, mm" }
            }
            @for state in &assessment.states {
                tr data-state=(state.name) {
                    td.word { (state.name) }
                    @for &spacing in &state.spacings_mm { (cell(Some(spacing), 4, false)) }
                    @for position in state.positions_mm.values() { (cell(position.as_f64(), 4, false)) }
                    (cell(Some(state.track_mm), 4, false))
                }
            }
        } }
    }
}

/// Every surface: radius, distance to the next, medium.
pub(super) fn prescription(file: &DesignFile) -> Markup {
    let design = &file.design;
    let mut number = 0;
    let mut rows = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            for (s, surface) in element.surfaces.iter().enumerate() {
                number += 1;
                let (thickness, medium) = match element.thicknesses_mm.get(s) {
                    Some(&thickness) => (decimals(thickness, 4), element.glasses[s].full_name()),
                    None => match group.airs_mm.get(e) {
                        Some(&air) => (decimals(air, 4), "air".into()),
                        None if g + 1 < design.groups.len() => ("see states".into(), "air".into()),
                        None => (String::new(), "air".into()),
                    },
                };
                let name = element.name.clone().unwrap_or_else(|| e.to_string());
                rows.push(vec![
                    format!("{number}  {} {name}, surface {s}", group.name),
                    radius(surface),
                    thickness,
                    medium,
                    as_written(element.diameter_mm),
                    shape(surface),
                ]);
            }
        }
    }
    html! {
        (table_of(
            &["surface", "radius mm", "to the next mm", "medium behind", "clear Ø mm", "conic and aspheric terms"],
            &rows,
        ))
        p.faint {
            "Radii are positive with the centre to the right, light comes from the left. Sag z(r) = \
             c r²/(1 + √(1 − (1 + κ) c² r²)) + Σ a r^n. In a tube of "
            (as_written(design.housing.track_mm)) " mm; fixed: "
            @let fixed: Vec<&str> = design.housing.fixed_groups().map(|g| design.groups[g].name.as_str()).collect();
            (if fixed.is_empty() { "none".to_owned() } else { fixed.join(", ") }) "."
        }
    }
}

/// A radius, or flat.
pub(crate) fn radius(surface: &Surface) -> String {
    if surface.curvature == 0.0 { "flat".into() } else { decimals(1.0 / surface.curvature, 4) }
}

/// Conic constant and asphere coefficients, where there are any.
pub(crate) fn shape(surface: &Surface) -> String {
    let mut terms = Vec::new();
    if surface.conic != 0.0 {
        terms.push(format!("κ = {}", decimals(surface.conic, 6)));
    }
    let coefficients = surface.asphere.iter().enumerate().filter(|(_, a)| **a != 0.0);
    terms.extend(coefficients.map(|(term, a)| format!("a{} = {a:.6e}", asphere_power(term))));
    terms.join(", ").replace('-', "\u{2212}")
}

/// The tightest limit of each kind, every one crossed, and all of them to be opened.
pub(super) fn limits(file: &DesignFile, assessment: &Assessment) -> Markup {
    html! {
        (limit_table(file, &chosen(&assessment.limits, Scope::Tightest)))
        @if any_of(assessment, LimitKind::InternalFocus) { p.faint { (FOCUS) } }
        details {
            summary { "All " (assessment.limits.len()) " limited quantities" }
            (limit_table(file, &chosen(&assessment.limits, Scope::All)))
        }
    }
}

fn limit_table(file: &DesignFile, limits: &[&LimitAssessment]) -> Markup {
    html! {
        div.scroll { table {
            tr { th.word { "limit" } th { "allowed" } th { "value" } th { "margin" } th.word { "at" } }
            @for limit in limits {
                tr {
                    td.word { (name(limit.limit)) }
                    td { (allowed(limit)) }
                    (value_cell(limit.value,
                        limit.value.map_or_else(|| if limit.met { "flat".into() } else { "unknown".into() },
                            |value| decimals(value, 4)), !limit.met))
                    td { @let margin = margin(limit);
                        (if margin.is_finite() { decimals(margin, 4) } else { "–".into() }) }
                    td.word { (place(file, limit)) }
                }
            }
        } }
    }
}

/// Every glass with its data and its maker.
pub(super) fn glasses(file: &DesignFile) -> Markup {
    let design = &file.design;
    let mut wavelengths: Vec<f64> =
        design.states.iter().flat_map(|state| &state.wavelengths_nm).copied().collect();
    wavelengths.sort_by(f64::total_cmp);
    wavelengths.dedup();
    let elements = design.groups.iter().flat_map(|group| &group.elements);
    let mut glasses: Vec<_> = Vec::new();
    for glass in elements.flat_map(|element| &element.glasses) {
        if !glasses.contains(&glass) {
            glasses.push(glass);
        }
    }
    let sources: Vec<&str> = glasses.iter().filter_map(|glass| glass.source()).collect();
    html! {
        (laid_out(&glass::of_a_design(&glasses, &wavelengths)))
        @if !sources.is_empty() { p.faint { "Sources: " (sources.join("; ")) "." } }
    }
}

/// What is wrong along the movement curve.
pub(super) fn findings(curve: &MovementCurve) -> Markup {
    html! {
        @if curve.sound {
            p { "Between the states no goal is missed, no limit is crossed and no groups meet." }
        }
        @if !curve.findings.is_empty() {
            ul { @for finding in &curve.findings {
                li { @if finding.wrong { strong { "! " } } (finding.told) }
            } }
        }
    }
}

/// Positions and slopes over the ratio.
pub(super) fn movement(curve: &MovementCurve) -> Markup {
    let moving: Vec<usize> = curve.moving().collect();
    html! {
        div.scroll { table.movement {
            tr {
                th { "ratio" } th.word { "state" }
                @for &g in &moving { th { (curve.groups[g].name) " at mm" } }
                @for &g in &moving { th { (curve.groups[g].name) " slope mm" } }
                @if curve.barrel.is_some() {
                    th { "barrel °" }
                    @for &g in &moving { th { (curve.groups[g].name) " groove °" } }
                }
                th { (off_word(curve)) " µrad" }
            }
            @for point in &curve.points {
                tr {
                    (cell(Some(point.ratio), 4, false))
                    td.word { (point.state.as_deref().unwrap_or("")) }
                    @for &g in &moving { (cell(Some(point.groups[g].position_mm), 4, false)) }
                    @for &g in &moving { (cell(Some(point.groups[g].slope_mm_per_ratio), 4, false)) }
                    @if curve.barrel.is_some() {
                        (cell(point.barrel_deg, 2, false))
                        @for &g in &moving { (cell(point.groups[g].groove.map(|g| g.groove_deg), 2, false)) }
                    }
                    (cell(Some(point.collimation_urad), 2, false))
                }
            }
        } }
        p.faint {
            "Held at " (as_written(curve.wavelength_nm)) " nm: " (held(curve)) ". Positions are of \
             first vertices from the front datum; slopes are d position/d ratio. "
            @for group in curve.groups.iter().filter(|group| group.part == Part::Guided) {
                (group.name) " follows a monotone cubic through the designed states; the others hold \
                 what is held. "
            }
        }
    }
}

/// What the numbers mean.
pub(super) fn definitions() -> Markup {
    html! {
        h2 { "What the numbers mean" }
        p.faint {
            "Ratio and exit slope are paraxial, for collimated light at the first wavelength; the slope is \
             that of the ray at the beam's 1/e² radius. The wavefront error is the optical path of exact \
             rays to the plane through the last vertex less that of the axial ray, weighted by \
             exp(−2r²/w²); RMS is without piston and with defocus, PV over the same heights. The \
             collimation of the movement curve is the slope that the beam-weighted best sphere of the \
             exact exit wavefront gives the ray at the 1/e² radius; where a focus is wanted, the slopes of \
             the movement curve are told less the one that leads there. Indices are relative to air at 20 °C \
             and 1 atm, wavelengths are in air."
        }
    }
}
