//! A design as the plain numbers the Ceres program reads; the other side is
//! `peers/ceres/problem.h`.

use std::fmt::Write;

use driver::design_file::DesignFile;
use driver::optimise::merit_of;
use merit_function::block::Bounds;
use merit_function::problem::RAYS;
use merit_function::variables::{SharedVariable, Variables};
use surface_model::design::Design;
use surface_model::place::Place;
use surface_model::quadrature::beam_sample;
use surface_model::sequence::{GapId, Sequence};
use surface_model::surface::asphere_power;

use crate::Failure;

/// Asphere terms the peer knows: r⁴ to r¹⁰.
const TERMS: usize = 4;

/// The text.
pub(crate) fn text(file: &DesignFile) -> Result<String, Failure> {
    let merit = merit_of(file)?;
    let (design, variables) = (&file.design, merit.variables());
    let sequence = design.sequence();
    let mut out = String::new();
    rays(&mut out, design)?;
    glass(&mut out, design, &sequence)?;
    states(&mut out, file)?;
    free(&mut out, variables, &sequence, design.states.len())?;
    let closed = variables.dependents(0).next().is_some();
    writeln!(out, "closed {} {:?}", u8::from(closed), design.housing.track_mm)?;
    Ok(out)
}

fn rays(out: &mut String, design: &Design) -> Result<(), Failure> {
    let beam = &design.beam;
    let sample = beam_sample(beam.radius_mm(), beam.traced_to, RAYS);
    writeln!(out, "radius_mm {:?}\nrays {RAYS}", beam.radius_mm())?;
    numbers(out, &sample.heights_mm)?;
    numbers(out, &sample.weights)
}

fn numbers(out: &mut String, numbers: &[f64]) -> Result<(), Failure> {
    for number in numbers {
        write!(out, "{number:?} ")?;
    }
    Ok(writeln!(out)?)
}

fn glass(out: &mut String, design: &Design, sequence: &Sequence) -> Result<(), Failure> {
    writeln!(out, "surfaces {}", sequence.surfaces.len())?;
    for id in &sequence.surfaces {
        let surface = &design.groups[id.group].elements[id.element].surfaces[id.surface];
        write!(out, "{:?} {:?} {TERMS}", surface.curvature, surface.conic)?;
        for term in 0..TERMS {
            write!(out, " {} {:?}", asphere_power(term), surface.asphere[term])?;
        }
        writeln!(out)?;
    }
    writeln!(out, "gaps {}", sequence.gaps.len())?;
    for gap in &sequence.gaps {
        match *gap {
            GapId::Thickness { group, element, glass } => {
                let length = design.groups[group].elements[element].thicknesses_mm[glass];
                writeln!(out, "-1 {length:?}")?;
            }
            GapId::Air { group, after } => {
                writeln!(out, "-1 {:?}", design.groups[group].airs_mm[after])?;
            }
            GapId::Spacing { after } => writeln!(out, "{after} 0")?,
        }
    }
    Ok(())
}

fn states(out: &mut String, file: &DesignFile) -> Result<(), Failure> {
    let design = &file.design;
    writeln!(out, "states {} {}", design.states.len(), design.groups.len() - 1)?;
    for (state, goals) in design.states.iter().zip(&file.wishes.states) {
        let all = [goals.wavefront_rms_waves, goals.ratio_percent, goals.exit_slope_urad];
        write!(out, "{:?} {:?} ", goals.weight, state.ratio)?;
        numbers(out, &all.map(|within| within.unwrap_or(0.0)))?;
        writeln!(out, "{}", state.wavelengths_nm.len())?;
        for &nm in &state.wavelengths_nm {
            write!(out, "{nm:?} ")?;
            numbers(out, design.train(state, nm)?.indices())?;
        }
        numbers(out, &state.spacings_mm)?;
    }
    Ok(())
}

fn free(
    out: &mut String,
    variables: &Variables,
    sequence: &Sequence,
    states: usize,
) -> Result<(), Failure> {
    let ends = |bounds: Bounds| {
        let (low, high) = (bounds.low.max(-1e301), bounds.high.min(1e301));
        format!("{low:?} {high:?}")
    };
    let mut start = variables.shared().len();
    writeln!(out, "shared {start}")?;
    for (variable, &bounds) in variables.shared().iter().zip(variables.bounds()) {
        let SharedVariable::Glass(place) = variable else {
            return Err("a variable that only limits need has no place here".into());
        };
        let (kind, at, term) = match *place {
            Place::Radius(id) => (0, sequence.place_of_surface(id), 0),
            Place::Asphere(id, term) => (1, sequence.place_of_surface(id), term),
            Place::Thickness { group, element, glass } => {
                (2, sequence.place_of_gap(GapId::Thickness { group, element, glass }), 0)
            }
            Place::Air { group, after } => {
                (2, sequence.place_of_gap(GapId::Air { group, after }), 0)
            }
            other => return Err(format!("the peer knows no {other:?}").into()),
        };
        let at = at.ok_or("a place outside the train")?;
        writeln!(out, "{kind} {at} {term} {}", ends(bounds))?;
    }
    let mut lines = Vec::new();
    for k in 0..states {
        for (j, place) in variables.own(k).iter().enumerate() {
            let Place::Spacing { after, .. } = *place else {
                return Err("an own variable that is no spacing".into());
            };
            let bounds = variables.bounds()[start + j];
            lines.push(format!("{k} {after} {}", ends(bounds)));
        }
        start += variables.own(k).len();
    }
    writeln!(out, "own {}", lines.len())?;
    for line in lines {
        writeln!(out, "{line}")?;
    }
    Ok(())
}
