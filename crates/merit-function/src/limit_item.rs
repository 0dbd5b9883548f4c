//! Every single thing a limit applies to: this edge, that spacing in this state.

use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::gaussian::{GaussianBeam, GaussianPath, peak_per_cm2};
use surface_model::ghost::{Ghost, GhostWay};
use surface_model::housing::Anchor;
use surface_model::place::Place;
use surface_model::sequence::{GapId, Sequence, SurfaceId};
use surface_model::train::Train;

use crate::edge::edge_mm;
use crate::limits::{LimitKind, Limits, Range};
use crate::movement::{Slide, Way, WayMeasure};

/// One limited quantity of a design.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct LimitItem {
    /// Which limit it is.
    pub kind: LimitKind,
    /// What it applies to, in the design file.
    pub at: Address,
    /// The state it is measured in, where it differs from state to state and `at` does not tell.
    pub state: Option<usize>,
    /// What is allowed.
    pub range: Range,
    pub(crate) measure: Measure,
}

/// How a limited quantity is measured on the trains.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Measure {
    /// A gap on axis.
    Gap(usize),
    /// A gap at the edge: at the smaller clear radius of its two surfaces.
    Edge(usize),
    /// |1/curvature| of a surface.
    Radius(usize),
    /// Semi-diameter times |curvature| of a surface.
    Steepness(usize),
    /// Way of a group over all states.
    Travel(usize),
    /// Angle of incidence of the edge ray at a surface.
    Incidence(usize),
    /// First vertex to last vertex.
    Length,
    /// Room between the train and the front of the housing.
    Front,
    /// Room between the train and the rear of the housing.
    Rear,
    /// Smallest height of the marginal ray, paraxial and exact, over its height at entry.
    Focus,
    /// Peak energy density of a pulse at a surface, J/cm².
    Fluence(usize),
    /// Least distance of a ghost's focus from glass, over all ghosts of this kind.
    Ghosts(GhostKind),
    /// Something along the way between the states.
    Way(WayMeasure),
}

/// How often a surface reflects the light of a ghost.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum GhostKind {
    Single,
    Double,
}

impl GhostKind {
    /// Every ghost of this kind in a train of so many surfaces.
    pub(crate) fn all(self, surfaces: usize) -> Vec<Ghost> {
        match self {
            Self::Single => Ghost::singles(surfaces).collect(),
            Self::Double => Ghost::doubles(surfaces).collect(),
        }
    }
}

/// What is measured of one state: its train at the first wavelength, and the rays in it.
#[derive(Debug, Clone)]
pub(crate) struct StateView {
    pub(crate) train: Train,
    /// The real beam at the first wavelength; `None` where its keys make none.
    pub(crate) beam: Option<GaussianBeam>,
    /// Where each group's first vertex stands in the housing, mm.
    pub(crate) positions_mm: Vec<f64>,
    /// Paraxial marginal height at every surface for unit height at entry.
    pub(crate) marginal: Vec<f64>,
    /// Heights of the outermost traced ray at every surface over its height at entry; `None` when
    /// it fails.
    pub(crate) edge_ray: Option<Vec<f64>>,
    /// Its angle of incidence at every surface, degrees.
    pub(crate) incidence_deg: Option<Vec<f64>>,
}

impl LimitItem {
    /// Everything the limits of a design apply to, in the order of the file; the housing, which
    /// is always kept, last.
    #[must_use]
    pub(crate) fn all(design: &Design, limits: &Limits) -> Vec<Self> {
        Lister { design, limits, sequence: design.sequence() }.all()
    }

    /// Its value; `None` where it cannot be measured (a surface that does not reach its edge, a
    /// ray that fails).
    pub(crate) fn value(&self, design: &Design, views: &[StateView]) -> Option<f64> {
        let view = &views[self.state.unwrap_or(0)];
        let front_mm = view.positions_mm.first().copied().unwrap_or(0.0);
        let surface = |place: usize| &view.train.surfaces()[place];
        match self.measure {
            Measure::Gap(gap) => Some(view.train.gaps()[gap]),
            Measure::Edge(gap) => edge_mm(&view.train, gap),
            Measure::Radius(place) => {
                let curvature = surface(place).curvature;
                Some(if curvature == 0.0 { f64::INFINITY } else { 1.0 / curvature.abs() })
            }
            Measure::Steepness(place) => {
                Some(surface(place).semi_diameter * surface(place).curvature.abs())
            }
            Measure::Travel(group) => {
                let at = views.iter().map(|view| view.positions_mm[group]);
                let (low, high) = at.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), z| {
                    (low.min(z), high.max(z))
                });
                Some(high - low)
            }
            Measure::Incidence(place) => view.incidence_deg.as_ref().map(|angles| angles[place]),
            Measure::Length => Some(view.train.length()),
            Measure::Front => Some(front_mm),
            Measure::Rear => Some(design.housing.track_mm - front_mm - view.train.length()),
            Measure::Focus => {
                let exact = view.edge_ray.as_ref()?;
                Some(view.marginal.iter().chain(exact).copied().fold(f64::INFINITY, f64::min))
            }
            Measure::Fluence(place) => {
                let mut path = GaussianPath::default();
                path.trace(&view.train, &view.beam?).ok()?;
                let energy_j = 1e-3 * design.beam.laser.pulse_energy_mj?;
                Some(peak_per_cm2(energy_j, path.radius_squared(place).sqrt()))
            }
            Measure::Ghosts(kind) => {
                let mut least = f64::INFINITY;
                for ghost in kind.all(view.train.len()) {
                    let mut way = GhostWay::new(&view.train, ghost);
                    way.trace(&view.beam?).ok()?;
                    least = least.min(way.closest().map_or(least, |focus| focus.clearance_mm));
                }
                Some(least)
            }
            // Told by `worst_on_the_way`.
            Measure::Way(_) => None,
        }
    }

    /// Whether it is about the way between the states.
    pub(crate) fn is_of_the_way(&self) -> bool {
        matches!(self.measure, Measure::Way(_))
    }

    /// Its value nearest to what is not allowed, or farthest beyond, on the way between the states,
    /// and the ratio at which it is met.
    pub(crate) fn worst_on_the_way(
        &self,
        design: &Design,
        views: &[StateView],
        way: &Way,
    ) -> Option<(f64, f64)> {
        let Measure::Way(measure) = self.measure else { return None };
        let constant_mm = match measure {
            WayMeasure::EdgeGap(after) => {
                edge_constant_mm(&views.first()?.train, &design.sequence(), after)?
            }
            WayMeasure::Rear => design.housing.track_mm,
            _ => 0.0,
        };
        let seek = |sign: f64| {
            let (value, ratio) = way.lowest(measure, constant_mm, sign);
            (sign * value, ratio)
        };
        if let WayMeasure::OneWay(group) = measure {
            let sign = way.direction(group);
            let (value, ratio) = way.lowest(measure, constant_mm, sign);
            return Some((value, ratio));
        }
        let (least, most) = (seek(1.0), seek(-1.0));
        if let WayMeasure::Position(_) = measure {
            return Some((most.0 - least.0, most.1));
        }
        if let WayMeasure::Slope(_) = measure {
            return Some(if -least.0 > most.0 { (-least.0, least.1) } else { most });
        }
        let nearer = least.0 - self.range.min < self.range.max - most.0;
        Some(if nearer { least } else { most })
    }
}

/// Air at the edge less that on the axis, between a group and the next one, mm.
pub(crate) fn edge_constant_mm(train: &Train, sequence: &Sequence, after: usize) -> Option<f64> {
    let gap = sequence.place_of_gap(GapId::Spacing { after })?;
    Some(edge_mm(train, gap)? - train.gaps()[gap])
}

struct Lister<'a> {
    design: &'a Design,
    limits: &'a Limits,
    sequence: Sequence,
}

impl Lister<'_> {
    fn all(&self) -> Vec<LimitItem> {
        let mut items = Vec::new();
        for (gap, &id) in self.sequence.gaps.iter().enumerate() {
            self.gap(gap, id, &mut items);
        }
        for (place, &id) in self.sequence.surfaces.iter().enumerate() {
            self.surface(place, id, &mut items);
        }
        for (group, fixed) in self.design.housing.fixed.iter().enumerate() {
            if !fixed && let Some(range) = self.limits.range(LimitKind::TravelMm) {
                let at = Address::root().key("groups").index(group);
                items.push(item(LimitKind::TravelMm, at, None, range, Measure::Travel(group)));
            }
        }
        for state in 0..self.design.states.len() {
            self.state(state, &mut items);
        }
        if self.limits.about_the_way() {
            self.way(&mut items);
        }
        items
    }

    /// What is limited along the way between the states.
    fn way(&self, items: &mut Vec<LimitItem>) {
        let limits = self.limits;
        let slide = Slide::of(self.design);
        let any = Range { min: 0.0, max: f64::INFINITY };
        let mut push = |kind, at: Address, range, measure| {
            items.push(item(kind, at, None, range, Measure::Way(measure)));
        };
        for &group in slide.moving() {
            let at = Address::root().key("groups").index(group);
            if let Some(range) = limits.range(LimitKind::TravelMm).filter(|_| limits.between_states)
            {
                let measure = WayMeasure::Position(group);
                push(LimitKind::TravelMm, at.clone(), range, measure);
            }
            if let Some(range) = limits.range(LimitKind::SlopeMmPerRatio) {
                let measure = WayMeasure::Slope(group);
                push(LimitKind::SlopeMmPerRatio, at.clone(), range, measure);
            }
            if limits.is_monotonic(self.design, group) {
                push(LimitKind::Monotonic, at, any, WayMeasure::OneWay(group));
            }
        }
        if !limits.between_states {
            return;
        }
        let states = || Address::root().key("states").every();
        for after in 0..self.design.groups.len() - 1 {
            let at = states().key("spacings_mm").index(after);
            for (kind, measure) in [
                (LimitKind::SpacingMm, WayMeasure::Spacing(after)),
                (LimitKind::EdgeGapMm, WayMeasure::EdgeGap(after)),
            ] {
                push(kind, at.clone(), limits.range(kind).unwrap_or(any), measure);
            }
        }
        if let Some(range) = limits.range(LimitKind::TrackMm) {
            push(LimitKind::TrackMm, states(), range, WayMeasure::Length);
        }
        for end in self.open_ends() {
            let measure = match end {
                Measure::Front => WayMeasure::Front,
                _ => WayMeasure::Rear,
            };
            push(LimitKind::HousingMm, states(), any, measure);
        }
    }

    /// The ends of the housing that the train could leave.
    fn open_ends(&self) -> &'static [Measure] {
        let housing = &self.design.housing;
        let filled = housing.fixed.first() == Some(&true) && housing.fixed.last() == Some(&true);
        match housing.anchor() {
            Anchor::Rear if filled => &[],
            Anchor::Rear => &[Measure::Front],
            Anchor::Front => &[Measure::Rear],
            Anchor::Middle(_) => &[Measure::Front, Measure::Rear],
        }
    }

    fn gap(&self, gap: usize, id: GapId, items: &mut Vec<LimitItem>) {
        let mut push = |kind, at: Address, state, measure| {
            if let Some(range) = self.limits.range(kind) {
                items.push(item(kind, at, state, range, measure));
            }
        };
        match id {
            GapId::Thickness { group, element, glass } => {
                let at = Place::Thickness { group, element, glass }.address();
                push(LimitKind::EdgeThicknessMm, at.clone(), None, Measure::Edge(gap));
                push(LimitKind::CentreThicknessMm, at, None, Measure::Gap(gap));
            }
            GapId::Air { group, after } => {
                let at = Place::Air { group, after }.address();
                push(LimitKind::AirMm, at.clone(), None, Measure::Gap(gap));
                push(LimitKind::EdgeGapMm, at, None, Measure::Edge(gap));
            }
            GapId::Spacing { after } => {
                for state in 0..self.design.states.len() {
                    let at = Place::Spacing { state, after }.address();
                    push(LimitKind::SpacingMm, at.clone(), Some(state), Measure::Gap(gap));
                    push(LimitKind::EdgeGapMm, at, Some(state), Measure::Edge(gap));
                }
            }
        }
    }

    fn surface(&self, place: usize, id: SurfaceId, items: &mut Vec<LimitItem>) {
        let at = Place::Radius(id).address();
        let mut push = |kind, state, measure| {
            if let Some(range) = self.limits.range(kind) {
                items.push(item(kind, at.clone(), state, range, measure));
            }
        };
        push(LimitKind::RadiusMm, None, Measure::Radius(place));
        push(LimitKind::Steepness, None, Measure::Steepness(place));
        for state in 0..self.design.states.len() {
            push(LimitKind::IncidenceDeg, Some(state), Measure::Incidence(place));
            push(LimitKind::FluenceJCm2, Some(state), Measure::Fluence(place));
        }
    }

    fn state(&self, state: usize, items: &mut Vec<LimitItem>) {
        let at = Address::root().key("states").index(state);
        let mut push = |kind, range, measure| {
            items.push(item(kind, at.clone(), Some(state), range, measure));
        };
        if let Some(range) = self.limits.range(LimitKind::TrackMm) {
            push(LimitKind::TrackMm, range, Measure::Length);
        }
        for (kind, ghosts) in [
            (LimitKind::GhostClearanceMm, GhostKind::Single),
            (LimitKind::DoubleGhostClearanceMm, GhostKind::Double),
        ] {
            if let Some(range) = self.limits.range(kind) {
                push(kind, range, Measure::Ghosts(ghosts));
            }
        }
        if self.limits.forbid_internal_focus {
            let range = Range { min: FOCUS_MARGIN, max: f64::INFINITY };
            push(LimitKind::InternalFocus, range, Measure::Focus);
        }
        let inside = Range { min: 0.0, max: f64::INFINITY };
        for &end in self.open_ends() {
            push(LimitKind::HousingMm, inside, end);
        }
    }
}

/// The smallest height, over the height at entry, that a marginal ray may have at any surface
/// where an internal focus is forbidden: a beam squeezed to a hundredth counts as a focus.
pub(crate) const FOCUS_MARGIN: f64 = 0.01;

fn item(
    kind: LimitKind,
    at: Address,
    state: Option<usize>,
    range: Range,
    measure: Measure,
) -> LimitItem {
    LimitItem { kind, at, state, range, measure }
}
