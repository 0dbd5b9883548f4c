//! From a glass as written to a definition that holds: one way, every number in bounds.

use super::error::{
    CLOSEST_POINTS_NM, DefinitionError, INDEX_ABOVE, INDEX_BELOW, MOST_PER_K, MOST_SHIFT,
    SHORTEST_NM,
};
use super::law::{DispersionLaw, SellmeierTerm};
use super::points::PointSeries;
use super::{GlassDocument, WavelengthRange};

/// Steps over a range at which the index of an own law is looked at.
const INDEX_STEPS: u32 = 256;

/// What a document comes to.
#[derive(Debug)]
pub(super) enum Definition<'a> {
    Melt { from: &'a str, index_shift: f64 },
    Law { law: DispersionLaw, range: Option<WavelengthRange> },
}

/// Faults with their places inside the document, as JSON Pointer suffixes.
#[derive(Debug, Default)]
pub(super) struct Faults(pub(super) Vec<(String, DefinitionError)>);

impl Faults {
    fn add(&mut self, at: impl Into<String>, error: DefinitionError) {
        self.0.push((at.into(), error));
    }

    fn check_finite(&mut self, at: impl Into<String>, found: f64) {
        if !found.is_finite() {
            self.add(at, DefinitionError::NotFinite { found });
        }
    }

    fn check_index(&mut self, at: impl Into<String>, index: f64) {
        if !in_bounds(index) {
            self.add(at, DefinitionError::IndexBounds { index });
        }
    }

    fn check_wavelength(&mut self, at: impl Into<String>, found_nm: f64) {
        if !(found_nm.is_finite() && found_nm >= SHORTEST_NM) {
            self.add(at, DefinitionError::Wavelength { found_nm });
        }
    }
}

fn in_bounds(index: f64) -> bool {
    INDEX_ABOVE < index && index < INDEX_BELOW
}

/// The first wavelength of the range, going up, at which the index is out of bounds.
pub(super) fn index_out_of_bounds(
    range: WavelengthRange,
    index_at_nm: impl Fn(f64) -> f64,
) -> Option<DefinitionError> {
    range
        .samples(INDEX_STEPS)
        .map(|wavelength_nm| (wavelength_nm, index_at_nm(wavelength_nm)))
        .find(|(_, index)| !in_bounds(*index))
        .map(|(wavelength_nm, index)| {
            if index.is_nan() {
                DefinitionError::NoRealIndex { wavelength_nm }
            } else {
                DefinitionError::IndexInRange { index, wavelength_nm }
            }
        })
}

/// Reads a document; all its faults at once where it has any.
pub(super) fn define(document: &GlassDocument) -> Result<Definition<'_>, Faults> {
    let mut faults = Faults::default();
    if let Some(found) = document.density_g_cm3
        && !(found.is_finite() && found > 0.0)
    {
        faults.add("/density_g_cm3", DefinitionError::Density { found });
    }
    let per_k =
        [("/expansion_per_k", document.expansion_per_k), ("/index_per_k", document.index_per_k)];
    for (at, found) in per_k {
        if let Some(found) = found
            && !(0.0..=MOST_PER_K).contains(&found.abs())
        {
            faults.add(at, DefinitionError::PerKelvin { found });
        }
    }
    let definition = definition(document, &mut faults);
    match definition {
        Some(definition) if faults.0.is_empty() => Ok(definition),
        _ => Err(faults),
    }
}

fn definition<'a>(document: &'a GlassDocument, faults: &mut Faults) -> Option<Definition<'a>> {
    let keys = ways(document);
    if keys.len() > 1 {
        faults.add("", DefinitionError::Mixed { keys });
        return None;
    }
    let lonely = lonely(document);
    if keys.is_empty() && lonely.is_empty() {
        faults.add("", DefinitionError::Undefined);
    }
    for (key, needs) in lonely {
        faults.add(format!("/{key}"), DefinitionError::Lonely { key, needs });
    }
    if let (Some(from), Some(shift)) = (&document.from, document.index_shift) {
        melt(from, shift, faults)
    } else if let Some(index) = document.index {
        faults.check_index("/index", index);
        Some(Definition::Law { law: DispersionLaw::Constant(index), range: None })
    } else if let Some(points) = &document.points {
        through_points(points, faults)
    } else if let (Some(terms), Some(range_nm)) = (&document.sellmeier, document.range_nm) {
        sellmeier(document.offset.unwrap_or(0.0), terms, range_nm, faults)
    } else {
        None
    }
}

/// The ways of definition that are present.
fn ways(document: &GlassDocument) -> Vec<&'static str> {
    [
        ("from", document.from.is_some()),
        ("index", document.index.is_some()),
        ("points", document.points.is_some()),
        ("sellmeier", document.sellmeier.is_some()),
    ]
    .into_iter()
    .filter_map(|(key, present)| present.then_some(key))
    .collect()
}

/// Keys without the key they need.
fn lonely(document: &GlassDocument) -> Vec<(&'static str, &'static str)> {
    let from = ("from", document.from.is_some());
    let shift = ("index_shift", document.index_shift.is_some());
    let sellmeier = ("sellmeier", document.sellmeier.is_some());
    let range = ("range_nm", document.range_nm.is_some());
    let offset = ("offset", document.offset.is_some());
    [(from, shift), (shift, from), (sellmeier, range), (range, sellmeier), (offset, sellmeier)]
        .into_iter()
        .filter(|((_, present), (_, needed))| *present && !*needed)
        .map(|((key, _), (needs, _))| (key, needs))
        .collect()
}

fn melt<'a>(from: &'a str, index_shift: f64, faults: &mut Faults) -> Option<Definition<'a>> {
    let in_bounds = index_shift.abs() <= MOST_SHIFT;
    if !in_bounds {
        faults.add("/index_shift", DefinitionError::ShiftBounds { shift: index_shift });
    }
    Some(Definition::Melt { from, index_shift })
}

fn through_points(points: &[[f64; 2]], faults: &mut Faults) -> Option<Definition<'static>> {
    if points.len() < 2 {
        faults.add("/points", DefinitionError::TooFewPoints { found: points.len() });
    }
    for (i, [wavelength_nm, index]) in points.iter().enumerate() {
        faults.check_wavelength(format!("/points/{i}/0"), *wavelength_nm);
        faults.check_index(format!("/points/{i}/1"), *index);
    }
    for (i, pair) in points.windows(2).enumerate() {
        if let [[before_nm, _], [after_nm, _]] = *pair
            && after_nm - before_nm < CLOSEST_POINTS_NM
        {
            let error = DefinitionError::PointOrder { before_nm, after_nm };
            faults.add(format!("/points/{}/0", i + 1), error);
        }
    }
    if !faults.0.is_empty() {
        return None;
    }
    let ([low_nm, _], [high_nm, _]) = (*points.first()?, *points.last()?);
    let range = WavelengthRange::new(low_nm, high_nm)?;
    let law = DispersionLaw::Points(PointSeries::through(points, range));
    within_bounds("/points", law, range, faults)
}

fn sellmeier(
    offset: f64,
    terms: &[[f64; 2]],
    [low_nm, high_nm]: [f64; 2],
    faults: &mut Faults,
) -> Option<Definition<'static>> {
    faults.check_finite("/offset", offset);
    faults.check_wavelength("/range_nm/0", low_nm);
    faults.check_wavelength("/range_nm/1", high_nm);
    if low_nm >= high_nm {
        faults.add("/range_nm", DefinitionError::RangeOrder { low_nm, high_nm });
    }
    if terms.is_empty() {
        faults.add("/sellmeier", DefinitionError::NoTerms);
    }
    for (i, [strength, resonance_um2]) in terms.iter().enumerate() {
        faults.check_finite(format!("/sellmeier/{i}/0"), *strength);
        faults.check_finite(format!("/sellmeier/{i}/1"), *resonance_um2);
    }
    let range = WavelengthRange::new(low_nm, high_nm)?;
    for (i, &[_, resonance_um2]) in terms.iter().enumerate() {
        // The root of a negative C is NaN: no resonance, and in no range.
        let resonance_nm = resonance_um2.sqrt() * 1000.0;
        if range.contains(resonance_nm) {
            let error = DefinitionError::ResonanceInside { resonance_um2, resonance_nm, range };
            faults.add(format!("/sellmeier/{i}/1"), error);
        }
    }
    if !faults.0.is_empty() {
        return None;
    }
    let terms = terms
        .iter()
        .map(|&[strength, resonance_um2]| SellmeierTerm { strength, resonance_um2 })
        .collect();
    within_bounds("/sellmeier", DispersionLaw::Sellmeier { offset, terms }, range, faults)
}

fn within_bounds(
    at: &str,
    law: DispersionLaw,
    range: WavelengthRange,
    faults: &mut Faults,
) -> Option<Definition<'static>> {
    if let Some(error) = index_out_of_bounds(range, |nm| law.index(nm / 1000.0)) {
        faults.add(at, error);
        return None;
    }
    Some(Definition::Law { law, range: Some(range) })
}
