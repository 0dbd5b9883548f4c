//! The quantities of a train by which derivatives are taken, and where each stands in a row of
//! them: the [reverse sweep](crate::reverse) writes such rows, variables read them.

use crate::surface::ASPHERE_TERMS;

/// Where each quantity of a train stands in a row of derivatives: curvatures first, then gaps, then
/// conic constant and asphere coefficients of the surfaces for which they are kept, then, unless
/// left out, indices.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Quantities {
    surfaces: usize,
    shapes: Shapes,
    indices: bool,
}

/// For which surfaces derivatives by conic constant and asphere coefficients are kept.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Shapes {
    /// For none: spheres then cost least.
    #[default]
    None,
    /// For those whose bit is set, by their place in the train; places from 63 on share the last
    /// bit.
    Of(u64),
}

impl Shapes {
    /// For every surface.
    pub const ALL: Self = Self::Of(u64::MAX);

    /// These, and one more surface.
    #[must_use]
    pub fn with(self, surface: usize) -> Self {
        match self {
            Self::None => Self::Of(bit(surface)),
            Self::Of(bits) => Self::Of(bits | bit(surface)),
        }
    }

    /// Whether they are kept for any surface.
    #[must_use]
    #[inline]
    pub fn any(self) -> bool {
        self != Self::None
    }

    /// Whether they are kept for this surface.
    #[must_use]
    #[inline]
    pub fn has(self, surface: usize) -> bool {
        match self {
            Self::None => false,
            Self::Of(bits) => bits & bit(surface) != 0,
        }
    }

    /// For how many of the first `surfaces` surfaces they are kept.
    #[inline]
    fn among(self, surfaces: usize) -> usize {
        let Self::Of(bits) = self else { return 0 };
        let single = bits & (bit(surfaces) - 1);
        let sharing = if self.has(SHARED_BIT) { surfaces.saturating_sub(SHARED_BIT) } else { 0 };
        single.count_ones() as usize + sharing
    }
}

/// The bit that all places from this one on share.
const SHARED_BIT: usize = 63;
/// Numbers of a surface's shape beside its curvature: the conic constant and the coefficients.
const SHAPE_NUMBERS: usize = 1 + ASPHERE_TERMS;

#[inline]
fn bit(surface: usize) -> u64 {
    1 << surface.min(SHARED_BIT)
}

/// One quantity of a train.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Quantity {
    /// Curvature of a surface.
    Curvature(usize),
    /// Gap behind a surface.
    Gap(usize),
    /// Index of a medium.
    Index(usize),
    /// Conic constant of a surface.
    Conic(usize),
    /// Asphere coefficient of a surface; term 0 is that of r⁴.
    Asphere(usize, usize),
}

impl Quantity {
    /// Whether it is of the glass itself, the same in all states and at all wavelengths.
    #[must_use]
    #[inline]
    pub fn is_shape(self) -> bool {
        matches!(self, Self::Curvature(_) | Self::Conic(_) | Self::Asphere(..))
    }
}

impl Quantities {
    /// For a train of `surfaces` surfaces; `shapes` says for which of them derivatives by conic
    /// constants and asphere coefficients are kept.
    #[must_use]
    pub fn new(surfaces: usize, shapes: Shapes) -> Self {
        Self { surfaces, shapes, indices: true }
    }

    /// The same without refractive indices, which costs less.
    #[must_use]
    pub fn without_indices(self) -> Self {
        Self { indices: false, ..self }
    }

    /// Whether refractive indices are among them.
    #[must_use]
    #[inline]
    pub fn has_indices(&self) -> bool {
        self.indices
    }

    /// Place of the curvature of a surface.
    #[must_use]
    #[inline]
    pub fn curvature(&self, surface: usize) -> usize {
        surface
    }

    /// Place of the gap behind a surface.
    #[must_use]
    #[inline]
    pub fn gap(&self, surface: usize) -> usize {
        self.surfaces + surface
    }

    /// Place of a refractive index, where they are kept; medium `i` stands before surface `i`.
    #[must_use]
    #[inline]
    pub fn index(&self, medium: usize) -> usize {
        self.first_index() + medium
    }

    /// Place of the conic constant of a surface for which it is kept.
    #[must_use]
    #[inline]
    pub fn conic(&self, surface: usize) -> usize {
        self.first_shape() + SHAPE_NUMBERS * self.shapes.among(surface)
    }

    /// Place of an asphere coefficient (r⁴ is term 0) of a surface for which they are kept.
    #[must_use]
    #[inline]
    pub fn asphere(&self, surface: usize, term: usize) -> usize {
        self.conic(surface) + 1 + term
    }

    #[inline]
    fn first_shape(&self) -> usize {
        self.surfaces + self.surfaces.saturating_sub(1)
    }

    #[inline]
    fn first_index(&self) -> usize {
        self.first_shape() + SHAPE_NUMBERS * self.shapes.among(self.surfaces)
    }

    /// Which quantity stands at `place`.
    #[must_use]
    #[inline]
    pub fn at(&self, place: usize) -> Quantity {
        if place < self.surfaces {
            return Quantity::Curvature(place);
        }
        if place < self.first_shape() {
            return Quantity::Gap(place - self.surfaces);
        }
        if place >= self.first_index() {
            return Quantity::Index(place - self.first_index());
        }
        let past = place - self.first_shape();
        let (rank, number) = (past / SHAPE_NUMBERS, past % SHAPE_NUMBERS);
        let shaped = (0..self.surfaces).filter(|&surface| self.shapes.has(surface)).nth(rank);
        let surface = shaped.unwrap_or(self.surfaces);
        match number.checked_sub(1) {
            None => Quantity::Conic(surface),
            Some(term) => Quantity::Asphere(surface, term),
        }
    }

    /// For which surfaces derivatives by conic constant and asphere coefficients are kept.
    #[must_use]
    #[inline]
    pub fn shapes(&self) -> Shapes {
        self.shapes
    }

    /// Number of derivatives in a row.
    #[must_use]
    #[inline]
    pub fn count(&self) -> usize {
        self.first_index() + if self.indices { self.surfaces + 1 } else { 0 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_quantity_has_one_place() {
        let shapes = Shapes::None.with(1).with(3);
        let quantities = Quantities::new(4, shapes);
        // 4 curvatures, 3 gaps, 2 shapes of 1 + 9 numbers, 5 indices.
        assert_eq!(quantities.count(), 4 + 3 + 2 * (1 + ASPHERE_TERMS) + 5);
        for surface in 0..4 {
            assert_eq!(quantities.at(quantities.curvature(surface)), Quantity::Curvature(surface));
        }
        for gap in 0..3 {
            assert_eq!(quantities.at(quantities.gap(gap)), Quantity::Gap(gap));
        }
        for surface in [1, 3] {
            assert_eq!(quantities.at(quantities.conic(surface)), Quantity::Conic(surface));
            for term in 0..ASPHERE_TERMS {
                let place = quantities.asphere(surface, term);
                assert_eq!(quantities.at(place), Quantity::Asphere(surface, term));
            }
        }
        for medium in 0..5 {
            assert_eq!(quantities.at(quantities.index(medium)), Quantity::Index(medium));
        }
        assert_eq!(quantities.without_indices().count(), quantities.count() - 5);
    }

    #[test]
    fn surfaces_beyond_the_last_bit_share_it() {
        let shapes = Shapes::None.with(70);
        assert!(shapes.has(63) && shapes.has(70) && !shapes.has(62));
        let quantities = Quantities::new(72, shapes);
        assert_eq!(quantities.at(quantities.conic(70)), Quantity::Conic(70));
        assert_eq!(quantities.at(quantities.asphere(71, 2)), Quantity::Asphere(71, 2));
    }

    /// A design without a goal on the wavefront has a bundle of no trains.
    #[test]
    fn no_surfaces_have_no_quantities() {
        for shapes in [Shapes::None, Shapes::ALL] {
            assert_eq!(Quantities::new(0, shapes).without_indices().count(), 0);
            assert_eq!(Quantities::new(0, shapes).at(0), Quantity::Index(0), "the medium alone");
        }
    }
}
