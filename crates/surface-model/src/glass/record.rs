//! One line of the embedded catalogue, as it is written there.

use serde::Deserialize;

use super::law::{DispersionLaw, PowerTerm, SellmeierTerm};
use super::{Glass, GlassData, GlassStatus, ThermalTerms, WavelengthRange};

#[derive(Deserialize)]
struct CatalogueRecord {
    name: String,
    maker: String,
    status: GlassStatus,
    range_um: [f64; 2],
    law: LawName,
    offset: f64,
    terms: Vec<[f64; 2]>,
    code: Option<String>,
    source: Option<String>,
    reference_c: Option<f64>,
    density_g_cm3: Option<f64>,
    expansion_per_k: Option<f64>,
    thermal: Option<[f64; 6]>,
}

#[derive(Deserialize)]
#[serde(rename_all = "kebab-case")]
enum LawName {
    Sellmeier,
    PowerSeries,
}

/// Reads one entry; `None` if it is not one.
pub(super) fn read(json: &str) -> Option<Glass> {
    let record: CatalogueRecord = serde_json::from_str(json).ok()?;
    let [low_um, high_um] = record.range_um;
    Some(Glass::new(GlassData {
        range: Some(WavelengthRange::from_um(low_um, high_um)?),
        law: law(&record),
        name: record.name,
        maker: Some(record.maker).filter(|maker| !maker.is_empty()),
        status: record.status,
        code: record.code,
        source: record.source,
        index_shift: 0.0,
        measured_at_c: record.reference_c,
        density_g_cm3: record.density_g_cm3,
        expansion_per_k: record.expansion_per_k,
        thermal: record.thermal.map(thermal),
        index_per_k: None,
    }))
}

fn law(record: &CatalogueRecord) -> DispersionLaw {
    let (offset, terms) = (record.offset, record.terms.iter());
    match record.law {
        LawName::Sellmeier => DispersionLaw::Sellmeier {
            offset,
            terms: terms
                .map(|&[strength, resonance_um2]| SellmeierTerm { strength, resonance_um2 })
                .collect(),
        },
        LawName::PowerSeries => DispersionLaw::PowerSeries {
            offset,
            terms: terms
                .map(|&[coefficient, exponent]| PowerTerm { coefficient, exponent })
                .collect(),
        },
    }
}

fn thermal(terms: [f64; 6]) -> ThermalTerms {
    let [d0_per_k, d1_per_k2, d2_per_k3, e0_um2_per_k, e1_um2_per_k2, lambda_tk_um] = terms;
    ThermalTerms { d0_per_k, d1_per_k2, d2_per_k3, e0_um2_per_k, e1_um2_per_k2, lambda_tk_um }
}
