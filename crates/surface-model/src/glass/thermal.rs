//! How the index changes with temperature, as makers give it.

/// The six constants with which makers describe how the absolute index changes with temperature:
///
/// dn/dT = (n² − 1)/(2n) · (D0 + 2 D1 ΔT + 3 D2 ΔT² + (E0 + 2 E1 ΔT)/(λ² − λ_TK²)), with ΔT counted from 20 °C and λ
/// in µm (Hoffmann, Jochs and Westenberger, Proc. SPIE 1780 (1992); from memory).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ThermalTerms {
    /// D0, 1/K.
    pub d0_per_k: f64,
    /// D1, 1/K².
    pub d1_per_k2: f64,
    /// D2, 1/K³.
    pub d2_per_k3: f64,
    /// E0, µm²/K.
    pub e0_um2_per_k: f64,
    /// E1, µm²/K².
    pub e1_um2_per_k2: f64,
    /// λ_TK, µm.
    pub lambda_tk_um: f64,
}
