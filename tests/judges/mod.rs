//! One judge a kind of input: it drives the program's own code with whatever it is given, as the
//! commands do, and tells what did not hold. A panic or a hang is for the caller to notice.

pub mod brief;
pub mod design;
pub mod mutants;
pub mod numbers;
pub mod plan;
pub mod retune;
pub mod run_folder;
pub mod shipped;
pub mod telling;
mod verdict;
pub mod words;

use driver::brief::BriefFile;
use driver::design_file::DesignFile;
use driver::sweep::PlanFile;
use surface_model::document::{Complaints, Document};

pub use verdict::{finite, refusal};

/// Reads a text as every kind of document.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn documents(bytes: &[u8]) -> Result<(), String> {
    let document = match Document::parse("spoilt.json", bytes) {
        Ok(document) => document,
        Err(complaints) => return refusal(&complaints),
    };
    let read: [Option<Complaints>; 3] = [
        DesignFile::read(document.clone()).err(),
        BriefFile::read(document.clone()).err(),
        PlanFile::read(document).err(),
    ];
    read.iter().flatten().try_for_each(refusal)
}
