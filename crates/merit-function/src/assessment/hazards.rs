//! What the beam may damage: peak irradiance and fluence at every surface and internal focus, and
//! ghosts, in every state at its first wavelength, against the thresholds of the design. All power
//! and pulse energy is taken to be there: a file does not say how they divide over several
//! wavelengths.
//!
//! Terms are those of ISO 21254-1: energy density (fluence, J/cm²) of a pulse, power density
//! (irradiance, W/cm²) of the mean power, both the peak values of a Gaussian cross-section.

use serde::Serialize;
use surface_model::design::{Design, ZoomState};
use surface_model::document::Address;
use surface_model::gaussian::{GaussianBeam, GaussianPath, peak_per_cm2};
use surface_model::ghost::{Ghost, GhostFocus, GhostWay, fresnel_reflectance, mode_overlap};
use surface_model::laser::{Laser, ThresholdDocument};
use surface_model::place::Place;
use surface_model::train::Train;

use super::finite;

/// A beam that narrows inside a gap to less than this part of its width at both ends comes to an
/// internal focus.
const FOCUS_NARROWS_TO: f64 = 0.5;

/// What one state's beam may damage.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateHazards {
    /// Name of the state.
    pub state: String,
    /// Wavelength the numbers are for, nm.
    pub wavelength_nm: f64,
    /// One entry a surface.
    pub surfaces: Vec<SurfaceHazard>,
    /// Where the beam narrows inside the expander to a focus.
    pub internal_foci: Vec<FocusHazard>,
    /// One entry a ghost: single reflections first, then double.
    pub ghosts: Vec<GhostHazard>,
}

impl StateHazards {
    /// Whether reflected light comes to a focus inside glass.
    #[must_use]
    pub fn has_ghost_in_glass(&self) -> bool {
        self.ghosts.iter().any(|ghost| ghost.clearance_mm.is_some_and(|mm| mm < 0.0))
    }
}

/// How hard a beam is at its centre; what is not given of the laser is absent.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Exposure {
    /// 1/e² diameter, mm.
    pub diameter_mm: f64,
    /// Peak energy density of a pulse, J/cm².
    #[serde(skip_serializing_if = "Option::is_none")]
    pub fluence_j_cm2: Option<f64>,
    /// Peak power density of the mean power, W/cm².
    #[serde(skip_serializing_if = "Option::is_none")]
    pub irradiance_w_cm2: Option<f64>,
    /// Peak power density during a pulse, W/cm².
    #[serde(skip_serializing_if = "Option::is_none")]
    pub pulse_irradiance_w_cm2: Option<f64>,
    /// The larger of fluence and irradiance over its threshold; absent without a threshold.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub of_threshold: Option<f64>,
}

/// The beam at a surface.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SurfaceHazard {
    /// Its place in the design file.
    pub at: Address,
    /// How hard it is hit.
    pub exposure: Exposure,
}

/// The beam at a focus inside the expander.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FocusHazard {
    /// The surface before it.
    pub behind: Address,
    /// Distance from that surface, mm.
    pub from_surface_mm: f64,
    /// Whether it lies in glass.
    pub in_glass: bool,
    /// How hard it is there.
    pub exposure: Exposure,
}

/// Light that surfaces reflect.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct GhostHazard {
    /// The surfaces that reflect, in order.
    pub reflected_at: Vec<Address>,
    /// Share of the power that takes this way, at most.
    pub share: f64,
    /// Its real foci, in order.
    pub foci: Vec<GhostFocusHazard>,
    /// Distance from glass of the nearest focus, mm, negative in glass; absent without a focus.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub clearance_mm: Option<f64>,
    /// The hardest it is at a surface it meets or in glass it crosses.
    pub hardest_on_glass: Option<Exposure>,
    /// Single reflections: 1/e² diameter on leaving the first surface towards the laser, mm.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub back_diameter_mm: Option<f64>,
    /// Single reflections: share of the laser's power that couples back into its own mode, for a
    /// beam with M² of 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub into_laser: Option<f64>,
}

/// A focus of a ghost.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct GhostFocusHazard {
    /// The surface it has met last.
    pub after: Address,
    /// From that surface along the axis, mm; negative towards the laser.
    pub from_surface_mm: f64,
    /// Whether it lies in glass.
    pub in_glass: bool,
    /// Distance from glass, mm; negative in glass.
    pub clearance_mm: f64,
    /// How hard it is there.
    pub exposure: Exposure,
}

/// What every state's beam may damage; nothing unless power or pulse energy is given.
#[must_use]
pub(super) fn hazards(design: &Design) -> Option<Vec<StateHazards>> {
    if !design.beam.laser.has_power() {
        return None;
    }
    Some(
        design.states.iter().filter_map(|state| Inspector::new(design, state)?.inspect()).collect(),
    )
}

/// Where light hits.
#[derive(Clone, Copy)]
enum Medium {
    Air,
    Glass,
    /// A surface that faces air.
    Surface,
}

struct Inspector<'a> {
    design: &'a Design,
    state: &'a ZoomState,
    wavelength_nm: f64,
    train: Train,
    beam: GaussianBeam,
    addresses: Vec<Address>,
    reflectances: Vec<f64>,
}

impl<'a> Inspector<'a> {
    fn new(design: &'a Design, state: &'a ZoomState) -> Option<Self> {
        let wavelength_nm = *state.wavelengths_nm.first()?;
        let train = design.train(state, wavelength_nm).ok()?;
        let sequence = design.sequence();
        let addresses = sequence.surfaces.iter().map(|&id| Place::Radius(id).address()).collect();
        let faces_air = |place: usize| {
            let id = sequence.surfaces[place];
            let last = design.groups[id.group].elements[id.element].glasses.len();
            id.surface == 0 || id.surface == last
        };
        let reflectance = |place: usize| {
            let uncoated = fresnel_reflectance(train.indices()[place], train.indices()[place + 1]);
            design.beam.laser.reflectance.filter(|_| faces_air(place)).unwrap_or(uncoated)
        };
        let reflectances = (0..train.len()).map(reflectance).collect();
        let beam = design.beam.gaussian(wavelength_nm).ok()?;
        Some(Self { design, state, wavelength_nm, train, beam, addresses, reflectances })
    }

    fn laser(&self) -> &Laser {
        &self.design.beam.laser
    }

    fn inspect(&self) -> Option<StateHazards> {
        let mut path = GaussianPath::default();
        path.trace(&self.train, &self.beam).ok()?;
        let count = self.train.len();
        let surface = |place: usize| {
            let radius_mm = path.radius_squared(place).sqrt();
            let exposure = self.exposure(1.0, radius_mm, self.medium_at(place))?;
            Some(SurfaceHazard { at: self.addresses[place].clone(), exposure })
        };
        let ghosts = Ghost::singles(count).chain(Ghost::doubles(count));
        Some(StateHazards {
            state: self.state.name.clone(),
            wavelength_nm: self.wavelength_nm,
            surfaces: (0..count).filter_map(surface).collect(),
            internal_foci: (0..count - 1).filter_map(|gap| self.focus(gap, &path)).collect(),
            ghosts: ghosts.filter_map(|ghost| self.ghost(ghost)).collect(),
        })
    }

    fn is_glass(&self, gap: usize) -> bool {
        use surface_model::sequence::GapId;
        let id = self.design.sequence().gaps.get(gap).copied();
        matches!(id, Some(GapId::Thickness { .. }))
    }

    fn medium_at(&self, surface: usize) -> Medium {
        let glass_before = surface > 0 && self.is_glass(surface - 1);
        let cemented = glass_before && self.is_glass(surface);
        if cemented { Medium::Glass } else { Medium::Surface }
    }

    fn focus(&self, gap: usize, path: &GaussianPath) -> Option<FocusHazard> {
        let (from_surface_mm, radius_mm) = path.narrowest_behind(gap, self.train.gaps()[gap]);
        let ends = path.radius_squared(gap).min(path.radius_squared(gap + 1)).sqrt();
        if radius_mm >= FOCUS_NARROWS_TO * ends {
            return None;
        }
        let in_glass = self.is_glass(gap);
        let medium = if in_glass { Medium::Glass } else { Medium::Air };
        let exposure = self.exposure(1.0, radius_mm, medium)?;
        let behind = self.addresses[gap].clone();
        Some(FocusHazard { behind, from_surface_mm, in_glass, exposure })
    }

    fn ghost(&self, ghost: Ghost) -> Option<GhostHazard> {
        let mut way = GhostWay::new(&self.train, ghost);
        let mut path = GaussianPath::default();
        way.trace(&self.beam).ok()?;
        way.trace_beam(&self.beam, &mut path).ok()?;
        let share = ghost.strength(&self.reflectances);
        let reflected_at = match ghost {
            Ghost::Single { at } => vec![at],
            Ghost::Double { first, second } => vec![first, second],
        };
        let foci = way.foci().filter_map(|focus| self.ghost_focus(&focus, share, &way, &path));
        let exit = path.exit().filter(|_| matches!(ghost, Ghost::Single { .. }));
        let back = exit.map(|exit| exit.radius_mm(0.0));
        Some(GhostHazard {
            reflected_at: reflected_at.iter().map(|&at| self.addresses[at].clone()).collect(),
            share,
            foci: foci.collect(),
            clearance_mm: way.closest().map(|focus| focus.clearance_mm),
            hardest_on_glass: self.hardest_on_glass(ghost, share, &way, &path),
            back_diameter_mm: back.map(|radius| 2.0 * radius),
            into_laser: exit.map(|exit| share * self.overlap(&exit)),
        })
    }

    /// Light that goes back has its slopes along +z; seen along its own way, the wavefront that
    /// would go back into the laser is the laser's own, reversed.
    fn overlap(&self, back: &GaussianBeam) -> f64 {
        let own = (self.beam.radius_mm(0.0), self.beam.curvature_per_mm(0.0));
        let other = (back.radius_mm(0.0), back.curvature_per_mm(0.0));
        mode_overlap(own, other, self.wavelength_nm)
    }

    fn ghost_focus(
        &self,
        focus: &GhostFocus,
        share: f64,
        way: &GhostWay,
        path: &GaussianPath,
    ) -> Option<GhostFocusHazard> {
        let place = focus.after - 1;
        let (_, radius_mm) = path.narrowest_behind(place, way.length_behind_mm(place));
        let medium = if focus.in_glass { Medium::Glass } else { Medium::Air };
        Some(GhostFocusHazard {
            after: self.addresses[way.surfaces()[place]].clone(),
            from_surface_mm: focus.from_surface_mm,
            in_glass: focus.in_glass,
            clearance_mm: focus.clearance_mm,
            exposure: self.exposure(share, radius_mm, medium)?,
        })
    }

    fn hardest_on_glass(
        &self,
        ghost: Ghost,
        share: f64,
        way: &GhostWay,
        path: &GaussianPath,
    ) -> Option<Exposure> {
        let (Ghost::Single { at } | Ghost::Double { first: at, .. }) = ghost;
        let places = at..way.surfaces().len();
        let surfaces = places.clone().skip(1).filter_map(|place| {
            let radius_mm = path.radius_squared(place).sqrt();
            self.exposure(share, radius_mm, self.medium_at(way.surfaces()[place]))
        });
        let inside = places.filter_map(|place| {
            let pair = way.surfaces().get(place..place + 2)?;
            self.is_glass(pair[0].min(pair[1])).then_some(())?;
            let (_, radius_mm) = path.narrowest_behind(place, way.length_behind_mm(place));
            self.exposure(share, radius_mm, Medium::Glass)
        });
        let all = surfaces.chain(inside);
        all.max_by(|a, b| {
            let hardness = |exposure: &Exposure| exposure.of_threshold.unwrap_or(0.0);
            let narrow = b.diameter_mm.total_cmp(&a.diameter_mm);
            hardness(a).total_cmp(&hardness(b)).then(narrow)
        })
    }

    fn exposure(&self, share: f64, radius_mm: f64, medium: Medium) -> Option<Exposure> {
        let laser = self.laser();
        let peak = |dose: f64| finite(peak_per_cm2(share * dose, radius_mm));
        let fluence = laser.pulse_energy_mj.and_then(|mj| peak(1e-3 * mj));
        let irradiance = laser.power_w.and_then(peak);
        let pulse = laser.pulse_length_ns.zip(fluence);
        let bears = [
            laser.thresholds.coating.filter(|_| matches!(medium, Medium::Surface)),
            laser.thresholds.glass.filter(|_| !matches!(medium, Medium::Air)),
        ];
        let shares = bears.iter().flatten().flat_map(|bears| {
            let over = |value: Option<f64>, threshold: Option<f64>| finite(value? / threshold?);
            let fluence = over(fluence, of_fluence(bears, laser));
            [fluence, over(irradiance, bears.irradiance_w_cm2)]
        });
        Some(Exposure {
            diameter_mm: finite(2.0 * radius_mm)?,
            fluence_j_cm2: fluence,
            irradiance_w_cm2: irradiance,
            pulse_irradiance_w_cm2: pulse.and_then(|(ns, fluence)| finite(fluence / ns * 1e9)),
            of_threshold: shares.flatten().reduce(f64::max),
        })
    }
}

fn of_fluence(bears: &ThresholdDocument, laser: &Laser) -> Option<f64> {
    bears.fluence_j_cm2_at(laser.pulse_length_ns)
}
