//! One sheet an element, a page of A4 each.

use driver::design_file::DesignFile;
use maud::{DOCTYPE, Markup, PreEscaped, html};
use surface_model::design::Element;
use surface_model::surface::Surface;

use super::OPEN;
use crate::page::{radius, shape};
use crate::picture::element_drawing;
use crate::text::{as_written, fixed, fixed_or_dash};

/// All sheets as one document.
pub(super) fn sheets(file: &DesignFile) -> String {
    let design = &file.design;
    let elements = || {
        design.groups.iter().flat_map(|group| {
            group.elements.iter().enumerate().map(move |(e, element)| (&group.name, e, element))
        })
    };
    let count = elements().count();
    let markup = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'";
                title { "Elements of " (design.title) }
                style { (PreEscaped(include_str!("sheet.css"))) }
            }
            body {
                @for (number, (group, e, element)) in elements().enumerate() {
                    @let name = element.name.clone().unwrap_or_else(|| e.to_string());
                    (sheet(file, &format!("{group} {name}"), element, number + 1, count))
                }
            }
        }
    };
    markup.into_string()
}

fn sheet(file: &DesignFile, name: &str, element: &Element, number: usize, count: usize) -> Markup {
    html! {
        section {
            div.drawing { (PreEscaped(element_drawing(element, 560.0).to_element(name))) }
            @for (k, glass) in element.glasses.iter().enumerate() {
                table data-piece=(format!("{name} {k}")) {
                    tr {
                        th style="width:33%" { "Left surface" }
                        th style="width:34%" { "Material" @if element.glasses.len() > 1 { ", piece " (k + 1) " of " (element.glasses.len()) } }
                        th style="width:33%" { "Right surface" }
                    }
                    tr {
                        td { (surface(&element.surfaces[k], true, element.diameter_mm)) }
                        td {
                            div { b { (glass.full_name()) } @if let Some(maker) = glass.maker() { ", " (maker) } }
                            div { "n" sub { "d" } " = " (fixed_or_dash(glass.nd(), 5)) }
                            div { "ν" sub { "d" } " = " (fixed_or_dash(glass.vd(), 2)) }
                            @for &nm in &file.design.beam.wavelengths_nm {
                                div { "n at " (as_written(nm)) " nm = " (fixed_or_dash(glass.index(nm).ok(), 6)) }
                            }
                            div { "thickness " (fixed(element.thicknesses_mm[k], 4)) " mm ± " (OPEN) }
                            (open(&["0/", "1/", "2/"]))
                        }
                        td { (surface(&element.surfaces[k + 1], false, element.diameter_mm)) }
                    }
                }
            }
            table {
                tr {
                    td { span.label { "element " } b { (name) } }
                    td { span.label { "design " } (file.design.title) }
                    td { span.label { "sheet " } (number) " of " (count) }
                }
                tr {
                    td colspan="3" {
                        "Lengths in mm, angles in degrees. Indications after ISO 10110-10; reference \
                         wavelength " (file.design.beam.wavelengths_nm.first().map_or_else(String::new, |&nm| as_written(nm)))
                        " nm. " (OPEN) " is left open: the design file does not say."
                    }
                }
            }
        }
    }
}

/// One surface: radius with its form, clear diameter, and what is left open.
fn surface(surface: &Surface, left: bool, clear_mm: f64) -> Markup {
    // A surface is convex where its middle stands out of the glass.
    let bulges = if left { surface.curvature > 0.0 } else { surface.curvature < 0.0 };
    let form = match surface.curvature {
        0.0 => "",
        _ if bulges => " CX",
        _ => " CC",
    };
    let size = if surface.curvature == 0.0 {
        "∞".to_owned()
    } else {
        fixed((1.0 / surface.curvature).abs(), 4)
    };
    let terms = shape(surface);
    html! {
        div data-radius=(radius(surface)) { "R " b { (size) (form) } " ± " (OPEN) }
        @if !terms.is_empty() { div { (terms) } }
        div { "Ø" sub { "e" } " " (as_written(clear_mm)) }
        div { "sag at Ø" sub { "e" } " " (fixed_or_dash(surface.sag(surface.semi_diameter).map(f64::abs), 4)) }
        div { "chamfer " (OPEN) }
        div { "coating " (OPEN) }
        (open(&["3/", "4/", "5/"]))
    }
}

/// Indications that are left open.
fn open(codes: &[&str]) -> Markup {
    html! { @for code in codes { div { (code) " " (OPEN) } } }
}
