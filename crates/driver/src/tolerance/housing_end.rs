//! The ends of the housing, which re-adjustment does not push a group through.

use std::ops::Range;

use surface_model::design::{Design, ZoomState};
use surface_model::housing::Anchor;
use surface_model::quantities::Quantity;

use super::bench::Bench;

/// An end of the housing that the groups could leave in a state.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct HousingEnd {
    /// What there is, mm, for …
    whole_mm: f64,
    /// … these gaps of the train.
    gaps: Range<usize>,
    /// The least room: none, or what a design lacks that stands a hair beyond its own limit, mm.
    least_mm: f64,
}

/// Room at an end of the housing as it depends on the spacings that are re-adjusted.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Room {
    /// Room beyond the least, mm.
    pub(crate) left_mm: f64,
    /// Its derivative by each of the spacings.
    pub(crate) by_spacing: Vec<f64>,
}

impl HousingEnd {
    /// All ends that the groups could leave in a state of a design.
    pub(super) fn all(design: &Design, state: &ZoomState) -> Vec<Self> {
        let sequence = design.sequence();
        let all = 0..sequence.gaps.len();
        let track_mm = design.housing.track_mm;
        let ends = match design.housing.anchor() {
            Anchor::Middle(group) => {
                let (at_mm, place) =
                    (design.middle_position_mm(group), sequence.first_surface(group));
                vec![(at_mm, 0..place), (track_mm - at_mm, place..all.end)]
            }
            // Between two fixed ends spacings give way to one another.
            Anchor::Rear if design.housing.fixed.first() == Some(&true) => Vec::new(),
            Anchor::Rear | Anchor::Front => vec![(track_mm, all)],
        };
        let gap_mm = |gap: usize| design.gap_mm(state, sequence.gaps[gap]);
        let end = |(whole_mm, gaps): (f64, Range<usize>)| {
            let room_mm = whole_mm - gaps.clone().map(gap_mm).sum::<f64>();
            Self { whole_mm, gaps, least_mm: room_mm.min(0.0) }
        };
        ends.into_iter().map(end).collect()
    }
}

impl Bench<'_> {
    /// The room at every end of the housing in state `k` at these values of the packed variables.
    pub(crate) fn rooms(&self, k: usize, packed: &[f64]) -> Vec<Room> {
        let ends = &self.states[k].ends;
        if ends.is_empty() {
            return Vec::new();
        }
        let gaps_mm = self.gaps(k, packed);
        let room = |end: &HousingEnd| {
            let taken_mm: f64 = gaps_mm[end.gaps.clone()].iter().sum();
            let spacings = self.readjusted(k).iter();
            Room {
                left_mm: end.whole_mm - taken_mm - end.least_mm,
                by_spacing: spacings.map(|&(at, _)| -self.taken_by(k, end, at)).collect(),
            }
        };
        ends.iter().map(room).collect()
    }

    /// How the gaps up to an end grow with a packed variable.
    fn taken_by(&self, k: usize, end: &HousingEnd, packed: usize) -> f64 {
        let quantities = self.variables.quantities();
        let mut by = 0.0;
        for binding in self.variables.bindings(k) {
            let Quantity::Gap(gap) = quantities.at(binding.quantity) else { continue };
            if end.gaps.contains(&gap) {
                let mine = |term: &&(_, f64)| self.packed_of(k, term.0) == Some(packed);
                by += binding.terms.iter().filter(mine).map(|term| term.1).sum::<f64>();
            }
        }
        by
    }
}
