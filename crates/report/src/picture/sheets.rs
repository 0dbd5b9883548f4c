//! The pictures that commands write with `--picture`.

use driver::cam::MovementCurve;
use driver::design_file::DesignFile;

use super::panel::{Panel, Word};
use super::{PICTURE_WIDTH, layout, merit_curve, movement, wavefronts};

/// Between two panels of a file, px.
const GAP: f64 = 26.0;

pub(super) fn heading(title: &str) -> Option<Panel> {
    if title.is_empty() {
        return None;
    }
    let mut panel = Panel::new(PICTURE_WIDTH, 22.0);
    panel.word([0.0, 16.0], title, Word { size: 17.0, ..Word::TITLE });
    Some(panel)
}

pub(super) fn file_of(panels: impl IntoIterator<Item = Panel>) -> String {
    Panel::stack(panels, GAP).into_file()
}

/// What `assess --picture` writes: layout and wavefronts.
#[must_use]
pub fn assessment_picture(file: &DesignFile, curve: Option<&MovementCurve>) -> String {
    let panels =
        [layout(&file.design, curve, PICTURE_WIDTH), wavefronts(&file.design, PICTURE_WIDTH)];
    file_of(heading(&file.design.title).into_iter().chain(panels))
}

/// What `cam --picture` writes: layout, and everything over the ratio.
#[must_use]
pub fn cam_picture(file: &DesignFile, curve: &MovementCurve) -> String {
    let mut panels = vec![
        layout(&file.design, Some(curve), PICTURE_WIDTH),
        movement::positions(curve, PICTURE_WIDTH),
        movement::slopes(curve, PICTURE_WIDTH),
    ];
    panels.extend(movement::pressure_angles(curve, PICTURE_WIDTH));
    panels.extend([
        movement::collimation(curve, &file.wishes, PICTURE_WIDTH),
        movement::wavefront(curve, &file.wishes, PICTURE_WIDTH),
        movement::sensitivities(curve, PICTURE_WIDTH),
    ]);
    file_of(heading(&file.design.title).into_iter().chain(panels))
}

/// What `optimise --picture` writes: how the merit fell, and what the design looks like now.
#[must_use]
pub fn optimisation_picture(
    after: &DesignFile,
    curve: Option<&MovementCurve>,
    runs: &[(String, Vec<(u64, f64)>)],
) -> String {
    let panels = [
        merit_curve("iteration", runs, PICTURE_WIDTH),
        layout(&after.design, curve, PICTURE_WIDTH),
        wavefronts(&after.design, PICTURE_WIDTH),
    ];
    file_of(heading(&after.design.title).into_iter().chain(panels))
}
