//! Bundles of rays parallel to the axis, one a train, traced abreast: optical paths of all rays,
//! and the derivatives of every path by every quantity of its train. This is what the merit
//! function calls.
//!
//! The trains of one bundle have the same surfaces (they are the zoom states and wavelengths of
//! one design) and are entered at the same heights. Rays of as many trains as fit go through the
//! trace side by side as one block, each lane with the gaps and indices of its own train, so that
//! the processor is full even when a train has only six rays.

use std::ops::Range;

use crate::fault::{FaultReason, RayFault};
use crate::quantities::{Quantities, Quantity, Shapes};
use crate::real::{Abreast, LANES, Lanes, RAYS_ABREAST, Real};
use crate::reverse::backward_meridional;
use crate::surface::Surface;
use crate::trace::{
    Crossing, Exit, Ray, Stage, Stages, find_fault, forward_meridional, forward_meridional_paths,
};
use crate::train::Train;

/// Rays of several trains, and what their reverse sweeps need. Buffers are kept from call to call:
/// no allocation after [`Self::load`].
#[derive(Debug, Default)]
pub struct Bundle {
    surfaces: usize,
    trains: usize,
    seats: Seats,
    blocks: Vec<Block>,
    /// One a surface and block: all surfaces of block 0, then of block 1, ….
    crossings: Vec<Crossing<Abreast, 1>>,
    exits: Vec<Exit<Abreast, 1>>,
    rows: Vec<Abreast>,
    quantities: Option<Quantities>,
}

/// Rays that go through the trace abreast, and the trains they go through. Lanes without a ray
/// follow the axis.
#[derive(Debug)]
struct Block {
    stages: Stages<Abreast>,
    start: Ray<Abreast, 1>,
}

/// Which ray sits where.
#[derive(Debug, Clone, Copy, Default)]
struct Seats {
    /// Rays a train.
    rays: usize,
    /// Trains whose rays share a block.
    trains_a_block: usize,
    /// Blocks a train fills, where it has more rays than a block.
    blocks_a_train: usize,
}

impl Seats {
    /// As many trains a block as leave, behind the first ray of the last, whole vectors for all
    /// its rays: any train's rays can then be read as vectors.
    fn new(rays: usize) -> Self {
        let last = rays.div_ceil(LANES) * LANES;
        let before = RAYS_ABREAST.saturating_sub(last);
        Self {
            rays,
            trains_a_block: 1 + before / rays.max(1),
            blocks_a_train: rays.div_ceil(RAYS_ABREAST),
        }
    }

    /// The block and the lane of a train's first ray.
    #[inline]
    fn first(&self, train: usize) -> (usize, usize) {
        let block = train / self.trains_a_block * self.blocks_a_train;
        (block, train % self.trains_a_block * self.rays)
    }

    /// The block and the lane of a ray.
    #[inline]
    fn of(&self, train: usize, ray: usize) -> (usize, usize) {
        let (block, lane) = self.first(train);
        (block + (lane + ray) / RAYS_ABREAST, (lane + ray) % RAYS_ABREAST)
    }

    /// The lanes of a train's rays, block by block.
    #[inline]
    fn lanes(&self, train: usize) -> impl Iterator<Item = (usize, Range<usize>)> + use<> {
        let (block, first) = self.first(train);
        let rays = self.rays;
        (0..self.blocks_a_train).map(move |i| {
            let end = (first + rays - i * RAYS_ABREAST).min(RAYS_ABREAST);
            (block + i, first..end)
        })
    }
}

impl Bundle {
    /// An empty bundle.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes these trains, each to be entered at these heights (mm).
    ///
    /// # Panics
    /// If the trains differ in their surfaces.
    pub fn load<'a>(&mut self, trains: impl IntoIterator<Item = &'a Train>, heights_mm: &[f64]) {
        let trains: Vec<&Train> = trains.into_iter().collect();
        let surfaces = trains.first().map_or(0, |train| train.len());
        let same = |train: &&Train| train.surfaces() == trains[0].surfaces();
        assert!(trains.iter().all(same), "trains of one design");
        self.surfaces = surfaces;
        self.seats = Seats::new(heights_mm.len());
        self.trains = if heights_mm.is_empty() { 0 } else { trains.len() };
        self.quantities = None;
        self.blocks.clear();
        for (number, train) in trains.iter().enumerate().take(self.trains) {
            let stages = Stages::<f64>::of(train);
            let mut heights = heights_mm;
            for (block, lanes) in self.seats.lanes(number) {
                if block == self.blocks.len() {
                    self.blocks.push(Block::on_axis(&stages));
                }
                let (here, rest) = heights.split_at(lanes.len());
                self.blocks[block].seat(lanes, &stages, here);
                heights = rest;
            }
        }
        self.crossings.resize(self.blocks.len() * surfaces, Crossing::blank());
        self.exits.resize(self.blocks.len(), Exit::blank());
    }

    /// Sets a quantity of one train. Curvatures, conic constants and asphere coefficients are the
    /// same glass in all trains: they are set for all at once, whichever train is named.
    #[inline]
    pub fn set_quantity(&mut self, train: usize, quantity: Quantity, value: f64) {
        match quantity {
            Quantity::Curvature(at) => {
                self.blocks.iter_mut().for_each(|block| block.curve(at, value));
            }
            Quantity::Conic(at) => self.reshape(at, |surface| surface.conic = value),
            Quantity::Asphere(at, term) => {
                self.reshape(at, |surface| surface.asphere[term] = value);
            }
            Quantity::Gap(gap) => {
                for (block, lanes) in self.seats.lanes(train) {
                    let gap = &mut self.blocks[block].stages.list[gap + 1].gap;
                    gap.numbers_mut()[lanes].fill(value);
                }
            }
            Quantity::Index(medium) => {
                for (block, lanes) in self.seats.lanes(train) {
                    self.blocks[block].set_index(medium, lanes, value);
                }
            }
        }
    }

    fn reshape(&mut self, at: usize, change: impl Fn(&mut Surface)) {
        for block in &mut self.blocks {
            let stage = &mut block.stages.list[at];
            change(&mut stage.surface);
            stage.sphere = stage.surface.is_sphere();
        }
    }

    /// Traces all rays. `paths` (train after train, one a ray) receives the optical path from the
    /// plane through the first vertex to the plane through the last, less that of the axial ray,
    /// in mm.
    ///
    /// # Errors
    /// The first ray that fails.
    ///
    /// # Panics
    /// If `paths` has not one place a ray and train.
    pub fn trace(&mut self, paths: &mut [f64]) -> Result<(), BundleFault> {
        self.quantities = None;
        for (block, exit) in self.blocks.iter().zip(&mut self.exits) {
            forward_meridional_paths(&block.stages, &block.start, exit);
        }
        match self.read_paths(paths) {
            None => Ok(()),
            // To say where and why, the ray is followed again.
            Some(_) => self.trace_kept(paths),
        }
    }

    /// As [`Self::trace`], keeping what [`Self::differentiate`] needs.
    ///
    /// # Errors
    /// The first ray that fails.
    ///
    /// # Panics
    /// If `paths` has not one place a ray and train.
    pub fn trace_kept(&mut self, paths: &mut [f64]) -> Result<(), BundleFault> {
        self.quantities = None;
        let kept = self.crossings.chunks_mut(self.surfaces.max(1));
        for ((block, crossings), exit) in self.blocks.iter().zip(kept).zip(&mut self.exits) {
            forward_meridional(&block.stages, &block.start, crossings, exit);
        }
        self.read_paths(paths).map_or(Ok(()), |failed| Err(self.fault(failed)))
    }

    /// Reads the paths out; returns the place of the first that is no path.
    fn read_paths(&self, paths: &mut [f64]) -> Option<usize> {
        assert_eq!(paths.len(), self.trains * self.seats.rays, "one path a ray and train");
        let mut rest = paths;
        let mut sound = true;
        for train in 0..self.trains {
            for (block, lanes) in self.seats.lanes(train) {
                let (here, behind) = rest.split_at_mut(lanes.len());
                let exit = &self.exits[block];
                let found = &exit.path_excess.numbers()[lanes.clone()];
                let forward = &exit.dz.numbers()[lanes];
                for ((path, &found), &forward) in here.iter_mut().zip(found).zip(forward) {
                    *path = found;
                    sound &= is_sound(found, forward);
                }
                rest = behind;
            }
        }
        if sound { None } else { self.first_failed() }
    }

    fn first_failed(&self) -> Option<usize> {
        let rays = self.seats.rays;
        (0..self.trains * rays).find(|place| {
            let (block, lane) = self.seats.of(place / rays, place % rays);
            let Exit { path_excess, dz, .. } = &self.exits[block];
            !is_sound(path_excess.numbers()[lane], dz.numbers()[lane])
        })
    }

    fn fault(&self, failed: usize) -> BundleFault {
        let (train, ray) = (failed / self.seats.rays, failed % self.seats.rays);
        let (block, lane) = self.seats.of(train, ray);
        let crossings = &self.crossings[block * self.surfaces..][..self.surfaces];
        // A path that is not finite without a failed crossing has overflowed on the way out.
        let overflow = RayFault { surface: self.surfaces - 1, reason: FaultReason::TurnedBack };
        let number = |number: Abreast| number.numbers()[lane];
        let fault = find_fault(crossings, &self.exits[block], number).unwrap_or(overflow);
        BundleFault { train, ray, fault }
    }

    /// Sweeps back along every ray of the last [`Self::trace_kept`], for derivatives by all but the
    /// indices. `shapes` says for which surfaces conic constant and asphere coefficients are among
    /// them. Read the result with [`Self::path_derivatives`].
    pub fn differentiate(&mut self, shapes: Shapes) -> Quantities {
        let quantities = Quantities::new(self.surfaces, shapes).without_indices();
        self.sweep(quantities);
        quantities
    }

    /// [`Self::differentiate`] with derivatives by the indices too.
    pub fn differentiate_all(&mut self, shapes: Shapes) -> Quantities {
        let quantities = Quantities::new(self.surfaces, shapes);
        self.sweep(quantities);
        quantities
    }

    fn sweep(&mut self, quantities: Quantities) {
        let count = quantities.count();
        self.rows.resize(self.blocks.len() * count, Abreast::splat(0.0));
        let kept = self.blocks.iter().zip(self.crossings.chunks(self.surfaces.max(1)));
        let exits = self.exits.iter().zip(self.rows.chunks_mut(count.max(1)));
        for ((block, crossings), (exit, row)) in kept.zip(exits) {
            backward_meridional(&block.stages, crossings, exit, quantities, row);
        }
        self.quantities = Some(quantities);
    }

    /// Derivatives of the optical paths of a train's rays by the quantity at `place`, in ray
    /// order, mm per unit of the quantity; empty before [`Self::differentiate`].
    pub fn path_derivatives(&self, train: usize, place: usize) -> impl Iterator<Item = f64> + '_ {
        let rays = if self.quantities.is_some() { self.seats.rays } else { 0 };
        (0..rays.div_ceil(LANES))
            .flat_map(move |vector| self.path_derivative_vector(train, vector).by(place).0)
            .take(rays)
    }

    /// The same eight rays at a time. In a vector that is not full the lanes behind the last ray
    /// hold any finite numbers.
    ///
    /// # Panics
    /// Before [`Self::differentiate`].
    #[must_use]
    #[inline(always)]
    pub fn path_derivative_vector(&self, train: usize, vector: usize) -> PathDerivatives<'_> {
        let (block, lane) = self.seats.of(train, vector * LANES);
        let count = self.rows.len() / self.blocks.len();
        PathDerivatives { rows: &self.rows[block * count..][..count], lane }
    }
}

/// Derivatives of the optical paths of up to eight rays of one train.
#[derive(Debug, Clone, Copy)]
pub struct PathDerivatives<'a> {
    rows: &'a [Abreast],
    lane: usize,
}

impl PathDerivatives<'_> {
    /// By the quantity at `place`, mm per unit of the quantity.
    #[must_use]
    #[inline(always)]
    pub fn by(&self, place: usize) -> Lanes {
        let numbers = &self.rows[place].numbers()[self.lane..];
        Lanes(numbers.first_chunk().copied().unwrap_or_default())
    }
}

#[inline]
fn is_sound(path: f64, forward: f64) -> bool {
    path.is_finite() & (forward > 0.0)
}

impl Block {
    /// All lanes on the axis of this train.
    fn on_axis(train: &Stages<f64>) -> Self {
        let stage = |stage: &Stage<f64>| Stage {
            surface: stage.surface,
            sphere: stage.sphere,
            gap: Abreast::splat(stage.gap),
            index: Abreast::splat(stage.index),
            ratio: Abreast::splat(stage.ratio),
        };
        let list = train.list.iter().map(stage).collect();
        let stages = Stages { list, last_index: Abreast::splat(train.last_index) };
        Self { stages, start: Ray::axial() }
    }

    /// Gives lanes to rays of this train.
    fn seat(&mut self, lanes: Range<usize>, train: &Stages<f64>, heights_mm: &[f64]) {
        self.start.y[0].numbers_mut()[lanes.clone()].copy_from_slice(heights_mm);
        for (wide, stage) in self.stages.list.iter_mut().zip(&train.list) {
            wide.gap.numbers_mut()[lanes.clone()].fill(stage.gap);
            wide.index.numbers_mut()[lanes.clone()].fill(stage.index);
            wide.ratio.numbers_mut()[lanes.clone()].fill(stage.ratio);
        }
        self.stages.last_index.numbers_mut()[lanes].fill(train.last_index);
    }

    /// A sphere stays a sphere.
    #[inline]
    fn curve(&mut self, at: usize, curvature: f64) {
        self.stages.list[at].surface.curvature = curvature;
    }

    fn index(&mut self, medium: usize) -> &mut Abreast {
        match self.stages.list.get_mut(medium) {
            Some(stage) => &mut stage.index,
            None => &mut self.stages.last_index,
        }
    }

    fn set_index(&mut self, medium: usize, lanes: Range<usize>, value: f64) {
        self.index(medium).numbers_mut()[lanes.clone()].fill(value);
        for surface in medium.saturating_sub(1)..(medium + 1).min(self.stages.list.len()) {
            let before = self.index(surface).numbers()[lanes.start];
            let ratio = before / self.index(surface + 1).numbers()[lanes.start];
            self.stages.list[surface].ratio.numbers_mut()[lanes.clone()].fill(ratio);
        }
    }
}

/// A ray of a bundle that failed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("ray {} of train {}: {fault}", .ray + 1, .train + 1)]
pub struct BundleFault {
    /// Which of the trains, counted from 0.
    pub train: usize,
    /// Which of the heights, counted from 0.
    pub ray: usize,
    /// What happened to it.
    pub fault: RayFault,
}

#[cfg(test)]
mod tests {
    use super::*;

    /// As in a design without a goal on the wavefront.
    #[test]
    fn a_bundle_of_no_trains_has_nothing_to_say() {
        let mut bundle = Bundle::new();
        bundle.load([], &[0.5, 1.0]);
        bundle.trace_kept(&mut []).unwrap();
        assert_eq!(bundle.differentiate(Shapes::ALL).count(), 0);
    }
}
