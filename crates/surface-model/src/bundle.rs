//! Bundles of rays parallel to the axis, one a train, traced abreast: optical paths of all rays,
//! and the derivatives of every path by every quantity of its train. This is what the merit
//! function calls.
//!
//! The trains of one bundle have the same surfaces (they are the zoom states and wavelengths of
//! one design) and are entered at the same heights. Each train's rays fill vectors
//! of eight lanes of its own; vectors of different trains go through the trace together, so that
//! the processor is full even when a train has only six rays.

use crate::fault::{FaultReason, RayFault};
use crate::real::{ABREAST, Abreast, LANES, Lanes, Real};
use crate::reverse::{Quantities, Quantity, Shapes, backward_meridional};
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
    rays: usize,
    trains: usize,
    /// Vectors of eight rays that one train fills.
    vectors: usize,
    blocks: Vec<Block>,
    /// One a surface and block: all surfaces of block 0, then of block 1, ….
    crossings: Vec<Crossing<Abreast, 1>>,
    exits: Vec<Exit<Abreast, 1>>,
    rows: Vec<Abreast>,
    quantities: Option<Quantities>,
}

/// Vectors that go through the trace abreast, and the trains they go through.
#[derive(Debug)]
struct Block {
    stages: Stages<Abreast>,
    start: Ray<Abreast, 1>,
}

/// Where a vector of eight rays stands.
#[derive(Debug, Clone, Copy)]
struct Slot {
    block: usize,
    place: usize,
}

impl Slot {
    fn of(vector: usize) -> Self {
        Self { block: vector / ABREAST, place: vector % ABREAST }
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
        self.rays = heights_mm.len();
        self.trains = if self.rays == 0 { 0 } else { trains.len() };
        self.vectors = self.rays.div_ceil(LANES);
        self.quantities = None;
        let all = self.trains * self.vectors;
        self.blocks.clear();
        for block in 0..all.div_ceil(ABREAST) {
            // A block that is not full goes through its last train again.
            let vectors: [usize; ABREAST] =
                std::array::from_fn(|place| (block * ABREAST + place).min(all - 1));
            let trains = vectors.map(|vector| trains[vector / self.vectors]);
            let heights = vectors.map(|vector| self.heights(heights_mm, vector % self.vectors));
            self.blocks.push(Block::new(trains, heights));
        }
        let zero = Abreast::splat(0.0);
        let blank = Ray { y: [zero], z: zero, d: [zero], dz: zero };
        let crossing = Crossing { ray: blank, path: zero, cos_in: zero, cos_out: zero };
        self.crossings.resize(self.blocks.len() * surfaces, crossing);
        self.exits.clear();
    }

    /// Eight heights; a vector that is not full repeats its last ray.
    fn heights(&self, heights_mm: &[f64], vector: usize) -> Lanes {
        Lanes(std::array::from_fn(|lane| heights_mm[(vector * LANES + lane).min(self.rays - 1)]))
    }

    /// Sets a quantity of one train. Curvatures, conic constants and asphere coefficients are the
    /// same glass in all trains and must be set alike in each before the next trace.
    #[inline]
    pub fn set_quantity(&mut self, train: usize, quantity: Quantity, value: f64) {
        match quantity {
            Quantity::Curvature(at) => {
                self.reshape(train, at, |surface| surface.curvature = value);
            }
            Quantity::Conic(at) => self.reshape(train, at, |surface| surface.conic = value),
            Quantity::Asphere(at, term) => {
                self.reshape(train, at, |surface| surface.asphere[term] = value);
            }
            Quantity::Gap(gap) => {
                self.each_vector(train, |block, place| {
                    block.stages.list[gap + 1].gap.0[place] = Lanes::splat(value);
                });
            }
            Quantity::Index(medium) => {
                self.each_vector(train, |block, place| block.set_index(medium, place, value));
            }
        }
    }

    fn reshape(&mut self, train: usize, at: usize, change: impl Fn(&mut Surface)) {
        self.each_vector(train, |block, _| {
            let stage = &mut block.stages.list[at];
            change(&mut stage.surface);
            stage.sphere = stage.surface.is_sphere();
        });
    }

    fn each_vector(&mut self, train: usize, change: impl Fn(&mut Block, usize)) {
        for vector in train * self.vectors..(train + 1) * self.vectors {
            let slot = Slot::of(vector);
            change(&mut self.blocks[slot.block], slot.place);
        }
        // The last block may go through the last train more than once.
        let all = self.trains * self.vectors;
        if train + 1 == self.trains && !all.is_multiple_of(ABREAST) {
            let block = all / ABREAST;
            for place in all % ABREAST..ABREAST {
                change(&mut self.blocks[block], place);
            }
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
        self.exits.clear();
        for block in &self.blocks {
            let exit = forward_meridional_paths(&block.stages, &block.start);
            self.exits.push(exit);
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
        self.exits.clear();
        for (block, crossings) in
            self.blocks.iter().zip(self.crossings.chunks_mut(self.surfaces.max(1)))
        {
            self.exits.push(forward_meridional(&block.stages, &block.start, crossings));
        }
        self.read_paths(paths).map_or(Ok(()), |failed| Err(self.fault(failed)))
    }

    /// Reads the paths out; returns the place of the first that is no path.
    fn read_paths(&self, paths: &mut [f64]) -> Option<usize> {
        assert_eq!(paths.len(), self.trains * self.rays, "one path a ray and train");
        for (train, paths) in paths.chunks_mut(self.rays.max(1)).enumerate() {
            for (vector, paths) in paths.chunks_mut(LANES).enumerate() {
                let slot = Slot::of(train * self.vectors + vector);
                let exit = &self.exits[slot.block];
                let lanes = &exit.path_excess.0[slot.place].0;
                paths.copy_from_slice(&lanes[..paths.len()]);
                let forward = &exit.dz.0[slot.place].0;
                let failed = |lane: &usize| !(lanes[*lane].is_finite() && forward[*lane] > 0.0);
                if let Some(lane) = (0..paths.len()).find(failed) {
                    return Some(train * self.rays + vector * LANES + lane);
                }
            }
        }
        None
    }

    fn fault(&self, failed: usize) -> BundleFault {
        let (train, ray) = (failed / self.rays, failed % self.rays);
        let slot = Slot::of(train * self.vectors + ray / LANES);
        let crossings = &self.crossings[slot.block * self.surfaces..][..self.surfaces];
        let lane = |number: Abreast| number.0[slot.place].0[ray % LANES];
        // A path that is not finite without a failed crossing has overflowed on the way out.
        let overflow = RayFault { surface: self.surfaces - 1, reason: FaultReason::TurnedBack };
        let fault = find_fault(crossings, &self.exits[slot.block], lane).unwrap_or(overflow);
        BundleFault { train, ray, fault }
    }

    /// Sweeps back along every ray of the last [`Self::trace_kept`]. `shapes` says for which
    /// surfaces derivatives by conic constant and asphere coefficients are kept too. Read the
    /// result with [`Self::path_derivatives`].
    pub fn differentiate(&mut self, shapes: Shapes) -> Quantities {
        let quantities = Quantities::new(self.surfaces, shapes);
        let count = quantities.count();
        self.rows.resize(self.blocks.len() * count, Abreast::splat(0.0));
        let kept = self.blocks.iter().zip(self.crossings.chunks(self.surfaces.max(1)));
        let exits = self.exits.iter().zip(self.rows.chunks_mut(count.max(1)));
        for ((block, crossings), (exit, row)) in kept.zip(exits) {
            backward_meridional(&block.stages, crossings, exit, quantities, row);
        }
        self.quantities = Some(quantities);
        quantities
    }

    /// Derivatives of the optical paths of a train's rays by the quantity at `place`, in ray
    /// order, mm per unit of the quantity; empty before [`Self::differentiate`].
    pub fn path_derivatives(&self, train: usize, place: usize) -> impl Iterator<Item = f64> + '_ {
        let vectors = if self.quantities.is_some() { self.vectors } else { 0 };
        (0..vectors)
            .flat_map(move |vector| self.path_derivative_vector(train, vector, place).0)
            .take(self.rays)
    }

    /// The same eight at a time; a vector that is not full repeats its last ray.
    #[must_use]
    #[inline]
    pub fn path_derivative_vector(&self, train: usize, vector: usize, place: usize) -> Lanes {
        let slot = Slot::of(train * self.vectors + vector);
        let count = self.quantities.map_or(0, |quantities| quantities.count());
        self.rows[slot.block * count + place].0[slot.place]
    }
}

impl Block {
    fn new(trains: [&Train; ABREAST], heights: [Lanes; ABREAST]) -> Self {
        let each = trains.map(Stages::<f64>::of);
        let wide = |number: &dyn Fn(&Stages<f64>) -> f64| {
            Abreast(std::array::from_fn(|place| Lanes::splat(number(&each[place]))))
        };
        let stage = |(i, first): (usize, &Stage<f64>)| Stage {
            surface: first.surface,
            sphere: first.sphere,
            gap: wide(&|train| train.list[i].gap),
            index: wide(&|train| train.list[i].index),
            ratio: wide(&|train| train.list[i].ratio),
        };
        let list = each[0].list.iter().enumerate().map(stage).collect();
        let stages = Stages { list, last_index: wide(&|train| train.last_index) };
        let zero = Abreast::splat(0.0);
        let start = Ray { y: [Abreast(heights)], z: zero, d: [zero], dz: Abreast::splat(1.0) };
        Self { stages, start }
    }

    fn index(&self, medium: usize, place: usize) -> Lanes {
        let behind =
            self.stages.list.get(medium).map_or(self.stages.last_index, |stage| stage.index);
        behind.0[place]
    }

    fn set_index(&mut self, medium: usize, place: usize, value: f64) {
        match self.stages.list.get_mut(medium) {
            Some(stage) => stage.index.0[place] = Lanes::splat(value),
            None => self.stages.last_index.0[place] = Lanes::splat(value),
        }
        for surface in medium.saturating_sub(1)..(medium + 1).min(self.stages.list.len()) {
            let ratio = self.index(surface, place) / self.index(surface + 1, place);
            self.stages.list[surface].ratio.0[place] = ratio;
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
