//! Dispersion laws: the refractive index as a function of the wavelength.

use super::points::PointSeries;

/// One of the published forms for the index n at a wavelength L in µm. The law knows nothing of its range.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum DispersionLaw {
    /// The same index at every wavelength.
    Constant(f64),
    /// n² − 1 = offset + Σ B L²/(L² − C): Sellmeier, Ann. Phys. 219, 272 (1871).
    Sellmeier { offset: f64, terms: Vec<SellmeierTerm> },
    /// n² = offset + Σ c L^p, the power series in which makers have long printed their glasses.
    PowerSeries { offset: f64, terms: Vec<PowerTerm> },
    /// A series through measured points.
    Points(PointSeries),
}

/// A resonance: its strength B and the square C of its wavelength, µm².
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct SellmeierTerm {
    pub(super) strength: f64,
    pub(super) resonance_um2: f64,
}

/// A term c L^p of a power series.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct PowerTerm {
    pub(super) coefficient: f64,
    pub(super) exponent: f64,
}

impl DispersionLaw {
    /// The index at a wavelength in µm. Not a number where the law gives n² < 0, infinite on a resonance.
    pub(super) fn index(&self, wavelength_um: f64) -> f64 {
        let square = wavelength_um * wavelength_um;
        match self {
            Self::Constant(index) => *index,
            Self::Sellmeier { offset, terms } => {
                let sum: f64 = terms
                    .iter()
                    .map(|term| term.strength * square / (square - term.resonance_um2))
                    .sum();
                (1.0 + offset + sum).sqrt()
            }
            Self::PowerSeries { offset, terms } => {
                let sum: f64 = terms
                    .iter()
                    .map(|term| term.coefficient * wavelength_um.powf(term.exponent))
                    .sum();
                (offset + sum).sqrt()
            }
            Self::Points(series) => series.index(wavelength_um),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sellmeier_by_hand() {
        // At L = 2: 1 + 0.25 + 1·4/(4 − 1) + 2·4/(4 − 8) = 1.25 + 4/3 − 2, and the square root of that.
        let term = |strength, resonance_um2| SellmeierTerm { strength, resonance_um2 };
        let law =
            DispersionLaw::Sellmeier { offset: 0.25, terms: vec![term(1.0, 1.0), term(2.0, 8.0)] };
        assert!((law.index(2.0) - (0.25f64 + 1.0 / 3.0).sqrt()).abs() < 1e-15);
    }

    #[test]
    fn power_series_by_hand() {
        // At L = 2: 2 + 0.5·4 + 4/16 = 4.25.
        let term = |coefficient, exponent| PowerTerm { coefficient, exponent };
        let law = DispersionLaw::PowerSeries {
            offset: 2.0,
            terms: vec![term(0.5, 2.0), term(4.0, -4.0)],
        };
        assert!((law.index(2.0) - 4.25f64.sqrt()).abs() < 1e-15);
    }
}
