//! A sketch of where the groups stand in the housing, to scale, a line a state.

use driver::design_file::DesignFile;
use surface_model::design::{Design, ZoomState};

use super::WIDTH;
use super::number::as_written;

/// The groups of every state as blocks of their number, and what the numbers mean.
pub(crate) fn layout(file: &DesignFile) -> String {
    let design = &file.design;
    let names = design.states.iter().map(|state| state.name.chars().count()).max().unwrap_or(0);
    let room = WIDTH.saturating_sub(names + 3).max(20);
    let lines = design.states.iter().map(|state| {
        let tube = tube(design, state, room);
        let pad = names - state.name.chars().count();
        format!("{}{} |{tube}|", state.name, " ".repeat(pad))
    });
    let groups = design.groups.iter().zip(&design.housing.fixed).enumerate();
    let legend: Vec<String> = groups
        .map(|(g, (group, &fixed))| {
            let fixed = if fixed { " (fixed)" } else { "" };
            format!("{} {}{fixed}", digit(g), group.name)
        })
        .collect();
    let legend = format!(
        "{} in a tube of {} mm, light from the left",
        legend.join(", "),
        as_written(design.housing.track_mm)
    );
    lines.chain([super::paragraph(&legend, WIDTH, "")]).collect::<Vec<_>>().join("\n")
}

fn digit(group: usize) -> char {
    u32::try_from(group + 1).ok().and_then(|n| char::from_digit(n, 36)).unwrap_or('#')
}

/// One state's tube; what stands outside it is cut off.
fn tube(design: &Design, state: &ZoomState, room: usize) -> String {
    let mut line = vec![' '; room];
    let scale = room as f64 / design.housing.track_mm;
    let positions = design.positions_mm(state);
    for (g, (group, front)) in design.groups.iter().zip(positions).enumerate() {
        let from = (front * scale).round().clamp(0.0, room as f64) as usize;
        let to = ((front + group.length_mm()) * scale).round().clamp(0.0, room as f64) as usize;
        let from = from.min(room - 1);
        let to = to.max(from + 1);
        line[from..to].fill(digit(g));
    }
    line.into_iter().collect()
}
