//! Which other glass could stand in for this one.

use schemars::JsonSchema;
use serde::Serialize;

use super::{C_LINE_NM, D_LINE_NM, F_LINE_NM, Glass, GlassError, GlassSummary, catalogue};

/// A glass of the catalogue beside the one it might replace. Differences are its own value less the other's.
#[derive(Clone, Debug, PartialEq, Serialize, JsonSchema)]
pub struct Equivalent {
    /// The glass.
    #[schemars(with = "GlassSummary")]
    pub glass: Glass,
    /// Root of the mean squared index difference over the wavelengths compared.
    pub rms_index_difference: f64,
    /// Difference in nd, null where one of the two has none.
    pub nd_difference: Option<f64>,
    /// Difference in vd, null where one of the two has none.
    pub vd_difference: Option<f64>,
    /// Both makers print the same six-digit code.
    pub same_code: bool,
}

/// The glasses nearest to one, of any maker, nearest first: by the root of the mean squared index difference at the
/// wavelengths given, nm, or at the d, F and C lines if there are none; equal ones by name. At most `most` of them.
///
/// Left out are the glass itself and glasses not known at all the wavelengths. A small difference is no promise: a design
/// is to be checked again, and re-optimised, with the glass it gets.
///
/// # Errors
/// As [`Glass::index`], where the glass itself is not known at one of the wavelengths.
pub fn equivalents(
    glass: &Glass,
    wavelengths_nm: &[f64],
    most: usize,
) -> Result<Vec<Equivalent>, GlassError> {
    let lines =
        if wavelengths_nm.is_empty() { &[D_LINE_NM, F_LINE_NM, C_LINE_NM] } else { wavelengths_nm };
    let wanted: Vec<(f64, f64)> =
        lines.iter().map(|&nm| Ok((nm, glass.index(nm)?))).collect::<Result<_, GlassError>>()?;
    let mut found: Vec<Equivalent> = catalogue::entries()
        .iter()
        .map(catalogue::Entry::glass)
        .filter(|other| *other != glass)
        .filter_map(|other| beside(other, glass, &wanted))
        .collect();
    found.sort_by(|a, b| {
        a.rms_index_difference
            .total_cmp(&b.rms_index_difference)
            .then_with(|| a.glass.name().cmp(b.glass.name()))
    });
    found.truncate(most);
    Ok(found)
}

/// The other glass held against the wanted indices; `None` where it is not known at one of the wavelengths.
fn beside(other: &Glass, glass: &Glass, wanted: &[(f64, f64)]) -> Option<Equivalent> {
    let squares = wanted
        .iter()
        .map(|(nm, index)| other.index(*nm).ok().map(|other| (other - index).powi(2)))
        .sum::<Option<f64>>()?;
    let difference = |of: fn(&Glass) -> Option<f64>| Some(of(other)? - of(glass)?);
    Some(Equivalent {
        glass: other.clone(),
        rms_index_difference: (squares / wanted.len() as f64).sqrt(),
        nd_difference: difference(Glass::nd),
        vd_difference: difference(Glass::vd),
        same_code: other.code().is_some() && other.code() == glass.code(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::glass::find;

    #[test]
    fn the_makers_crown_glasses_stand_in_for_each_other() {
        let glass = find("N-BK7").unwrap();
        let found = equivalents(&glass, &[], 20).unwrap();
        assert_eq!(found.len(), 20);
        assert!(found.iter().all(|e| e.glass != glass));
        assert!(found.is_sorted_by_key(|e| e.rms_index_difference));
        let crown = found.iter().find(|e| e.glass.name() == "H-K9L").unwrap();
        assert!(crown.same_code && crown.rms_index_difference < 2e-5);
        assert!(crown.nd_difference.unwrap().abs() < 2e-5);
    }

    #[test]
    fn the_distance_is_the_rms_at_the_wavelengths_given() {
        let glass = find("fused-silica").unwrap();
        let first = &equivalents(&glass, &[532.0, 1064.0], 1).unwrap()[0];
        let difference = |nm| first.glass.index(nm).unwrap() - glass.index(nm).unwrap();
        let rms = difference(532.0).hypot(difference(1064.0)) / 2f64.sqrt();
        assert!((first.rms_index_difference - rms).abs() < 1e-15);
    }

    #[test]
    fn a_glass_not_known_there_is_an_error_and_others_are_left_out() {
        assert!(equivalents(&find("germanium").unwrap(), &[], 3).is_err());
        let found = equivalents(&find("germanium").unwrap(), &[10_600.0], 3).unwrap();
        assert!(found.iter().all(|e| e.glass.index(10_600.0).is_ok()) && !found.is_empty());
    }
}
