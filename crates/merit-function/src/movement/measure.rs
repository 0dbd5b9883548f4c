//! What limits measure along the way of the groups.

use super::follow::Point;
use super::interpolant::{Aspect, Lowest, Polynomial};
use super::way::Way;

/// Something measured at every ratio.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum WayMeasure {
    /// Air behind a group, vertex to vertex, mm.
    Spacing(usize),
    /// The same at the edge, mm.
    EdgeGap(usize),
    /// First vertex to last vertex, mm.
    Length,
    /// Room between the train and the front of the housing, mm.
    Front,
    /// Room between the train and the rear of the housing, mm.
    Rear,
    /// Where a group's first vertex stands in the housing, mm.
    Position(usize),
    /// Slope of a group, mm a unit of ratio, without its sign.
    Slope(usize),
    /// Slope of a group in the direction it moves, mm a unit of ratio.
    OneWay(usize),
}

impl WayMeasure {
    pub(crate) fn aspect(self) -> Aspect {
        match self {
            Self::Slope(_) | Self::OneWay(_) => Aspect::Slope,
            _ => Aspect::Value,
        }
    }

    /// What it is at a point of the way: linear in positions and lengths, but for `constant_mm`,
    /// at the edge the sags of the facing surfaces, at the rear the track.
    fn at(self, way: &Way, constant_mm: f64, point: &Point) -> f64 {
        let slide = &way.equations.slide;
        let positions = slide.positions_mm(&point.moving_mm);
        let lengths = slide.lengths_mm();
        constant_mm + self.by(&positions, lengths)
    }

    /// Its derivative, from those of the positions and the lengths of all groups.
    pub(crate) fn by(self, position: &[f64], length: &[f64]) -> f64 {
        let last = position.len() - 1;
        match self {
            Self::Spacing(after) | Self::EdgeGap(after) => {
                position[after + 1] - position[after] - length[after]
            }
            Self::Length => position[last] + length[last] - position[0],
            Self::Front => position[0],
            Self::Rear => -position[last] - length[last],
            Self::Position(group) | Self::Slope(group) | Self::OneWay(group) => position[group],
        }
    }
}

impl Way {
    /// What is measured along the way, as a polynomial.
    pub(crate) fn polynomial(&self, measure: WayMeasure, constant_mm: f64) -> Polynomial {
        self.through(|point| measure.at(self, constant_mm, point))
    }

    /// The lowest value of `sign` times what is measured, over the whole way, and the ratio at
    /// which it is met.
    pub(crate) fn lowest(&self, measure: WayMeasure, constant_mm: f64, sign: f64) -> (f64, f64) {
        let polynomial = self.polynomial(measure, constant_mm);
        let panels = 0..self.panels();
        let lowest = panels.map(|panel| self.lowest_in(panel, &polynomial, measure.aspect(), sign));
        let none = Lowest { value: f64::INFINITY, at: 0.0 };
        let lowest = lowest.fold(none, |a, b| if b.value < a.value { b } else { a });
        (lowest.value, self.interpolant().ratio(lowest.at))
    }
}
