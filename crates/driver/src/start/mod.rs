//! First-order starts: from a brief to designs worth optimising.
//!
//! A brief spans a space of layouts. A point of it is a list of numbers from 0 to 1, and stands for
//! everything a layout has to choose: the scheme (how many groups, and how they move), the signs of their powers, the
//! focal lengths, the size in the tube, what is tied where four groups leave a freedom, and for
//! every element its bending and its glass, or its pair of glasses in their order. Any list of
//! numbers is a point.
//!
//! The way of a point:
//!
//! | step | where |
//! |---|---|
//! | number and seed → point | [`Sobol`] |
//! | fixed groups and counts → how spacings follow | `scheme`, `family` |
//! | point → powers, spacings of thin groups in closed form, screened | `thin` (`by_heights`, `four_groups`), `spacings` |
//! | powers → glasses, bendings of least spherical aberration | `shape`, `glasses`, `bending` |
//! | thin → thick, exact by principal planes | `thick`, `lens` |
//! | thick → design, every limit held against it | `layout` |
//! | sums that foretell aberration and sensitivity | `score` |
//! | layout → design file | `file` |
//! | many points → the best that differ | `ranking`; none at all: `relaxation` |
//!
//! For a search: [`Starts::of`] once; then for start number k point k of [`Starts::points`], or a
//! point of one's own, [`Starts::layout`] (a fraction of a millisecond; what has no layout mostly says why
//! in a microsecond), [`Starts::merit`] over the layout's design for a local solver,
//! [`Starts::design_file`] for what is kept (milliseconds: it is read as any file is). Nothing
//! depends on threads or order: the same brief, number and seed give the same bits.

mod begun;
mod bending;
mod by_heights;
mod error;
mod family;
mod file;
mod four_groups;
mod glasses;
mod layout;
mod lens;
mod no_layout;
mod ranking;
mod relaxation;
mod scheme;
mod score;
mod shape;
mod space;
mod spacings;
#[cfg(test)]
mod tests;
mod thick;
mod thin;

use merit_function::problem::{MeritFunction, RAYS};
use merit_function::variables::{FreePlace, Variables};
use surface_model::design::Design;
use surface_model::document::Complaints;
use surface_model::place::Place;

use crate::brief::BriefFile;
use crate::design_file::DesignFile;
use crate::optimise::OptimiseError;

pub use crate::sampling::Sobol;
pub(crate) use begun::{Begun, GlassesOfGroups};
pub use error::StartError;
pub use family::{Family, Sign};
pub use layout::Layout;
pub use no_layout::NoLayout;
pub use ranking::{Ranked, Ranking, Refusals};
pub use relaxation::{InVain, Relaxation, Relaxations, Relaxed};
pub use score::Score;

use space::{Point, Space};

/// Points that `start` looks at: enough for several layouts of every family that fits, in seconds.
pub const LOOKED_AT: u64 = 1 << 13;

/// The layouts that a brief allows.
#[derive(Debug, Clone)]
pub struct Starts {
    space: Space,
}

impl Starts {
    /// Sets up the space of a brief's layouts.
    ///
    /// # Errors
    /// The brief contradicts itself in a way that no layout gets around.
    pub fn of(brief: &BriefFile) -> Result<Self, StartError> {
        Ok(Self { space: Space::of(brief)? })
    }

    /// The brief they are of.
    #[must_use]
    pub fn brief(&self) -> &BriefFile {
        &self.space.brief
    }

    /// How many numbers a point has.
    #[must_use]
    pub(crate) fn dimensions(&self) -> usize {
        self.space.dimensions
    }

    /// The evenly spread points that `seed` begins. A coordinate beyond those they have reads as
    /// the middle.
    #[must_use]
    pub fn points(&self, seed: u64) -> Sobol {
        Sobol::shifted(self.dimensions(), seed)
    }

    /// The layout at a point.
    ///
    /// # Errors
    /// There is none, with the first thing that stands against it.
    pub fn layout(&self, point: &[f64]) -> Result<Layout, NoLayout> {
        Layout::at(&self.space, Point(point))
    }

    /// What an optimiser may change of a layout's design: radii and spacings, as the `free` of its
    /// design file says.
    #[must_use]
    pub(crate) fn free(&self, design: &Design) -> Vec<FreePlace> {
        let places = Place::all(design).into_iter();
        places
            .filter(|place| matches!(place, Place::Radius(_) | Place::Spacing { .. }))
            .map(|place| FreePlace { place, own_range: merit_function::block::Bounds::FREE })
            .collect()
    }

    /// The merit function of a layout's design over its radii and spacings, ready for a solver.
    ///
    /// # Errors
    /// The limits contradict each other, or the brief has no goals.
    pub fn merit(&self, design: &Design) -> Result<MeritFunction, OptimiseError> {
        let wishes = &self.space.brief.wishes;
        crate::optimise::require_goal(wishes)?;
        let variables = Variables::new(design, &wishes.limits, &self.free(design))?;
        Ok(MeritFunction::new(design, wishes, variables, RAYS)?)
    }

    /// A design file: the layout's glasses and the brief's wishes, with the numbers of `design`
    /// (the layout's own, or what an optimiser made of them) and a remark.
    ///
    /// # Errors
    /// The numbers do not make a design.
    pub fn design_file(
        &self,
        layout: &Layout,
        design: &Design,
        note: &str,
    ) -> Result<DesignFile, Complaints> {
        self.file_of(&layout.glasses, design, note)
    }

    /// As [`Self::design_file`], of lenses of these glasses.
    pub(crate) fn file_of(
        &self,
        glasses: &GlassesOfGroups,
        design: &Design,
        note: &str,
    ) -> Result<DesignFile, Complaints> {
        file::design_file(&self.space.brief, glasses, design, note)
    }

    /// The lenses of a design that was begun from another brief, in this one's beam, tube and
    /// ratios; `None` where this one does not allow its groups, its glasses or the number of its
    /// ratios.
    pub(crate) fn take_over(&self, file: &DesignFile) -> Option<Begun> {
        Begun::of_another(&self.space, file)
    }
}
