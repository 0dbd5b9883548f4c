//! The page: one self-contained HTML file about one design, or several side by side.
//!
//! No network, no fonts to fetch, prints on A4, and reads with scripts off: all that a script does
//! is to move the slider of the layout (`stage.rs`). Numbers are those of the assessment and of the
//! movement curve, rounded for people; the full ones stand in `data-value`.
//!
//! To add a section hand it over in [`Subject::sections`]: a title and a body, made by
//! `maud::html!`, with [`parts::laid_out`] for a table that the terminal has too. It stands between
//! the glasses and how the design was found; [`beam_section`], [`hazards_section`],
//! [`tolerance_section`] and [`temperature_section`] are examples.

mod compare;
mod laser;
mod parts;
mod requirement;
mod stage;
mod workshop;

use driver::cam::MovementCurve;
use driver::design_file::DesignFile;
use maud::{DOCTYPE, Markup, PreEscaped, html};
use merit_function::assessment::Assessment;

pub use laser::{beam_section, hazards_section};
pub(crate) use parts::{radius, shape};
pub use workshop::{silent_section, temperature_section, tolerance_section};

use crate::picture::{Panel, layout, merit_curve, movement, wavefronts};

/// One design of a page.
#[derive(Debug)]
pub struct Subject<'a> {
    /// What the page calls it where there are several.
    pub name: String,
    /// The design.
    pub file: &'a DesignFile,
    /// Its numbers.
    pub assessment: &'a Assessment,
    /// Its movement curve, or why it has none.
    pub curve: Result<&'a MovementCurve, String>,
    /// How it was found, as far as that is known.
    pub found: Found,
    /// Further sections.
    pub sections: Vec<Section>,
}

/// How a design was found.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Found {
    /// Settings and their values: method, seed, version, ….
    pub settings: Vec<(String, String)>,
    /// What is counted while the merit falls: iterations, starts.
    pub counted: &'static str,
    /// Named lists of that count and the merit.
    pub runs: Vec<(String, Vec<(u64, f64)>)>,
}

/// A further section.
#[derive(Debug, Clone)]
pub struct Section {
    /// Its title.
    pub title: String,
    /// What stands under it.
    pub body: Markup,
}

/// Width that pictures on the page are drawn at, px.
const WIDTH: f64 = 840.0;

/// What may be loaded: nothing but what the page brings along.
const POLICY: &str = "default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'";

/// The page about these designs.
#[must_use]
pub fn page(subjects: &[Subject<'_>]) -> String {
    let title = match subjects {
        [one] => name_of(one),
        many => format!("{} designs side by side", many.len()),
    };
    let markup = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                meta http-equiv="Content-Security-Policy" content=(POLICY);
                title { (title) }
                style { (PreEscaped(include_str!("style.css"))) }
            }
            body {
                @if subjects.len() > 1 {
                    h1 { (title) }
                    (compare::compare(subjects))
                    (caution())
                }
                @for (k, subject) in subjects.iter().enumerate() {
                    article { (article(subject, k, subjects.len() == 1)) }
                }
                (parts::definitions())
                script { (PreEscaped(include_str!("slider.js"))) }
            }
        }
    };
    markup.into_string()
}

fn name_of(subject: &Subject<'_>) -> String {
    let title = &subject.file.design.title;
    if title.is_empty() { subject.name.clone() } else { title.clone() }
}

fn article(subject: &Subject<'_>, number: usize, alone: bool) -> Markup {
    let Subject { file, assessment, .. } = subject;
    html! {
        h1 { (name_of(subject)) }
        p.faint { (crate::text::assessment::beam_sentence(file)) }
        @if !alone { p.faint { (subject.name) } }
        (requirement::requirement(subject))
        @if alone { (caution()) }
        h2 { "States" }
        (parts::states(file, assessment))
        h2 { "Layout" }
        (stage::stage(subject, number))
        (figure(layout(&file.design, subject.curve.as_ref().ok().copied(), WIDTH), "Layout of every state, to scale"))
        h2 { "Wavefront" }
        (figure(wavefronts(&file.design, WIDTH), "Exit wavefront of every state"))
        h2 { "Movement" }
        (movement_part(subject))
        h2 { "Prescription" }
        (parts::prescription(file))
        h2 { "Limits and margins" }
        (parts::limits(file, assessment))
        h2 { "Glasses" }
        (parts::glasses(file))
        @for section in &subject.sections {
            h2 { (section.title) }
            (section.body)
        }
        h2 { "How it was found" }
        (found(subject))
    }
}

/// A picture with its name.
fn figure(panel: Panel, name: &str) -> Markup {
    html! { figure { (PreEscaped(panel.into_element(name))) } }
}

fn movement_part(subject: &Subject<'_>) -> Markup {
    let curve = match &subject.curve {
        Ok(curve) => *curve,
        Err(why) => return html! { p { "There is no movement curve: " (why) "." } },
    };
    let wishes = &subject.file.wishes;
    let mut panels = vec![(movement::positions(curve, WIDTH), "Movement curves")];
    panels.extend(movement::pressure_angles(curve, WIDTH).map(|panel| (panel, "Pressure angles")));
    panels.extend([
        (movement::collimation(curve, wishes, WIDTH), "Collimation against ratio"),
        (movement::wavefront(curve, wishes, WIDTH), "Wavefront error against ratio"),
        (movement::sensitivities(curve, WIDTH), "Sensitivity of collimation"),
    ]);
    html! {
        (parts::findings(curve))
        @for (panel, name) in panels { (figure(panel, name)) }
        (parts::movement(curve))
    }
}

fn found(subject: &Subject<'_>) -> Markup {
    let Found { settings, counted, runs } = &subject.found;
    html! {
        @if settings.is_empty() {
            p { "The design file does not say." }
        } @else {
            table.facts { @for (name, value) in settings {
                tr { td.word { (name) } td.word { (value) } }
            } }
        }
        @if !runs.is_empty() { (figure(merit_curve(counted, runs, WIDTH), "How the merit fell")) }
    }
}

/// What belongs on every page about a laser.
fn caution() -> Markup {
    html! {
        div.caution {
            p { strong { "Lasers hurt people. " }
                "An expanded, collimated beam stays dangerous to the eye over a long way, and a focus \
                 inside an expander can ionise air or burn dust. The numbers here are optics, not a \
                 safety case: have every real set-up judged by your laser safety officer under your \
                 local rules and the standard that applies (IEC 60825-1 or its national form), and \
                 hold coatings and glass to the maker's own damage data." }
        }
    }
}
