//! The allowed glasses as lenses need them: indices at the brief's wavelengths, and the ordered
//! pairs that make an achromat.
//!
//! The dispersion number of a glass between the shortest and the longest wavelength of the brief,
//! V = (n − 1)/(n_short − n_long), n at the first wavelength, takes the place of Abbe's. Two thin
//! lenses in contact of powers φ_a + φ_b = φ have the same power at both wavelengths if
//! φ_a/V_a + φ_b/V_b = 0, that is φ_a = φ V_a/(V_a − V_b), φ_b = −φ V_b/(V_a − V_b)
//! (R. Kingslake and R. B. Johnson, *Lens Design Fundamentals* (2010), section 5.4).

use surface_model::glass::Glass;

use crate::brief::BriefFile;

/// The allowed glasses at the wavelengths of a brief.
#[derive(Debug, Clone)]
pub(super) struct Glasses {
    /// All wavelengths of the brief, nm, each once, the first of the first ratio in front.
    pub(super) wavelengths_nm: Vec<f64>,
    /// Per glass, its index at each of them.
    indices: Vec<Vec<f64>>,
    /// Ordered pairs that can be achromats, with the share of the power the first one takes.
    pub(super) pairs: Vec<Pair>,
}

/// Two glasses cemented, in the order light meets them.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Pair {
    pub(super) glasses: [usize; 2],
    /// Power of each over the power of the pair; they add up to 1.
    pub(super) shares: [f64; 2],
}

/// A lens of a pair may have at most so many times the power of the pair; beyond, its curves give
/// more aberration than the pair is worth.
const STRONGEST_SHARE: f64 = 4.0;

impl Glasses {
    pub(super) fn of(brief: &BriefFile) -> Self {
        let mut wavelengths_nm: Vec<f64> = Vec::new();
        for nm in brief.ratios.iter().flat_map(|ratio| ratio.wavelengths_nm.iter().copied()) {
            if !wavelengths_nm.contains(&nm) {
                wavelengths_nm.push(nm);
            }
        }
        // A brief is read with every glass known at every wavelength.
        let at = |glass: &Glass, nm: &f64| glass.index(*nm).unwrap_or(1.0);
        let allowed = brief.glasses_allowed.iter().map(|allowed| &allowed.glass);
        let indices =
            allowed.clone().map(|glass| wavelengths_nm.iter().map(|nm| at(glass, nm)).collect());
        let indices: Vec<Vec<f64>> = indices.collect();
        let numbers: Vec<Option<f64>> = match ends(&wavelengths_nm) {
            Some((short, long)) => {
                indices.iter().map(|n| dispersion_number(n[0], n[short], n[long])).collect()
            }
            // One wavelength: the pair is that for the visible lines.
            None => allowed.map(Glass::vd).collect(),
        };
        let pairs = pairs(&numbers, &indices);
        Self { wavelengths_nm, indices, pairs }
    }

    pub(super) fn has_pairs(&self) -> bool {
        !self.pairs.is_empty()
    }

    pub(super) fn count(&self) -> usize {
        self.indices.len()
    }

    /// Index of a glass at a wavelength, both by place.
    pub(super) fn index(&self, glass: usize, wavelength: usize) -> f64 {
        self.indices[glass][wavelength]
    }

    /// Place of a wavelength in the list.
    pub(super) fn place_of(&self, wavelength_nm: f64) -> usize {
        self.wavelengths_nm.iter().position(|&nm| nm == wavelength_nm).unwrap_or(0)
    }
}

/// Places of the shortest and the longest wavelength, where there are two.
fn ends(wavelengths_nm: &[f64]) -> Option<(usize, usize)> {
    let mut places: Vec<usize> = (0..wavelengths_nm.len()).collect();
    places.sort_by(|&a, &b| wavelengths_nm[a].total_cmp(&wavelengths_nm[b]));
    match places.as_slice() {
        [short, .., long] => Some((*short, *long)),
        _ => None,
    }
}

/// V = (n − 1)/(n_short − n_long); `None` without dispersion.
pub(super) fn dispersion_number(n: f64, n_short: f64, n_long: f64) -> Option<f64> {
    Some((n - 1.0) / (n_short - n_long)).filter(|v| v.is_finite() && *v > 0.0)
}

/// Shares of the power of an achromatic pair; `None` where one lens would be too strong.
pub(super) fn achromatic_shares(v_a: f64, v_b: f64) -> Option<[f64; 2]> {
    let shares = [v_a / (v_a - v_b), -v_b / (v_a - v_b)];
    let weak = |share: &f64| share.is_finite() && share.abs() <= STRONGEST_SHARE;
    shares.iter().all(weak).then_some(shares)
}

fn pairs(numbers: &[Option<f64>], indices: &[Vec<f64>]) -> Vec<Pair> {
    let mut pairs = Vec::new();
    for (a, v_a) in numbers.iter().enumerate() {
        for (b, v_b) in numbers.iter().enumerate() {
            let lens = indices[a][0] > 1.01 && indices[b][0] > 1.01;
            if let (Some(v_a), Some(v_b), true) = (v_a, v_b, lens)
                && let Some(shares) = achromatic_shares(*v_a, *v_b)
            {
                pairs.push(Pair { glasses: [a, b], shares });
            }
        }
    }
    pairs
}

#[cfg(test)]
mod tests {
    use super::*;
    use surface_model::glass::{C_LINE_NM, D_LINE_NM, F_LINE_NM, find};

    #[test]
    fn a_pair_of_crown_and_flint_has_the_powers_of_the_textbook() {
        // E. Hecht, Optics, on achromatic doublets: f_1d V_1d + f_2d V_2d = 0. By the catalogue's
        // V_d of N-BK7 (64.17) and N-SF6 (25.36), for a pair of 100 mm:
        let shares = achromatic_shares(64.17, 25.36).unwrap();
        let f = shares.map(|share| 100.0 / share);
        assert!((f[0] * 64.17 + f[1] * 25.36).abs() < 1e-9);
        assert!((1.0 / f[0] + 1.0 / f[1] - 0.01).abs() < 1e-15);
        assert!((f[0] - 60.48).abs() < 0.01 && (f[1] + 153.03).abs() < 0.01, "{f:?}");
    }

    #[test]
    fn numbers_between_the_lines_of_the_spectrum_are_abbes() {
        for name in ["N-BK7", "N-SF6", "Schott:F2"] {
            let glass = find(name).unwrap();
            let n = [D_LINE_NM, F_LINE_NM, C_LINE_NM].map(|nm| glass.index(nm).unwrap());
            let number = dispersion_number(n[0], n[1], n[2]).unwrap();
            assert!((number - glass.vd().unwrap()).abs() < 1e-12);
        }
    }

    #[test]
    fn glasses_alike_make_no_pair() {
        assert_eq!(achromatic_shares(60.0, 60.0), None);
        assert_eq!(achromatic_shares(60.0, 50.0), None);
        assert_eq!(dispersion_number(1.5, 1.5, 1.5), None);
        assert_eq!(ends(&[532.0]), None);
        assert_eq!(ends(&[800.0, 1064.0, 532.0]), Some((2, 1)));
    }
}
