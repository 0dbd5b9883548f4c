//! What is wanted of a design: goals of every state, and limits.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use surface_model::design::Design;
use surface_model::document::{Address, AddressSyntaxError, Complain, Place};
use surface_model::glass::{REFERENCE_C, THERMAL_RANGE_C};

use crate::goals::{Goals, GoalsDocument};
use crate::limits::{
    BetweenDocument, FocusDocument, LimitKind, Limits, LimitsDocument, Range, RangeDocument,
    groups_at,
};
use crate::movement::{NoWay, Slide, knots};
use crate::way_rows::MOST_MOVERS;

/// The part of a design file that says what is wanted.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct WishesDocument {
    /// Goals of all states.
    #[serde(default)]
    pub goals: GoalsDocument,
    /// Limits.
    #[serde(default)]
    pub limits: LimitsDocument,
    /// Temperatures in °C at which the goals hold too, nothing re-adjusted; the design is drawn at
    /// 20 °C, which always counts.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub temperatures_c: Vec<f64>,
    /// What single states want differently.
    pub states: Vec<StateWishesDocument>,
}

/// What one state wants differently from the others.
#[derive(Debug, Clone, Default, PartialEq, Deserialize, Serialize, JsonSchema)]
pub struct StateWishesDocument {
    /// How much the state counts in the merit; 1 if not given.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub weight: Option<f64>,
    /// Goals of this state that differ from those of all.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub goals: Option<GoalsDocument>,
}

/// Goals and limits, resolved.
#[derive(Debug, Clone, PartialEq)]
pub struct Wishes {
    /// Per state, its goals.
    pub states: Vec<Goals>,
    /// Limits.
    pub limits: Limits,
    /// Temperatures at which the goals hold too, °C.
    pub temperatures_c: Vec<f64>,
}

impl Wishes {
    /// Temperatures beside the 20 °C a design is drawn at, °C.
    pub(crate) fn other_temperatures_c(&self) -> impl Iterator<Item = &f64> {
        self.temperatures_c.iter().filter(|&&temperature_c| temperature_c != REFERENCE_C)
    }
}

/// A goal or limit that makes no sense. Its place is told beside it.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum WishError {
    /// A tolerance or weight out of range.
    #[error("{what} is {found}")]
    OutOfRange {
        /// What it is.
        what: &'static str,
        /// The number found.
        found: f64,
        /// What it must be.
        allowed: &'static str,
    },
    /// A range without ends.
    #[error("the limit {} has neither \"min\" nor \"max\"", .0.word())]
    NoEnds(LimitKind),
    /// A beam that should be collimated and come to a focus.
    #[error("exit_focus_m and exit_slope_urad cannot be wanted together")]
    FocusAndSlope,
    /// A limit on what the beam does not say.
    #[error("the limit {} needs the energy of a pulse", .0.word())]
    NoEnergy(LimitKind),
    /// Not written as an address.
    #[error(transparent)]
    Syntax(AddressSyntaxError),
    /// An address that names no group.
    #[error("\"{0}\" is no group")]
    NoGroup(Address),
    /// A group that does not move.
    #[error("\"{0}\" does not move")]
    Still(Address),
    /// There is no way between the states.
    #[error(transparent)]
    NoWay(NoWay),
    /// More groups move than ratio and collimation fix, or none.
    #[error("{0} groups move")]
    Movers(usize),
    /// A state that is not collimated.
    #[error("state \"{0}\" is wanted focused, and movement curves are of collimated beams alone")]
    Focused(String),
    /// A range whose ends are the wrong way round.
    #[error("the limit {} has min {min} above max {max}", .kind.word())]
    Reversed {
        /// Which limit.
        kind: LimitKind,
        /// Its min.
        min: f64,
        /// Its max.
        max: f64,
    },
}

impl WishError {
    /// What would have been right.
    #[must_use]
    pub(crate) fn expected(&self) -> String {
        match self {
            Self::OutOfRange { allowed, .. } => (*allowed).into(),
            Self::NoEnds(_) => "\"min\", \"max\" or both".into(),
            Self::Reversed { .. } => "min at most max".into(),
            Self::FocusAndSlope => "one of them; a state of its own may want the other".into(),
            Self::NoEnergy(_) => "\"pulse_energy_mj\" in \"beam\"".into(),
            Self::Syntax(_) | Self::NoGroup(_) | Self::Still(_) => {
                "a group that moves, such as \"/groups/runner\", or \"/groups/*\"".into()
            }
            Self::NoWay(_) => "states at two or more ratios of the same sign".into(),
            Self::Movers(_) => {
                "one or two groups that move, so that ratio and collimation fix where they stand \
                 between the states"
                    .into()
            }
            Self::Focused(_) => "collimated states".into(),
        }
    }
}

/// A fault and its place.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{error}")]
pub struct WishFault {
    /// Where in the file.
    pub at: Address,
    /// What.
    pub error: WishError,
}

impl Complain for WishFault {
    fn place(&self) -> Place {
        Place::Value(self.at.clone())
    }

    fn expected(&self) -> Option<String> {
        Some(self.error.expected())
    }
}

impl Wishes {
    /// What the design does not say and a limit needs to know.
    #[must_use]
    pub fn lacks_of(&self, design: &Design) -> Option<WishFault> {
        let kind = LimitKind::FluenceJCm2;
        let wanted = self.limits.range(kind).is_some();
        let lacks = wanted && design.beam.laser.pulse_energy_mj.is_none();
        let at = Address::root().key("limits").key(kind.word());
        let lacks = lacks.then_some(WishFault { at, error: WishError::NoEnergy(kind) });
        lacks.or_else(|| self.no_way_of(design))
    }

    /// Why what is asked of the way between the states makes no sense for a design.
    fn no_way_of(&self, design: &Design) -> Option<WishFault> {
        let limits = &self.limits;
        if !limits.about_the_way() {
            return None;
        }
        let at = Address::root().key("limits");
        let slide = Slide::of(design);
        for (i, group) in limits.monotonic.iter().enumerate() {
            let named = groups_at(design, group);
            let error = match named.iter().find(|group| slide.moving().contains(group)) {
                Some(_) => continue,
                None if named.is_empty() => WishError::NoGroup(group.clone()),
                None => WishError::Still(group.clone()),
            };
            return Some(WishFault { at: at.key("monotonic").index(i), error });
        }
        let at = if limits.between_states {
            at.key("between_states")
        } else if limits.monotonic.is_empty() {
            at.key(LimitKind::SlopeMmPerRatio.word())
        } else {
            at.key("monotonic")
        };
        let moving = slide.moving().len();
        let focused = self.states.iter().position(|goals| goals.exit_focus_m.is_some());
        let error = match knots(design) {
            Err(no_way) => WishError::NoWay(no_way),
            Ok(_) if !(1..=MOST_MOVERS).contains(&moving) => WishError::Movers(moving),
            Ok(_) => WishError::Focused(design.states.get(focused?)?.name.clone()),
        };
        Some(WishFault { at, error })
    }
}

impl WishesDocument {
    /// Checks every number and gives each state its goals.
    ///
    /// # Errors
    /// Every fault found, each with its address.
    pub fn resolve(&self) -> Result<Wishes, Vec<WishFault>> {
        let mut faults = Vec::new();
        check_goals(&Address::root().key("goals"), &self.goals, &mut faults);
        let limits = self.resolve_limits(&mut faults);
        let mut states = Vec::with_capacity(self.states.len());
        for (k, state) in self.states.iter().enumerate() {
            let at = Address::root().key("states").index(k);
            if let Some(goals) = &state.goals {
                check_goals(&at.clone().key("goals"), goals, &mut faults);
            }
            let weight = state.weight.unwrap_or(1.0);
            if !(0.0..=1e6).contains(&weight) {
                let (what, allowed) = ("a weight", "a number from 0 to 1 000 000");
                let error = WishError::OutOfRange { what, found: weight, allowed };
                faults.push(WishFault { at: at.key("weight"), error });
            }
            states.push(Goals::of_state(&self.goals, state.goals.as_ref(), weight));
        }
        let (low, high) = THERMAL_RANGE_C;
        for (i, &found) in self.temperatures_c.iter().enumerate() {
            if !(low..=high).contains(&found) || self.temperatures_c[..i].contains(&found) {
                let what = "a temperature";
                let allowed = "a number from -100 to 140 °C, each once";
                let error = WishError::OutOfRange { what, found, allowed };
                faults
                    .push(WishFault { at: Address::root().key("temperatures_c").index(i), error });
            }
        }
        let temperatures_c = self.temperatures_c.clone();
        if faults.is_empty() { Ok(Wishes { states, limits, temperatures_c }) } else { Err(faults) }
    }

    fn resolve_limits(&self, faults: &mut Vec<WishFault>) -> Limits {
        let mut ranges = Vec::new();
        for (kind, range) in self.limits.ranges() {
            let Some(range) = range else { continue };
            let at = Address::root().key("limits").key(kind.word());
            match resolve_range(kind, range) {
                Ok(range) => ranges.push((kind, range)),
                Err(error) => faults.push(WishFault { at, error }),
            }
        }
        let mut limits = Limits::new(ranges);
        limits.forbid_internal_focus = self.limits.internal_focus == Some(FocusDocument::Forbid);
        limits.between_states = self.limits.between_states == Some(BetweenDocument::Keep);
        limits.monotonic = self.resolve_monotonic(faults);
        limits
    }

    fn resolve_monotonic(&self, faults: &mut Vec<WishFault>) -> Vec<Address> {
        let mut groups = Vec::new();
        for (i, text) in self.limits.monotonic.iter().enumerate() {
            match text.parse() {
                Ok(at) => groups.push(at),
                Err(error) => {
                    let at = Address::root().key("limits").key("monotonic").index(i);
                    faults.push(WishFault { at, error: WishError::Syntax(error) });
                }
            }
        }
        groups
    }
}

fn check_goals(at: &Address, goals: &GoalsDocument, faults: &mut Vec<WishFault>) {
    let GoalsDocument {
        wavefront_rms_waves,
        ratio_percent,
        exit_slope_urad,
        divergence_mrad,
        diameter_at_range_mm: range,
        exit_focus_m: focus,
    } = *goals;
    let all = [
        ("wavefront_rms_waves", wavefront_rms_waves),
        ("ratio_percent", ratio_percent),
        ("exit_slope_urad", exit_slope_urad),
        ("divergence_mrad", divergence_mrad),
    ];
    let mut check = |word: &str, key: &str, what, found: f64, sound: bool, allowed| {
        if !sound {
            let error = WishError::OutOfRange { what, found, allowed };
            faults.push(WishFault { at: at.clone().key(word).key(key), error });
        }
    };
    let within = all.into_iter().filter_map(|(word, goal)| Some((word, goal?.within)));
    let within = within
        .chain(range.map(|goal| ("diameter_at_range_mm", goal.within)))
        .chain(focus.map(|goal| ("exit_focus_m", goal.within)));
    for (word, found) in within {
        let sound = found > 1e-12 && found <= 1e12;
        check(word, "within", "a goal's \"within\"", found, sound, "a number above 0");
    }
    if let Some(goal) = range {
        let word = "diameter_at_range_mm";
        let far = "a number of metres above 0 and at most 1 000 000 000";
        let sound = goal.range_m > 0.0 && goal.range_m <= 1e9;
        check(word, "range_m", "the range", goal.range_m, sound, far);
        let sound = (0.0..=1e9).contains(&goal.wanted);
        check(word, "wanted", "the diameter wanted", goal.wanted, sound, "a number of mm from 0");
    }
    if let Some(goal) = focus {
        let sound = (1e-3..=1e9).contains(&goal.wanted.abs());
        let allowed = "a number of metres other than 0; for a collimated beam use exit_slope_urad";
        check("exit_focus_m", "wanted", "the focus wanted", goal.wanted, sound, allowed);
    }
    if focus.is_some() && exit_slope_urad.is_some() {
        let error = WishError::FocusAndSlope;
        faults.push(WishFault { at: at.clone().key("exit_focus_m"), error });
    }
}

fn resolve_range(kind: LimitKind, range: RangeDocument) -> Result<Range, WishError> {
    let RangeDocument { min, max } = range;
    if min.is_none() && max.is_none() {
        return Err(WishError::NoEnds(kind));
    }
    for found in [min, max].into_iter().flatten() {
        if !(0.0..=1e9).contains(&found) {
            let (what, allowed) = ("a limit", "a number from 0 to 1 000 000 000");
            return Err(WishError::OutOfRange { what, found, allowed });
        }
    }
    let ends = Range { min: min.unwrap_or(f64::NEG_INFINITY), max: max.unwrap_or(f64::INFINITY) };
    if ends.min > ends.max {
        return Err(WishError::Reversed { kind, min: ends.min, max: ends.max });
    }
    Ok(ends)
}
