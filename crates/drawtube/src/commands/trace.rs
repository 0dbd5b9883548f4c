//! `trace`: one exact ray, surface by surface.

use driver::design_file::DesignFile;
use report::ray::{RayEntry, ray};
use report::text;
use surface_model::design::ZoomState;

use crate::arguments::TraceArguments;
use crate::console::Console;
use crate::exit_status::ExitStatus;
use crate::failure::Failure;
use crate::input;

/// What is asked for.
struct Request {
    file: DesignFile,
    state: ZoomState,
    wavelength_nm: f64,
    start: RayEntry,
    json: bool,
}

impl Request {
    fn of(arguments: TraceArguments) -> Result<Self, Failure> {
        let start = RayEntry {
            x_mm: finite("--x-mm", arguments.x_mm)?,
            height_mm: finite("--height-mm", arguments.height_mm)?,
            angle_x_mrad: finite("--angle-x-mrad", arguments.angle_x_mrad)?,
            angle_mrad: finite("--angle-mrad", arguments.angle_mrad)?,
        };
        let file = input::design(&arguments.design)?;
        let states = &file.design.states;
        let Some(state) = states.iter().find(|state| state.name == arguments.state).cloned() else {
            let names = states.iter().map(|state| state.name.clone()).collect();
            return Err(Failure::NoState { asked: arguments.state, names });
        };
        let own = state.wavelengths_nm.first().copied();
        let wavelength_nm = match arguments.wavelength_nm.or(own) {
            Some(nm) if nm.is_finite() && nm > 0.0 => nm,
            other => {
                return Err(Failure::Argument {
                    option: "--wavelength-nm",
                    found: other.map_or_else(String::new, |nm| nm.to_string()),
                    constraint: "a positive number of nanometres",
                });
            }
        };
        Ok(Self { file, state, wavelength_nm, start, json: arguments.json })
    }
}

fn finite(option: &'static str, value: f64) -> Result<f64, Failure> {
    if value.is_finite() {
        return Ok(value);
    }
    Err(Failure::Argument { option, found: value.to_string(), constraint: "a finite number" })
}

pub(crate) fn run(arguments: TraceArguments, console: &Console) -> Result<ExitStatus, Failure> {
    let request = Request::of(arguments)?;
    let report = ray(&request.file, &request.state, request.wavelength_nm, request.start)?;
    if request.json {
        console.print_json(&report)?;
    } else {
        console.print(&text::ray::ray(&report))?;
    }
    Ok(ExitStatus::Done)
}
