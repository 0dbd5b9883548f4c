//! Surfaces and elements as CSV.

use driver::design_file::DesignFile;
use surface_model::solid::Solid;
use surface_model::surface::asphere_power;

use super::sheet::radius_off_mm;
use crate::text::significant;

/// One line a surface: radius, sag at the edge of the clear diameter, shape.
pub(super) fn surfaces(file: &DesignFile) -> Result<String, csv::Error> {
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record([
        "group",
        "element",
        "surface",
        "radius_mm",
        "clear_diameter_mm",
        "sag_mm",
        "conic",
        "asphere",
        "radius_off_mm",
        "radius_fringes",
        "irregularity_fringes",
        "chamfer_min_mm",
        "chamfer_max_mm",
        "imperfections",
        "imperfections_grade_mm",
        "scratches",
        "scratches_width_mm",
        "edge_chips_mm",
        "coating",
    ])?;
    for (g, group) in file.design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let drawing = file.tolerances.drawing(&file.design, g, e);
            for (s, surface) in element.surfaces.iter().enumerate() {
                let radius = match surface.curvature {
                    0.0 => "flat".to_owned(),
                    curvature => format!("{:.6}", 1.0 / curvature),
                };
                let sag = surface.sag(surface.semi_diameter);
                let terms = surface.asphere.iter().enumerate().filter(|(_, a)| **a != 0.0);
                let terms: Vec<String> =
                    terms.map(|(term, a)| format!("r^{}: {a:e}", asphere_power(term))).collect();
                let says = drawing.surfaces.get(s).cloned().unwrap_or_default();
                let off = radius_off_mm(surface, &says).map(|by| significant(by, 3));
                writer.write_record([
                    group.name.clone(),
                    element.name.clone().unwrap_or_else(|| e.to_string()),
                    s.to_string(),
                    radius,
                    element.diameter_mm.to_string(),
                    sag.map_or_else(String::new, |sag| format!("{sag:.6}")),
                    surface.conic.to_string(),
                    terms.join(" "),
                    off.unwrap_or_default(),
                    given(says.radius_fringes),
                    given(says.irregularity_fringes),
                    given(says.chamfer_mm.map(|width| width.min)),
                    given(says.chamfer_mm.map(|width| width.max)),
                    given(says.imperfections.map(|all| all.count)),
                    given(says.imperfections.map(|all| all.grade_mm)),
                    given(says.scratches.map(|all| all.count)),
                    given(says.scratches.map(|all| all.width_mm)),
                    given(says.edge_chips_mm),
                    says.coating.unwrap_or_default(),
                ])?;
            }
        }
    }
    text(writer)
}

/// One line a piece of glass: thickness on axis and at the edge, glass, index.
pub(super) fn elements(file: &DesignFile) -> Result<String, csv::Error> {
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record([
        "group",
        "element",
        "piece",
        "glass",
        "maker",
        "nd",
        "vd",
        "centre_thickness_mm",
        "edge_thickness_mm",
        "clear_diameter_mm",
        "outer_diameter_mm",
        "outer_diameter_lower_mm",
        "outer_diameter_upper_mm",
        "thickness_off_mm",
        "index_off",
        "abbe_off_percent",
        "wedge_mrad",
        "stress_birefringence_nm_cm",
        "bubbles",
        "bubbles_grade_mm",
        "inhomogeneity_class",
        "striae_class",
    ])?;
    let number = |value: Option<f64>, places: usize| {
        value.map_or_else(String::new, |value| format!("{value:.places$}"))
    };
    for (g, group) in file.design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let drawing = file.tolerances.drawing(&file.design, g, e);
            for (k, (glass, &axial_mm)) in
                element.glasses.iter().zip(&element.thicknesses_mm).enumerate()
            {
                let solid =
                    Solid { front: &element.surfaces[k], back: &element.surfaces[k + 1], axial_mm };
                let says = drawing.glasses.get(k).cloned().unwrap_or_default();
                writer.write_record([
                    group.name.clone(),
                    element.name.clone().unwrap_or_else(|| e.to_string()),
                    k.to_string(),
                    glass.full_name(),
                    glass.maker().unwrap_or_default().to_owned(),
                    number(glass.nd(), 5),
                    number(glass.vd(), 2),
                    format!("{axial_mm:.6}"),
                    number(solid.thickness(0.5 * element.diameter_mm).ok(), 6),
                    element.diameter_mm.to_string(),
                    given(drawing.outer_diameter_mm),
                    given(drawing.outer_diameter_off_mm.map(|[low, _]| low)),
                    given(drawing.outer_diameter_off_mm.map(|[_, high]| high)),
                    given(says.thickness_mm),
                    given(says.index),
                    given(says.abbe_percent),
                    given(says.wedge_mrad),
                    given(says.stress_birefringence_nm_cm),
                    given(says.bubbles.map(|all| all.count)),
                    given(says.bubbles.map(|all| all.grade_mm)),
                    given(says.inhomogeneity_class),
                    given(says.striae_class),
                ])?;
            }
        }
    }
    text(writer)
}

/// What the design gives; nothing where it is left open.
fn given(value: Option<impl ToString>) -> String {
    value.map_or_else(String::new, |value| value.to_string())
}

fn text(writer: csv::Writer<Vec<u8>>) -> Result<String, csv::Error> {
    let bytes = writer.into_inner().map_err(|error| csv::Error::from(error.into_error()))?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}
