//! How the index changes with temperature, as makers give it.
//!
//! Makers describe the *absolute* index, against vacuum; catalogues and this program count against
//! air. With n_air of `air_index`,
//!
//! n(T) = [n(T₀) n_air(T₀) + Δn_abs(T) − Δn_abs(T₀)] / n_air(T),
//!
//! so that the air, which thins when it warms, takes part.

/// The six constants with which makers describe how the absolute index changes with temperature:
///
/// dn/dT = (n² − 1)/(2n) · (D0 + 2 D1 ΔT + 3 D2 ΔT² + (E0 + 2 E1 ΔT)/(λ² − λ_TK²)), with ΔT counted from 20 °C and λ
/// in µm (Hoffmann, Jochs and Westenberger, Proc. SPIE 1780 (1992); from memory).
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct ThermalTerms {
    /// D0, 1/K.
    pub(super) d0_per_k: f64,
    /// D1, 1/K².
    pub(super) d1_per_k2: f64,
    /// D2, 1/K³.
    pub(super) d2_per_k3: f64,
    /// E0, µm²/K.
    pub(super) e0_um2_per_k: f64,
    /// E1, µm²/K².
    pub(super) e1_um2_per_k2: f64,
    /// λ_TK, µm.
    pub(super) lambda_tk_um: f64,
}

/// The temperatures for which makers vouch for their terms, °C (Schott, TIE-19, *Temperature
/// Coefficient of the Refractive Index*; from memory).
pub const THERMAL_RANGE_C: (f64, f64) = (-100.0, 140.0);

/// The temperature that catalogue indices and designs are for, °C.
pub const REFERENCE_C: f64 = 20.0;

impl ThermalTerms {
    /// Change of the absolute index from 20 °C to `temperature_c`, for a glass whose absolute
    /// index is `index` at the vacuum wavelength `wavelength_um`: the integral of dn/dT with the
    /// factor in front taken at 20 °C, as the makers take it (Schott, TIE-19; from memory).
    fn absolute_change(&self, index: f64, wavelength_um: f64, temperature_c: f64) -> f64 {
        let t = temperature_c - REFERENCE_C;
        let resonance = wavelength_um * wavelength_um - self.lambda_tk_um * self.lambda_tk_um;
        let by_temperature = t * (self.d0_per_k + t * (self.d1_per_k2 + t * self.d2_per_k3));
        let by_wavelength = t * (self.e0_um2_per_k + t * self.e1_um2_per_k2) / resonance;
        (index * index - 1.0) / (2.0 * index) * (by_temperature + by_wavelength)
    }
}

/// Index of air at one atmosphere: the dispersion of B. Edlén, J. Opt. Soc. Am. 43, 339 (1953), and
/// the temperature of F. Kohlrausch, *Praktische Physik* (1968), together the air of the glass
/// makers' catalogues (from memory). Wavelength in µm, in vacuum.
fn air_index(wavelength_um: f64, temperature_c: f64) -> f64 {
    let square = wavelength_um * wavelength_um;
    let at_15_c = 1e-8
        * (6432.8
            + 2_949_810.0 * square / (146.0 * square - 1.0)
            + 25_540.0 * square / (41.0 * square - 1.0));
    1.0 + at_15_c / (1.0 + 3.4785e-3 * (temperature_c - 15.0))
}

/// Index relative to air at `temperature_c`, from that at `at_c`.
pub(super) fn relative_index(
    terms: &ThermalTerms,
    (index, at_c): (f64, f64),
    wavelength_um: f64,
    temperature_c: f64,
) -> f64 {
    // Wavelengths are told in air; the light's own, in vacuum, stays.
    let vacuum_um = wavelength_um * air_index(wavelength_um, REFERENCE_C);
    let absolute = index * air_index(vacuum_um, at_c);
    let change = |to_c: f64| terms.absolute_change(absolute, vacuum_um, to_c);
    let at = |to_c: f64| (absolute + change(to_c) - change(at_c)) / air_index(vacuum_um, to_c);
    // At 20 °C a glass is what its catalogue says, wherever it was measured.
    index + at(temperature_c) - at(REFERENCE_C)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn air_as_metrologists_know_it() {
        // At 632.8 nm, 20 °C, 1 atm, dry, 450 ppm CO₂: 1.000 271 8 (P. E. Ciddor, Appl. Opt. 35,
        // 1566 (1996), table 1; from memory). The older formula is within 5e-7.
        assert!((air_index(0.6328, 20.0) - 1.000_271_8).abs() < 5e-7);
    }

    #[test]
    fn at_the_reference_nothing_changes() {
        let terms = ThermalTerms {
            d0_per_k: 1e-6,
            d1_per_k2: 1e-8,
            d2_per_k3: -1e-11,
            e0_um2_per_k: 4e-7,
            e1_um2_per_k2: 6e-10,
            lambda_tk_um: 0.17,
        };
        for measured_at in [20.0, 25.0] {
            assert_eq!(relative_index(&terms, (1.5, measured_at), 0.532, 20.0), 1.5);
        }
    }
}
