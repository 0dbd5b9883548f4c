//! Tolerances: what a workshop's errors do to a design, and how many systems come out right.
//!
//! # The way of an error
//!
//! 1. *Built.* Radii, irregularities, thicknesses, glass, wedges, decentres and tilts are drawn
//!    within their tolerances (`kind.rs`, `document.rs`); one draw is one system in all its states.
//!    Between two fixed groups a length that comes out wrong is made up by the last free spacing,
//!    elsewhere it shifts what follows.
//! 2. *Re-adjusted.* In every state the user turns the spacings that can be turned until the state
//!    is as good as it gets.
//! 3. *Set.* Each time it is used, every spacing is set a little wrong. Nothing follows that.
//! 4. *Judged.* Exact skew rays through the spoilt surfaces give the wavefront and, apart from it,
//!    the boresight; ratio and exit slope are paraxial, as everywhere.
//!
//! A group whose mount rotates turns its decentres, tilts, wedges and irregularities with it, by
//! its travel over the lead.

mod balance;
mod bench;
mod built;
mod document;
mod draw;
mod drawing;
mod effect;
mod housing_end;
mod item;
mod kind;
mod monte_carlo;
mod nominal;
mod readjust;
mod requirement;
mod sensitivity;
mod shop;
mod system;

use merit_function::variables::VariablesError;
use serde::Serialize;
use surface_model::document::Address;
use surface_model::glass::GlassError;
use surface_model::place::Place;

use crate::design_file::DesignFile;
use item::Item;

pub(crate) use bench::Bench;
pub(crate) use built::{Gauges, Mounts, StateNumbers};
pub(crate) use document::resolve;
pub(crate) use readjust::Levers;

pub use balance::{Balance, BalancedTolerance};
pub use document::{
    OwnToleranceDocument, RequirementDocument, RotatingDocument, ToleranceDocument, Tolerances,
    TolerancesDocument,
};
pub use drawing::{ElementDrawing, GlassDrawing, SurfaceDrawing};
pub use kind::{Grade, Kind, Spread};
pub use monte_carlo::{
    Distribution, MissCount, MonteCarlo, QuantityDistribution, StateDistribution, Unwatched,
    Watcher,
};
pub use requirement::{Quantity, Requirement};
pub use sensitivity::{By, Sensitivity, StateSensitivity};
pub use shop::{ChamferDocument, ImperfectionsDocument, ScratchesDocument, ShopDocument};
pub use system::Miss;

/// The most systems that are built: what is kept of each is a few hundred bytes a state.
pub const MOST_SYSTEMS: u64 = 100_000;

/// What is asked for beside the file.
#[derive(Debug, Clone, PartialEq)]
pub struct ToleranceSettings {
    /// How many systems are built at random, at most [`MOST_SYSTEMS`].
    pub systems: u64,
    /// Which sequence of random numbers.
    pub seed: u64,
    /// A grade in place of the file's.
    pub grade: Option<Grade>,
    /// What is re-adjusted in place of what the file says: words or addresses; empty for nothing.
    pub readjusted: Option<Vec<String>>,
    /// The yield tolerances are balanced to, per cent.
    pub balance_percent: Option<f64>,
}

/// What `tolerance --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ToleranceReport {
    /// Always `drawtube-tolerance/1`.
    pub format: &'static str,
    /// The design's title.
    pub title: String,
    /// The named set of tolerances.
    pub grade: Grade,
    /// How errors are spread within them.
    pub spread: Spread,
    /// Spacings that are re-adjusted.
    pub readjusted: Vec<Address>,
    /// What each state must reach.
    pub requirements: Vec<Requirement>,
    /// What each tolerance alone does, the worst first.
    pub sensitivities: Vec<Sensitivity>,
    /// What came of the systems that were built.
    pub monte_carlo: MonteCarlo,
    /// Tolerances balanced to a yield, where asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub balance: Option<Balance>,
}

/// Why tolerances could not be told.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ToleranceError {
    /// Nothing is required.
    #[error("the file has no goals and requires nothing, so no system could be told from another")]
    NothingRequired,
    /// What is to be re-adjusted makes no sense.
    #[error("{0}")]
    Readjusted(String),
    /// Too few or too many systems.
    #[error("{0} systems cannot be built; it must be from 1 to {MOST_SYSTEMS}")]
    Systems(u64),
    /// A yield that is none.
    #[error("a yield cannot be {0} %; it must be from 1 to 100")]
    Yield(f64),
    /// The spacings contradict limits or housing.
    #[error(transparent)]
    Variables(#[from] VariablesError),
    /// A glass is not known at a wavelength.
    #[error(transparent)]
    Glass(#[from] GlassError),
    /// The design as drawn cannot be traced.
    #[error("state \"{state}\" as drawn cannot be traced: {fault}")]
    Nominal {
        /// Name of the state.
        state: String,
        /// What happened.
        fault: String,
    },
    /// A first-order number leaves the range of numbers.
    #[error("in state \"{state}\" the first-order numbers overflow")]
    Overflow {
        /// Name of the state.
        state: String,
    },
    /// One error alone at its full tolerance stops rays.
    #[error("with {kind} of {at} at its full tolerance, in state \"{state}\": {fault}")]
    Spoilt {
        /// The tolerance's kind.
        kind: &'static str,
        /// Where.
        at: String,
        /// Name of the state.
        state: String,
        /// What happened.
        fault: String,
    },
}

/// Finds what the tolerances of a file do: sensitivities, systems built at random and, where
/// asked for, tolerances balanced to a yield. Work is shared out over the threads of the current
/// rayon pool; the result does not depend on their number.
///
/// # Errors
/// See [`ToleranceError`].
pub fn tolerance(
    file: &DesignFile,
    settings: &ToleranceSettings,
    watcher: &mut dyn Watcher,
) -> Result<ToleranceReport, ToleranceError> {
    if !(1..=MOST_SYSTEMS).contains(&settings.systems) {
        return Err(ToleranceError::Systems(settings.systems));
    }
    if let Some(wanted) = settings.balance_percent
        && !(1.0..=100.0).contains(&wanted)
    {
        return Err(ToleranceError::Yield(wanted));
    }
    let tolerances = settled(file, settings)?;
    let items = Item::all(&file.design, &tolerances);
    let bench = Bench::new(file, &tolerances, items)?;
    let requirements: Vec<Requirement> =
        bench.states.iter().map(|state| state.requirement).collect();
    let nothing = |requirement: &Requirement| {
        Quantity::ALL.iter().all(|&quantity| requirement.within(quantity).is_none())
    };
    if requirements.iter().all(nothing) && bench.wander_within_urad.is_none() {
        return Err(ToleranceError::NothingRequired);
    }
    let levers: Vec<Levers> = (0..bench.states.len()).map(|k| Levers::of(&bench, k)).collect();
    let mut sensitivities = sensitivity::sensitivities(&bench, &levers)?;
    let draws = (settings.systems, settings.seed);
    let begun: Vec<f64> = bench.items.iter().map(|item| item.item.tolerance).collect();
    let outcomes = monte_carlo::build_systems(&bench, &levers, &begun, draws, watcher);
    let whole = outcomes.len() as u64 == settings.systems;
    let monte_carlo = monte_carlo::account(&bench, &sensitivities, &outcomes, draws);
    let balance = settings.balance_percent.filter(|_| whole).and_then(|wanted| {
        let percents = (monte_carlo.yield_percent, wanted);
        balance::balance(&bench, &levers, &sensitivities, percents, draws, watcher)
    });
    sensitivities.sort_by(|a, b| b.share_percent.total_cmp(&a.share_percent));
    Ok(ToleranceReport {
        format: "drawtube-tolerance/1",
        title: file.design.title.clone(),
        grade: tolerances.grade,
        spread: tolerances.spread,
        readjusted: bench.readjusted_addresses(),
        requirements,
        sensitivities,
        monte_carlo,
        balance,
    })
}

/// The tolerances of a file with what the settings say instead.
fn settled(file: &DesignFile, settings: &ToleranceSettings) -> Result<Tolerances, ToleranceError> {
    let mut tolerances = file.tolerances.clone();
    if let Some(grade) = settings.grade {
        tolerances.grade = grade;
        tolerances.graded = true;
    }
    if let Some(words) = &settings.readjusted {
        let mut places: Vec<Place> = Vec::new();
        for words in words {
            let found = document::spacings_of(words, &file.design, file.document().value());
            places.extend(found.map_err(ToleranceError::Readjusted)?);
        }
        tolerances.readjusted = Some(places);
    }
    Ok(tolerances)
}
