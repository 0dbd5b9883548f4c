//! One zoom state: ratio, collimation, wavefront.

use serde::Serialize;
use surface_model::design::{Design, ZoomState};
use surface_model::gaussian::{GaussianBeam, GaussianPath};
use surface_model::paraxial::ParaxialRay;
use surface_model::skew::{RayStart, trace_ray};
use surface_model::traced_beam::TracedBeam;
use surface_model::train::Train;
use surface_model::wavefront::{WavefrontFault, wavefront_error};

use super::finite;
use super::surface::{self, SurfaceAssessment};
use crate::goals::Goals;
use crate::limit_item::StateView;

/// One zoom state's numbers.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StateAssessment {
    /// Its name.
    pub name: String,
    /// Ratio wanted.
    pub ratio_wanted: f64,
    /// Paraxial ratio at the first wavelength.
    pub ratio: Option<f64>,
    /// (ratio − wanted)/wanted in per cent.
    pub ratio_error_percent: Option<f64>,
    /// Paraxial exit slope of the ray that enters at the 1/e² radius, µrad.
    pub exit_slope_urad: Option<f64>,
    /// Divergence of the real beam behind the last surface, full angle, mrad, without the design's
    /// aberration.
    pub divergence_mrad: Option<f64>,
    /// 1/e² diameter of the real beam at the range of the goal, mm; absent without that goal.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub diameter_at_range_mm: Option<f64>,
    /// Where the ray at the 1/e² radius meets the axis, m behind the last vertex, negative before
    /// it; absent unless a focus is wanted.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub exit_focus_m: Option<f64>,
    /// Miss of that focus by vergence, in m at the focus wanted; absent likewise.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub exit_focus_error_m: Option<f64>,
    /// First vertex to last vertex, mm.
    pub track_mm: f64,
    /// Air between the groups, mm.
    pub spacings_mm: Vec<f64>,
    /// Where each group's first vertex stands in the housing, mm.
    pub positions_mm: serde_json::Map<String, serde_json::Value>,
    /// 1/e² diameter behind the last surface, paraxial, mm.
    pub exit_diameter_mm: Option<f64>,
    /// One entry a wavelength.
    pub wavefront: Vec<WavefrontAssessment>,
    /// One entry a surface: third-order aberrations and angle of incidence.
    pub surfaces: Vec<SurfaceAssessment>,
    /// Whether every goal of the state is met.
    pub met: bool,
    /// What the state adds to the merit.
    pub merit: Option<f64>,
    /// Why rays fail, if any do.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub fault: Option<String>,
}

/// Wavefront error at one wavelength.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct WavefrontAssessment {
    /// Wavelength, nm.
    pub wavelength_nm: f64,
    /// Weighted RMS, waves.
    pub rms_waves: Option<f64>,
    /// Peak to valley, waves.
    pub pv_waves: Option<f64>,
}

/// A state's train at its first wavelength with the rays that limits are measured on. `None`
/// where a glass is not known at the wavelength, which a resolved design rules out.
pub(super) fn view(
    design: &Design,
    state: &ZoomState,
    positions_mm: Vec<f64>,
) -> Option<StateView> {
    let train = design.train(state, *state.wavelengths_nm.first()?).ok()?;
    let mut paraxial = ParaxialRay::default();
    let marginal = paraxial.trace(&train, 1.0, 0.0).map(|()| paraxial.heights().to_vec());
    let edge_mm = design.beam.edge_mm();
    let edge = trace_ray(&train, RayStart::parallel(edge_mm)).ok();
    let heights = edge
        .as_ref()
        .map(|ray| ray.points().iter().map(|point| point.position_mm[1] / edge_mm).collect());
    let angles = edge
        .as_ref()
        .map(|ray| ray.points().iter().map(|point| point.incidence_rad.to_degrees()).collect());
    Some(StateView {
        train,
        beam: design.beam.gaussian(*state.wavelengths_nm.first()?).ok(),
        positions_mm,
        marginal: marginal.unwrap_or_default(),
        edge_ray: heights,
        incidence_deg: angles,
    })
}

/// Assesses one state.
pub(super) fn assess(
    design: &Design,
    state: &ZoomState,
    positions_mm: &[f64],
    goals: &Goals,
) -> StateAssessment {
    let first = state.wavelengths_nm.first().and_then(|&nm| design.train(state, nm).ok());
    let paraxial = first.as_ref().and_then(|train| {
        let mut ray = ParaxialRay::default();
        ray.trace(train, 1.0, 0.0).ok().map(|()| ray)
    });
    let radius_mm = design.beam.radius_mm();
    let ratio = paraxial.as_ref().and_then(ParaxialRay::ratio);
    let exit_slope_urad =
        paraxial.as_ref().and_then(|ray| finite(ray.exit_slope()? * radius_mm * 1e6));
    let ratio_error_percent = ratio.map(|ratio| (ratio / state.ratio - 1.0) * 100.0);
    let (wavefront, fault) = wavefronts(design, state, goals);
    let beam = first.as_ref().and_then(|train| ExitBeam::of(design, state, train));
    let mut misses = misses(goals, ratio_error_percent, exit_slope_urad, &wavefront);
    misses.extend(beam_misses(goals, beam.as_ref()));
    let at_range = goals.diameter_at_range_mm.zip(beam.as_ref());
    let focus = goals.exit_focus_m.zip(beam.as_ref());
    let positions = design.groups.iter().zip(positions_mm);
    StateAssessment {
        name: state.name.clone(),
        ratio_wanted: state.ratio,
        ratio,
        ratio_error_percent,
        exit_slope_urad,
        divergence_mrad: beam.as_ref().map(ExitBeam::divergence_mrad),
        diameter_at_range_mm: at_range
            .and_then(|(goal, beam)| finite(beam.diameter_mm(goal.range_m))),
        exit_focus_m: focus.and_then(|(_, beam)| finite(1.0 / beam.vergence_per_m)),
        exit_focus_error_m: focus
            .and_then(|(goal, beam)| finite(goal.miss(beam.vergence_per_m) * goal.within_m)),
        track_mm: design.length_mm(state),
        spacings_mm: state.spacings_mm.clone(),
        positions_mm: positions.map(|(group, &z)| (group.name.clone(), z.into())).collect(),
        exit_diameter_mm: ratio.map(|ratio| ratio.abs() * design.beam.diameter_mm),
        wavefront,
        surfaces: first.map_or_else(Vec::new, |train| surface::assess(design, &train)),
        met: fault.is_none()
            && misses.iter().all(|miss| miss.is_some_and(|miss| miss.abs() <= 1.0)),
        merit: misses
            .iter()
            .map(|miss| miss.map(|miss| goals.weight * miss * miss))
            .sum::<Option<f64>>()
            .filter(|_| fault.is_none()),
        fault,
    }
}

/// Each goal's miss in units of its `within`; `None` where it has no value.
fn misses(
    goals: &Goals,
    ratio_error_percent: Option<f64>,
    exit_slope_urad: Option<f64>,
    wavefront: &[WavefrontAssessment],
) -> Vec<Option<f64>> {
    let Goals {
        wavefront_rms_waves,
        ratio_percent,
        exit_slope_urad: slope_urad,
        // In `beam_misses`.
        divergence_mrad: _,
        diameter_at_range_mm: _,
        exit_focus_m: _,
        weight: _,
    } = *goals;
    let mut misses = Vec::new();
    if let Some(within) = wavefront_rms_waves {
        misses.extend(wavefront.iter().map(|w| w.rms_waves.map(|rms| rms / within)));
    }
    if let Some(within) = ratio_percent {
        misses.push(ratio_error_percent.map(|error| error / within));
    }
    if let Some(within) = slope_urad {
        misses.push(exit_slope_urad.map(|slope| slope / within));
    }
    misses
}

/// The real beam behind the last surface, at the first wavelength.
struct ExitBeam {
    beam: GaussianBeam,
    /// Vergence of the ray at the 1/e² radius, 1/m, positive when it converges.
    vergence_per_m: f64,
}

impl ExitBeam {
    fn of(design: &Design, state: &ZoomState, train: &Train) -> Option<Self> {
        let entrance = design.beam.gaussian(*state.wavelengths_nm.first()?).ok()?;
        let mut path = GaussianPath::default();
        path.trace(train, &entrance).ok()?;
        let (height, slope) = entrance.edge_ray();
        let mut edge = ParaxialRay::default();
        edge.trace(train, height, slope).ok()?;
        let vergence = -1e3 * edge.exit_slope()? / edge.heights().last()?;
        Some(Self { beam: path.exit()?, vergence_per_m: finite(vergence)? })
    }

    fn divergence_mrad(&self) -> f64 {
        2e3 * self.beam.half_divergence_rad
    }

    fn diameter_mm(&self, range_m: f64) -> f64 {
        2.0 * self.beam.radius_mm(1e3 * range_m)
    }
}

/// The same misses for the goals about the real beam.
fn beam_misses(goals: &Goals, beam: Option<&ExitBeam>) -> Vec<Option<f64>> {
    let divergence =
        goals.divergence_mrad.map(|within| beam.map(|beam| beam.divergence_mrad() / within));
    let range = goals
        .diameter_at_range_mm
        .map(|goal| beam.map(|beam| goal.miss(beam.diameter_mm(goal.range_m))));
    let focus = goals.exit_focus_m.map(|goal| beam.map(|beam| goal.miss(beam.vergence_per_m)));
    [divergence, range, focus].into_iter().flatten().collect()
}

fn wavefronts(
    design: &Design,
    state: &ZoomState,
    goals: &Goals,
) -> (Vec<WavefrontAssessment>, Option<String>) {
    let mut fault = None;
    let mut of = |nm: f64| -> WavefrontAssessment {
        let mut tell = |reason: String| {
            fault.get_or_insert(format!("at {nm} nm: {reason}"));
        };
        let train: Option<Train> = match design.train(state, nm) {
            Ok(train) => Some(train),
            Err(error) => {
                tell(error.to_string());
                None
            }
        };
        let error = train.and_then(|train| {
            TracedBeam::new(design.beam.radius_mm(), design.beam.traced_to, nm)
                .map_err(WavefrontFault::Beam)
                .map(|beam| match goals.exit_focus_m {
                    Some(focus) => beam.focused(1e3 * focus.wanted_m),
                    None => beam,
                })
                .and_then(|beam| wavefront_error(&train, &beam))
                .map_err(|error| tell(reason(design, &error)))
                .ok()
        });
        WavefrontAssessment {
            wavelength_nm: nm,
            rms_waves: error.map(|error| error.rms_waves),
            pv_waves: error.map(|error| error.pv_waves),
        }
    };
    (state.wavelengths_nm.iter().map(|&nm| of(nm)).collect(), fault)
}

/// A wavefront's fault with the surface by its address.
fn reason(design: &Design, fault: &WavefrontFault) -> String {
    let WavefrontFault::Ray { height_mm, fault } = fault else {
        return fault.to_string();
    };
    format!("entering at {height_mm:.4} mm, {}", design.fault_in_words(fault))
}
