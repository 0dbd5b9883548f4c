//! A cylindrical (barrel) cam that turns in proportion to the ratio, and a follower that is
//! guided along the axis.
//!
//! On the barrel unrolled, a groove at radius R whose follower is at z(θ) rises by dz over R dθ:
//! the **groove angle** to the circumference is atan((dz/dθ)/R). The side of the groove pushes the
//! follower along its normal, which stands at the same angle to the axis the follower moves
//! along: that is the **pressure angle**,
//!
//! ```text
//! tan α = |dz/dθ|/R
//! ```
//!
//! (H. A. Rothbart (ed.), *Cam Design Handbook*, McGraw-Hill 2004; the same for translating
//! followers of cylindrical cams in R. L. Norton, *Design of Machinery*, the chapter on cams; both
//! cited from memory). R is the radius at which follower and groove touch.

use serde::Serialize;

use super::error::CamError;

/// Turn of the barrel from the smallest to the largest ratio where none is given, degrees.
pub const USUAL_TURN_DEG: f64 = 180.0;

/// A barrel.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Barrel {
    /// Radius at which followers and grooves touch, mm.
    pub radius_mm: f64,
    /// Turn from the smallest to the largest ratio, degrees.
    pub turn_deg: f64,
}

/// A groove at one ratio.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Groove {
    /// Angle to the circumference, degrees; positive when the group moves on as the ratio grows.
    pub groove_deg: f64,
    /// Pressure angle, degrees.
    pub pressure_deg: f64,
}

impl Barrel {
    /// A barrel of this radius and turn.
    ///
    /// # Errors
    /// A number is not finite and positive.
    pub fn new(radius_mm: f64, turn_deg: f64) -> Result<Self, CamError> {
        let numbers = [("--barrel-radius-mm", radius_mm), ("--barrel-turn-deg", turn_deg)];
        for (option, found) in numbers {
            if !(found.is_finite() && found > 0.0) {
                let constraint = "a number above 0";
                return Err(CamError::Setting { option, found, constraint });
            }
        }
        Ok(Self { radius_mm, turn_deg })
    }

    /// How far the barrel has turned, degrees, at a ratio between `low` and `high`.
    pub(super) fn turned_deg(&self, ratio: f64, low: f64, high: f64) -> f64 {
        self.turn_deg * (ratio - low) / (high - low)
    }

    /// The groove of a group that moves by `slope_mm` a unit of ratio.
    pub(super) fn groove(&self, slope_mm: f64, low: f64, high: f64) -> Groove {
        let by_angle_mm = slope_mm * (high - low) / self.turn_deg.to_radians();
        let groove_deg = (by_angle_mm / self.radius_mm).atan().to_degrees();
        Groove { groove_deg, pressure_deg: groove_deg.abs() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_pressure_angle_of_a_helix_is_that_of_the_textbook() {
        // 20 mm of travel over half a turn at R = 15 mm, by hand: tan α = 20/(π 15) = 0.424413,
        // α = 22.9970°.
        let barrel = Barrel::new(15.0, 180.0).unwrap();
        let groove = barrel.groove(-5.0, 2.0, 6.0);
        assert!((groove.pressure_deg - 22.9970).abs() < 1e-4, "{groove:?}");
        assert_eq!(groove.groove_deg, -groove.pressure_deg);
        assert_eq!(barrel.turned_deg(3.0, 2.0, 6.0), 45.0);
        // Twice the turn halves the tangent.
        let slower = Barrel::new(15.0, 360.0).unwrap().groove(5.0, 2.0, 6.0);
        assert!((slower.pressure_deg.to_radians().tan() - 0.212_207).abs() < 1e-6);
        assert!(Barrel::new(0.0, 180.0).is_err() && Barrel::new(9.0, f64::NAN).is_err());
    }
}
