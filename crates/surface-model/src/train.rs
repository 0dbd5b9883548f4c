//! A train: the flat row of surfaces that one zoom state is at one wavelength.
//!
//! Everything that traces rays takes a train; nothing below knows of groups, states or glass
//! names. Surface `i` stands between the media `indices[i]` and `indices[i + 1]`; gap `i` is the
//! axial distance from surface `i` to surface `i + 1`.

use crate::quantities::{Quantities, Quantity};
use crate::surface::Surface;

/// A row of surfaces with the gaps and refractive indices between them.
#[derive(Debug, Clone, PartialEq)]
pub struct Train {
    surfaces: Vec<Surface>,
    gaps: Vec<f64>,
    indices: Vec<f64>,
}

/// Why surfaces, gaps and indices do not make a train.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum TrainError {
    /// There must be a surface to trace to.
    #[error("a train needs at least one surface")]
    Empty,
    /// The three lists do not fit together.
    #[error(
        "{surfaces} surfaces need {} gaps and {} indices; found {gaps} and {indices}",
        .surfaces - 1, .surfaces + 1
    )]
    Counts {
        /// Number of surfaces.
        surfaces: usize,
        /// Number of gaps found.
        gaps: usize,
        /// Number of indices found.
        indices: usize,
    },
    /// A number is not finite, or an index is not positive.
    #[error("{what} {place} is {value}, which no train can have")]
    Value {
        /// What kind of number it is.
        what: &'static str,
        /// Its place in its list.
        place: usize,
        /// The value found.
        value: f64,
    },
}

impl Train {
    /// Puts surfaces together: one gap (mm) fewer, one refractive index more, light from the left.
    ///
    /// # Errors
    /// The counts do not fit, or a number is not finite, or an index is not positive.
    pub fn new(
        surfaces: Vec<Surface>,
        gaps: Vec<f64>,
        indices: Vec<f64>,
    ) -> Result<Self, TrainError> {
        let count = surfaces.len();
        if count == 0 {
            return Err(TrainError::Empty);
        }
        if gaps.len() != count - 1 || indices.len() != count + 1 {
            return Err(TrainError::Counts {
                surfaces: count,
                gaps: gaps.len(),
                indices: indices.len(),
            });
        }
        let bad = |what, place, value| Err(TrainError::Value { what, place, value });
        for (place, surface) in surfaces.iter().enumerate() {
            for value in surface.numbers() {
                if !value.is_finite() {
                    return bad("a number of surface", place, value);
                }
            }
        }
        for (place, &value) in gaps.iter().enumerate() {
            if !value.is_finite() {
                return bad("gap", place, value);
            }
        }
        for (place, &value) in indices.iter().enumerate() {
            if !(value.is_finite() && value > 0.0) {
                return bad("index", place, value);
            }
        }
        Ok(Self { surfaces, gaps, indices })
    }

    /// A train of numbers that a resolved design has already vouched for.
    pub(crate) fn of_design(surfaces: Vec<Surface>, gaps: Vec<f64>, indices: Vec<f64>) -> Self {
        debug_assert!(gaps.len() + 1 == surfaces.len() && indices.len() == surfaces.len() + 1);
        Self { surfaces, gaps, indices }
    }

    /// Number of surfaces, at least one.
    #[must_use]
    #[inline]
    pub fn len(&self) -> usize {
        self.surfaces.len()
    }

    /// Never true: a train has at least one surface.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.surfaces.is_empty()
    }

    /// The surfaces, from left to right.
    #[must_use]
    #[inline]
    pub fn surfaces(&self) -> &[Surface] {
        &self.surfaces
    }

    /// The surfaces, to be reshaped; their number stays.
    #[inline]
    pub fn surfaces_mut(&mut self) -> &mut [Surface] {
        &mut self.surfaces
    }

    /// Axial distances between neighbouring surfaces, mm.
    #[must_use]
    #[inline]
    pub fn gaps(&self) -> &[f64] {
        &self.gaps
    }

    /// The gaps, to be changed; their number stays.
    #[inline]
    pub fn gaps_mut(&mut self) -> &mut [f64] {
        &mut self.gaps
    }

    /// Refractive indices, from before the first surface to behind the last.
    #[must_use]
    #[inline]
    pub fn indices(&self) -> &[f64] {
        &self.indices
    }

    /// Sets the refractive index of a medium; medium `i` stands before surface `i`.
    #[inline]
    pub fn set_index(&mut self, medium: usize, index: f64) {
        self.indices[medium] = index;
    }

    /// Sets the quantity at `place` (see [`Quantities`]).
    #[inline]
    pub fn set_quantity(&mut self, quantities: Quantities, place: usize, value: f64) {
        self.set(quantities.at(place), value);
    }

    /// Sets a quantity.
    #[inline]
    pub fn set(&mut self, quantity: Quantity, value: f64) {
        match quantity {
            Quantity::Curvature(surface) => self.surfaces[surface].curvature = value,
            Quantity::Gap(gap) => self.gaps[gap] = value,
            Quantity::Index(medium) => self.indices[medium] = value,
            Quantity::Conic(surface) => self.surfaces[surface].conic = value,
            Quantity::Asphere(surface, term) => self.surfaces[surface].asphere[term] = value,
        }
    }

    /// Axial distance from the first vertex to the last, mm.
    #[must_use]
    pub fn length(&self) -> f64 {
        self.gaps.iter().sum()
    }

    /// The same glass seen from the other side: order and curvatures reversed.
    #[must_use]
    pub fn reversed(&self) -> Self {
        Self {
            surfaces: self.surfaces.iter().rev().map(Surface::turned_round).collect(),
            gaps: self.gaps.iter().rev().copied().collect(),
            indices: self.indices.iter().rev().copied().collect(),
        }
    }
}
