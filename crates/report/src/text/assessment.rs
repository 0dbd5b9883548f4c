//! What `assess` prints for people.

use driver::design_file::DesignFile;
use merit_function::assessment::Assessment;

use super::number::{as_written, counted, significant, significant_or_dash};
use super::table::Table;
use super::{
    WIDTH, beam, elements, hazards, layout, limits, paragraph, sections, states, verdict, warnings,
};

pub use super::limits::Scope;

/// The whole assessment of a design file.
#[must_use]
pub fn assessment(file: &DesignFile, assessment: &Assessment, scope: Scope) -> String {
    sections([
        heading(file),
        states::reached(file, assessment),
        states::of_the_beam(file, assessment).map_or_else(String::new, Table::text),
        states::faults(assessment),
        states::spacings(file, assessment),
        layout::layout(file),
        limits::limits(file, assessment, scope),
        elements::elements(file, assessment),
        beam::summary(assessment),
        hazards::summary(file, assessment),
        signs(file, assessment),
        warnings(&assessment.warnings),
        hazards::cautions(assessment),
        format!("{}\n{}", merit(assessment), closing(file, assessment)),
    ])
}

/// Title, beam and what the design is made of.
pub(crate) fn heading(file: &DesignFile) -> String {
    let told = paragraph(&beam_sentence(file), WIDTH, "");
    let title = &file.design.title;
    if title.is_empty() { told } else { format!("{}\n{told}", paragraph(title, WIDTH, "")) }
}

/// The beam and what the design is made of.
pub(crate) fn beam_sentence(file: &DesignFile) -> String {
    let beam = &file.design.beam;
    let wavelengths: Vec<String> = beam.wavelengths_nm.iter().map(|&nm| as_written(nm)).collect();
    let elements = file.design.groups.iter().map(|group| group.elements.len()).sum();
    format!(
        "Beam {} mm (1/e²) at {} nm, traced to {} of its radius; {} in {}, {}.",
        as_written(beam.diameter_mm),
        wavelengths.join(", "),
        as_written(beam.traced_to),
        counted(elements, "element"),
        counted(file.design.groups.len(), "group"),
        counted(file.design.states.len(), "zoom state"),
    )
}

/// What the sign `!` means, where there is one.
fn signs(file: &DesignFile, assessment: &Assessment) -> String {
    let any = states::any_missed(file, assessment) || assessment.limits.iter().any(|l| !l.met);
    if any { "! a goal missed or a limit crossed".to_owned() } else { String::new() }
}

fn merit(assessment: &Assessment) -> String {
    let merit = &assessment.merit;
    if merit.total.is_none() {
        return "There is no merit while rays fail.".to_owned();
    }
    format!(
        "Merit {}: goals {}, limits {}.",
        significant_or_dash(merit.total, 4),
        significant_or_dash(merit.goals, 4),
        significant(merit.limits, 4)
    )
}

/// Whether the design does what it should, and what is worst about it.
#[must_use]
pub fn closing(file: &DesignFile, assessment: &Assessment) -> String {
    paragraph(&verdict::closing_sentence(file, assessment), WIDTH, "")
}
