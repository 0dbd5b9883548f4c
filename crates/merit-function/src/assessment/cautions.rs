//! What must be said wherever a laser's power is, and warnings about what it may damage.

use surface_model::design::Design;
use surface_model::document::Address;
use surface_model::laser::{Laser, SQUARE_ROOT_RANGE_NS, ScalingDocument, ThresholdDocument};
use surface_model::place::Place;

use super::StateHazards;

/// Cautions in plain sentences; none where neither power nor pulse energy is given.
pub(super) fn cautions(laser: &Laser) -> Vec<String> {
    if !laser.has_power() {
        return Vec::new();
    }
    let mut out = vec![
        "the expanded, collimated beam stays dangerous to the eye and skin over a long way, and \
         reflections from every surface do too; exposure limits, hazard distances, eyewear and \
         enclosures are for your laser safety officer to judge, under IEC 60825-1 or your local \
         standard and rules: nothing here is a safety assessment"
            .to_owned(),
        "fluence and irradiance are those of an ideal Gaussian beam on clean surfaces; hot spots, \
         dust and misalignment make them higher: hold every number against the maker's own damage \
         data for your wavelength, pulse length, pulse rate and spot size (ISO 21254), with a \
         margin that you can answer for"
            .to_owned(),
    ];
    let thresholds = [laser.thresholds.coating, laser.thresholds.glass];
    if thresholds.iter().flatten().next().is_none() {
        out.push(
            "the file gives no damage_thresholds, so nothing is judged; enter your maker's own"
                .to_owned(),
        );
    }
    let named = [("coating", laser.thresholds.coating), ("glass", laser.thresholds.glass)];
    for (name, threshold) in named {
        out.extend(threshold.and_then(|threshold| of_pulse_length(name, &threshold, laser)));
    }
    if laser.reflectance.is_none() {
        out.push(
            "the file gives no coating, so surfaces that face air reflect what bare glass does \
             (Fresnel)"
                .to_owned(),
        );
    }
    out
}

/// How a threshold comes to the pulse length of the beam.
fn of_pulse_length(name: &str, threshold: &ThresholdDocument, laser: &Laser) -> Option<String> {
    let (from, to) = (threshold.pulse_length_ns?, laser.pulse_length_ns?);
    threshold.fluence_j_cm2?;
    let (low, high) = SQUARE_ROOT_RANGE_NS;
    if threshold.scaling == Some(ScalingDocument::SquareRoot) {
        return Some(format!(
            "the {name}'s threshold fluence is scaled from {from} ns to {to} ns by the square root \
             of the pulse length, as the file asks: a rule for heat that diffuses away, from about \
             {low} ns (B. C. Stuart et al., Phys. Rev. Lett. 74, 2248 (1995)) to about {high} ns \
             (common practice), and no substitute for a test at {to} ns"
        ));
    }
    let differs = (from / to - 1.0).abs() > 0.01;
    differs.then(|| {
        format!(
            "the {name}'s threshold fluence was measured at {from} ns and is held against pulses \
             of {to} ns as it is; ask the maker, or ask for \"scaling\""
        )
    })
}

/// In each state the place that is hit hardest beyond its threshold, and over all states the ghost
/// that comes to a focus deepest in glass.
pub(super) fn warnings(design: &Design, states: &[StateHazards]) -> Vec<String> {
    let hardest = states.iter().filter_map(|state| beyond_threshold(design, state));
    hardest.chain(ghost_in_glass(design, states)).collect()
}

fn ghost_in_glass(design: &Design, states: &[StateHazards]) -> Option<String> {
    let how_many = states.iter().filter(|state| state.has_ghost_in_glass()).count();
    let ghosts = states.iter().flat_map(|state| state.ghosts.iter().map(move |g| (state, g)));
    let in_glass = ghosts.filter_map(|(state, ghost)| {
        Some((state, ghost, ghost.clearance_mm.filter(|&clearance| clearance < 0.0)?))
    });
    let (state, ghost, clearance) = in_glass.min_by(|a, b| a.2.total_cmp(&b.2))?;
    let at: Vec<String> =
        ghost.reflected_at.iter().map(|at| with_names(design, at).to_string()).collect();
    let limit = match ghost.reflected_at.len() {
        1 => "ghost_clearance_mm",
        _ => "double_ghost_clearance_mm",
    };
    let percent = 100.0 * ghost.share;
    // Two digits that count: a coated surface's share is never told as none.
    let places = (1.0 - percent.log10().floor()).clamp(2.0, 15.0) as usize;
    Some(format!(
        "light that surfaces reflect comes to a focus inside glass in {how_many} of {} states: \
         deepest in {}, reflected at {}, {:.2} mm from the nearest surface, with at most {percent:.places$} \
         % of the power; set {limit} as a limit and optimise",
        states.len(),
        state.state,
        at.join(" and "),
        -clearance,
    ))
}

fn beyond_threshold(design: &Design, state: &StateHazards) -> Option<String> {
    let surfaces = state.surfaces.iter().map(|hit| ("the beam at", &hit.at, &hit.exposure));
    let foci = state
        .internal_foci
        .iter()
        .map(|focus| ("the internal focus behind", &focus.behind, &focus.exposure));
    let ghosts = state.ghosts.iter().filter_map(|ghost| {
        Some(("the ghost from", ghost.reflected_at.first()?, ghost.hardest_on_glass.as_ref()?))
    });
    let beyond = surfaces.chain(foci).chain(ghosts).filter_map(|(what, at, exposure)| {
        Some((what, at, exposure.of_threshold.filter(|&times| times > 1.0)?))
    });
    let (what, at, times) = beyond.max_by(|a, b| a.2.total_cmp(&b.2))?;
    Some(format!(
        "{}: {what} {} reaches {times:.2} times the threshold given for it; widen the beam there, \
         or set fluence_j_cm2 or ghost_clearance_mm as a limit and optimise",
        state.state,
        with_names(design, at)
    ))
}

/// A surface's address as people read it.
fn with_names(design: &Design, at: &Address) -> Address {
    let ids = design.sequence().surfaces;
    let id = ids.into_iter().find(|&id| Place::Radius(id).address() == *at);
    id.map_or_else(
        || at.clone(),
        |id| design.element_address(id.group, id.element).key("radii_mm").index(id.surface),
    )
}
