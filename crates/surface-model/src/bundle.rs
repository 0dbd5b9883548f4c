//! A bundle of rays parallel to the axis: optical paths of all of them, and the derivatives of
//! every path by every quantity of the train. This is what the merit function calls.

use crate::fault::RayFault;
use crate::real::{LANES, Lanes, Real};
use crate::reverse::{Quantities, Seed, Shapes, backward_meridional};
use crate::trace::{Crossing, Exit, Ray, find_fault, forward_meridional};
use crate::train::Train;

/// Traces rays that enter parallel to the axis, and keeps what their reverse sweeps need. Buffers
/// are kept from call to call: no allocation once the largest train has been seen.
#[derive(Debug, Default)]
pub struct Bundle {
    surfaces: usize,
    rays: usize,
    crossings: Vec<Crossing<Lanes, 1>>,
    exits: Vec<Exit<Lanes, 1>>,
    rows: Vec<Lanes>,
    quantities: Option<Quantities>,
}

impl Bundle {
    /// An empty bundle.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Traces rays at these heights (mm) through the train. `paths` (one a ray) receives the
    /// optical path from the plane through the first vertex to the plane through the last, less
    /// that of the axial ray, in mm.
    ///
    /// # Errors
    /// The first ray that fails, by its place among the heights.
    ///
    /// # Panics
    /// If `paths` and `heights_mm` differ in length.
    pub fn trace(
        &mut self,
        train: &Train,
        heights_mm: &[f64],
        paths: &mut [f64],
    ) -> Result<(), BundleFault> {
        assert_eq!(heights_mm.len(), paths.len(), "one path a ray");
        let zero = Lanes::ZERO;
        self.surfaces = train.len();
        self.rays = heights_mm.len();
        self.quantities = None;
        let blocks = self.rays.div_ceil(LANES);
        let blank = Ray { y: [zero], z: zero, d: [zero], dz: Lanes::splat(1.0) };
        let empty = Crossing { ray: blank, path: zero, cos_in: zero, cos_out: zero };
        self.crossings.resize(blocks * self.surfaces, empty);
        self.exits.clear();

        for (block, heights) in heights_mm.chunks(LANES).enumerate() {
            let mut start = blank;
            // A block that is not full repeats its last ray.
            for (lane, y) in start.y[0].0.iter_mut().enumerate() {
                *y = heights[lane.min(heights.len() - 1)];
            }
            let crossings = &mut self.crossings[block * self.surfaces..][..self.surfaces];
            let exit = forward_meridional(train, &start, crossings);
            self.exits.push(exit);
            for (lane, path) in paths[block * LANES..].iter_mut().take(heights.len()).enumerate() {
                *path = exit.path_excess.0[lane];
                if !(path.is_finite() && exit.dz.0[lane] > 0.0) {
                    let fault = find_fault(crossings, &exit, |lanes: Lanes| lanes.0[lane]);
                    return Err(BundleFault::new(block * LANES + lane, fault, self.surfaces));
                }
            }
        }
        Ok(())
    }

    /// Sweeps back along every ray of the last [`Self::trace`] of this train. `shapes` says for
    /// which surfaces derivatives by conic constant and asphere coefficients are kept too. Read the result with
    /// [`Self::path_derivatives`].
    pub fn differentiate(&mut self, train: &Train, shapes: Shapes) -> Quantities {
        let quantities = Quantities::new(self.surfaces, shapes);
        self.rows.resize(self.exits.len() * quantities.count(), Lanes::ZERO);
        let seed = Seed::path();
        for (block, exit) in self.exits.iter().enumerate() {
            let crossings = &self.crossings[block * self.surfaces..][..self.surfaces];
            let row = &mut self.rows[block * quantities.count()..][..quantities.count()];
            backward_meridional(train, crossings, exit, &seed, quantities, row);
        }
        self.quantities = Some(quantities);
        quantities
    }

    /// Derivatives of the optical paths of all rays by the quantity at `place`, in ray order, mm
    /// per unit of the quantity; empty before [`Self::differentiate`].
    pub fn path_derivatives(&self, place: usize) -> impl Iterator<Item = f64> + '_ {
        let count = self.quantities.map_or(0, |quantities| quantities.count());
        let blocks = if count == 0 { 0 } else { self.exits.len() };
        (0..blocks).flat_map(move |block| self.rows[block * count + place].0).take(self.rays)
    }

    /// The same eight at a time: the derivatives of block `block` of eight rays, in which a block
    /// that is not full repeats its last ray.
    #[must_use]
    #[inline]
    pub fn path_derivative_block(&self, place: usize, block: usize) -> Lanes {
        let count = self.quantities.map_or(0, |quantities| quantities.count());
        self.rows[block * count + place]
    }

    /// Height above the axis at which ray `ray` meets each surface, mm, from left to right.
    pub fn heights_at_surfaces(&self, ray: usize) -> impl Iterator<Item = f64> + '_ {
        self.crossings_of(ray).map(move |crossing| crossing.ray.y[0].0[ray % LANES])
    }

    /// Cosine of the angle of incidence of ray `ray` at each surface, from left to right.
    pub fn cos_incidences(&self, ray: usize) -> impl Iterator<Item = f64> + '_ {
        self.crossings_of(ray).map(move |crossing| crossing.cos_in.0[ray % LANES])
    }

    fn crossings_of(&self, ray: usize) -> impl Iterator<Item = &Crossing<Lanes, 1>> {
        self.crossings[ray / LANES * self.surfaces..][..self.surfaces].iter()
    }

    /// Derivatives of the cosine of the angle of incidence of ray `ray` at `surface` by every
    /// quantity of the train, written to `row` ([`Quantities::count`] long).
    pub fn differentiate_cos_incidence(
        &mut self,
        train: &Train,
        shapes: Shapes,
        (ray, surface): (usize, usize),
        row: &mut Vec<f64>,
    ) {
        let quantities = Quantities::new(self.surfaces, shapes);
        let block = ray / LANES;
        let crossings = &self.crossings[block * self.surfaces..][..self.surfaces];
        let mut lanes = vec![Lanes::ZERO; quantities.count()];
        let seed = Seed::cos_in(surface);
        backward_meridional(train, crossings, &self.exits[block], &seed, quantities, &mut lanes);
        row.clear();
        row.extend(lanes.iter().map(|value| value.0[ray % LANES]));
    }
}

/// A ray of a bundle that failed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("ray {} of the bundle: {fault}", .ray + 1)]
pub struct BundleFault {
    /// Which of the heights, counted from 0.
    pub ray: usize,
    /// What happened to it.
    pub fault: RayFault,
}

impl BundleFault {
    fn new(ray: usize, fault: Option<RayFault>, surfaces: usize) -> Self {
        use crate::fault::FaultReason;
        // A path that is not finite without a failed crossing has overflowed on the way out.
        let overflow = RayFault { surface: surfaces - 1, reason: FaultReason::TurnedBack };
        Self { ray, fault: fault.unwrap_or(overflow) }
    }
}
