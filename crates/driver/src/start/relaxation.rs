//! What would have to give for an impossible brief to have a layout: one number of the brief at a
//! time is relaxed, and each answer is one that was tried.

use serde_json::{Value, json};
use surface_model::document::{Address, Document};

use crate::brief::{BriefFile, RatioDocument};

use super::Starts;
use super::ranking::admits;

/// A number of a brief that can give.
#[derive(Debug, Clone, PartialEq)]
pub struct Relaxation {
    /// Where it stands.
    pub at: Address,
    /// What it is, in words, with its unit.
    pub what: &'static str,
    /// Whether more of it makes the brief easier.
    more: bool,
}

/// A relaxation that admits none by itself.
#[derive(Debug, Clone, PartialEq)]
pub struct InVain {
    /// What gives.
    pub relaxation: Relaxation,
    /// The furthest value it was tried with.
    pub furthest: f64,
}

/// What came of relaxing one number at a time.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Relaxations {
    /// Those that admit a layout, the smallest change first.
    pub admitting: Vec<Relaxed>,
    /// Those that are not enough, in the order they were tried.
    pub in_vain: Vec<InVain>,
}

/// A relaxation that admits a layout.
#[derive(Debug, Clone, PartialEq)]
pub struct Relaxed {
    /// What gives.
    pub relaxation: Relaxation,
    /// Its value in the brief.
    pub from: f64,
    /// A value with which a layout was found.
    pub to: f64,
}

impl Relaxed {
    /// How far it goes: the larger value over the smaller, less 1.
    #[must_use]
    pub(crate) fn change(&self) -> f64 {
        (self.to / self.from).max(self.from / self.to) - 1.0
    }
}

/// A number is relaxed by this factor at most.
const FURTHEST: f64 = 8.0;
/// Halvings of the way, on a logarithmic scale, until the least is taken as found.
const HALVINGS: usize = 7;

/// Limits that can give, with the end that does.
const LIMITS: [(&str, &str, &str); 15] = [
    ("spacing_mm", "min", "the smallest spacing, mm"),
    ("spacing_mm", "max", "the largest spacing, mm"),
    ("radius_mm", "min", "the smallest radius, mm"),
    ("radius_mm", "max", "the largest radius, mm"),
    ("travel_mm", "max", "the longest travel, mm"),
    ("edge_thickness_mm", "min", "the smallest edge thickness, mm"),
    ("edge_thickness_mm", "max", "the largest edge thickness, mm"),
    ("centre_thickness_mm", "min", "the smallest centre thickness, mm"),
    ("centre_thickness_mm", "max", "the largest centre thickness, mm"),
    ("air_mm", "min", "the smallest air in a group, mm"),
    ("air_mm", "max", "the largest air in a group, mm"),
    ("edge_gap_mm", "min", "the smallest edge gap, mm"),
    ("steepness", "max", "the largest steepness"),
    ("incidence_deg", "max", "the largest angle of incidence, degrees"),
    ("track_mm", "min", "the shortest track, mm"),
];

/// Every number of a brief that can give.
fn candidates(brief: &BriefFile) -> Vec<Relaxation> {
    let root = Address::root;
    let mut list = vec![
        Relaxation { at: root().key("housing").key("track_mm"), what: "the track, mm", more: true },
        Relaxation {
            at: root().key("beam").key("diameter_mm"),
            what: "the beam diameter, mm",
            more: false,
        },
    ];
    list.extend(LIMITS.map(|(limit, end, what)| Relaxation {
        at: root().key("limits").key(limit).key(end),
        what,
        more: end == "max",
    }));
    let at = root().key("limits").key("track_mm").key("max");
    list.push(Relaxation { at, what: "the longest track, mm", more: true });
    let ratios = brief.ratios.iter().map(|ratio| ratio.ratio.abs()).enumerate();
    if let Some((k, _)) = ratios.max_by(|a, b| a.1.total_cmp(&b.1)) {
        let at = root().key("ratios").index(k);
        let own = matches!(brief.written().ratios.get(k), Some(RatioDocument::Own(_)));
        let at = if own { at.key("ratio") } else { at };
        list.push(Relaxation { at, what: "the highest ratio", more: false });
    }
    list
}

impl Starts {
    /// Relaxations of the brief, one number at a time, that admit a layout among the first `tried`
    /// points, and those that do not. Each was tried with the value told.
    #[must_use]
    pub fn relaxations(&self, tried: u64, seed: u64) -> Relaxations {
        let brief = self.brief();
        let mut out = Relaxations::default();
        for candidate in candidates(brief) {
            match least(brief, candidate, tried, seed) {
                Some(Ok(relaxed)) => out.admitting.push(relaxed),
                Some(Err(in_vain)) => out.in_vain.push(in_vain),
                None => {}
            }
        }
        out.admitting.sort_by(|a, b| a.change().total_cmp(&b.change()));
        out
    }
}

/// The least relaxation that does; `None` if the brief has no such number, or none to relax.
fn least(
    brief: &BriefFile,
    relaxation: Relaxation,
    tried: u64,
    seed: u64,
) -> Option<Result<Relaxed, InVain>> {
    let from = relaxation.at.get(brief.document().value())?.as_f64()?;
    if from == 0.0 {
        return None;
    }
    let value = |factor: f64| {
        rounded(if relaxation.more { from * factor } else { from / factor }, relaxation.more)
    };
    let does = |factor: f64| {
        let to = value(factor);
        let admitted = admits(Starts::of(&with(brief, &relaxation.at, to)?), tried, seed);
        Some(to).filter(|_| admitted)
    };
    let furthest = value(FURTHEST);
    with(brief, &relaxation.at, furthest)?;
    let Some(mut to) = does(FURTHEST) else { return Some(Err(InVain { relaxation, furthest })) };
    let (mut little, mut much) = (1.0_f64, FURTHEST);
    for _ in 0..HALVINGS {
        let middle = (little * much).sqrt();
        match does(middle) {
            Some(value) => (to, much) = (value, middle),
            None => little = middle,
        }
    }
    Some(Ok(Relaxed { relaxation, from, to }))
}

/// The brief with one number changed; `None` if that makes no brief.
fn with(brief: &BriefFile, at: &Address, number: f64) -> Option<BriefFile> {
    let mut value: Value = brief.document().value().clone();
    *at.get_mut(&mut value)? = json!(number);
    BriefFile::read(Document::from_value(brief.label(), value)).ok()
}

/// To three digits, away from where it comes from.
fn rounded(number: f64, up: bool) -> f64 {
    let unit = 10_f64.powi((number.abs().log10().floor() - 2.0) as i32);
    // Nothing, and what is next to nothing, has no three digits.
    if !unit.is_normal() {
        return number;
    }
    let steps = if up { (number / unit).ceil() } else { (number / unit).floor() };
    // Written and read back, so that 0.1 is 0.1.
    format!("{:.2e}", steps * unit).parse().unwrap_or(number)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_are_told_in_three_digits_towards_the_easier_side() {
        assert_eq!(rounded(123.4, true), 124.0);
        assert_eq!(rounded(0.04567, false), 0.0456);
        assert_eq!(rounded(-2.3456, false), -2.35);
        for number in [0.0, -0.0, 5e-324, 1e-310, f64::INFINITY] {
            assert_eq!(rounded(number, true), number);
            assert_eq!(rounded(number, false), number);
        }
    }
}
