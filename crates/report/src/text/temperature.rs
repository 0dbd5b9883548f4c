//! What a design does at other temperatures.

use driver::design_file::DesignFile;
use driver::temperature::{TemperatureNumbers, TemperatureReport};
use merit_function::goals::Goals;

use super::number::{as_written, fixed, significant};
use super::states::{marked, spacing_heads};
use super::table::{Column, Table};
use super::verdict::missed;
use super::{WIDTH, paragraph, sections};

/// Drift around 20 °C, then every state at every temperature, untouched and re-adjusted.
#[must_use]
pub fn temperatures(file: &DesignFile, report: &TemperatureReport) -> String {
    sections([
        drift(file, report).text(),
        states(file, report).text(),
        paragraph(&note(report), WIDTH, ""),
    ])
}

/// How fast every state drifts around 20 °C.
pub(crate) fn drift(file: &DesignFile, report: &TemperatureReport) -> Table {
    let count = report.drift.first().map_or(0, |state| state.readjustment_mm_per_k.len());
    let heads = moved_heads(file, report, count, "µm/K");
    let mut columns = vec![
        (Column::Left, "drift\nat 20 °C"),
        (Column::Right, "ratio\n%/K"),
        (Column::Right, "exit slope\nµrad/K"),
    ];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    let mut table = Table::new(columns);
    for state in &report.drift {
        let mut row = vec![
            state.state.clone(),
            significant(state.ratio_percent_per_k, 3),
            significant(state.exit_slope_urad_per_k, 3),
        ];
        let moved = state.readjustment_mm_per_k.iter();
        row.extend(moved.map(|per_k| significant(1e3 * per_k, 3)));
        table.row(row);
    }
    table
}

/// What re-adjustments are called: the spacing where all states have them all, else a number.
fn moved_heads(
    file: &DesignFile,
    report: &TemperatureReport,
    count: usize,
    unit: &str,
) -> Vec<String> {
    let all = report.readjusted.len() == count * report.drift.len();
    let spacings = spacing_heads(&file.design);
    if all && count == spacings.len() {
        spacings.iter().map(|head| head.replace("mm", unit)).collect()
    } else {
        (0..count).map(|number| format!("spacing {}\n{unit}", number + 1)).collect()
    }
}

/// Every state at every temperature, untouched and re-adjusted.
pub(crate) fn states(file: &DesignFile, report: &TemperatureReport) -> Table {
    let mut table = Table::new([
        (Column::Right, "°C"),
        (Column::Left, "state"),
        (Column::Right, "ratio \nerror % "),
        (Column::Right, "slope \nµrad "),
        (Column::Right, "RMS \nwaves "),
        (Column::Right, "re-adjusted\nby mm"),
        (Column::Right, "ratio \nerror % "),
        (Column::Right, "slope \nµrad "),
        (Column::Right, "RMS \nwaves "),
    ]);
    for at in &report.temperatures {
        for (k, (state, goals)) in at.states.iter().zip(&file.wishes.states).enumerate() {
            let moved: Vec<String> = state.readjustment_mm.iter().map(|&by| fixed(by, 3)).collect();
            let mut row = vec![
                if k == 0 { as_written(at.temperature_c) } else { String::new() },
                state.state.clone(),
            ];
            row.extend(numbers(goals, &state.untouched));
            row.push(moved.join(" "));
            row.extend(numbers(goals, &state.readjusted));
            table.row(row);
        }
    }
    table
}

fn numbers(goals: &Goals, numbers: &TemperatureNumbers) -> [String; 3] {
    let TemperatureNumbers { ratio_percent, exit_slope_urad, wavefront_rms_waves } = *numbers;
    [
        marked(fixed(ratio_percent, 3), missed(Some(ratio_percent), goals.ratio_percent)),
        marked(fixed(exit_slope_urad, 1), missed(Some(exit_slope_urad), goals.exit_slope_urad)),
        marked(
            significant(wavefront_rms_waves, 2),
            missed(Some(wavefront_rms_waves), goals.wavefront_rms_waves),
        ),
    ]
}

/// What re-adjusted means, and where it stopped.
pub(crate) fn note(report: &TemperatureReport) -> String {
    let stopped = report
        .temperatures
        .iter()
        .flat_map(|at| at.states.iter().map(move |state| (at, state)))
        .find(|(_, state)| state.at_bound);
    let bound = stopped.map_or_else(String::new, |(at, state)| {
        format!(
            " A re-adjusted spacing stopped at its limit, first in {} at {} °C.",
            state.state,
            as_written(at.temperature_c)
        )
    });
    format!(
        "Untouched, then re-adjusted towards the goals; re-adjustments are beyond the growth of \
         the tube.{bound}"
    )
}
