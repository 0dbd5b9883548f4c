//! The housing: a tube of fixed length, and the groups that do not move in it.
//!
//! Positions are measured from the front datum, z = 0; the last vertex may not pass z = track.
//!
//! - With the last group fixed, its last vertex is at z = track.
//! - Otherwise, with the first group fixed (or none), the first vertex is at z = 0.
//! - With only a middle group fixed, it has one position in all states; the file does not say
//!   which, so it stands halfway between the foremost and the rearmost place that keeps every
//!   state inside the tube.

use crate::design::{Design, ZoomState};

/// How far two lengths that must be equal may differ, mm: a nanometre over what twelve printed
/// digits of a length can hold, and a thousandth of what any limit is kept to.
pub const HOUSING_TOLERANCE_MM: f64 = 1e-6;

/// The tube, and which groups stand still in it.
#[derive(Debug, Clone, PartialEq)]
pub struct Housing {
    /// Front datum to the last vertex at most, mm.
    pub track_mm: f64,
    /// Per group, whether it is fixed.
    pub fixed: Vec<bool>,
    /// Linear expansion of the tube and, where a group says nothing else, of its mounts, 1/K.
    pub expansion_per_k: Option<f64>,
}

/// What positions in the housing are measured from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Anchor {
    /// The last vertex stands at z = track in every state.
    Rear,
    /// The first vertex stands at z = 0 in every state.
    Front,
    /// The front vertex of this middle group stands still.
    Middle(usize),
}

impl Housing {
    /// What positions are measured from.
    #[must_use]
    pub fn anchor(&self) -> Anchor {
        let first_fixed = self.fixed.iter().position(|&fixed| fixed);
        match (self.fixed.last(), first_fixed) {
            (Some(true), _) => Anchor::Rear,
            (_, None | Some(0)) => Anchor::Front,
            (_, Some(middle)) => Anchor::Middle(middle),
        }
    }

    /// The fixed groups, from left to right.
    pub fn fixed_groups(&self) -> impl Iterator<Item = usize> + '_ {
        self.fixed.iter().enumerate().filter(|&(_, &fixed)| fixed).map(|(group, _)| group)
    }
}

impl Design {
    /// Per group, the distance from the train's first vertex to the group's first vertex, mm.
    #[must_use]
    pub fn offsets_mm(&self, state: &ZoomState) -> Vec<f64> {
        let mut z = 0.0;
        let mut offsets = Vec::with_capacity(self.groups.len());
        for (g, group) in self.groups.iter().enumerate() {
            offsets.push(z);
            z += group.length_mm() + state.spacings_mm.get(g).copied().unwrap_or(0.0);
        }
        offsets
    }

    /// Where the train's first vertex stands in the housing in this state, mm from the front
    /// datum; negative when the design does not fit.
    #[must_use]
    pub fn front_mm(&self, state: &ZoomState) -> f64 {
        match self.housing.anchor() {
            Anchor::Rear => self.housing.track_mm - self.length_mm(state),
            Anchor::Front => 0.0,
            Anchor::Middle(group) => self.middle_position_mm(group) - self.offsets_mm(state)[group],
        }
    }

    /// Per group, where its first vertex stands in the housing in this state, mm.
    #[must_use]
    pub fn positions_mm(&self, state: &ZoomState) -> Vec<f64> {
        let front = self.front_mm(state);
        self.offsets_mm(state).iter().map(|offset| front + offset).collect()
    }

    /// The same for every state. Where positions are measured from a middle group, its own follows
    /// from all states and is worked out once.
    #[must_use]
    pub fn all_positions_mm(&self) -> Vec<Vec<f64>> {
        let middle = match self.housing.anchor() {
            Anchor::Middle(group) => Some((group, self.middle_position_mm(group))),
            _ => None,
        };
        let positions = |state: &ZoomState| {
            let offsets = self.offsets_mm(state);
            let front = match middle {
                Some((group, position)) => position - offsets[group],
                None => self.front_mm(state),
            };
            offsets.iter().map(|offset| front + offset).collect()
        };
        self.states.iter().map(positions).collect()
    }

    /// The one position of a fixed middle group: halfway between the foremost and the rearmost
    /// that keep all states inside.
    #[must_use]
    pub fn middle_position_mm(&self, group: usize) -> f64 {
        let ahead = |state: &ZoomState| self.offsets_mm(state)[group];
        let behind = |state: &ZoomState| self.length_mm(state) - ahead(state);
        let foremost = self.states.iter().map(ahead).fold(0.0, f64::max);
        let rearmost = self.housing.track_mm - self.states.iter().map(behind).fold(0.0, f64::max);
        0.5 * (foremost + rearmost)
    }

    /// For each pair of neighbouring fixed groups (and, with the first and the last group fixed,
    /// the whole track) the distance between them must be the same in all states. Returns, for the
    /// first state that breaks this, the state, the last spacing of the pair and what it would
    /// have to be.
    #[must_use]
    pub fn housing_mismatch(&self) -> Option<HousingMismatch> {
        let fixed: Vec<usize> = self.housing.fixed_groups().collect();
        for pair in fixed.windows(2) {
            let (from, to) = (pair[0], pair[1]);
            let span = |state: &ZoomState| {
                let offsets = self.offsets_mm(state);
                offsets[to] - offsets[from]
            };
            let ends = from == 0 && to + 1 == self.groups.len();
            let wanted = if ends {
                self.housing.track_mm - self.groups[to].length_mm()
            } else {
                span(&self.states[0])
            };
            for (index, state) in self.states.iter().enumerate() {
                let excess = span(state) - wanted;
                if excess.abs() > HOUSING_TOLERANCE_MM {
                    let spacing = to - 1;
                    return Some(HousingMismatch {
                        state: index,
                        spacing,
                        found_mm: state.spacings_mm[spacing],
                        needed_mm: state.spacings_mm[spacing] - excess,
                    });
                }
            }
        }
        self.ends_mismatch(&fixed)
    }

    /// Fits the spacings of every state to the fixed groups after a part or the track has changed:
    /// between two neighbouring fixed groups one spacing takes up the difference, the one that
    /// `gives_way` names for the state and the groups from `from` to `to` (the spacing behind
    /// group `from` to the one before group `to`). Without one nothing is done. Returns what was
    /// changed.
    pub fn fit_to_housing(
        &mut self,
        gives_way: impl Fn(usize, std::ops::Range<usize>) -> Option<usize>,
    ) -> Vec<TakenUp> {
        let fixed: Vec<usize> = self.housing.fixed_groups().collect();
        let last = self.groups.len() - 1;
        let mut taken_up = Vec::new();
        for pair in fixed.windows(2) {
            let (from, to) = (pair[0], pair[1]);
            let span = |design: &Self, state: usize| {
                let offsets = design.offsets_mm(&design.states[state]);
                offsets[to] - offsets[from]
            };
            let wanted = if fixed.first() == Some(&0) && to == last {
                // The front of the first group stands at z = 0, so what is behind it is known.
                let before = self.offsets_mm(&self.states[0])[from];
                self.housing.track_mm - self.groups[to].length_mm() - before
            } else {
                span(self, 0)
            };
            for state in 0..self.states.len() {
                let excess = span(self, state) - wanted;
                if excess.abs() <= HOUSING_TOLERANCE_MM {
                    continue;
                }
                let Some(after) = gives_way(state, from..to) else { continue };
                self.states[state].spacings_mm[after] -= excess;
                taken_up.push(TakenUp { state, after, by_mm: -excess });
            }
        }
        taken_up
    }

    /// First and last group fixed with others fixed between them: the whole must fill the track.
    fn ends_mismatch(&self, fixed: &[usize]) -> Option<HousingMismatch> {
        let last = self.groups.len() - 1;
        let both_ends = fixed.len() > 2 && fixed.first() == Some(&0) && fixed.last() == Some(&last);
        if !both_ends {
            return None;
        }
        let excess = self.length_mm(&self.states[0]) - self.housing.track_mm;
        (excess.abs() > HOUSING_TOLERANCE_MM).then(|| {
            let found_mm = self.states[0].spacings_mm[last - 1];
            HousingMismatch { state: 0, spacing: last - 1, found_mm, needed_mm: found_mm - excess }
        })
    }
}

/// A spacing that took up what a part or the track lost or gained.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TakenUp {
    /// Which state.
    pub state: usize,
    /// The group it follows.
    pub after: usize,
    /// By how much it grew, mm.
    pub by_mm: f64,
}

/// A spacing that contradicts the fixed groups.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HousingMismatch {
    /// Which state.
    pub state: usize,
    /// Which of its spacings could mend it.
    pub spacing: usize,
    /// Its value, mm.
    pub found_mm: f64,
    /// The value that would fit, mm.
    pub needed_mm: f64,
}
