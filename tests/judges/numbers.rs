//! What must hold of any numbers on the command line.

use driver::cam::{Barrel, CamSettings, Ratios, movement_curve};
use driver::design_file::DesignFile;
use driver::temperature::at_temperatures;
use driver::tolerance::{Grade, ToleranceSettings, Unwatched, tolerance};
use merit_function::assessment::{assess, real_beam};
use report::ray::{RayEntry, ray};
use report::text;
use surface_model::document::Document;
use surface_model::glass::{equivalents, find};

use super::shipped::DESIGNS;
use super::verdict::{finite, printed, quiet};

/// Gives the numbers to whatever takes some; the first byte says to which shipped design.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8]) -> Result<(), String> {
    let Some((&which, bytes)) = bytes.split_first() else { return Ok(()) };
    let text = DESIGNS[usize::from(which) % DESIGNS.len()].1;
    let file = Document::parse("design.json", text.as_bytes()).and_then(DesignFile::read);
    let file = file.map_err(|complaints| complaints.to_string())?;
    let numbers: Vec<f64> =
        bytes.as_chunks::<8>().0.iter().take(6).map(|eight| f64::from_le_bytes(*eight)).collect();
    let &[a, b, c, d, e, f] = numbers.as_slice() else { return Ok(()) };
    // The command line admits only finite numbers here.
    if [a, b, c, d].iter().all(|number| number.is_finite()) && e.is_finite() && e > 0.0 {
        let entry = RayEntry { x_mm: a, height_mm: b, angle_x_mrad: c, angle_mrad: d };
        match ray(&file, &file.design.states[0], e, entry) {
            Ok(report) => {
                finite("the ray", &report)?;
                printed("the ray", &text::ray::ray(&report))?;
            }
            Err(error) => quiet(&error.to_string())?,
        }
        let glass = find("N-BK7").map_err(|error| error.to_string())?;
        match equivalents(&glass, &[e], 3) {
            Ok(found) => finite("glasses", &found)?,
            Err(error) => quiet(&error.to_string())?,
        }
    }
    moved(&file, [a, b, c, d, e])?;
    let beams = real_beam(&file.design, &file.wishes, &[a, b]);
    finite("the beam", &beams)?;
    let assessment = assess(&file.design, &file.wishes);
    printed("the beam", &text::beam::beam(&file, &beams, &assessment))?;
    match at_temperatures(&file, &[c]) {
        Ok(report) => {
            finite("temperatures", &report)?;
            printed("temperatures", &text::temperature::temperatures(&file, &report))?;
        }
        Err(error) => quiet(&error.to_string())?,
    }
    let settings = ToleranceSettings {
        systems: 2,
        seed: 0,
        grade: Some(Grade::Fine),
        readjusted: None,
        balance_percent: Some(f),
    };
    match tolerance(&file, &settings, &mut Unwatched) {
        Ok(report) => finite("tolerances", &report),
        Err(error) => quiet(&error.to_string()),
    }
}

fn moved(file: &DesignFile, [a, b, c, d, e]: [f64; 5]) -> Result<(), String> {
    let barrel = match Barrel::new(a, b) {
        Ok(barrel) => Some(barrel),
        Err(error) => quiet(&error.to_string()).map(|()| None)?,
    };
    let settings = CamSettings {
        ratios: Ratios::Step(c),
        barrel,
        steepest_mm: Some(d),
        steepest_deg: Some(e),
    };
    match movement_curve(&file.design, &file.wishes, &settings) {
        Ok(curve) => {
            finite("the movement curve", &curve)?;
            printed("the movement curve", &text::cam::cam(file, &curve))
        }
        Err(error) => quiet(&error.to_string()),
    }
}
