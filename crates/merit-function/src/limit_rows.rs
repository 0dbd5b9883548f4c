//! Limits as the solver sees them: rows `value ≥ 0` with gradients, each in its block.
//!
//! A limit on a single variable is a bound and makes no row; a limit on what cannot change makes
//! none either.

use surface_model::design::Design;
use surface_model::ghost::Ghost;
use surface_model::housing::Anchor;
use surface_model::sequence::{GapId, Sequence};

use crate::limit_item::{FOCUS_MARGIN, LimitItem, Measure};
use crate::limits::{LimitKind, Limits, Range};
use crate::movement::{Slide, WayMeasure, direction, knots};
use crate::variables::{SharedVariable, Variables};
use crate::way_rows::{MOST_MOVERS, OnTheWay};

/// A limit row: value = constant + sign × measured, kept at or above zero.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct RowRule {
    pub(crate) state: Option<usize>,
    pub(crate) tolerance: f64,
    pub(crate) constant: f64,
    pub(crate) sign: f64,
    pub(crate) measured: Measured,
}

/// What a limit row measures on the train of its state.
#[derive(Debug, Clone, PartialEq)]
pub(crate) enum Measured {
    /// A sum of gaps and shared variables, each with a factor.
    Sum { gaps: Vec<(usize, f64)>, shared: Vec<(usize, f64)> },
    /// A gap at its edge.
    Edge(usize),
    /// Angle of incidence of the edge ray at a surface, degrees.
    Incidence(usize),
    /// Paraxial marginal height at a surface, over that at entry.
    MarginalHeight(usize),
    /// Height of the outermost traced ray at a surface, over that at entry.
    EdgeRayHeight(usize),
    /// Peak energy density of a pulse at a surface, J/cm².
    Fluence(usize),
    /// Distance from glass of the nearest focus of a ghost, mm.
    GhostClearance(Ghost),
    /// Something on the way between two neighbouring states.
    OnTheWay(OnTheWay),
}

impl RowRule {
    /// All rows of a design.
    pub(crate) fn all(design: &Design, limits: &Limits, variables: &Variables) -> Vec<Self> {
        let positions_mm = design.all_positions_mm();
        let maker = Maker { design, variables, positions_mm, sequence: design.sequence() };
        let mut rows = Vec::new();
        for item in LimitItem::all(design, limits) {
            maker.rows_of(&item, &mut rows);
        }
        maker.dependent_spacings(limits, &mut rows);
        rows
    }
}

/// The least slope, mm a unit of ratio, that a group is kept to which must not turn back: beyond
/// the tolerance, so that it does not turn back by what the limit may be crossed.
const ONE_WAY_MARGIN: f64 = 2e-3;

/// A position in the housing: constant + Σ factor × gap + Σ factor × shared variable.
struct Position {
    constant: f64,
    gaps: Vec<(usize, f64)>,
    shared: Vec<(usize, f64)>,
}

struct Maker<'a> {
    design: &'a Design,
    variables: &'a Variables,
    /// Per state, where each group's first vertex stands in the housing now.
    positions_mm: Vec<Vec<f64>>,
    sequence: Sequence,
}

impl Maker<'_> {
    fn rows_of(&self, item: &LimitItem, rows: &mut Vec<RowRule>) {
        let measured = match item.measure {
            Measure::Edge(gap) => Measured::Edge(gap),
            Measure::Incidence(surface) => Measured::Incidence(surface),
            Measure::Length => self.sum_of_gaps(0..self.sequence.gaps.len()),
            Measure::Front | Measure::Rear => {
                rows.extend(self.housing_row(item));
                return;
            }
            Measure::Travel(group) => {
                self.travel_rows(item, group, rows);
                return;
            }
            Measure::Focus => {
                for surface in 1..self.sequence.surfaces.len() {
                    let measured = Measured::MarginalHeight(surface);
                    rows.push(RowRule {
                        state: item.state,
                        tolerance: item.kind.tolerance(),
                        constant: -FOCUS_MARGIN,
                        sign: 1.0,
                        measured,
                    });
                }
                return;
            }
            Measure::Fluence(surface) => Measured::Fluence(surface),
            Measure::Ghosts(kind) => {
                for ghost in kind.all(self.sequence.surfaces.len()) {
                    push_both(item, Measured::GhostClearance(ghost), rows);
                }
                return;
            }
            Measure::Way(measure) => {
                self.way_rows(item, measure, rows);
                return;
            }
            Measure::Gap(_) | Measure::Radius(_) | Measure::Steepness(_) => return,
        };
        // A limit on an edge between groups names the state; one inside a group holds in all.
        if self.can_change(&measured, item.state) {
            push_both(item, measured, rows);
        }
    }

    fn can_change(&self, measured: &Measured, state: Option<usize>) -> bool {
        let state = state.unwrap_or(0);
        let quantities = self.variables.quantities();
        let bound = |quantity| {
            self.variables.bindings(state).iter().any(|binding| binding.quantity == quantity)
        };
        match measured {
            Measured::Edge(gap) => {
                [quantities.gap(*gap), quantities.curvature(*gap), quantities.curvature(gap + 1)]
                    .into_iter()
                    .any(bound)
            }
            Measured::Sum { gaps, .. } => gaps.iter().any(|&(gap, _)| bound(quantities.gap(gap))),
            Measured::Incidence(_)
            | Measured::MarginalHeight(_)
            | Measured::EdgeRayHeight(_)
            | Measured::Fluence(_)
            | Measured::GhostClearance(_)
            | Measured::OnTheWay(_) => true,
        }
    }

    fn sum_of_gaps(&self, gaps: std::ops::Range<usize>) -> Measured {
        Measured::Sum { gaps: gaps.map(|gap| (gap, 1.0)).collect(), shared: Vec::new() }
    }

    /// Room at one end of the housing, as constant + sign × sum.
    fn housing_row(&self, item: &LimitItem) -> Option<RowRule> {
        let track_mm = self.design.housing.track_mm;
        let all = self.sequence.gaps.len();
        let row = |constant, sign, measured| RowRule {
            state: item.state,
            tolerance: item.kind.tolerance(),
            constant,
            sign,
            measured,
        };
        let Anchor::Middle(group) = self.design.housing.anchor() else {
            return Some(row(track_mm, -1.0, self.sum_of_gaps(0..all)));
        };
        let place = self.sequence.first_surface(group);
        let (gaps, factor, constant) = match item.measure {
            Measure::Front => (0..place, 1.0, 0.0),
            _ => (place..all, -1.0, track_mm),
        };
        let gaps = gaps.map(|gap| (gap, -1.0)).collect();
        let (still, shared) = self.still_position(group);
        let shared = shared.into_iter().map(|(number, by)| (number, factor * by)).collect();
        Some(row(constant + factor * still, 1.0, Measured::Sum { gaps, shared }))
    }

    /// Where a fixed middle group stands: a constant, or a shared variable.
    fn still_position(&self, group: usize) -> (f64, Vec<(usize, f64)>) {
        match self.shared(SharedVariable::FixedPosition(group)) {
            Some(number) => (0.0, vec![(number, 1.0)]),
            None => (self.positions_mm.first().map_or(0.0, |z| z[group]), Vec::new()),
        }
    }

    fn shared(&self, wanted: SharedVariable) -> Option<usize> {
        self.variables.shared().iter().position(|&variable| variable == wanted)
    }

    /// Where a group's first vertex stands in the housing.
    fn position(&self, group: usize) -> Position {
        let place = self.sequence.first_surface(group);
        let all = self.sequence.gaps.len();
        match self.design.housing.anchor() {
            Anchor::Rear => {
                let gaps = (place..all).map(|gap| (gap, -1.0)).collect();
                let constant = self.design.housing.track_mm;
                Position { constant, gaps, shared: Vec::new() }
            }
            Anchor::Front => {
                let gaps = (0..place).map(|gap| (gap, 1.0)).collect();
                Position { constant: 0.0, gaps, shared: Vec::new() }
            }
            Anchor::Middle(still) => {
                let from = self.sequence.first_surface(still);
                let factor = if place >= from { 1.0 } else { -1.0 };
                let gaps = (place.min(from)..place.max(from)).map(|gap| (gap, factor)).collect();
                let (constant, shared) = self.still_position(still);
                Position { constant, gaps, shared }
            }
        }
    }

    /// The way of a group stays within `max` if, from a start that is a variable, it never goes
    /// back behind it nor further than `max` past it. To reach at least `min`, the two states that
    /// are furthest apart now must stay that far apart.
    fn travel_rows(&self, item: &LimitItem, group: usize, rows: &mut Vec<RowRule>) {
        let Some(start) = self.shared(SharedVariable::TravelStart(group)) else { return };
        let Position { constant, gaps, shared } = self.position(group);
        let mut push = |state: usize, sign: f64, beyond: f64| {
            let mut shared = shared.clone();
            shared.push((start, -1.0));
            rows.push(RowRule {
                state: Some(state),
                tolerance: item.kind.tolerance(),
                constant: sign * (constant - beyond),
                sign,
                measured: Measured::Sum { gaps: gaps.clone(), shared },
            });
        };
        if item.range.max.is_finite() {
            for state in 0..self.design.states.len() {
                push(state, 1.0, 0.0);
                push(state, -1.0, item.range.max);
            }
        }
        if item.range.min > 0.0 {
            let positions = self.positions_mm.iter().enumerate();
            let mut order: Vec<(usize, f64)> = positions.map(|(k, z)| (k, z[group])).collect();
            order.sort_by(|a, b| a.1.total_cmp(&b.1));
            if let (Some(first), Some(last)) = (order.first(), order.last()) {
                push(first.0, -1.0, 0.0);
                push(last.0, 1.0, item.range.min);
            }
        }
    }

    /// The rows of a limit along the way, one or two between each state and the next.
    fn way_rows(&self, item: &LimitItem, measure: WayMeasure, rows: &mut Vec<RowRule>) {
        let Ok(knots) = knots(self.design) else { return };
        let moving = Slide::of(self.design).moving().len();
        let follows = self.variables.shared().iter().any(|shared| match shared {
            SharedVariable::Glass(_) | SharedVariable::FixedPosition(_) => true,
            SharedVariable::TravelStart(_) => false,
        });
        if !follows || moving > MOST_MOVERS {
            return;
        }
        let tolerance = item.kind.tolerance();
        for panel in 0..knots.len() - 1 {
            let mut push = |constant: f64, sign: f64, less: Option<usize>| {
                let measured = Measured::OnTheWay(OnTheWay { measure, panel, less });
                rows.push(RowRule { state: None, tolerance, constant, sign, measured });
            };
            let Range { min, max } = item.range;
            match measure {
                WayMeasure::Position(group) => {
                    let start = self.shared(SharedVariable::TravelStart(group));
                    if start.is_some() && max.is_finite() {
                        push(0.0, 1.0, start);
                        push(max, -1.0, start);
                    }
                }
                WayMeasure::Slope(_) => {
                    push(max, 1.0, None);
                    push(max, -1.0, None);
                }
                WayMeasure::OneWay(group) => {
                    let at = |k: Option<&usize>| k.map_or(0.0, |&k| self.positions_mm[k][group]);
                    push(-ONE_WAY_MARGIN, direction(at(knots.first()), at(knots.last())), None);
                }
                _ => {
                    if min.is_finite() {
                        push(-min, 1.0, None);
                    }
                    if max.is_finite() {
                        push(max, -1.0, None);
                    }
                }
            }
        }
    }

    /// Spacings that follow from the housing are no variables: their limits are rows, and they
    /// may not become negative even where no limit says so.
    fn dependent_spacings(&self, limits: &Limits, rows: &mut Vec<RowRule>) {
        let range = limits.range(LimitKind::SpacingMm);
        let low = range.map_or(0.0, |range| range.min.max(0.0));
        let high = range.map_or(f64::INFINITY, |range| range.max);
        for state in 0..self.design.states.len() {
            for (after, _) in self.variables.dependents(state) {
                let Some(gap) = self.sequence.place_of_gap(GapId::Spacing { after }) else {
                    continue;
                };
                let mut push = |constant, sign| {
                    rows.push(RowRule {
                        state: Some(state),
                        tolerance: LimitKind::SpacingMm.tolerance(),
                        constant,
                        sign,
                        measured: self.sum_of_gaps(gap..gap + 1),
                    });
                };
                push(-low, 1.0);
                if high.is_finite() {
                    push(high, -1.0);
                }
            }
        }
    }
}

fn push_both(item: &LimitItem, measured: Measured, rows: &mut Vec<RowRule>) {
    let mut push = |constant, sign, measured| {
        let (state, tolerance) = (item.state, item.kind.tolerance());
        rows.push(RowRule { state, tolerance, constant, sign, measured });
    };
    if item.range.min.is_finite() {
        push(-item.range.min, 1.0, measured.clone());
    }
    if item.range.max.is_finite() {
        push(item.range.max, -1.0, measured);
    }
}
