//! Surfaces and elements as CSV.

use driver::design_file::DesignFile;
use surface_model::solid::Solid;
use surface_model::surface::asphere_power;

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
    ])?;
    for group in &file.design.groups {
        for (e, element) in group.elements.iter().enumerate() {
            for (s, surface) in element.surfaces.iter().enumerate() {
                let radius = match surface.curvature {
                    0.0 => "flat".to_owned(),
                    curvature => format!("{:.6}", 1.0 / curvature),
                };
                let sag = surface.sag(surface.semi_diameter);
                let terms = surface.asphere.iter().enumerate().filter(|(_, a)| **a != 0.0);
                let terms: Vec<String> =
                    terms.map(|(term, a)| format!("r^{}: {a:e}", asphere_power(term))).collect();
                writer.write_record([
                    group.name.clone(),
                    element.name.clone().unwrap_or_else(|| e.to_string()),
                    s.to_string(),
                    radius,
                    element.diameter_mm.to_string(),
                    sag.map_or_else(String::new, |sag| format!("{sag:.6}")),
                    surface.conic.to_string(),
                    terms.join(" "),
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
    ])?;
    let number = |value: Option<f64>, places: usize| {
        value.map_or_else(String::new, |value| format!("{value:.places$}"))
    };
    for group in &file.design.groups {
        for (e, element) in group.elements.iter().enumerate() {
            for (k, (glass, &axial_mm)) in
                element.glasses.iter().zip(&element.thicknesses_mm).enumerate()
            {
                let solid =
                    Solid { front: &element.surfaces[k], back: &element.surfaces[k + 1], axial_mm };
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
                ])?;
            }
        }
    }
    text(writer)
}

fn text(writer: csv::Writer<Vec<u8>>) -> Result<String, csv::Error> {
    let bytes = writer.into_inner().map_err(|error| csv::Error::from(error.into_error()))?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}
