//! What `tolerance` prints for people.

use driver::design_file::DesignFile;
use driver::tolerance::{
    Balance, Distribution, Miss, MonteCarlo, Quantity, Sensitivity, Spread, StateSensitivity,
    ToleranceReport,
};
use surface_model::document::Address;

use super::number::{as_written, counted, fixed, significant, significant_or_dash};
use super::table::{ARROW, Column, Table};
use super::{WIDTH, assessment, paragraph, sections, warnings};

/// Which tolerances are listed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Listed {
    /// The worst.
    #[default]
    Worst,
    /// Every one.
    All,
}

/// How many are the worst.
const WORST: usize = 12;

/// The whole result.
#[must_use]
pub fn told(file: &DesignFile, report: &ToleranceReport, listed: Listed) -> String {
    sections([
        assessment::heading(file),
        paragraph(&premises(file, report), WIDTH, ""),
        distributions(&report.monte_carlo).text(),
        wander(&report.monte_carlo).text(),
        sensitivities_told(file, report, listed),
        balance(file, report.balance.as_ref()),
        warnings(&cautions(report)),
        paragraph(&verdict(file, report), WIDTH, ""),
    ])
}

/// What was taken for granted: grade, spread, what is re-adjusted.
pub(crate) fn premises(file: &DesignFile, report: &ToleranceReport) -> String {
    let spread = match report.spread {
        Spread::Normal => "normal, cut off at the tolerance, which is two sigma",
        Spread::Uniform => "uniform within the tolerance",
    };
    let spacings: Vec<String> = report.readjusted.iter().map(|at| label(file, at)).collect();
    let followed = if spacings.is_empty() {
        "Nothing is re-adjusted.".to_owned()
    } else {
        let states = file.design.states.len();
        format!(
            "Re-adjusted: {} in {}.",
            counted(spacings.len(), "spacing"),
            counted(states, "state")
        )
    };
    format!("Grade {}; errors are {spread}. {followed}", report.grade.word())
}

/// How the systems are spread in every state.
pub(crate) fn distributions(monte_carlo: &MonteCarlo) -> Table {
    let mut table = Table::new([
        (Column::Left, "state"),
        (Column::Left, "quantity"),
        (Column::Right, "within"),
        (Column::Right, "as\ndrawn"),
        (Column::Right, "50 %"),
        (Column::Right, "90 %"),
        (Column::Right, "98 %"),
        (Column::Right, "met\n%"),
    ]);
    for state in &monte_carlo.states {
        for (i, quantity) in state.quantities.iter().enumerate() {
            let sizes = &quantity.sizes;
            table.row([
                if i == 0 { state.state.clone() } else { String::new() },
                name(quantity.quantity).to_owned(),
                quantity.within.map_or_else(String::new, as_written),
                significant(quantity.nominal, 3),
                significant_or_dash(sizes.percent_50, 3),
                significant_or_dash(sizes.percent_90, 3),
                significant_or_dash(sizes.percent_98, 3),
                quantity.within_percent.map_or_else(String::new, |percent| fixed(percent, 1)),
            ]);
        }
    }
    table
}

fn name(quantity: Quantity) -> &'static str {
    match quantity {
        Quantity::WavefrontRmsWaves => "RMS waves",
        Quantity::RatioPercent => "ratio %",
        Quantity::ExitSlopeUrad => "slope µrad",
        Quantity::BoresightUrad => "boresight µrad",
    }
}

/// How far the beam wanders through the zoom.
pub(crate) fn wander(monte_carlo: &MonteCarlo) -> Table {
    let mut table = Table::new([
        (Column::Left, "boresight through the zoom, µrad"),
        (Column::Right, "within"),
        (Column::Right, "rms"),
        (Column::Right, "50 %"),
        (Column::Right, "90 %"),
        (Column::Right, "98 %"),
        (Column::Right, "met\n%"),
    ]);
    let allowed = monte_carlo.boresight_wander_within_urad.map_or_else(String::new, as_written);
    let met = monte_carlo.boresight_wander_within_percent;
    let met = met.map_or_else(String::new, |percent| fixed(percent, 1));
    let mut row = |what: &str, sizes: &Distribution, required: bool| {
        let only = |text: &String| if required { text.clone() } else { String::new() };
        table.row([
            what.to_owned(),
            only(&allowed),
            significant(sizes.rms, 3),
            significant_or_dash(sizes.percent_50, 3),
            significant_or_dash(sizes.percent_90, 3),
            significant_or_dash(sizes.percent_98, 3),
            only(&met),
        ]);
    };
    match &monte_carlo.boresight_wander_sliding_urad {
        None => row("all mounts slide", &monte_carlo.boresight_wander_urad, true),
        Some(sliding) => {
            row("mounts as given, some turn", &monte_carlo.boresight_wander_urad, true);
            row("if all mounts slid", sliding, false);
        }
    }
    table
}

/// What single tolerances do, the worst state each, and what that means.
fn sensitivities_told(file: &DesignFile, report: &ToleranceReport, listed: Listed) -> String {
    let table = sensitivities(file, report, listed);
    let rest = report.sensitivities.len() - table.rows().len();
    let more = if rest > 0 { format!(" {rest} more: --all.") } else { String::new() };
    format!("{}\n{}", table.text(), paragraph(&format!("{}{more}", effects(report)), WIDTH, ""))
}

/// What the numbers of a sensitivity are.
pub(crate) fn effects(report: &ToleranceReport) -> String {
    let followed = if report.readjusted.is_empty() { "" } else { ", spacings re-adjusted" };
    format!(
        "The effect at the full tolerance in the worst state{followed}; its share of all that is \
         expected to go amiss, squares in units of what is allowed."
    )
}

/// What single tolerances do, the worst state each.
pub(crate) fn sensitivities(file: &DesignFile, report: &ToleranceReport, listed: Listed) -> Table {
    // Of the two about the beam's direction, the one that is required.
    let wander = report.monte_carlo.boresight_wander_within_urad.is_some();
    let mut table = Table::new([
        (Column::Right, "share\n%"),
        (Column::Left, "tolerance"),
        (Column::Place, "at"),
        (Column::Right, "±"),
        (Column::Right, "RMS\nwaves"),
        (Column::Right, "ratio\n%"),
        (Column::Right, "slope\nµrad"),
        (Column::Right, if wander { "wander\nµrad" } else { "bore-\nsight µrad" }),
    ]);
    let most = if listed == Listed::All { usize::MAX } else { WORST };
    for sensitivity in report.sensitivities.iter().take(most) {
        let mut row = vec![
            fixed(sensitivity.share_percent, 1),
            sensitivity.kind.word().to_owned(),
            label(file, &sensitivity.at),
            as_written(sensitivity.tolerance),
        ];
        let worst = |quantity| {
            let sizes = sensitivity.states.iter();
            sizes.map(|state: &StateSensitivity| state.size(quantity)).fold(0.0, f64::max)
        };
        row.extend(Quantity::ALL.map(|quantity| match quantity {
            Quantity::BoresightUrad if wander => effect(sensitivity.wander_urad),
            quantity => effect(worst(quantity)),
        }));
        table.row(row);
    }
    table
}

/// An effect; what no one could measure is nothing.
fn effect(size: f64) -> String {
    if size < 5e-5 { "0".to_owned() } else { significant(size, 2) }
}

/// A place in few words: the names and numbers of its address.
pub(crate) fn label(file: &DesignFile, at: &Address) -> String {
    let at = at.with_names(file.document().value());
    let steps = at.steps();
    let names = steps.iter().enumerate().filter(|(i, _)| i % 2 == 1).map(|(_, step)| *step);
    names.collect::<Vec<_>>().join(" ")
}

fn balance(file: &DesignFile, balance: Option<&Balance>) -> String {
    let Some(balance) = balance else { return String::new() };
    let mut table = Table::new([
        (Column::Left, "tolerance"),
        (Column::Left, "at"),
        (Column::From, "from"),
        (Column::Arrow, ""),
        (Column::Right, "to"),
    ]);
    for tolerance in &balance.tolerances {
        table.row([
            tolerance.kind.word().to_owned(),
            label(file, &tolerance.at),
            as_written(tolerance.from),
            ARROW.to_owned(),
            as_written(tolerance.to),
        ]);
    }
    let wanted = as_written(balance.wanted_percent);
    let [given, now] = [balance.given_percent, balance.yield_percent].map(|part| fixed(part, 1));
    let reached = if !balance.reached {
        format!("Even with a tenth of every tolerance {now} % come out right, not {wanted} %")
    } else if balance.given_percent >= balance.wanted_percent && balance.relative_cost < 1.0 {
        format!(
            "The tolerances as given yield {given} % already, more than the {wanted} % wanted. \
             Relaxed to these, {now} % of the same systems come out right"
        )
    } else if balance.given_percent >= balance.wanted_percent {
        format!(
            "The tolerances as given yield {given} % already, {wanted} % being wanted, and nothing \
             cheaper was found that does"
        )
    } else {
        format!("Balanced, {now} % of the same systems come out right ({wanted} % wanted)")
    };
    let told = format!(
        "{reached}, at {} times the cost, if a tolerance half as wide costs twice as much.",
        significant(balance.relative_cost, 2)
    );
    format!("{}\n{}", table.text(), paragraph(&told, WIDTH, ""))
}

/// What should be known of the systems that were built.
pub(crate) fn cautions(report: &ToleranceReport) -> Vec<String> {
    let monte_carlo = &report.monte_carlo;
    let mut cautions = Vec::new();
    if let Some(fault) = &monte_carlo.first_fault {
        let failed = counted(monte_carlo.failed as usize, "system");
        cautions.push(format!("in {failed} a ray does not get through; first: {fault}"));
    }
    if monte_carlo.readjustment_at_bound > 0 {
        let systems = counted(monte_carlo.readjustment_at_bound as usize, "system");
        cautions.push(format!(
            "in {systems} a re-adjusted spacing stopped at its limit: leave it more room"
        ));
    }
    if monte_carlo.systems < monte_carlo.systems_wanted {
        cautions.push(format!(
            "stopped after {} of {} systems",
            monte_carlo.systems, monte_carlo.systems_wanted
        ));
    }
    cautions
}

/// The yield, and what costs it most.
pub(crate) fn verdict(file: &DesignFile, report: &ToleranceReport) -> String {
    let monte_carlo = &report.monte_carlo;
    let [low, high] = monte_carlo.yield_between_percent.map(|percent| fixed(percent, 1));
    let as_given = if report.balance.is_some() { "With the tolerances as given " } else { "" };
    let mut told = format!(
        "{as_given}{} of {} come out right: a yield of {} % (95 % sure: {low} to {high} %).",
        monte_carlo.passed,
        counted(monte_carlo.systems as usize, "system"),
        fixed(monte_carlo.yield_percent, 1),
    );
    if !monte_carlo.missed.is_empty() {
        let missed = monte_carlo.missed.iter();
        let missed: Vec<String> =
            missed.map(|miss| format!("{} in {}", shortfall(miss.what), miss.systems)).collect();
        told.push_str(&format!(" Out of bounds: {}.", missed.join(", ")));
    }
    let largest: Option<&Sensitivity> = report.sensitivities.first();
    if let Some(largest) = largest.filter(|largest| largest.share_percent > 0.0) {
        told.push_str(&format!(
            " The largest contributor is {} of {}: {} % of all that is expected to go amiss.",
            largest.kind.word(),
            largest.at.with_names(file.document().value()),
            fixed(largest.share_percent, 0)
        ));
    }
    told
}

fn shortfall(what: Miss) -> &'static str {
    match what {
        Miss::Rays => "rays do not get through",
        Miss::WavefrontRmsWaves => "the wavefront",
        Miss::RatioPercent => "the ratio",
        Miss::ExitSlopeUrad => "the exit slope",
        Miss::BoresightUrad => "the boresight of a state",
        Miss::Wander => "the boresight through the zoom",
    }
}
