//! What the workshop and the weather do to a design: sections of the page, with the tables of
//! `tolerance` and of `assess --temperatures-c`.

use driver::design_file::DesignFile;
use driver::temperature::TemperatureReport;
use driver::tolerance::ToleranceReport;
use maud::html;

use super::parts::laid_out;
use super::{Section, WIDTH, figure};
use crate::picture::{Axis, Bar, bars};
use crate::text::{temperature, tolerance};

/// Bars that are drawn.
const BARS: usize = 12;

/// How systems come out that are built within the design's tolerances.
#[must_use]
pub fn tolerance_section(file: &DesignFile, report: &ToleranceReport) -> Section {
    let built = &report.monte_carlo;
    let shares = report.sensitivities.iter().map(|sensitivity| Bar {
        name: format!("{} {}", sensitivity.kind.word(), tolerance::label(file, &sensitivity.at)),
        value: sensitivity.share_percent,
    });
    let shares: Vec<Bar> = shares.filter(|bar| bar.value > 0.0).collect();
    let listed = tolerance::sensitivities(file, report, tolerance::Listed::Worst);
    let all = tolerance::sensitivities(file, report, tolerance::Listed::All);
    let axis = Axis::linear("share of all that is expected to go amiss", "%");
    let body = html! {
        p { strong { (tolerance::verdict(file, report)) } }
        p.faint {
            (built.systems) " systems built at random, seed " (built.seed) ". "
            (tolerance::premises(file, report))
        }
        @for caution in tolerance::cautions(report) { p { "Warning: " (caution) } }
        h3 { "Systems as built and re-adjusted" }
        p.faint { "So many per cent of the systems are no larger than the number in their column." }
        (laid_out(&tolerance::distributions(built)))
        (laid_out(&tolerance::wander(built)))
        h3 { "What counts most" }
        @if !shares.is_empty() {
            (figure(bars("Tolerances by their share", &axis, &shares, BARS, WIDTH), "Sensitivity to each tolerance"))
        }
        p.faint { (tolerance::effects(report)) }
        (laid_out(&listed))
        @if all.rows().len() > listed.rows().len() {
            details {
                summary { "All " (all.rows().len()) " tolerances" }
                (laid_out(&all))
            }
        }
    };
    Section { title: "Tolerances".into(), body }
}

/// What the design does at other temperatures than the one it is drawn at.
#[must_use]
pub fn temperature_section(file: &DesignFile, report: &TemperatureReport) -> Section {
    let body = html! {
        p.faint { (temperature::note(report)) }
        (laid_out(&temperature::states(file, report)))
        h3 { "Drift around 20 °C, and what spacings have to follow" }
        (laid_out(&temperature::drift(file, report)))
    };
    Section { title: "Temperature".into(), body }
}

/// A section that could not be told, and why.
#[must_use]
pub fn silent_section(title: &str, why: &str) -> Section {
    let body = html! { p { "This cannot be told: " (why) "." } };
    Section { title: title.into(), body }
}
