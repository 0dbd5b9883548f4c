//! The tables of the real beam.

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, BeamAssessment, BeamNumbers, SurfaceBeam};

use super::number::{NONE, as_written, fixed, fixed_or_dash, significant, significant_or_dash};
use super::table::{Column, Table};
use super::{WIDTH, hazards, paragraph, sections, surface_name};

/// What `assess --beam` prints: everything about the real beam.
#[must_use]
pub fn beam(file: &DesignFile, beams: &[BeamAssessment], assessment: &Assessment) -> String {
    sections([
        super::assessment::heading(file),
        entrance_told(beams),
        exits(beams).text(),
        readjustments(beams).text(),
        ranges(file, beams).text(),
        pointing(beams).text(),
        sections(surfaces(file, beams).into_iter().map(Table::text)),
        paragraph(EXPLAINED, WIDTH, ""),
        hazards::first_caution(assessment),
    ])
}

/// What `assess` prints of it: how it enters and leaves.
pub(crate) fn summary(assessment: &Assessment) -> String {
    let Some(beams) = &assessment.real_beam else { return String::new() };
    sections([entrance_told(beams), exits(beams).text()])
}

fn entrance_told(beams: &[BeamAssessment]) -> String {
    let lines: Vec<String> =
        entrance(beams).iter().map(|told| paragraph(told, WIDTH, "  ")).collect();
    lines.join("\n")
}

/// The beam that enters, a sentence a wavelength where they differ.
pub(crate) fn entrance(beams: &[BeamAssessment]) -> Vec<String> {
    let mut told: Vec<(f64, BeamNumbers)> = Vec::new();
    for beam in beams {
        if !told.iter().any(|(nm, _)| *nm == beam.wavelength_nm) {
            told.push((beam.wavelength_nm, beam.entrance));
        }
    }
    let line = |(nm, beam): &(f64, BeamNumbers)| {
        let waist = match beam.waist_at_m {
            at if at.abs() < 5e-7 => "at the first surface".to_owned(),
            at if at < 0.0 => format!("{} mm before the first surface", significant(-1e3 * at, 4)),
            at => format!("{} mm behind the first surface", significant(1e3 * at, 4)),
        };
        format!(
            "Real beam at {} nm: M² {}, waist {} mm {waist}, divergence {} mrad (full angle).",
            as_written(*nm),
            fixed(beam.m_squared, 2),
            fixed(beam.waist_diameter_mm, 3),
            significant(beam.divergence_mrad, 4),
        )
    };
    told.iter().map(line).collect()
}

/// State and wavelength, the state once.
fn names(beams: &[BeamAssessment], i: usize) -> [String; 2] {
    let first = i == 0 || beams[i - 1].state != beams[i].state;
    let name = if first { beams[i].state.clone() } else { String::new() };
    [name, as_written(beams[i].wavelength_nm)]
}

const NAMES: [(Column, &str); 2] = [(Column::Left, "state"), (Column::Right, "wave-\nlength nm")];

/// The beam that leaves.
pub(crate) fn exits(beams: &[BeamAssessment]) -> Table {
    let heads = [
        (Column::Right, "real\nbeam mm"),
        (Column::Right, "waist\nm from\nexit"),
        (Column::Right, "diver-\ngence\nmrad"),
        (Column::Right, "M²\nbehind"),
        (Column::Right, "on axis\nfar off"),
        (Column::Right, "the same\nfocused"),
        (Column::Right, "most\nclipped %"),
    ];
    let mut table = Table::new(NAMES.into_iter().chain(heads));
    for (i, beam) in beams.iter().enumerate() {
        let exit = |of: fn(&BeamNumbers) -> f64| beam.exit.as_ref().map(of);
        let far = beam.far_field.as_ref();
        let clipped = beam.surfaces.iter().map(|surface| surface.clipped_percent);
        table.row(names(beams, i).into_iter().chain([
            fixed_or_dash(exit(|exit| exit.diameter_mm), 2),
            significant_or_dash(exit(|exit| exit.waist_at_m), 3),
            significant_or_dash(far.and_then(|far| far.divergence_mrad), 3),
            fixed_or_dash(far.map(|far| far.m_squared), 3),
            fixed_or_dash(far.map(|far| far.on_axis), 4),
            fixed_or_dash(far.map(|far| far.on_axis_refocused), 4),
            significant_or_dash(clipped.reduce(f64::max).map(negligible), 2),
        ]));
    }
    table
}

/// Less than a millionth of a per cent is nothing.
fn negligible(percent: f64) -> f64 {
    if percent < 1e-6 { 0.0 } else { percent }
}

/// How a group would move the waist or lessen the divergence.
pub(crate) fn readjustments(beams: &[BeamAssessment]) -> Table {
    let heads = [
        (Column::Left, "group\nto move"),
        (Column::Right, "to least\ndivergence\nmm"),
        (Column::Right, "diver-\ngence then\nmrad"),
        (Column::Right, "to waist\nat exit\nmm"),
    ];
    let mut table = Table::new(NAMES.into_iter().chain(heads));
    for (i, beam) in beams.iter().enumerate() {
        for (k, moved) in beam.readjust.iter().enumerate() {
            let names = if k == 0 { names(beams, i) } else { [String::new(), String::new()] };
            table.row(names.into_iter().chain([
                moved.group.clone(),
                fixed_or_dash(moved.to_least_divergence_mm, 4),
                significant_or_dash(moved.least_divergence_mrad, 4),
                fixed_or_dash(moved.to_waist_at_exit_mm, 4),
            ]));
        }
    }
    table
}

/// The beam at distances that were asked for.
pub(crate) fn ranges(file: &DesignFile, beams: &[BeamAssessment]) -> Table {
    let laser = &file.design.beam.laser;
    let peak = |dose: Option<f64>, diameter_mm: f64| {
        let peak = |dose| surface_model::gaussian::peak_per_cm2(dose, 0.5 * diameter_mm);
        dose.map_or_else(dash, |dose| significant(peak(dose), 3))
    };
    let heads = [
        (Column::Right, "range m"),
        (Column::Right, "beam mm"),
        (Column::Right, "fluence\nJ/cm²"),
        (Column::Right, "irradiance\nW/cm²"),
    ];
    let mut table = Table::new(NAMES.into_iter().chain(heads));
    for (i, beam) in beams.iter().enumerate() {
        for (k, at) in beam.ranges.iter().enumerate() {
            let names = if k == 0 { names(beams, i) } else { [String::new(), String::new()] };
            table.row(names.into_iter().chain([
                as_written(at.range_m),
                fixed(at.diameter_mm, 2),
                peak(laser.pulse_energy_mj.map(|mj| 1e-3 * mj), at.diameter_mm),
                peak(laser.power_w, at.diameter_mm),
            ]));
        }
    }
    table
}

/// A beam that enters at an angle.
pub(crate) fn pointing(beams: &[BeamAssessment]) -> Table {
    let heads = [
        (Column::Right, "enters at\nmrad"),
        (Column::Right, "leaves at\nmrad"),
        (Column::Right, "and mm\noff axis"),
        (Column::Right, "RMS without\ntilt waves"),
        (Column::Right, "vignetted\n%"),
    ];
    let mut table = Table::new(NAMES.into_iter().chain(heads));
    for (i, beam) in beams.iter().enumerate() {
        if let Some(turned) = &beam.pointing {
            table.row(names(beams, i).into_iter().chain([
                as_written(turned.angle_mrad),
                fixed(turned.exit_angle_mrad, 4),
                fixed(turned.exit_shift_mm, 3),
                significant(turned.rms_waves, 3),
                fixed(turned.vignetted_percent, 2),
            ]));
        }
    }
    table
}

/// Most states side by side in one table.
const ABREAST: usize = 5;

/// The beam at every surface, states side by side; then what is clipped, where anything is.
pub(crate) fn surfaces(file: &DesignFile, beams: &[BeamAssessment]) -> Vec<Table> {
    let told = |what: &str, of: &dyn Fn(&SurfaceBeam) -> String| {
        beams.chunks(ABREAST).filter_map(|some| beside(file, some, what, of)).collect::<Vec<_>>()
    };
    let mut parts = told("beam mm", &|surface| fixed(surface.diameter_mm, 3));
    let all = || beams.iter().flat_map(|beam| &beam.surfaces);
    if all().any(|surface| surface.clipped_percent >= WORTH_TELLING_PERCENT) {
        parts.extend(told("clipped %", &|surface| {
            significant(negligible(surface.clipped_percent), 2)
        }));
    }
    parts
}

/// Share of the power outside a clear diameter that is worth a table, per cent.
const WORTH_TELLING_PERCENT: f64 = 1e-3;

fn beside(
    file: &DesignFile,
    beams: &[BeamAssessment],
    what: &str,
    of: &dyn Fn(&SurfaceBeam) -> String,
) -> Option<Table> {
    let several = beams.iter().any(|beam| beam.wavelength_nm != beams[0].wavelength_nm);
    let head = |beam: &BeamAssessment| {
        let nm = as_written(beam.wavelength_nm);
        let nm = if several { format!("\n{nm} nm") } else { String::new() };
        format!("{}{nm}\n{what}", beam.state)
    };
    let heads: Vec<String> = beams.iter().map(head).collect();
    let mut columns = vec![(Column::Left, "surface"), (Column::Right, "clear\nØ mm")];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    let mut table = Table::new(columns);
    let elements = file.design.groups.iter().flat_map(|group| &group.elements);
    let clear = elements.flat_map(|part| part.surfaces.iter().map(|s| 2.0 * s.semi_diameter));
    let first = beams.iter().find(|beam| !beam.surfaces.is_empty())?;
    for (k, (surface, clear)) in first.surfaces.iter().zip(clear).enumerate() {
        let mut row = vec![surface_name(file, &surface.at), as_written(clear)];
        row.extend(beams.iter().map(|beam| beam.surfaces.get(k).map_or_else(dash, of)));
        table.row(row);
    }
    Some(table)
}

fn dash() -> String {
    NONE.to_owned()
}

/// What the numbers of the real beam are.
pub(crate) const EXPLAINED: &str = "Diameters are 1/e² diameters and divergences full angles (ISO 11146-1). Divergence and M² \
     behind the design are with its aberration, all else is first order. \"On axis far off\" is the \
     intensity by diffraction over that of the same beam without aberration, collimated (or, where \
     that is the goal, focused) as it should be. Groups move away from the laser by positive ways.";
