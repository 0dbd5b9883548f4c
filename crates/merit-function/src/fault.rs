//! Why a design cannot be evaluated at some values of its variables.

use surface_model::fault::RayFault;

use crate::movement::Stop;

/// A point at which the merit does not exist.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum EvaluationFault {
    /// A ray fails.
    #[error("in state \"{state}\" at {wavelength_nm} nm, height {height_mm:.4} mm: {fault}")]
    Ray {
        /// Name of the state.
        state: String,
        /// Wavelength, nm.
        wavelength_nm: f64,
        /// Height at which the ray enters, mm.
        height_mm: f64,
        /// What happened to it.
        fault: RayFault,
    },
    /// A first-order number leaves the range of numbers.
    #[error("in state \"{state}\" the first-order numbers overflow")]
    Overflow {
        /// Name of the state.
        state: String,
    },
    /// No movement holds ratio and collimation from the first state to the last.
    #[error("no continuous movement leads over all states: {0}")]
    Way(Stop),
    /// A surface does not reach the height at which its edge is measured.
    #[error("surface {} does not reach its clear diameter", .surface + 1)]
    Edge {
        /// Which surface of the train, counted from 0.
        surface: usize,
    },
}

impl EvaluationFault {
    pub(crate) fn ray(state: &str, wavelength_nm: f64, height_mm: f64, fault: RayFault) -> Self {
        Self::Ray { state: state.into(), wavelength_nm, height_mm, fault }
    }

    pub(crate) fn overflow(state: &str) -> Self {
        Self::Overflow { state: state.into() }
    }
}
