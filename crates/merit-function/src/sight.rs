//! How far a limit is seen: a row that is kept by more has no gradient, costs none, and cannot hold
//! up a step. A step that jumps the whole way is seen by the row's value, and rejected.

use crate::limit_rows::{Measured, RowRule};

/// How far rows see.
#[derive(Debug)]
pub(crate) struct Sight {
    /// Height of a marginal ray above its limit, over the height at entry.
    focus: f64,
    /// Distance of a ghost's focus beyond its limit, mm.
    ghost_mm: f64,
    /// Angle of incidence below its limit, degrees.
    incidence_deg: f64,
    /// Fluence below its limit, as a part of it.
    fluence: f64,
}

impl Sight {
    /// Far enough that a step seldom goes all the way.
    pub(crate) const USUAL: Self =
        Self { focus: 0.3, ghost_mm: 20.0, incidence_deg: 10.0, fluence: 0.5 };

    /// However far.
    #[cfg(test)]
    pub(crate) const EVERYTHING: Self = {
        let far = f64::INFINITY;
        Self { focus: far, ghost_mm: far, incidence_deg: far, fluence: far }
    };

    /// How far a row with this rule sees, in its unit.
    pub(crate) fn of(&self, rule: &RowRule) -> f64 {
        match rule.measured {
            Measured::MarginalHeight(_) | Measured::EdgeRayHeight(_) => self.focus,
            Measured::GhostClearance(_) => self.ghost_mm,
            Measured::Incidence(_) => self.incidence_deg,
            // The constant of such a row is the limit itself.
            Measured::Fluence(_) => self.fluence * rule.constant.abs(),
            Measured::Sum { .. } | Measured::Edge(_) | Measured::OnTheWay(_) => f64::INFINITY,
        }
    }
}
