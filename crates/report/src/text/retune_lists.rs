//! What `retune` prints of several designs: glasses ranked, radii moved to tools, a batch of units.

use driver::design_file::DesignFile;
use driver::retune::batch::{Totals, TunedUnit};
use driver::retune::equivalents::Replacement;
use driver::retune::tool_radii::ToolRadii;

use super::number::{NONE, counted, fixed, fixed_or_dash, significant_or_dash};
use super::table::{ARROW, BLANK, Column, Table};
use super::{WIDTH, paragraph, sections};

/// Glasses in place of `glass`, best first.
#[must_use]
pub fn replacements(glass: &str, found: &[Replacement]) -> String {
    let head = format!("in place of\n{glass}");
    let mut table = Table::new([
        (Column::Left, head.as_str()),
        (Column::Left, "maker"),
        (Column::Left, "code"),
        (Column::Right, "index\noff by"),
        (Column::Right, "merit, nothing\nmoved"),
        (Column::Right, "spacings\nonly"),
        (Column::Right, "all not\nmade"),
        (Column::Left, "meets"),
    ]);
    for one in found {
        let glass = &one.glass.glass;
        table.row([
            glass.full_name(),
            glass.maker().unwrap_or(NONE).to_owned(),
            glass.code().unwrap_or(NONE).to_owned(),
            format!("{:.6}", one.glass.rms_index_difference),
            significant_or_dash(one.merit_nothing_moved, 4),
            significant_or_dash(one.merit_spacings, 4),
            significant_or_dash(one.merit_unmade, 4),
            if one.meets { "yes" } else { "no" }.to_owned(),
        ]);
    }
    let closing = match found.first() {
        None => format!("No other maker has a glass known at these wavelengths near {glass}."),
        Some(best) => {
            let merit = significant_or_dash(best.merit(), 3);
            format!("The best of them is {}, merit {merit}.", best.glass.glass.full_name())
        }
    };
    sections([table.text(), paragraph(&closing, WIDTH, "")])
}

/// Every radius moved to a tool, in the order of the moves.
#[must_use]
pub fn tool_radii(done: &ToolRadii) -> String {
    let mut table = Table::new([
        (Column::Right, ""),
        (Column::Place, "radius moved to a tool"),
        (Column::From, "from"),
        (Column::Arrow, ""),
        (Column::Right, "to mm"),
        (Column::Right, "merit\nafter"),
        (Column::Right, "cost"),
    ]);
    let radius = |mm: Option<f64>| mm.map_or_else(|| "flat".to_owned(), |mm| fixed(mm, 3));
    for (number, one) in done.moves.iter().enumerate() {
        table.row([
            (number + 1).to_string(),
            one.at.to_string(),
            radius(one.from_mm),
            ARROW.to_owned(),
            radius(one.to_mm),
            significant_or_dash(one.merit, 4),
            significant_or_dash(one.cost, 3),
        ]);
    }
    if table.is_empty() {
        return "No radius is free, so none was moved to a tool.".to_owned();
    }
    let last = done.moves.last().and_then(|last| last.merit);
    let closing = format!(
        "{} moved to tools: merit {} before, {} after.",
        counted(done.moves.len(), "radius").replace("radiuss", "radii"),
        significant_or_dash(done.merit_before, 4),
        significant_or_dash(last, 4)
    );
    sections([table.text(), closing])
}

/// A batch of units, a line a unit and state.
#[must_use]
pub fn batch(file: &DesignFile, units: &[TunedUnit]) -> String {
    let heads = super::states::spacing_heads(&file.design);
    let mut columns = vec![
        (Column::Left, "serial"),
        (Column::Right, "merit as\ndesigned "),
        (Column::Right, "re-\nadjusted "),
        (Column::Left, "state"),
    ];
    columns.extend(heads.iter().map(|head| (Column::Right, head.as_str())));
    let mut table = Table::new(columns);
    let marked = |merit, meets| {
        format!("{}{}", significant_or_dash(merit, 4), if meets { BLANK } else { '!' })
    };
    for unit in units {
        for (k, state) in unit.states.iter().enumerate() {
            let mut row = vec![String::new(); 3];
            if k == 0 {
                row[0].clone_from(&unit.serial);
                row[1] = marked(unit.merit_nothing_moved, unit.meets_nothing_moved);
                row[2] = marked(unit.merit, unit.meets);
            }
            row.push(state.name.clone());
            let told =
                |mm: &f64| if unit.fault.is_some() { NONE.to_owned() } else { fixed(*mm, 3) };
            row.extend(state.spacings_mm.iter().map(told));
            table.row(row);
        }
    }
    let faults: Vec<String> = units
        .iter()
        .filter_map(|unit| Some(format!("{}: {}", unit.serial, unit.fault.as_ref()?)))
        .map(|line| paragraph(&line, WIDTH, "  "))
        .collect();
    let signs = "! a goal missed or a limit crossed".to_owned();
    let any = units.iter().any(|unit| !unit.meets || !unit.meets_nothing_moved);
    sections([
        table.text(),
        if any { signs } else { String::new() },
        faults.join("\n"),
        totals(units),
    ])
}

fn totals(units: &[TunedUnit]) -> String {
    let totals = Totals::of(units);
    let worst = units
        .iter()
        .filter_map(|unit| Some((unit.merit?, unit)))
        .max_by(|a, b| a.0.total_cmp(&b.0));
    let mut told = format!(
        "{}: {} meet everything with the spacings of the design, {} with their own",
        counted(totals.units, "unit"),
        totals.meet_nothing_moved,
        totals.meet
    );
    if totals.failed > 0 {
        told.push_str(&format!(", {} could not be adjusted", totals.failed));
    }
    told.push('.');
    if let Some((merit, unit)) = worst {
        told.push_str(&format!(
            " The worst is {}, merit {}.",
            unit.serial,
            fixed_or_dash(Some(merit), 4)
        ));
    }
    paragraph(&told, WIDTH, "")
}
