//! Why a point of the space has no layout.

/// The first thing that stands against a layout.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, thiserror::Error)]
#[non_exhaustive]
pub enum NoLayout {
    /// With these powers a ratio would need a spacing below zero, or there is no solution at all.
    #[error("groups would have to pass through one another")]
    Passing,
    /// The beam would cross the axis, or nearly.
    #[error("the beam would come to a focus inside")]
    Focus,
    /// The clearances between the groups cannot be had in the track there is.
    #[error("the groups with their clearances need more track than there is")]
    Track,
    /// The train is shorter than the shortest track allowed.
    #[error("the train is shorter than the track limit allows")]
    Short,
    /// A group would have to travel further than it may.
    #[error("a group would have to travel too far")]
    Travel,
    /// A curve would be stronger than the radius limit or the clear diameter allows.
    #[error("a surface would have to be curved too strongly")]
    Curvature,
    /// Edge or centre thickness cannot be kept.
    #[error("a lens would be too thin or too thick")]
    Thickness,
    /// Air inside a group or between groups cannot be kept.
    #[error("lenses would touch or stand too far apart")]
    Air,
    /// The outermost ray fails or meets a surface too obliquely.
    #[error("the outermost ray does not get through, or too obliquely")]
    Ray,
    /// The fixed groups cannot be kept with thick lenses.
    #[error("the groups cannot be fitted between the fixed ones")]
    Housing,
    /// No pair of allowed glasses corrects colour.
    #[error("no two allowed glasses make an achromatic pair")]
    NoPair,
    /// A pulse would be too strong for a surface.
    #[error("a pulse would be too strong for a surface")]
    Fluence,
    /// Reflected light would come to a focus in glass or too near to it.
    #[error("reflected light would come to a focus too near to glass")]
    Ghost,
}

impl NoLayout {
    /// Every reason.
    pub(super) const ALL: [Self; 13] = [
        Self::Passing,
        Self::Focus,
        Self::Track,
        Self::Short,
        Self::Travel,
        Self::Curvature,
        Self::Thickness,
        Self::Air,
        Self::Ray,
        Self::Housing,
        Self::NoPair,
        Self::Fluence,
        Self::Ghost,
    ];
}
