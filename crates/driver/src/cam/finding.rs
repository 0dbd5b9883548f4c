//! One thing that is found along a movement curve.

use serde::Serialize;

/// Kinds of finding.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum FindingKind {
    /// Two neighbouring states lie on different curves, or the curve turns back between them.
    BranchChange,
    /// Rays do not get through.
    Fault,
    /// Two groups touch, on axis or at the edge.
    Collision,
    /// A limit of the design file is crossed between the states.
    Limit,
    /// A goal of the design file is missed between the states.
    Goal,
    /// A slope or pressure angle is steeper than allowed.
    Steep,
    /// A group turns back.
    Reversal,
    /// The curve does not go through a state.
    LeftOut,
}

/// One finding.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Finding {
    /// What kind.
    pub kind: FindingKind,
    /// Whether it is wrong, and not only to be known.
    pub wrong: bool,
    /// The ratios it is about, from and to.
    pub ratios: [f64; 2],
    /// What it is about: a group, a limit, a goal.
    pub what: String,
    /// The worst value met, in the unit that `told` names; `None` where there is none.
    pub worst: Option<f64>,
    /// The whole of it as a sentence.
    pub told: String,
}
