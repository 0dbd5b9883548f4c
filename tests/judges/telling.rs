//! What must hold of everything that is told of a design, however it is spoilt.

use driver::cam::{Barrel, CamSettings, Ratios, csv_table, movement_curve};
use driver::design_file::DesignFile;
use driver::temperature::at_temperatures;
use driver::tolerance::{Grade, ToleranceSettings, Unwatched, tolerance};
use merit_function::assessment::{assess, real_beam};
use report::page::{Found, Subject, page};
use report::picture::{assessment_picture, cam_picture};
use report::ray::{RayEntry, ray};
use report::shop::shop_files;
use report::text::tolerance::{Listed, told};
use report::text::{self, assessment::Scope};
use report::tolerance_rows;
use surface_model::document::Document;

use super::verdict::{finite, printed, quiet, refusal};

/// Tells everything of a design; whether it was one.
///
/// # Errors
/// What did not hold, as a sentence.
pub fn judge(bytes: &[u8]) -> Result<bool, String> {
    let file = match Document::parse("spoilt.json", bytes).and_then(DesignFile::read) {
        Ok(file) => file,
        Err(complaints) => return refusal(&complaints).map(|()| false),
    };
    assessed(&file)?;
    rays(&file)?;
    at_work(&file)?;
    Ok(true)
}

fn assessed(file: &DesignFile) -> Result<(), String> {
    let mut assessment = assess(&file.design, &file.wishes);
    printed("the assessment", &text::assessment::assessment(file, &assessment, Scope::All))?;
    printed("the hazards", &text::hazards::hazards(file, &assessment))?;
    let curve = curve(file, &CamSettings { ratios: Ratios::Count(3), ..CamSettings::default() })?;
    printed("the picture", &assessment_picture(file, curve.as_ref().ok()))?;
    let beams = real_beam(&file.design, &file.wishes, &[0.0, 30.0]);
    finite("the beam", &beams)?;
    printed("the beam", &text::beam::beam(file, &beams, &assessment))?;
    assessment.real_beam = Some(beams);
    let subject = || Subject {
        name: "spoilt".into(),
        file,
        assessment: &assessment,
        curve: curve.as_ref().map_err(Clone::clone),
        found: Found::default(),
        sections: Vec::new(),
    };
    printed("the page", &page(&[subject()]))?;
    printed("the page of two", &page(&[subject(), subject()]))?;
    for (name, sheet) in shop_files(file).map_err(|error| error.to_string())? {
        // Tables end their lines as RFC 4180 has it.
        printed(&name, &sheet.replace("\r\n", "\n"))?;
    }
    Ok(())
}

/// The movement curve with all that is told of it, or why there is none.
fn curve(
    file: &DesignFile,
    settings: &CamSettings,
) -> Result<Result<driver::cam::MovementCurve, String>, String> {
    match movement_curve(&file.design, &file.wishes, settings) {
        Ok(curve) => {
            finite("the movement curve", &curve)?;
            printed("the movement curve", &text::cam::cam(file, &curve))?;
            printed("its picture", &cam_picture(file, &curve))?;
            let table = csv_table(&curve).map_err(|error| error.to_string())?;
            printed("its table", &table.replace("\r\n", "\n"))?;
            Ok(Ok(curve))
        }
        Err(error) => {
            quiet(&error.to_string())?;
            Ok(Err(error.to_string()))
        }
    }
}

fn rays(file: &DesignFile) -> Result<(), String> {
    let entry = RayEntry { x_mm: 0.3, height_mm: 1.0, angle_x_mrad: 2.0, angle_mrad: -1.0 };
    for state in &file.design.states {
        for &wavelength_nm in &state.wavelengths_nm {
            match ray(file, state, wavelength_nm, entry) {
                Ok(report) => {
                    finite("the ray", &report)?;
                    printed("the ray", &text::ray::ray(&report))?;
                }
                Err(error) => quiet(&error.to_string())?,
            }
        }
    }
    Ok(())
}

/// On the barrel, in other weather, and as a workshop builds it.
fn at_work(file: &DesignFile) -> Result<(), String> {
    let barrel = Barrel::new(16.0, 270.0).map_err(|error| error.to_string())?;
    let settings = CamSettings { barrel: Some(barrel), ..CamSettings::default() };
    let _ = curve(file, &settings)?;
    match at_temperatures(file, &[-10.0, 45.0]) {
        Ok(report) => {
            finite("temperatures", &report)?;
            printed("temperatures", &text::temperature::temperatures(file, &report))?;
        }
        Err(error) => quiet(&error.to_string())?,
    }
    let settings = ToleranceSettings {
        systems: 3,
        seed: 1,
        grade: Some(Grade::Fine),
        readjusted: None,
        balance_percent: None,
    };
    match tolerance(file, &settings, &mut Unwatched) {
        Ok(report) => {
            finite("tolerances", &report)?;
            printed("tolerances", &told(file, &report, Listed::All))?;
            let rows = tolerance_rows(&report).map_err(|error| error.to_string())?;
            printed("rows of tolerances", &rows.replace("\r\n", "\n"))
        }
        Err(error) => quiet(&error.to_string()),
    }
}
