//! The keys about the laser, checked.

use crate::design::Design;
use crate::design_error::{Allowed, DesignError, DesignFault};
use crate::document::Address;
use crate::laser::{BeamForm, Laser, SQUARE_ROOT_RANGE_NS, ScalingDocument, ThresholdDocument};
use crate::optics_document::OpticsDocument;

const fn above_zero(high: f64, unit: &'static str) -> Allowed {
    Allowed { low: 0.0, high, above_low: true, unit }
}

const QUALITY: Allowed = Allowed { low: 1.0, high: 1000.0, above_low: false, unit: "" };
const DISTANCE: Allowed = Allowed { low: -1e6, high: 1e6, above_low: false, unit: " mm" };
const POINTING: Allowed = Allowed { low: 0.0, high: 100.0, above_low: false, unit: " mrad" };
const REFLECTANCE: Allowed = Allowed { low: 0.0, high: 100.0, above_low: false, unit: " %" };
const SCALED: Allowed = Allowed {
    low: SQUARE_ROOT_RANGE_NS.0,
    high: SQUARE_ROOT_RANGE_NS.1,
    above_low: false,
    unit: " ns",
};

/// What the file says of the laser, and what is wrong with it.
pub(crate) fn laser(document: &OpticsDocument) -> (Laser, Vec<DesignFault>) {
    let beam = &document.beam;
    let mut faults = Vec::new();
    let at = Address::root().key("beam");
    let numbers = [
        ("m_squared", "M²", beam.m_squared, QUALITY),
        ("divergence_mrad", "the divergence", beam.divergence_mrad, above_zero(1000.0, " mrad")),
        ("waist_diameter_mm", "the waist", beam.waist_diameter_mm, above_zero(1e6, " mm")),
        ("waist_distance_mm", "the distance of the waist", beam.waist_distance_mm, DISTANCE),
        ("power_w", "the power", beam.power_w, above_zero(1e9, " W")),
        ("pulse_energy_mj", "the pulse energy", beam.pulse_energy_mj, above_zero(1e9, " mJ")),
        ("pulse_length_ns", "the pulse length", beam.pulse_length_ns, above_zero(1e9, " ns")),
        ("pointing_mrad", "the pointing angle", beam.pointing_mrad, POINTING),
    ];
    for (key, quantity, found, allowed) in numbers {
        check(at.clone().key(key), quantity, found, allowed, &mut faults);
    }
    if beam.pulse_length_ns.is_some() && beam.pulse_energy_mj.is_none() {
        let (key, needed) = ("pulse_length_ns", "pulse_energy_mj");
        let at = at.key(key);
        faults.push(DesignFault { at, error: DesignError::Needs { key, needed } });
    }
    let thresholds = document.damage_thresholds.unwrap_or_default();
    let at = Address::root().key("damage_thresholds");
    for (key, given) in [("coating", thresholds.coating), ("glass", thresholds.glass)] {
        if let Some(given) = given {
            threshold(&at.clone().key(key), &given, beam.pulse_length_ns, &mut faults);
        }
    }
    let reflectance = document.coating.map(|coating| coating.reflectance_percent);
    let at = Address::root().key("coating").key("reflectance_percent");
    check(at, "the reflectance", reflectance, REFLECTANCE, &mut faults);
    let form = BeamForm {
        m_squared: beam.m_squared,
        divergence_mrad: beam.divergence_mrad,
        waist_diameter_mm: beam.waist_diameter_mm,
        waist_distance_mm: beam.waist_distance_mm,
    };
    let laser = Laser {
        form,
        power_w: beam.power_w,
        pulse_energy_mj: beam.pulse_energy_mj,
        pulse_length_ns: beam.pulse_length_ns,
        pointing_mrad: beam.pointing_mrad,
        reflectance: reflectance.map(|percent| 0.01 * percent),
        thresholds,
    };
    (laser, faults)
}

/// Whether the keys make a beam at every wavelength of every state; told once.
pub(crate) fn beam_fault(design: &Design) -> Option<DesignFault> {
    let form = &design.beam.laser.form;
    let used = design.states.iter().flat_map(|state| &state.wavelengths_nm);
    let error = used.filter_map(|&nm| design.beam.gaussian(nm).err()).next()?;
    let keys = [
        ("m_squared", form.m_squared),
        ("divergence_mrad", form.divergence_mrad),
        ("waist_diameter_mm", form.waist_diameter_mm),
        ("waist_distance_mm", form.waist_distance_mm),
    ];
    let last = keys.iter().rev().find(|(_, given)| given.is_some());
    let at = Address::root().key("beam");
    let at = last.map_or_else(|| at.clone(), |(key, _)| at.clone().key(*key));
    Some(DesignFault { at, error: DesignError::BeamForm(error) })
}

fn check(
    at: Address,
    quantity: &'static str,
    found: Option<f64>,
    allowed: Allowed,
    faults: &mut Vec<DesignFault>,
) {
    if let Some(found) = found.filter(|&found| !allowed.contains(found)) {
        faults
            .push(DesignFault { at, error: DesignError::OutOfRange { quantity, found, allowed } });
    }
}

fn threshold(
    at: &Address,
    given: &ThresholdDocument,
    beam_pulse_ns: Option<f64>,
    faults: &mut Vec<DesignFault>,
) {
    let numbers = [
        ("fluence_j_cm2", "a threshold", given.fluence_j_cm2, above_zero(1e9, " J/cm²")),
        ("irradiance_w_cm2", "a threshold", given.irradiance_w_cm2, above_zero(1e15, " W/cm²")),
        ("pulse_length_ns", "the pulse length", given.pulse_length_ns, above_zero(1e9, " ns")),
    ];
    for (key, quantity, found, allowed) in numbers {
        check(at.clone().key(key), quantity, found, allowed, faults);
    }
    let mut needs = |key, needed| {
        let at = at.clone().key(key);
        faults.push(DesignFault { at, error: DesignError::Needs { key, needed } });
    };
    if given.scaling == Some(ScalingDocument::SquareRoot) {
        if given.fluence_j_cm2.is_none() {
            needs("scaling", "fluence_j_cm2");
        }
        if given.pulse_length_ns.is_none() {
            needs("scaling", "pulse_length_ns");
        }
        let quantity = "a pulse length for the square root";
        let here = at.clone().key("pulse_length_ns");
        check(here, quantity, given.pulse_length_ns, SCALED, faults);
        match beam_pulse_ns {
            None => {
                let (key, needed) = ("scaling", "beam.pulse_length_ns");
                let at = at.clone().key(key);
                faults.push(DesignFault { at, error: DesignError::Needs { key, needed } });
            }
            Some(_) => {
                let at = Address::root().key("beam").key("pulse_length_ns");
                check(at, quantity, beam_pulse_ns, SCALED, faults);
            }
        }
    }
}
