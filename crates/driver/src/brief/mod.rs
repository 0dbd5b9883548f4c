//! A brief: the requirement from which designs are begun, read as design files are.

mod document;
mod error;
mod probe;
#[cfg(test)]
mod tests;
mod usual;

use merit_function::wishes::Wishes;
use schemars::Schema;
use surface_model::design::Beam;
use surface_model::document::{Address, Complain, Complaint, Complaints, Document, union};
use surface_model::glass::Glass;

use crate::design_file::silent_about_temperature;
use crate::document_kind::{BRIEF, part};

pub use document::{
    BriefDocument, BriefFormat, GroupBriefDocument, OwnRatioDocument, RatioDocument,
};
pub(crate) use usual::complete_written;

/// A brief, read and checked.
#[derive(Debug, Clone)]
pub struct BriefFile {
    document: Document,
    written: BriefDocument,
    /// The beam that enters.
    pub beam: Beam,
    /// The ratios wanted, at least one, in the order of the file.
    pub ratios: Vec<RatioBrief>,
    /// The glasses lenses may be made of, at least one, in the order of the file.
    pub glasses_allowed: Vec<AllowedGlass>,
    /// Goals, one entry a ratio, and limits, with what is usual where the brief has none.
    pub wishes: Wishes,
}

/// A ratio wanted: a zoom state without spacings.
#[derive(Debug, Clone, PartialEq)]
pub struct RatioBrief {
    /// What its zoom state is called, unique in the brief.
    pub name: String,
    /// Beam diameter out over in; negative is an inverted beam.
    pub ratio: f64,
    /// The beam's wavelengths at this ratio, nm, at least one.
    pub wavelengths_nm: Vec<f64>,
}

/// A glass that lenses may be made of, known at every wavelength of the brief.
#[derive(Debug, Clone, PartialEq)]
pub struct AllowedGlass {
    /// As the brief names it, and so as a design file may name it.
    pub name: String,
    /// The glass.
    pub glass: Glass,
}

impl BriefFile {
    /// Reads a brief.
    ///
    /// # Errors
    /// Everything that is wrong with it, placed in its text.
    pub fn read(document: Document) -> Result<Self, Complaints> {
        BRIEF.refuse_others(&document)?;
        document.check(&brief_schema())?;
        let written: BriefDocument = document.read()?;
        let own: Vec<Complaint> =
            error::faults(&written).into_iter().map(Complaint::from).collect();
        match (probe::optics(&written).resolve(), probe::wishes(&written).resolve()) {
            (Ok(design), Ok(wishes)) if own.is_empty() => {
                if let Some(lacks) = wishes.lacks_of(&design) {
                    return Err(document.refuse([lacks]));
                }
                if let Some(silent) = silent_about_temperature(&design, &wishes) {
                    return Err(document.refuse([silent]));
                }
                let glasses = design.groups.into_iter().next().map(|group| group.elements);
                let stack = glasses.into_iter().flatten().next();
                let glasses = stack.map(|element| element.glasses).unwrap_or_default();
                let names = written.glasses_allowed.iter().cloned();
                let named = names.zip(glasses);
                let ratio = |state: surface_model::design::ZoomState| RatioBrief {
                    name: state.name,
                    ratio: state.ratio,
                    wavelengths_nm: state.wavelengths_nm,
                };
                Ok(Self {
                    beam: design.beam,
                    ratios: design.states.into_iter().map(ratio).collect(),
                    glasses_allowed: named
                        .map(|(name, glass)| AllowedGlass { name, glass })
                        .collect(),
                    wishes,
                    document,
                    written,
                })
            }
            (design, wishes) => {
                let optics = design.err().into_iter().flatten();
                let optics = optics.filter_map(|fault| placed(&fault.at, &fault, &written));
                let wanted = wishes.err().into_iter().flatten();
                let wanted = wanted.filter_map(|fault| placed(&fault.at, &fault, &written));
                Err(document.refuse(own.into_iter().chain(optics).chain(wanted)))
            }
        }
    }

    /// What messages call the file.
    #[must_use]
    pub fn label(&self) -> &str {
        self.document.label()
    }

    /// The document as it was written.
    #[must_use]
    pub fn document(&self) -> &Document {
        &self.document
    }

    /// What the document says, before names are looked up: groups, housing, own glasses, goals and
    /// limits as written.
    #[must_use]
    pub fn written(&self) -> &BriefDocument {
        &self.written
    }
}

/// A fault of the design that stands for a brief, told where the brief has it.
fn placed(at: &Address, fault: &impl Complain, brief: &BriefDocument) -> Option<Complaint> {
    let at = probe::place_in_brief(at, brief)?;
    Some(Complaint {
        place: surface_model::document::Place::Value(at),
        found: fault.to_string(),
        expected: fault.expected(),
        advice: fault.advice(),
    })
}

/// JSON Schema of briefs.
#[must_use]
pub fn brief_schema() -> Schema {
    union("A drawtube brief", &[part::<BriefDocument>()])
}
