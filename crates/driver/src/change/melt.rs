//! A glass that came back measured: its indices at given wavelengths in place of its name.
//!
//! Where a change gives a glass of an element as `1.51947@532` (index at a wavelength in nm; several
//! with commas between) or as a definition (the object that `glasses` would hold), the design gets
//! a glass of its own, called after the one it replaces. One measured index shifts the index of the
//! glass it replaces by the same amount at every wavelength, as makers' melt sheets are commonly
//! applied (common practice, no published source); from two on the law goes through the points.

use serde_json::{Number, Value, json};
use surface_model::document::{Address, Complaint, Place, quoted};
use surface_model::glass::D_LINE_NM;

use super::glasses_of;
use super::target::{Edit, Target};
use super::written::Change;
use crate::design_file::DesignFile;

/// Defines the glass a target wants, if it wants one of its own, and puts its name in place of the
/// definition.
pub(super) fn define(
    change: &Change,
    target: &mut Target,
    file: &DesignFile,
    value: &mut Value,
) -> Result<(), Complaint> {
    let Edit::Set(wanted) = &target.edit else { return Ok(()) };
    let Some(replaced) = glass_at(&target.at, file) else { return Ok(()) };
    let definition = match wanted {
        Value::Object(_) => wanted.clone(),
        Value::Number(index) => return Err(no_wavelength(index, &target.at, file)),
        Value::String(text) if text.contains('@') => measured(text, &target.at, &replaced, file)?,
        _ => return Ok(()),
    };
    let Some(glasses) = glasses_of(value) else { return Ok(()) };
    let stem = format!(
        "{replaced} {}",
        if change.value().is_object() { "as changed" } else { "as measured" }
    );
    let taken = |name: &String| glasses.get(name).is_some_and(|other| *other != definition);
    let numbered = (2..).map(|number| format!("{stem} {number}"));
    let name = std::iter::once(stem.clone()).chain(numbered).find(|name| !taken(name));
    let name = name.unwrap_or(stem);
    glasses.insert(name.clone(), definition);
    target.edit = Edit::Set(Value::from(name));
    Ok(())
}

/// A measured index that does not say where it was measured.
fn no_wavelength(index: &Number, at: &Address, file: &DesignFile) -> Complaint {
    let first = file.design.beam.wavelengths_nm.first().copied().unwrap_or(D_LINE_NM);
    Complaint {
        place: Place::Value(at.clone()),
        found: format!("the glass is the number {index}"),
        expected: Some("a glass by name, or its measured index at a wavelength in nm".to_owned()),
        advice: Some(format!("write {index}@{first} if it was measured at {first} nm")),
    }
}

/// The name of the glass at an address, if it is that of an element's glass.
fn glass_at(at: &Address, file: &DesignFile) -> Option<String> {
    let ["groups", _, "elements", _, "glasses", _] = at.steps().as_slice() else { return None };
    at.get(file.document().value())?.as_str().map(str::to_owned)
}

/// The definition that measured indices make.
fn measured(
    text: &str,
    at: &Address,
    replaced: &str,
    file: &DesignFile,
) -> Result<Value, Complaint> {
    let mut points: Vec<[f64; 2]> = text.split(',').map(point).collect::<Result<_, _>>()?;
    points.sort_by(|a, b| a[0].total_cmp(&b[0]));
    let [[wavelength_nm, index]] = points.as_slice() else {
        return Ok(json!({ "points": points }));
    };
    let steps = at.steps();
    let number = |place: usize| steps.get(place).and_then(|step| step.parse::<usize>().ok());
    let glass = number(1)
        .zip(number(3))
        .zip(number(5))
        .and_then(|((g, e), i)| file.design.groups.get(g)?.elements.get(e)?.glasses.get(i));
    let Some(glass) = glass else { return Ok(json!({ "points": points })) };
    let expected = glass.index(*wavelength_nm).map_err(|error| Complaint {
        place: Place::File,
        found: error.to_string(),
        expected: Some("a wavelength at which the glass is known".to_owned()),
        advice: error.advice(),
    })?;
    Ok(json!({ "from": replaced, "index_shift": rounded(index - expected, decimals(text)) }))
}

/// Decimals of an index shift, if the measured index needs no more: a thousandth of what makers
/// measure a melt to.
const SHIFT_DECIMALS: usize = 8;

/// How many decimals a shift needs to give the index measured to its last digit.
fn decimals(measured: &str) -> usize {
    let behind_the_point = measured.split_once('.').map_or("", |(_, behind)| behind);
    let given = behind_the_point.bytes().take_while(u8::is_ascii_digit).count();
    (given + 1).max(SHIFT_DECIMALS)
}

fn rounded(shift: f64, decimals: usize) -> f64 {
    // The sum makes 0 of −0.
    format!("{shift:.decimals$}").parse().unwrap_or(shift) + 0.0
}

fn point(text: &str) -> Result<[f64; 2], Complaint> {
    let numbers = text.split_once('@').and_then(|(index, nm)| {
        Some([nm.trim().parse::<f64>().ok()?, index.trim().parse::<f64>().ok()?])
    });
    numbers.filter(|point| point.iter().all(|number| number.is_finite())).ok_or_else(|| Complaint {
        place: Place::File,
        found: format!("{} is not an index at a wavelength", quoted(text)),
        expected: Some("index@nm, such as \"1.51947@532\"; several with commas between".to_owned()),
        advice: None,
    })
}
