//! A design on the bench: every state's trains, what each tolerance does to them, and the exact
//! derivatives of what is measured (`nominal.rs` says what that is).

use std::ops::Range;

use merit_function::block::Bounds;
use merit_function::limits::LimitKind;
use merit_function::variables::{Column, FreePlace, Variables};
use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::place::Place;
use surface_model::pupil::Pupil;
use surface_model::quantities::{Quantities, Quantity, Shapes};
use surface_model::train::Train;

use super::ToleranceError;
use super::document::Tolerances;
use super::effect::BenchItem;
use super::housing_end::HousingEnd;
use super::item::Item;
use super::kind::Spread;
use super::requirement::Requirement;
use crate::design_file::DesignFile;

/// Rings and arms of the pupil: W² is integrated exactly up to r³² and eleven times the angle.
pub(crate) const RINGS: usize = 8;
/// See [`RINGS`].
pub(crate) const ARMS: usize = 12;

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
    /// The ends of the housing that the groups could leave.
    pub(crate) ends: Vec<HousingEnd>,
    /// Per group, how far its mount has turned, rad.
    pub(crate) turns: Vec<f64>,
    /// What is measured of the design as it stands.
    pub(crate) nominal: Vec<f64>,
    /// Its derivative by every quantity of the train.
    pub(super) by_quantity: Vec<Vec<f64>>,
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
    pub(super) quantities: Quantities,
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
            ends: HousingEnd::all(self.design, zoom),
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
    pub(super) fn packed(&self, place: Place) -> Option<usize> {
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

    pub(super) fn packed_of(&self, k: usize, column: Column) -> Option<usize> {
        match column {
            Column::Shared(number) => Some(number),
            Column::Own(number) => {
                let before: usize = (0..k).map(|k| self.variables.own(k).len()).sum();
                Some(self.variables.shared().len() + before + number)
            }
        }
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

/// Adds `factor` times `row`.
pub(super) fn add(sum: &mut [f64], factor: f64, row: &[f64]) {
    for (sum, value) in sum.iter_mut().zip(row) {
        *sum += factor * value;
    }
}
