//! How groups slide: from the positions of those that move to a state's spacings, and back.

use surface_model::design::Design;
use surface_model::housing::Anchor;

/// The groups of a design on their common axis.
#[derive(Debug, Clone)]
pub struct Slide {
    /// Per group, first vertex to last vertex, mm.
    lengths_mm: Vec<f64>,
    /// Per group, its one position if it stands still, mm.
    still_mm: Vec<Option<f64>>,
    /// The groups that move, from left to right.
    moving: Vec<usize>,
}

impl Slide {
    /// The groups of a design. Without any fixed group the first one stands still, at the front
    /// datum: only distances matter then.
    pub fn of(design: &Design) -> Self {
        let positions = design.all_positions_mm();
        let at_first_state = |group: usize| positions.first().map(|state| state[group]);
        let anchored = |group: usize| {
            design.housing.fixed[group] || (group == 0 && design.housing.anchor() == Anchor::Front)
        };
        let groups = 0..design.groups.len();
        let still_mm: Vec<Option<f64>> = groups
            .clone()
            .map(|group| if anchored(group) { at_first_state(group) } else { None })
            .collect();
        Self {
            lengths_mm: design.groups.iter().map(|group| group.length_mm()).collect(),
            moving: groups.filter(|&group| still_mm[group].is_none()).collect(),
            still_mm,
        }
    }

    /// Lengths of all groups, mm.
    pub(crate) fn lengths_mm(&self) -> &[f64] {
        &self.lengths_mm
    }

    /// Where a group stands that does not move, mm.
    pub(crate) fn still_mm(&self, group: usize) -> Option<f64> {
        self.still_mm.get(group).copied().flatten()
    }

    /// Takes a group's length and, if it does not move, where it stands, mm.
    pub(crate) fn fit(&mut self, group: usize, length_mm: f64, still_mm: f64) {
        self.lengths_mm[group] = length_mm;
        if let Some(at) = &mut self.still_mm[group] {
            *at = still_mm;
        }
    }

    /// The groups that move, from left to right.
    pub fn moving(&self) -> &[usize] {
        &self.moving
    }

    /// Positions of all groups from those of the moving ones, mm.
    pub fn positions_mm(&self, moving_mm: &[f64]) -> Vec<f64> {
        let mut moving = moving_mm.iter().copied();
        self.still_mm
            .iter()
            .map(|still| still.unwrap_or_else(|| moving.next().unwrap_or(0.0)))
            .collect()
    }

    /// Air between neighbouring groups, mm; negative where they overlap.
    pub fn spacings_mm(&self, moving_mm: &[f64]) -> Vec<f64> {
        let positions = self.positions_mm(moving_mm);
        let pairs = positions.windows(2).zip(&self.lengths_mm);
        pairs.map(|(pair, length)| pair[1] - pair[0] - length).collect()
    }

    /// The moving groups' part of the positions of all groups.
    pub fn pick(&self, positions_mm: &[f64]) -> Vec<f64> {
        self.moving.iter().map(|&group| positions_mm[group]).collect()
    }

    /// The derivative by every group's position, from that by every spacing.
    pub fn by_position(&self, by_spacing: &[f64]) -> Vec<f64> {
        let spacing = |after: Option<usize>| after.and_then(|k| by_spacing.get(k)).copied();
        let groups = 0..self.lengths_mm.len();
        groups
            .map(|group| {
                let before = spacing(group.checked_sub(1)).unwrap_or(0.0);
                before - spacing(Some(group)).unwrap_or(0.0)
            })
            .collect()
    }
}
