//! What the real beam does and may damage: sections of the page, with the tables of `assess --beam`
//! and `assess --hazards`.

use driver::design_file::DesignFile;
use maud::html;
use merit_function::assessment::Assessment;

use super::Section;
use super::parts::laid_out;
use crate::text::{beam, hazards};

/// The real beam, where the design has one.
#[must_use]
pub fn beam_section(file: &DesignFile, assessment: &Assessment) -> Option<Section> {
    let beams = assessment.real_beam.as_ref()?;
    let further = [
        ("What a group moved by a little does to it", beam::readjustments(beams)),
        ("At a distance", beam::ranges(file, beams)),
        ("Entering at an angle", beam::pointing(beams)),
    ];
    let body = html! {
        @for told in beam::entrance(beams) { p { (told) } }
        (laid_out(&beam::exits(beams)))
        @for (title, table) in further.iter().filter(|(_, table)| !table.is_empty()) {
            h3 { (title) }
            (laid_out(table))
        }
        h3 { "At every surface" }
        @for table in beam::surfaces(file, beams) { (laid_out(&table)) }
        p.faint { (beam::EXPLAINED) }
    };
    Some(Section { title: "The real beam".into(), body })
}

/// What the beam may damage, where the design says how strong it is; its cautions with it.
#[must_use]
pub fn hazards_section(file: &DesignFile, assessment: &Assessment) -> Option<Section> {
    let states = assessment.hazards.as_ref()?;
    let parts = [
        ("Hit hardest", hazards::hardest(file, states)),
        ("Foci inside", hazards::foci(file, states)),
        ("The worst ghosts", hazards::worst_ghosts(file, states)),
        ("Every surface", hazards::surfaces(file, states)),
    ];
    let ghosts = hazards::ghosts(file, states);
    let body = html! {
        @for caution in &assessment.cautions { p { strong { "Caution: " } (caution) } }
        @for (title, table) in parts.iter().filter(|(_, table)| !table.is_empty()) {
            h3 { (title) }
            (laid_out(table))
        }
        @if !ghosts.is_empty() {
            details {
                summary { "Every ghost" }
                (laid_out(&ghosts))
            }
        }
        p.faint { (hazards::EXPLAINED) }
    };
    Some(Section { title: "Hazards".into(), body })
}
