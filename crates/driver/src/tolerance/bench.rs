//! A design on the bench: every state's trains, what each tolerance does to them, and the exact
//! derivatives of what is measured.
//!
//! What is measured of a state is one row of numbers: per wavelength and ray √w times the
//! wavefront without tilt in waves, then the ratio's error in per cent and the exit slope in µrad.

use std::ops::Range;

use merit_function::block::Bounds;
use merit_function::limits::LimitKind;
use merit_function::variables::{Column, FreePlace, Variables};
use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::paraxial::{ParaxialRay, ParaxialWeights};
use surface_model::place::Place;
use surface_model::pupil::Pupil;
use surface_model::quantities::{Quantities, Quantity, Shapes};
use surface_model::sequence::{Sequence, SurfaceId};
use surface_model::skew::{ExitSum, RayStart, trace_ray};
use surface_model::spoilt::FRINGE_NM;
use surface_model::train::Train;

use super::ToleranceError;
use super::document::Tolerances;
use super::item::{Item, Target};
use super::kind::{Kind, Spread};
use super::requirement::Requirement;
use crate::design_file::DesignFile;

/// Rings and arms of the pupil: W² is integrated exactly up to r³² and eleven times the angle.
pub(crate) const RINGS: usize = 8;
/// See [`RINGS`].
pub(crate) const ARMS: usize = 12;

/// What an error does to a train, found out once.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Effect {
    /// c becomes c/(1 + e/100).
    RadiusPercent {
        surface: usize,
    },
    /// c changes by so much a fringe, 1/mm.
    RadiusFringes {
        surface: usize,
        by: f64,
    },
    Irregularity {
        surface: usize,
    },
    /// A packed variable changes.
    Length {
        packed: usize,
    },
    /// A packed variable is set wrong.
    Setting {
        packed: usize,
    },
    Index {
        medium: usize,
    },
    Abbe {
        medium: usize,
    },
    Wedge {
        surface: usize,
    },
    ElementDecentre {
        element: usize,
    },
    ElementTilt {
        element: usize,
    },
    GroupDecentre {
        group: usize,
    },
    GroupTilt {
        group: usize,
    },
}

/// One tolerance on the bench.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct BenchItem {
    pub(crate) item: Item,
    pub(crate) effect: Effect,
}

/// One zoom state on the bench.
#[derive(Debug)]
pub(crate) struct BenchState {
    pub(crate) name: String,
    /// One train a wavelength.
    pub(crate) trains: Vec<Train>,
    pub(crate) waves_per_mm: Vec<f64>,
    pub(crate) ratio_wanted: f64,
    pub(crate) requirement: Requirement,
    /// Packed variables that are re-adjusted, with their bounds.
    pub(crate) readjusted: Vec<(usize, Bounds)>,
    /// Per group, how far its mount has turned, rad.
    pub(crate) turns: Vec<f64>,
    /// What is measured of the design as it stands.
    pub(crate) nominal: Vec<f64>,
    /// Its derivative by every quantity of the train.
    by_quantity: Vec<Vec<f64>>,
}

/// A design on the bench.
#[derive(Debug)]
pub(crate) struct Bench<'a> {
    pub(crate) design: &'a Design,
    pub(crate) items: Vec<BenchItem>,
    pub(crate) spread: Spread,
    pub(crate) variables: Variables,
    pub(crate) states: Vec<BenchState>,
    pub(crate) pupil: Pupil,
    /// The order of the derivatives that are kept.
    quantities: Quantities,
    pub(crate) roots: Vec<f64>,
    /// Surfaces of every element, and of every group.
    pub(crate) elements: Vec<Range<usize>>,
    pub(crate) groups: Vec<Range<usize>>,
    /// Per medium, its index at the d line, where it has an Abbe number.
    pub(crate) at_d_line: Vec<Option<f64>>,
    pub(crate) any_rotating: bool,
    /// The largest change of boresight through the zoom that is allowed, µrad.
    pub(crate) wander_within_urad: Option<f64>,
}

impl<'a> Bench<'a> {
    /// Puts a design on the bench, to be spoilt by `items`.
    pub(crate) fn new(
        file: &'a DesignFile,
        tolerances: &Tolerances,
        items: Vec<Item>,
    ) -> Result<Self, ToleranceError> {
        let design = &file.design;
        let sequence = design.sequence();
        let lengths = Place::all(design).into_iter().filter(is_length);
        let free: Vec<FreePlace> =
            lengths.map(|place| FreePlace { place, own_range: Bounds::FREE }).collect();
        let limits = file.wishes.limits.only(&[LimitKind::SpacingMm]);
        let variables = Variables::new(design, &limits, &free)?;
        let mut bench = Self {
            design,
            items: Vec::new(),
            spread: tolerances.spread,
            variables,
            states: Vec::new(),
            pupil: Pupil::new(design.beam.radius_mm(), design.beam.traced_to, RINGS, ARMS),
            quantities: Quantities::new(sequence.surfaces.len(), Shapes::None),
            roots: Vec::new(),
            elements: elements(design),
            groups: (0..design.groups.len())
                .map(|g| sequence.first_surface(g)..sequence.first_surface(g + 1))
                .collect(),
            at_d_line: at_d_line(design),
            any_rotating: tolerances.leads_mm.iter().any(Option::is_some),
            wander_within_urad: tolerances.require.boresight_wander_urad.map(|w| w.within),
        };
        bench.roots = bench.pupil.weights().iter().map(|weight| weight.sqrt()).collect();
        let with_effect =
            |item: Item| bench.effect(&item, &sequence).map(|effect| BenchItem { item, effect });
        bench.items = items.into_iter().filter_map(with_effect).collect();
        let readjusted = tolerances.readjusted.clone().unwrap_or_else(|| {
            file.free.iter().map(|free| free.place).filter(is_spacing).collect()
        });
        let positions_mm = design.all_positions_mm();
        for k in 0..design.states.len() {
            let turns = tolerances.leads_mm.iter().enumerate().map(|(g, lead_mm)| {
                let travel = positions_mm[k][g] - positions_mm[0][g];
                lead_mm.map_or(0.0, |lead_mm| std::f64::consts::TAU * travel / lead_mm)
            });
            let requirement = Requirement::of(&file.wishes.states[k], &tolerances.require);
            let state = bench.state(k, requirement, turns.collect(), &readjusted)?;
            bench.states.push(state);
        }
        Ok(bench)
    }

    fn state(
        &self,
        k: usize,
        requirement: Requirement,
        turns: Vec<f64>,
        readjusted: &[Place],
    ) -> Result<BenchState, ToleranceError> {
        let zoom = &self.design.states[k];
        let trains: Result<Vec<Train>, _> =
            zoom.wavelengths_nm.iter().map(|&nm| self.design.train(zoom, nm)).collect();
        let trains = trains?;
        let waves_per_mm: Vec<f64> = zoom.wavelengths_nm.iter().map(|nm| 1e6 / nm).collect();
        let own = self.variables.own(k).iter().filter(|place| readjusted.contains(place));
        let readjusted = own.filter_map(|&place| {
            let packed = self.packed(place)?;
            let (bounds, now) = (self.variables.bounds()[packed], self.variables.start()[packed]);
            // A design may stand a hair beyond its own limit.
            let reach = Bounds { low: bounds.low.min(now), high: bounds.high.max(now) };
            Some((packed, reach))
        });
        let mut state = BenchState {
            name: zoom.name.clone(),
            ratio_wanted: zoom.ratio,
            requirement,
            readjusted: readjusted.collect(),
            turns,
            nominal: Vec::new(),
            by_quantity: Vec::new(),
            trains,
            waves_per_mm,
        };
        self.measure_nominal(&mut state)?;
        Ok(state)
    }

    /// What is measured of a state as it stands, and its derivatives: by the reverse sweep along
    /// one ray a ring, since the design is round.
    fn measure_nominal(&self, state: &mut BenchState) -> Result<(), ToleranceError> {
        let quantities = self.quantities;
        let rows = self.roots.len() * state.trains.len() + 2;
        state.nominal = vec![0.0; rows];
        state.by_quantity = vec![vec![0.0; rows]; quantities.count()];
        let mut row = 0;
        for (train, waves) in state.trains.iter().zip(&state.waves_per_mm) {
            for ring in 0..RINGS {
                let position_mm = self.pupil.positions_mm()[ring * ARMS];
                let start = RayStart { position_mm, direction: [0.0, 0.0] };
                let ray = trace_ray(train, start).map_err(|fault| ToleranceError::Nominal {
                    state: state.name.clone(),
                    fault: fault.to_string(),
                })?;
                let weights = ExitSum { path_mm: 1.0, ..ExitSum::default() };
                let by = ray.differentiate(&weights, Shapes::None);
                for arm in ring * ARMS..(ring + 1) * ARMS {
                    state.nominal[row + arm] = waves * ray.exit().path_mm;
                    for (column, by) in state.by_quantity.iter_mut().zip(&by) {
                        column[row + arm] = waves * by;
                    }
                }
            }
            self.weigh(&mut state.nominal[row..row + self.roots.len()]);
            for column in &mut state.by_quantity {
                self.weigh(&mut column[row..row + self.roots.len()]);
            }
            row += self.roots.len();
        }
        self.measure_first_order(state, row)
    }

    /// Piston out, then times √w.
    fn weigh(&self, waves: &mut [f64]) {
        let weights = self.pupil.weights();
        let mean: f64 = waves.iter().zip(weights).map(|(wave, weight)| weight * wave).sum();
        for (wave, root) in waves.iter_mut().zip(&self.roots) {
            *wave = root * (*wave - mean);
        }
    }

    fn measure_first_order(
        &self,
        state: &mut BenchState,
        row: usize,
    ) -> Result<(), ToleranceError> {
        let overflow = || ToleranceError::Overflow { state: state.name.clone() };
        let train = &state.trains[0];
        let mut ray = ParaxialRay::new();
        ray.trace(train, 1.0, 0.0).map_err(|_| overflow())?;
        let (ratio, slope) =
            (ray.ratio().ok_or_else(overflow)?, ray.exit_slope().ok_or_else(overflow)?);
        let to_urad = 1e6 * self.design.beam.radius_mm();
        let to_percent = 100.0 / state.ratio_wanted;
        let quantities = self.quantities;
        let mut gradient = vec![0.0; quantities.count()];
        let last = [(train.len() - 1, to_percent)];
        let measured = [
            (row, ratio * to_percent - 100.0, ParaxialWeights { heights: &last, exit_slope: 0.0 }),
            (row + 1, slope * to_urad, ParaxialWeights { heights: &[], exit_slope: to_urad }),
        ];
        for (row, value, weights) in measured {
            ray.differentiate(train, weights, quantities, &mut gradient).map_err(|_| overflow())?;
            state.nominal[row] = value;
            for (column, by) in state.by_quantity.iter_mut().zip(&gradient) {
                column[row] = *by;
            }
        }
        Ok(())
    }

    /// Exact derivative of what is measured of state `k` by one packed variable.
    pub(crate) fn by_packed(&self, k: usize, packed: usize) -> Vec<f64> {
        let state = &self.states[k];
        let mut sum = vec![0.0; state.nominal.len()];
        for binding in self.variables.bindings(k) {
            let Quantity::Gap(gap) = self.variables.quantities().at(binding.quantity) else {
                continue;
            };
            let by_gap = &state.by_quantity[self.quantities.gap(gap)];
            for &(column, factor) in &binding.terms {
                if self.packed_of(k, column) == Some(packed) {
                    add(&mut sum, factor, by_gap);
                }
            }
        }
        sum
    }

    /// Exact derivative of what is measured of state `k` by a round error, by its unit; `None`
    /// for one that is not round.
    pub(crate) fn by_error(&self, k: usize, effect: Effect) -> Option<Vec<f64>> {
        let state = &self.states[k];
        let quantities = self.quantities;
        let mut sum = vec![0.0; state.nominal.len()];
        match effect {
            Effect::RadiusPercent { surface } => {
                let by = -0.01 * state.trains[0].surfaces()[surface].curvature;
                add(&mut sum, by, &state.by_quantity[quantities.curvature(surface)]);
            }
            Effect::RadiusFringes { surface, by } => {
                add(&mut sum, by, &state.by_quantity[quantities.curvature(surface)]);
            }
            Effect::Length { packed } | Effect::Setting { packed } => {
                return Some(self.by_packed(k, packed));
            }
            Effect::Index { medium } => {
                add(&mut sum, 1.0, &state.by_quantity[quantities.index(medium)]);
            }
            Effect::Abbe { medium } => {
                let column = &state.by_quantity[quantities.index(medium)];
                let rays = self.roots.len();
                for (row, by) in column.iter().enumerate() {
                    // Ratio and exit slope are told at the first wavelength.
                    let train = if row < rays * state.trains.len() { row / rays } else { 0 };
                    sum[row] = -0.01 * self.dispersion(&state.trains[train], medium) * by;
                }
            }
            _ => return None,
        }
        Some(sum)
    }

    /// n − n_d of a medium in a train: what is in inverse proportion to the Abbe number.
    pub(crate) fn dispersion(&self, train: &Train, medium: usize) -> f64 {
        self.at_d_line[medium].map_or(0.0, |at_d| train.indices()[medium] - at_d)
    }

    /// The gaps of a state's trains at these values of the packed variables, mm.
    pub(crate) fn gaps(&self, k: usize, packed: &[f64]) -> Vec<f64> {
        let mut gaps = self.states[k].trains[0].gaps().to_vec();
        let quantities = self.variables.quantities();
        for binding in self.variables.bindings(k) {
            if let Quantity::Gap(gap) = quantities.at(binding.quantity) {
                let terms = binding.terms.iter();
                let values =
                    terms.map(|&(column, by)| by * self.variables.value(packed, k, column));
                gaps[gap] = binding.offset + values.sum::<f64>();
            }
        }
        gaps
    }

    /// Where a number stands among the packed variables.
    fn packed(&self, place: Place) -> Option<usize> {
        let (k, own) = match place {
            Place::Spacing { state, .. } => (state, true),
            _ => (0, false),
        };
        if own {
            let number = self.variables.own(k).iter().position(|&other| other == place)?;
            self.packed_of(k, Column::Own(number))
        } else {
            let glass = merit_function::variables::SharedVariable::Glass(place);
            self.variables.shared().iter().position(|&other| other == glass)
        }
    }

    /// The spacings that are re-adjusted, state by state.
    pub(crate) fn readjusted_addresses(&self) -> Vec<Address> {
        let mut addresses = Vec::new();
        for (k, state) in self.states.iter().enumerate() {
            for &place in self.variables.own(k) {
                let packed = self.packed(place);
                if state.readjusted.iter().any(|&(at, _)| Some(at) == packed) {
                    addresses.push(place.address());
                }
            }
        }
        addresses
    }

    fn packed_of(&self, k: usize, column: Column) -> Option<usize> {
        match column {
            Column::Shared(number) => Some(number),
            Column::Own(number) => {
                let before: usize = (0..k).map(|k| self.variables.own(k).len()).sum();
                Some(self.variables.shared().len() + before + number)
            }
        }
    }

    /// What an error does. `None` for the setting of a spacing that follows from the others.
    fn effect(&self, item: &Item, sequence: &Sequence) -> Option<Effect> {
        let surface_place = |id| sequence.place_of_surface(id);
        match item.target {
            Target::Surface(id) => {
                let surface = surface_place(id)?;
                Some(match item.kind {
                    Kind::RadiusPercent => Effect::RadiusPercent { surface },
                    Kind::RadiusFringes => {
                        Effect::RadiusFringes { surface, by: self.curvature_a_fringe(id)? }
                    }
                    _ => Effect::Irregularity { surface },
                })
            }
            Target::Glass { group, element, glass } => {
                // The surface behind the glass; the medium before it has the same number.
                let behind = surface_place(SurfaceId { group, element, surface: glass + 1 })?;
                Some(match item.kind {
                    Kind::ThicknessMm => {
                        let place = Place::Thickness { group, element, glass };
                        Effect::Length { packed: self.packed(place)? }
                    }
                    Kind::Index => Effect::Index { medium: behind },
                    Kind::AbbePercent => Effect::Abbe { medium: behind },
                    _ => Effect::Wedge { surface: behind },
                })
            }
            Target::Air { group, after } => {
                Some(Effect::Length { packed: self.packed(Place::Air { group, after })? })
            }
            Target::Element { group, element } => {
                let before: usize =
                    self.design.groups[..group].iter().map(|group| group.elements.len()).sum();
                let element = before + element;
                Some(match item.kind {
                    Kind::ElementDecentreMm => Effect::ElementDecentre { element },
                    _ => Effect::ElementTilt { element },
                })
            }
            Target::Group(group) => Some(match item.kind {
                Kind::GroupDecentreMm => Effect::GroupDecentre { group },
                _ => Effect::GroupTilt { group },
            }),
            Target::Spacing { state, after } => {
                Some(Effect::Setting { packed: self.packed(Place::Spacing { state, after })? })
            }
        }
    }

    /// Change of curvature that changes the sag at the clear semi-diameter a by one fringe, 1/mm:
    /// ∂z/∂c = (a² + z²)/(2w).
    fn curvature_a_fringe(&self, id: SurfaceId) -> Option<f64> {
        let surface = &self.design.groups[id.group].elements[id.element].surfaces[id.surface];
        let (a, c, k1) = (surface.semi_diameter, surface.curvature, 1.0 + surface.conic);
        let w = (1.0 - k1 * c * c * a * a).sqrt();
        let z = c * a * a / (1.0 + w);
        let by = FRINGE_NM * 1e-6 * 2.0 * w / (a * a + k1 * z * z);
        by.is_finite().then_some(by)
    }
}

/// Adds `factor` times `row`.
fn add(sum: &mut [f64], factor: f64, row: &[f64]) {
    for (sum, value) in sum.iter_mut().zip(row) {
        *sum += factor * value;
    }
}

fn is_spacing(place: &Place) -> bool {
    matches!(place, Place::Spacing { .. })
}

fn is_length(place: &Place) -> bool {
    matches!(place, Place::Spacing { .. } | Place::Thickness { .. } | Place::Air { .. })
}

/// The surfaces of every element, in the order of the train.
fn elements(design: &Design) -> Vec<Range<usize>> {
    let mut first = 0;
    let all = design.groups.iter().flat_map(|group| &group.elements);
    all.map(|element| {
        let range = first..first + element.surfaces.len();
        first = range.end;
        range
    })
    .collect()
}

/// Per medium of a train, its index at the d line, where it has an Abbe number.
fn at_d_line(design: &Design) -> Vec<Option<f64>> {
    let mut media = vec![None];
    for element in design.groups.iter().flat_map(|group| &group.elements) {
        media.extend(element.glasses.iter().map(|glass| glass.vd().and(glass.nd())));
        media.push(None);
    }
    media
}
