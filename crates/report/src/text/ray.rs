//! One ray as a table.

use super::number::{as_written, fixed, significant};
use super::table::{BLANK, Column, Table};
use super::{WIDTH, paragraph, sections, warnings};
use crate::ray::{RayAtSurface, RayReport};

/// The ray surface by surface, and how it leaves.
#[must_use]
pub fn ray(report: &RayReport) -> String {
    sections([
        paragraph(&heading(report), WIDTH, ""),
        surfaces(report),
        paragraph(&exit(report), WIDTH, ""),
        warnings(&report.warnings),
    ])
}

fn is_skew(report: &RayReport) -> bool {
    report.start.x_mm != 0.0 || report.start.angle_x_mrad != 0.0
}

fn heading(report: &RayReport) -> String {
    let start = &report.start;
    let at = if is_skew(report) {
        format!("x {} mm, y {} mm", as_written(start.x_mm), as_written(start.height_mm))
    } else {
        format!("a height of {} mm", as_written(start.height_mm))
    };
    let angles = match (start.angle_x_mrad, start.angle_mrad) {
        (0.0, 0.0) => "parallel to the axis".to_owned(),
        (0.0, y) => format!("at {} mrad to the axis", as_written(y)),
        (x, y) => format!("at {} mrad in x and {} mrad in y", as_written(x), as_written(y)),
    };
    format!(
        "State {} at {} nm: a ray enters at {at}, {angles}.",
        report.state,
        as_written(report.wavelength_nm)
    )
}

fn surfaces(report: &RayReport) -> String {
    let skew = is_skew(report);
    let mut columns = vec![
        (Column::Left, "surface"),
        (Column::Left, "into"),
        (Column::Right, "y\nmm "),
        (Column::Right, "sag\nmm"),
        (Column::Right, "path\nmm"),
        (Column::Right, "inci-\ndence °"),
        (Column::Right, "refrac-\ntion °"),
        (Column::Right, "slope\nmrad"),
    ];
    if skew {
        columns[1] = (Column::Right, "x\nmm");
        columns.push((Column::Right, "slope\nx mrad"));
    }
    let mut table = Table::new(columns);
    for surface in &report.surfaces {
        table.row(row(surface, skew));
    }
    table.text()
}

fn row(surface: &RayAtSurface, skew: bool) -> Vec<String> {
    let mut row = vec![
        surface.label.clone(),
        surface.into.clone(),
        format!("{}{}", fixed(surface.y_mm, 4), if surface.outside { '!' } else { BLANK }),
        fixed(surface.sag_mm, 4),
        fixed(surface.path_mm, 4),
        fixed(surface.incidence_deg, 3),
        fixed(surface.refraction_deg, 3),
        fixed(surface.slope_y_mrad, 3),
    ];
    if skew {
        // Both do not fit in a line; the document for machines has the medium too.
        row[1] = fixed(surface.x_mm, 4);
        row.push(fixed(surface.slope_x_mrad, 3));
    }
    row
}

fn exit(report: &RayReport) -> String {
    let exit = &report.exit;
    let slope = fixed(exit.slope_y_mrad * 1e3, 3);
    let across = if is_skew(report) {
        format!(
            "x {} mm, y {} mm with slopes of {} µrad in x and {slope} µrad in y",
            fixed(exit.x_mm, 5),
            fixed(exit.y_mm, 5),
            fixed(exit.slope_x_mrad * 1e3, 3)
        )
    } else {
        format!("a height of {} mm with a slope of {slope} µrad", fixed(exit.y_mm, 5))
    };
    let longer = if exit.path_waves < 0.0 { "shorter" } else { "longer" };
    format!(
        "It crosses the plane through the last vertex at {across}. Up to there its optical path is \
         {} waves {longer} than that of the axial ray.",
        significant(exit.path_waves.abs(), 5)
    )
}
