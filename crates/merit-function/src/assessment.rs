//! The assessment: every state's numbers and every limit, of a design as it stands.
//!
//! Nothing here is sampled as the optimiser samples: wavefronts are integrated to convergence.

use serde::Serialize;
use surface_model::bundle::Bundle;
use surface_model::design::{Design, ZoomState};
use surface_model::document::Address;
use surface_model::first_order::first_order;
use surface_model::paraxial::ParaxialRay;
use surface_model::train::Train;
use surface_model::wavefront::{TracedBeam, wavefront_error};

use crate::goals::Goals;
use crate::limit_item::{LimitItem, StateView};
use crate::limits::LimitKind;
use crate::wishes::Wishes;

/// What `assess` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Assessment {
    /// Always `drawtube-assessment/1`.
    pub format: &'static str,
    /// The design's title.
    pub title: String,
    /// Whether every goal and every limit is met in every state.
    pub meets: bool,
    /// The merit function, wavefronts integrated to convergence.
    pub merit: Merit,
    /// One entry a zoom state.
    pub states: Vec<StateAssessment>,
    /// One entry an element.
    pub elements: Vec<ElementAssessment>,
    /// One entry a limited quantity.
    pub limits: Vec<LimitAssessment>,
    /// What a careful reader should know and no limit says.
    pub warnings: Vec<String>,
}

/// The merit function's parts; `None` where a state cannot be evaluated.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Merit {
    /// Goals and limits together.
    pub total: Option<f64>,
    /// Σ over states of weight × Σ (miss/within)².
    pub goals: Option<f64>,
    /// What crossed limits add.
    pub limits: f64,
}

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

/// One element's numbers.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ElementAssessment {
    /// Its place in the design file.
    pub at: Address,
    /// Axial distance of neighbouring surfaces at the clear radius, mm; `None` where a surface does
    /// not reach it.
    pub edge_thicknesses_mm: Vec<Option<f64>>,
    /// Centre thicknesses, mm.
    pub centre_thicknesses_mm: Vec<f64>,
    /// Effective focal length at the first wavelength, mm; `None` without power.
    pub focal_length_mm: Option<f64>,
    /// Largest diameter that traced rays take up on its surfaces, over all states, mm.
    pub footprint_mm: Option<f64>,
}

/// One limited quantity.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LimitAssessment {
    /// Which limit.
    pub limit: LimitKind,
    /// What it applies to.
    pub at: Address,
    /// Name of the state, where the value is one state's.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub state: Option<String>,
    /// The value; `None` where it cannot be measured, or is infinite (the radius of a flat).
    pub value: Option<f64>,
    /// Smallest value allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub min: Option<f64>,
    /// Largest value allowed.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub max: Option<f64>,
    /// Whether it is kept, to the tolerance of its kind.
    pub met: bool,
}

/// Assesses a design against what is wanted of it.
#[must_use]
pub fn assess(design: &Design, wishes: &Wishes) -> Assessment {
    let states: Vec<StateAssessment> = design
        .states
        .iter()
        .zip(&wishes.states)
        .map(|(state, goals)| assess_state(design, state, goals))
        .collect();
    let views: Option<Vec<StateView>> =
        design.states.iter().map(|state| view(design, state)).collect();
    let views = views.unwrap_or_default();
    let items = LimitItem::all(design, &wishes.limits);
    let judged: Vec<(LimitAssessment, f64)> =
        items.iter().map(|item| judge(item, design, &views)).collect();
    let limits_merit: f64 = judged.iter().map(|(_, merit)| merit).sum();
    let limits: Vec<LimitAssessment> = judged.into_iter().map(|(limit, _)| limit).collect();
    let goals: Option<f64> = states.iter().map(|state| state.merit).sum();
    let elements = assess_elements(design, &views);
    Assessment {
        format: "drawtube-assessment/1",
        title: design.title.clone(),
        meets: states.iter().all(|state| state.met) && limits.iter().all(|limit| limit.met),
        merit: Merit {
            total: goals.map(|goals| goals + limits_merit),
            goals,
            limits: limits_merit,
        },
        warnings: crate::warnings::warnings(design, &elements, &states),
        states,
        elements,
        limits,
    }
}

fn finite(value: f64) -> Option<f64> {
    value.is_finite().then_some(value)
}

/// A state's train at its first wavelength with the rays that limits are measured on. `None`
/// where a glass is not known at the wavelength, which a resolved design rules out.
fn view(design: &Design, state: &ZoomState) -> Option<StateView> {
    let train = design.train(state, *state.wavelengths_nm.first()?).ok()?;
    let mut paraxial = ParaxialRay::default();
    let marginal = paraxial.trace(&train, 1.0, 0.0).map(|()| paraxial.heights().to_vec());
    let edge_mm = design.beam.edge_mm();
    let mut bundle = Bundle::new();
    let traced = bundle.trace(&train, &[edge_mm], &mut [0.0]).is_ok();
    let heights = traced.then(|| bundle.heights_at_surfaces(0).map(|y| y / edge_mm).collect());
    let angles = traced.then(|| {
        bundle.cos_incidences(0).map(|cosine| cosine.min(1.0).acos().to_degrees()).collect()
    });
    Some(StateView {
        train,
        marginal: marginal.unwrap_or_default(),
        edge_ray: heights,
        incidence_deg: angles,
    })
}

fn assess_state(design: &Design, state: &ZoomState, goals: &Goals) -> StateAssessment {
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
    let (wavefront, fault) = wavefronts(design, state);
    let misses = misses(goals, ratio_error_percent, exit_slope_urad, &wavefront);
    let positions = design.groups.iter().zip(design.positions_mm(state));
    StateAssessment {
        name: state.name.clone(),
        ratio_wanted: state.ratio,
        ratio,
        ratio_error_percent,
        exit_slope_urad,
        track_mm: design.length_mm(state),
        spacings_mm: state.spacings_mm.clone(),
        positions_mm: positions.map(|(group, z)| (group.name.clone(), z.into())).collect(),
        exit_diameter_mm: ratio.map(|ratio| ratio.abs() * design.beam.diameter_mm),
        wavefront,
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
    let mut misses = Vec::new();
    if let Some(within) = goals.wavefront_rms_waves {
        misses.extend(wavefront.iter().map(|w| w.rms_waves.map(|rms| rms / within)));
    }
    if let Some(within) = goals.ratio_percent {
        misses.push(ratio_error_percent.map(|error| error / within));
    }
    if let Some(within) = goals.exit_slope_urad {
        misses.push(exit_slope_urad.map(|slope| slope / within));
    }
    misses
}

fn wavefronts(design: &Design, state: &ZoomState) -> (Vec<WavefrontAssessment>, Option<String>) {
    let mut fault = None;
    let mut of = |nm: f64| -> WavefrontAssessment {
        let mut tell = |reason: String| {
            fault.get_or_insert(format!("at {nm} nm {reason}"));
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
                .and_then(|beam| wavefront_error(&train, &beam))
                .map_err(|error| tell(error.to_string()))
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

/// A limit's assessment, and what it adds to the merit. A limit that cannot be measured is not
/// met, and adds what one crossed by its whole range would.
fn judge(item: &LimitItem, design: &Design, views: &[StateView]) -> (LimitAssessment, f64) {
    let value = if views.is_empty() { None } else { item.value(design, views) };
    let crossed_by = value.map(|value| item.range.crossed_by(value));
    let tolerance = item.kind.tolerance();
    let at_names_state = item.at.steps().first() == Some(&"states");
    let state = item.state.filter(|_| !at_names_state).map(|k| design.states[k].name.clone());
    let merit = crossed_by.map_or(UNMEASURED, |by| item.kind.merit_of_crossing(by));
    let assessment = LimitAssessment {
        limit: item.kind,
        at: item.at.clone(),
        state,
        value: value.and_then(finite),
        min: finite(item.range.min),
        max: finite(item.range.max),
        met: crossed_by.is_some_and(|by| by <= tolerance),
    };
    (assessment, merit)
}

/// What a limit adds to the merit that cannot be measured at all.
const UNMEASURED: f64 = 1e6;

fn focal_length_mm(train: &Train, part: std::ops::Range<usize>) -> Option<f64> {
    first_order(train, part).ok()?.focal.map(|focal| focal.effective_focal_length_mm)
}

fn assess_elements(design: &Design, views: &[StateView]) -> Vec<ElementAssessment> {
    let Some(view) = views.first() else { return Vec::new() };
    let edge_mm = design.beam.edge_mm();
    let mut place = 0;
    let mut out = Vec::new();
    for (g, group) in design.groups.iter().enumerate() {
        for (e, element) in group.elements.iter().enumerate() {
            let surfaces = place..place + element.surfaces.len();
            place = surfaces.end;
            let gaps = surfaces.start..surfaces.end - 1;
            let rays = views.iter().map(|view| {
                let heights = view.edge_ray.as_ref()?;
                Some(surfaces.clone().map(|s| heights[s].abs()).fold(0.0, f64::max))
            });
            let footprint: Option<f64> =
                rays.collect::<Option<Vec<f64>>>().map(|r| r.into_iter().fold(0.0, f64::max));
            out.push(ElementAssessment {
                at: Address::root().key("groups").index(g).key("elements").index(e),
                edge_thicknesses_mm: gaps
                    .map(|gap| crate::edge::edge_mm(&view.train, gap))
                    .collect(),
                centre_thicknesses_mm: element.thicknesses_mm.clone(),
                focal_length_mm: focal_length_mm(&view.train, surfaces),
                footprint_mm: footprint.map(|height| 2.0 * height * edge_mm),
            });
        }
    }
    out
}
