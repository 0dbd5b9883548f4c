//! The picture of a search: how the merit fell, and the best design.

use driver::cam::{CamSettings, movement_curve};
use driver::design_file::DesignFile;
use driver::overnight::{Finds, RankedList};
use report::picture::overnight_picture;
use surface_model::document::Document;

use crate::console::Console;
use crate::failure::Failure;
use crate::output_file::OutputFile;

/// Draws what the starts found, where they found anything.
pub(in crate::commands) fn draw(
    list: &RankedList,
    finds: &Finds,
    output: &OutputFile,
    console: &Console,
) -> Result<(), Failure> {
    let Some(best) = list.best.first() else {
        console.say("drawtube: no picture: no design was found yet");
        return Ok(());
    };
    let file = DesignFile::read(Document::parse(best.file.as_str(), best.text().as_bytes())?)?;
    let curve = movement_curve(&file.design, &file.wishes, &CamSettings::default());
    output.write(&overnight_picture(&file, curve.as_ref().ok(), finds))
}
