//! One sheet an element, a page of A4 each.

use driver::design_file::DesignFile;
use driver::tolerance::{ElementDrawing, ImperfectionsDocument, SurfaceDrawing};
use maud::{DOCTYPE, Markup, PreEscaped, html};
use surface_model::design::Element;
use surface_model::surface::Surface;

use super::OPEN;
use crate::page::{radius, shape};
use crate::picture::element_drawing;
use crate::text::{as_written, fixed, fixed_or_dash, significant};

/// All sheets as one document.
pub(super) fn sheets(file: &DesignFile) -> String {
    let design = &file.design;
    let mut sheets = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let name = element.name.clone().unwrap_or_else(|| e.to_string());
            let name = format!("{} {name}", group.name);
            let drawing = file.tolerances.drawing(design, g, e);
            sheets.push(Sheet { file, name, element, drawing });
        }
    }
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
                @for (k, sheet) in sheets.iter().enumerate() { (sheet.page(k + 1, sheets.len())) }
            }
        }
    };
    markup.into_string()
}

/// One element, and what is drawn of it.
struct Sheet<'a> {
    file: &'a DesignFile,
    name: String,
    element: &'a Element,
    drawing: ElementDrawing,
}

impl Sheet<'_> {
    fn page(&self, number: usize, count: usize) -> Markup {
        let Self { file, name, element, drawing } = self;
        let pieces = element.glasses.len();
        html! {
            section {
                div.drawing { (PreEscaped(element_drawing(element, 560.0).into_element(name))) }
                @for k in 0..pieces {
                    table data-piece=(format!("{name} {k}")) {
                        tr {
                            th { "Left surface" }
                            th { "Material" @if pieces > 1 { ", piece " (k + 1) " of " (pieces) } }
                            th { "Right surface" }
                        }
                        tr {
                            td { (self.surface(k, Side::Left)) (centring(None)) (self.imperfections(k)) }
                            td { (self.material(k)) }
                            td {
                                (self.surface(k + 1, Side::Right))
                                (centring(drawing.glasses.get(k).and_then(|glass| glass.wedge_mrad)))
                                (self.imperfections(k + 1))
                            }
                        }
                    }
                }
                table {
                    tr {
                        td { span.label { "element " } b { (name) } }
                        td { span.label { "design " } (file.design.title) }
                        td { span.label { "sheet " } (number) " of " (count) }
                    }
                    tr { td colspan="3" { (self.notes()) } }
                }
            }
        }
    }

    fn material(&self, k: usize) -> Markup {
        let Self { file, element, drawing, .. } = self;
        let Some(glass) = element.glasses.get(k) else { return html! {} };
        let says = drawing.glasses.get(k).cloned().unwrap_or_default();
        let abbe = says.abbe_percent.zip(glass.vd()).map(|(percent, vd)| vd * percent / 100.0);
        let homogeneity = match (says.inhomogeneity_class, says.striae_class) {
            (None, None) => OPEN.to_owned(),
            (class, striae) => format!("{}; {}", or_open(class), or_open(striae)),
        };
        html! {
            div { b { (glass.full_name()) } @if let Some(maker) = glass.maker() { ", " (maker) } }
            div { "n" sub { "d" } " = " (fixed_or_dash(glass.nd(), 5)) " ± " (off(says.index)) }
            div { "ν" sub { "d" } " = " (fixed_or_dash(glass.vd(), 2)) " ± "
                (abbe.map_or_else(|| OPEN.to_owned(), |by| significant(by, 2))) }
            @for &nm in &file.design.beam.wavelengths_nm {
                div { "n at " (as_written(nm)) " nm = " (fixed_or_dash(glass.index(nm).ok(), 6)) }
            }
            div { "thickness " (fixed(element.thicknesses_mm[k], 4)) " mm ± " (off(says.thickness_mm)) }
            div { "Ø " (self.outer_diameter()) }
            div { "0/ " (off(says.stress_birefringence_nm_cm)) }
            div { "1/ " (says.bubbles.map_or_else(|| OPEN.to_owned(), |all| counted(&all))) }
            div { "2/ " (homogeneity) }
        }
    }

    fn outer_diameter(&self) -> String {
        let Some(outer_mm) = self.drawing.outer_diameter_mm else { return OPEN.to_owned() };
        let signed = |by: f64| match by {
            0.0 => "0".to_owned(),
            by if by < 0.0 => format!("−{}", as_written(-by)),
            by => format!("+{}", as_written(by)),
        };
        let off = self.drawing.outer_diameter_off_mm;
        let off = off.map_or_else(
            || format!("± {OPEN}"),
            |[low, high]| format!("{} / {}", signed(high), signed(low)),
        );
        format!("{} {off}", as_written(outer_mm))
    }

    /// One surface: radius with its form, clear diameter, chamfer, coating, figure.
    fn surface(&self, s: usize, side: Side) -> Markup {
        let Self { element, drawing, .. } = self;
        let Some(surface) = element.surfaces.get(s) else { return html! {} };
        let says = drawing.surfaces.get(s).cloned().unwrap_or_default();
        let size = if surface.curvature == 0.0 {
            "∞".to_owned()
        } else {
            fixed((1.0 / surface.curvature).abs(), 4)
        };
        let terms = shape(surface);
        let by = radius_off_mm(surface, &says);
        let inner = s > 0 && s + 1 < element.surfaces.len();
        let coating = if inner { "cemented" } else { says.coating.as_deref().unwrap_or(OPEN) };
        html! {
            div data-radius=(radius(surface)) {
                "R " b { (size) (side.form(surface)) } " ± "
                (by.map_or_else(|| OPEN.to_owned(), |by| significant(by, 2)))
            }
            @if !terms.is_empty() { div { (terms) } }
            div { "Ø" sub { "e" } " " (as_written(element.diameter_mm)) }
            div { "sag at Ø" sub { "e" } " "
                (fixed_or_dash(surface.sag(surface.semi_diameter).map(f64::abs), 4)) }
            div { "chamfer " (says.chamfer_mm.map_or_else(|| OPEN.to_owned(), |width| {
                format!("{} – {}", as_written(width.min), as_written(width.max))
            })) }
            div { "coating " (coating) }
            div { "3/ " (figure(&says)) }
        }
    }

    fn imperfections(&self, s: usize) -> Markup {
        let says = self.drawing.surfaces.get(s).cloned().unwrap_or_default();
        let mut told: Vec<String> = Vec::new();
        told.extend(says.imperfections.map(|all| counted(&all)));
        told.extend(
            says.scratches.map(|all| format!("L {} × {}", all.count, as_written(all.width_mm))),
        );
        told.extend(says.edge_chips_mm.map(|reach| format!("E {}", as_written(reach))));
        let told = if told.is_empty() { OPEN.to_owned() } else { told.join("; ") };
        html! { div { "5/ " (told) } }
    }

    fn notes(&self) -> Markup {
        let beam = &self.file.design.beam;
        let nm = beam.wavelengths_nm.first().map_or_else(String::new, |&nm| as_written(nm));
        html! {
            "Lengths in mm, angles in minutes of arc. Indications after ISO 10110-10; 3/ in fringes \
             of 273 nm of sag over Ø" sub { "e" } ", radius and (irregularity); 4/ is the turn of \
             the right surface against the left; the design's wavelength is " (nm) " nm. " (OPEN)
            " is left open: the design file does not say."
        }
    }
}

/// Which side of a piece of glass a surface is.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Side {
    Left,
    Right,
}

impl Side {
    /// A surface is convex where its middle stands out of the glass.
    fn form(self, surface: &Surface) -> &'static str {
        match (surface.curvature, self) {
            (0.0, _) => "",
            (c, Self::Left) if c > 0.0 => " CX",
            (c, Self::Right) if c < 0.0 => " CX",
            _ => " CC",
        }
    }
}

/// By how much a radius may be off, mm: as given, or what the fringes against the test plate come
/// to. The sag R − √(R² − h²) changes with R by 1 − R/√(R² − h²).
pub(super) fn radius_off_mm(surface: &Surface, says: &SurfaceDrawing) -> Option<f64> {
    if surface.curvature == 0.0 {
        return None;
    }
    let radius = (1.0 / surface.curvature).abs();
    if let Some(percent) = says.radius_percent {
        return Some(radius * percent / 100.0);
    }
    let sag_mm = says.radius_fringes? * FRINGE_MM;
    let rest = radius * radius - surface.semi_diameter * surface.semi_diameter;
    let by_radius = (1.0 - radius / rest.sqrt()).abs();
    (rest > 0.0 && by_radius > 0.0).then(|| sag_mm / by_radius).filter(|by| by.is_finite())
}

/// Sag that one fringe is, mm: half the wavelength of 546.07 nm (ISO 10110-5).
const FRINGE_MM: f64 = 273.035e-6;

/// 3/A(B): fringes of radius, and of irregularity.
fn figure(says: &SurfaceDrawing) -> String {
    match (says.radius_fringes, says.irregularity_fringes) {
        (None, None) => OPEN.to_owned(),
        (radius, None) => off(radius),
        (radius, Some(irregularity)) => format!("{}({})", off(radius), as_written(irregularity)),
    }
}

/// 4/σ in minutes of arc.
fn centring(wedge_mrad: Option<f64>) -> Markup {
    let told = wedge_mrad.map_or_else(
        || OPEN.to_owned(),
        |mrad| format!("{}′", significant((mrad * 1e-3).to_degrees() * 60.0, 2)),
    );
    html! { div { "4/ " (told) } }
}

fn counted(all: &ImperfectionsDocument) -> String {
    format!("{} × {}", all.count, as_written(all.grade_mm))
}

fn off(value: Option<f64>) -> String {
    value.map_or_else(|| OPEN.to_owned(), as_written)
}

fn or_open(class: Option<u8>) -> String {
    class.map_or_else(|| OPEN.to_owned(), |class| class.to_string())
}
