//! Why a ray could not be traced: a place and a reason, never a NaN.

use std::fmt;

/// A ray that did not get through a train.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("{reason} at surface {}", .surface + 1)]
pub struct RayFault {
    /// Which surface of the train, counted from 0.
    pub surface: usize,
    /// What happened there.
    pub reason: FaultReason,
}

/// What stopped a ray.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum FaultReason {
    /// The ray passes by the surface without meeting it.
    Miss,
    /// The ray meets the surface from behind, beyond its equator.
    FarSide,
    /// Total internal reflection.
    TotalReflection,
    /// The ray leaves the last surface away from the exit.
    TurnedBack,
}

impl fmt::Display for FaultReason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Miss => "the ray misses the surface",
            Self::FarSide => "the ray meets the surface beyond its equator",
            Self::TotalReflection => "the ray is totally reflected",
            Self::TurnedBack => "the ray turns back",
        })
    }
}
