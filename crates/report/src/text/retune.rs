//! What `retune` prints for people: the stages side by side, what moved, what hurt.

use super::bounds::ended_on_bounds;
use driver::change::{Difference, differences};
use driver::design_file::DesignFile;
use driver::retune::blame::Blame;
use driver::retune::{Moving, Retuning, Stage};
use surface_model::design::Design;

use super::differences::{differences as table_of, signed};
use super::number::{
    NONE, as_written, fixed, fixed_or_dash, fixed_or_less, significant, significant_or_dash,
};
use super::states::spacing_heads;
use super::table::{ARROW, BLANK, Column, Table};
use super::verdict::{marks, missed};
use super::{WIDTH, assessment, paragraph, sections, warnings};

/// The whole account of a design retuned; `before` is the file as it was.
#[must_use]
pub fn retuning(before: &DesignFile, retuning: &Retuning) -> String {
    let mut parts = vec![assessment::heading(before), changed(before, retuning), took_up(retuning)];
    parts.extend([merits(retuning), goals(retuning), faults(retuning)]);
    parts.extend(moved(retuning));
    parts.extend([blamed(&retuning.blame), warnings(&cautions(retuning)), closing(retuning)]);
    sections(parts)
}

/// What was changed, leaving out what was held by it.
fn changed(before: &DesignFile, retuning: &Retuning) -> String {
    let Some(after) = retuning.stage(Moving::Nothing) else { return String::new() };
    let found = differences(before.document().value(), after.file.document().value());
    let told: Vec<&Difference> = found
        .iter()
        .filter(|difference| !is_bookkeeping(difference))
        .filter(|difference| !is_taken_up(difference, retuning, &after.file.design))
        .collect();
    table_of("changed", &told)
}

/// What follows from a change and is told elsewhere: numbers held, glasses defined.
fn is_bookkeeping(difference: &Difference) -> bool {
    match difference.at.steps().first() {
        Some(&"held") => true,
        Some(&"glasses") => difference.from.is_none(),
        _ => false,
    }
}

fn is_taken_up(difference: &Difference, retuning: &Retuning, design: &Design) -> bool {
    let steps = difference.at.steps();
    let ["states", name, "spacings_mm", after] = steps.as_slice() else { return false };
    let mut taken = retuning.taken_up.iter();
    taken.any(|taken| {
        let state = design.states.get(taken.state).map(|state| state.name.as_str());
        state == Some(*name) && taken.after.to_string() == *after
    })
}

/// The spacings that give way between fixed groups, in a sentence.
fn took_up(retuning: &Retuning) -> String {
    let by: Vec<f64> = retuning.taken_up.iter().map(|taken| taken.by_mm).collect();
    let (Some(least), Some(most)) =
        (by.iter().copied().reduce(f64::min), by.iter().copied().reduce(f64::max))
    else {
        return String::new();
    };
    let by = if fixed(least, 3) == fixed(most, 3) {
        format!("{} mm", signed(least, 3))
    } else {
        format!("{} to {} mm", signed(least, 3), signed(most, 3))
    };
    let told = format!(
        "Between the fixed groups one spacing of every state takes up the difference, {by}, before \
         anything is moved."
    );
    paragraph(&told, WIDTH, "")
}

fn name_of(moving: Moving) -> &'static str {
    match moving {
        Moving::AsDesigned => "as designed",
        Moving::Nothing => "changed, nothing moved",
        Moving::Spacings => "spacings re-adjusted",
        Moving::Unmade => "and what is not made yet",
    }
}

fn merits(retuning: &Retuning) -> String {
    let mut table = Table::new([
        (Column::Left, "stage"),
        (Column::Right, "merit"),
        (Column::Right, "of the loss\nrecovered"),
        (Column::Right, "goals\nmissed"),
        (Column::Right, "limits\ncrossed"),
    ]);
    for stage in &retuning.stages {
        let missed_goals =
            marks(&stage.file, &stage.assessment).iter().filter(|mark| mark.size() > 1.0).count();
        let crossed = stage.assessment.limits.iter().filter(|limit| !limit.met).count();
        let recovered = retuning.recovered_percent(stage);
        table.row([
            name_of(stage.moving).to_owned(),
            significant_or_dash(stage.assessment.merit.total, 4),
            recovered.map_or_else(|| NONE.to_owned(), percent),
            missed_goals.to_string(),
            crossed.to_string(),
        ]);
    }
    table.text()
}

fn percent(percent: f64) -> String {
    if percent >= 100.0 { "all".to_owned() } else { format!("{} %", fixed(percent, 1)) }
}

/// Every goal of every state, a column a stage.
fn goals(retuning: &Retuning) -> String {
    let heads = retuning.stages.iter().map(|stage| match stage.moving {
        Moving::AsDesigned => "as \ndesigned ",
        Moving::Nothing => "nothing \nmoved ",
        Moving::Spacings => "spacings \nre-adjusted ",
        Moving::Unmade => "not made \ntoo ",
    });
    let leading = [(Column::Left, "state"), (Column::Left, "goal")];
    let columns = leading.into_iter().chain(heads.map(|head| (Column::Right, head)));
    let mut table = Table::new(columns);
    let Some(last) = retuning.last() else { return String::new() };
    for state in &last.assessment.states {
        let name = |row: usize| if row == 0 { state.name.clone() } else { String::new() };
        for (row, (goal, cells)) in rows(retuning, &state.name).into_iter().enumerate() {
            table.row([name(row), goal].into_iter().chain(cells));
        }
    }
    table.text()
}

/// One state's goals, each with what every stage reaches.
fn rows(retuning: &Retuning, state: &str) -> Vec<(String, Vec<String>)> {
    let mut rows: Vec<(String, Vec<String>)> = Vec::new();
    for (place, stage) in retuning.stages.iter().enumerate() {
        for (goal, cell) in reached(stage, state) {
            let row = match rows.iter().position(|(other, _)| *other == goal) {
                Some(row) => row,
                None => {
                    rows.push((goal, Vec::new()));
                    rows.len() - 1
                }
            };
            rows[row].1.resize(place, format!("{NONE}{BLANK}"));
            rows[row].1.push(cell);
        }
    }
    for row in &mut rows {
        row.1.resize(retuning.stages.len(), format!("{NONE}{BLANK}"));
    }
    rows
}

/// What a stage reaches in a state, marked where it misses.
fn reached(stage: &Stage, state: &str) -> Vec<(String, String)> {
    let states = stage.file.wishes.states.iter().zip(&stage.assessment.states);
    let Some((goals, reached)) = { states }.find(|(_, reached)| reached.name == state) else {
        return Vec::new();
    };
    let cell = |text: String, value, within| {
        format!("{text}{}", if missed(value, within) { '!' } else { BLANK })
    };
    let mut cells = Vec::new();
    if goals.wavefront_rms_waves.is_some() {
        for wavefront in &reached.wavefront {
            let rms = wavefront.rms_waves;
            cells.push((
                format!("RMS waves, {} nm", as_written(wavefront.wavelength_nm)),
                cell(significant_or_dash(rms, 3), rms, goals.wavefront_rms_waves),
            ));
        }
    }
    if goals.ratio_percent.is_some() {
        let error = reached.ratio_error_percent;
        let text = cell(fixed_or_less(error, 4), error, goals.ratio_percent);
        cells.push(("ratio error %".to_owned(), text));
    }
    if goals.exit_slope_urad.is_some() {
        let slope = reached.exit_slope_urad;
        let text = cell(fixed_or_dash(slope, 2), slope, goals.exit_slope_urad);
        cells.push(("exit slope µrad".to_owned(), text));
    }
    cells
}

/// Why rays fail, where they do.
fn faults(retuning: &Retuning) -> String {
    let lines = retuning.stages.iter().flat_map(|stage| {
        let name = name_of(stage.moving);
        stage.assessment.states.iter().filter_map(move |state| {
            let fault = state.fault.as_ref()?;
            Some(paragraph(&format!("{name}, {}: {fault}", state.name), WIDTH, "  "))
        })
    });
    lines.collect::<Vec<_>>().join("\n")
}

/// Spacings for the bench, and what moved in the last stage.
fn moved(retuning: &Retuning) -> Vec<String> {
    let Some(changed) = retuning.stage(Moving::Nothing) else { return Vec::new() };
    let mut parts = Vec::new();
    if let Some(stage) = retuning.stage(Moving::Spacings) {
        parts.push(bench_table(&changed.file.design, &stage.file.design));
    }
    if let Some(stage) = retuning.stage(Moving::Unmade) {
        let found = differences(changed.file.document().value(), stage.file.document().value());
        parts.push(table_of("moved with what is not made", &found.iter().collect::<Vec<_>>()));
    }
    parts
}

/// Most spacings that stand beside each other.
const ABREAST: usize = 2;

/// What the mechanic sets: every spacing, and by how much it moves.
fn bench_table(before: &Design, after: &Design) -> String {
    let heads = spacing_heads(before);
    if heads.len() > ABREAST {
        return tall_bench_table(before, after, &heads);
    }
    let mut columns = vec![(Column::Left, "re-adjust")];
    for head in &heads {
        columns.extend([
            (Column::From, head.as_str()),
            (Column::Arrow, ""),
            (Column::Right, ""),
            (Column::Right, "by mm"),
        ]);
    }
    let mut table = Table::new(columns);
    for (old, new) in before.states.iter().zip(&after.states) {
        let mut row = vec![old.name.clone()];
        for (&from, &to) in old.spacings_mm.iter().zip(&new.spacings_mm) {
            row.extend([fixed(from, 3), ARROW.to_owned(), fixed(to, 3), signed(to - from, 3)]);
        }
        table.row(row);
    }
    table.text()
}

/// The same with a line a spacing.
fn tall_bench_table(before: &Design, after: &Design, heads: &[String]) -> String {
    let mut table = Table::new([
        (Column::Left, "re-adjust"),
        (Column::Left, "spacing mm"),
        (Column::From, "from"),
        (Column::Arrow, ""),
        (Column::Right, "to"),
        (Column::Right, "by mm"),
    ]);
    for (old, new) in before.states.iter().zip(&after.states) {
        let spacings = old.spacings_mm.iter().zip(&new.spacings_mm).zip(heads);
        for (k, ((&from, &to), head)) in spacings.enumerate() {
            let state = if k == 0 { old.name.clone() } else { String::new() };
            let spacing = head.lines().collect::<Vec<_>>().join(" ");
            let spacing = spacing.trim_end_matches(" mm").to_owned();
            let cells = [fixed(from, 3), ARROW.to_owned(), fixed(to, 3), signed(to - from, 3)];
            table.row([state, spacing].into_iter().chain(cells));
        }
    }
    table.text()
}

fn blamed(blame: &[Blame]) -> String {
    let mut table = Table::new([
        (Column::Left, "this change alone adds"),
        (Column::Right, "by\nderivatives"),
        (Column::Right, "traced"),
        (Column::Right, "by limits\ncrossed"),
    ]);
    for one in blame {
        let change = paragraph(&one.change, 48, "  ");
        let by = match one.without_derivative {
            Some(_) => "none¹".to_owned(),
            None => significant_or_dash(one.by_derivatives, 4),
        };
        let traced = significant_or_dash(one.traced, 4);
        table.row([change, by, traced, significant(one.by_limits, 4)]);
    }
    if table.is_empty() {
        return String::new();
    }
    let mut reasons: Vec<&str> = blame.iter().filter_map(|one| one.without_derivative).collect();
    reasons.sort_unstable();
    reasons.dedup();
    if reasons.is_empty() {
        return table.text();
    }
    format!("{}\n¹ no derivative ({}): traced alone instead", table.text(), reasons.join("; "))
}

fn cautions(retuning: &Retuning) -> Vec<String> {
    let mut cautions = Vec::new();
    for stage in &retuning.stages {
        let Some(solver) = &stage.solver else { continue };
        let name = name_of(stage.moving);
        if !solver.was_successful {
            cautions.push(format!("{name}: {}", solver.stopped));
        }
        if let Some(told) = ended_on_bounds(&solver.on_bounds, solver.variables) {
            cautions.push(format!("{name}: {told}"));
        }
    }
    if retuning.stage(Moving::Spacings).is_none() {
        cautions.push("the file frees no spacing, so none was re-adjusted".to_owned());
    }
    cautions
}

fn closing(retuning: &Retuning) -> String {
    let mut told = Vec::new();
    let hurt = |one: &&Blame| one.cost().is_some_and(|cost| cost > 0.0);
    let worst = retuning
        .blame
        .iter()
        .filter(hurt)
        .max_by(|a, b| a.cost().unwrap_or(0.0).total_cmp(&b.cost().unwrap_or(0.0)));
    if let (Some(worst), true) = (worst, retuning.blame.len() > 1) {
        let how = match worst.by_derivatives {
            Some(_) if worst.by_limits > 0.0 => "from derivatives and the limits it crosses",
            Some(_) => "from derivatives",
            None => "traced alone",
        };
        let cost = significant(worst.cost().unwrap_or(0.0), 3);
        told.push(format!(
            "What hurt most is {}: it adds {cost} to the merit, {how}.",
            worst.change
        ));
    }
    if let Some(stage) = retuning.stage(Moving::Spacings)
        && let Some(percent) = retuning.recovered_percent(stage)
    {
        let share = match percent {
            _ if percent >= 100.0 => "all".to_owned(),
            _ if percent < 0.05 => "none".to_owned(),
            _ => format!("{} %", fixed(percent, 1)),
        };
        told.push(format!("Spacings alone recover {share} of the loss."));
    }
    if let Some(last) = retuning.last() {
        told.push(assessment::closing(&last.file, &last.assessment));
    }
    let lines: Vec<String> = told.iter().map(|line| paragraph(line, WIDTH, "")).collect();
    lines.join("\n")
}
