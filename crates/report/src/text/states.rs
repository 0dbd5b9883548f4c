//! The table of zoom states.

use driver::design_file::DesignFile;
use merit_function::assessment::{Assessment, StateAssessment, WavefrontAssessment};
use merit_function::goals::Goals;
use surface_model::design::{Design, Group};

use super::number::{
    NONE, as_written, fixed, fixed_or_dash, fixed_or_less, significant_or_dash, wavefront as waves,
};
use super::table::{BLANK, Column, Table};
use super::verdict::missed;

/// A number with the sign that it misses its goal, or room for one.
pub(crate) fn marked(text: String, missed: bool) -> String {
    format!("{text}{}", if missed { '!' } else { BLANK })
}

/// What every state reaches, with the goals in the first row.
pub(crate) fn reached(file: &DesignFile, assessment: &Assessment) -> String {
    let mut table = Table::new([
        (Column::Left, "state"),
        (Column::Right, "ratio\nwanted"),
        (Column::Right, "ratio"),
        (Column::Right, "ratio \nerror % "),
        (Column::Right, "exit \nslope \nµrad "),
        (Column::Right, "ratio ×\nbeam mm"),
        (Column::Right, "wave-\nlength\nnm"),
        (Column::Right, "RMS \nwaves "),
        (Column::Right, "PV\nwaves"),
    ]);
    let shared = shared_goals(file);
    if shared.iter().any(Option::is_some) {
        let within = |goal: Option<f64>| {
            goal.map_or_else(String::new, |goal| format!("{}{BLANK}", as_written(goal)))
        };
        let mut row = vec![String::new(); 9];
        "goal".clone_into(&mut row[0]);
        row[3] = within(shared[0]);
        row[4] = within(shared[1]);
        row[7] = within(shared[2]);
        table.row(row);
    }
    let goals = file.wishes.states.iter().cycle();
    for (goals, (temperature_c, state)) in goals.zip(assessment.all_states()) {
        let name = at_temperature(&state.name, temperature_c);
        for (k, wavefront) in state.wavefront.iter().enumerate() {
            let mut row =
                if k == 0 { paraxial(goals, state, &name) } else { vec![String::new(); 6] };
            row.extend(at_wavelength(goals, wavefront));
            table.row(row);
        }
    }
    table.text()
}

/// The goals about the real beam in every state that has any; nothing if none has.
pub(crate) fn of_the_beam(file: &DesignFile, assessment: &Assessment) -> Option<Table> {
    let goals = || file.wishes.states.iter();
    let divergence = goals().any(|goals| goals.divergence_mrad.is_some());
    let range = goals().any(|goals| goals.diameter_at_range_mm.is_some());
    let focus = goals().any(|goals| goals.exit_focus_m.is_some());
    let mut heads = vec![(Column::Left, "state")];
    if divergence {
        heads.extend([(Column::Right, "divergence \nmrad "), (Column::Right, "goal")]);
    }
    if range {
        heads.extend([
            (Column::Right, "at\nrange m"),
            (Column::Right, "beam \nmm "),
            (Column::Right, "goal"),
        ]);
    }
    if focus {
        heads.extend([(Column::Right, "focus \nat m "), (Column::Right, "goal")]);
    }
    if heads.len() == 1 {
        return None;
    }
    let mut table = Table::new(heads);
    for (goals, state) in file.wishes.states.iter().zip(&assessment.states) {
        let mut row = vec![state.name.clone()];
        let any = goals.divergence_mrad.is_some()
            || goals.diameter_at_range_mm.is_some()
            || goals.exit_focus_m.is_some();
        if !any {
            continue;
        }
        if divergence {
            row.extend(divergence_cells(goals, state));
        }
        if range {
            row.extend(range_cells(goals, state));
        }
        if focus {
            row.extend(focus_cells(goals, state));
        }
        table.row(row);
    }
    Some(table)
}

/// A value wanted and how far off it may be.
pub(crate) fn about(wanted: f64, within: f64) -> String {
    format!("{} ± {}", as_written(wanted), as_written(within))
}

fn divergence_cells(goals: &Goals, state: &StateAssessment) -> [String; 2] {
    let within = goals.divergence_mrad;
    if within.is_none() {
        return [const { String::new() }; 2];
    }
    let value = state.divergence_mrad;
    [
        marked(significant_or_dash(value, 4), missed(value, within)),
        within.map_or_else(String::new, |within| format!("≤ {}", as_written(within))),
    ]
}

fn range_cells(goals: &Goals, state: &StateAssessment) -> [String; 3] {
    let Some(goal) = goals.diameter_at_range_mm else { return [const { String::new() }; 3] };
    let off = state.diameter_at_range_mm.map(|diameter| diameter - goal.wanted_mm);
    [
        as_written(goal.range_m),
        marked(fixed_or_dash(state.diameter_at_range_mm, 2), missed(off, Some(goal.within_mm))),
        about(goal.wanted_mm, goal.within_mm),
    ]
}

fn focus_cells(goals: &Goals, state: &StateAssessment) -> [String; 2] {
    let Some(goal) = goals.exit_focus_m else { return [const { String::new() }; 2] };
    [
        marked(
            significant_or_dash(state.exit_focus_m, 4),
            missed(state.exit_focus_error_m, Some(goal.within_m)),
        ),
        about(goal.wanted_m, goal.within_m),
    ]
}

/// The goals for ratio error, exit slope and RMS, each where all the states that have it want the
/// same.
fn shared_goals(file: &DesignFile) -> [Option<f64>; 3] {
    let shared = |goal: fn(&Goals) -> Option<f64>| {
        let mut wanted = file.wishes.states.iter().filter_map(goal);
        wanted.next().filter(|first| wanted.all(|other| other == *first))
    };
    [
        shared(|goals| goals.ratio_percent),
        shared(|goals| goals.exit_slope_urad),
        shared(|goals| goals.wavefront_rms_waves),
    ]
}

/// A state's name, with its temperature where that is not 20 °C.
pub(crate) fn at_temperature(name: &str, temperature_c: Option<f64>) -> String {
    match temperature_c {
        None => name.to_owned(),
        Some(temperature_c) => format!("{name} {} °C", as_written(temperature_c)),
    }
}

fn paraxial(goals: &Goals, state: &StateAssessment, name: &str) -> Vec<String> {
    vec![
        name.to_owned(),
        as_written(state.ratio_wanted),
        fixed_or_dash(state.ratio, 4),
        marked(
            fixed_or_less(state.ratio_error_percent, 4),
            missed(state.ratio_error_percent, goals.ratio_percent),
        ),
        marked(
            fixed_or_dash(state.exit_slope_urad, 2),
            missed(state.exit_slope_urad, goals.exit_slope_urad),
        ),
        fixed_or_dash(state.exit_diameter_mm, 2),
    ]
}

fn at_wavelength(goals: &Goals, wavefront: &WavefrontAssessment) -> [String; 3] {
    let rms = wavefront.rms_waves;
    [
        as_written(wavefront.wavelength_nm),
        marked(waves(rms), missed(rms, goals.wavefront_rms_waves)),
        waves(wavefront.pv_waves),
    ]
}

/// Whether a table of states has a number with the sign that it misses its goal.
pub(crate) fn any_missed(file: &DesignFile, assessment: &Assessment) -> bool {
    super::verdict::marks(file, assessment).iter().any(|mark| mark.size() > 1.0)
}

/// Why rays fail, a line a state.
pub(crate) fn faults(assessment: &Assessment) -> String {
    let lines: Vec<String> = assessment
        .all_states()
        .filter_map(|(temperature_c, state)| {
            let name = at_temperature(&state.name, temperature_c);
            Some(format!("{name}: {}", state.fault.as_ref()?))
        })
        .map(|line| super::paragraph(&line, super::WIDTH, "  "))
        .collect();
    lines.join("\n")
}

/// Spacings and lengths of every state.
pub(crate) fn spacings(file: &DesignFile, assessment: &Assessment) -> String {
    let heads = spacing_heads(&file.design);
    let mut columns = vec![(Column::Left, "state")];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    columns.extend([(Column::Right, "track\nmm"), (Column::Right, "front\nat mm")]);
    let mut table = Table::new(columns);
    for state in &assessment.states {
        let front = state.positions_mm.values().next().and_then(serde_json::Value::as_f64);
        let mut row = vec![state.name.clone()];
        row.extend(state.spacings_mm.iter().map(|&spacing| fixed(spacing, 3)));
        row.push(fixed(state.track_mm, 3));
        row.push(front.map_or_else(|| NONE.to_owned(), |front| fixed(front, 3)));
        table.row(row);
    }
    table.text()
}

/// What a spacing's column is called: the groups on both sides, in short lines.
pub(crate) fn spacing_heads(design: &Design) -> Vec<String> {
    let named = |pair: &[Group]| format!("{} to {} mm", pair[0].name, pair[1].name);
    let head = |pair: &[Group]| super::paragraph(&named(pair), HEAD_WIDTH, "");
    design.groups.windows(2).map(head).collect()
}

/// A spacing's head is broken into lines about as wide as its numbers.
const HEAD_WIDTH: usize = 10;
