//! What is asked of a movement curve.

use super::barrel::Barrel;
use super::error::CamError;

/// Most ratios that can be asked for.
const MOST_RATIOS: usize = 100_000;

/// Which ratios are told.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Ratios {
    /// So many, in equal steps from the smallest to the largest ratio of the states.
    Count(usize),
    /// In steps of this size from the smallest ratio; the largest is told too.
    Step(f64),
}

impl Default for Ratios {
    fn default() -> Self {
        Self::Count(21)
    }
}

/// What is asked of a movement curve.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct CamSettings {
    /// Which ratios are told besides those of the states.
    pub ratios: Ratios,
    /// The barrel the grooves are cut in, if any.
    pub barrel: Option<Barrel>,
    /// Steepest slope allowed, mm a unit of ratio.
    pub steepest_mm: Option<f64>,
    /// Largest pressure angle allowed, degrees.
    pub steepest_deg: Option<f64>,
}

impl CamSettings {
    /// # Errors
    /// A number is out of range.
    pub(super) fn check(&self) -> Result<(), CamError> {
        let refuse =
            |option, found, constraint| Err(CamError::Setting { option, found, constraint });
        match self.ratios {
            Ratios::Count(count) if !(2..=MOST_RATIOS).contains(&count) => {
                return refuse("--ratios", count as f64, "a number from 2 to 100000");
            }
            Ratios::Step(step) if !(step.is_finite() && step > 0.0) => {
                return refuse("--step", step, "a number above 0");
            }
            _ => {}
        }
        let steepest = [("--steepest-mm", self.steepest_mm), ("--steepest-deg", self.steepest_deg)];
        for (option, found) in steepest {
            if let Some(found) = found
                && !(found.is_finite() && found > 0.0)
            {
                return refuse(option, found, "a number above 0");
            }
        }
        Ok(())
    }

    /// The ratios told between `low` and `high`, ends included, ascending.
    ///
    /// # Errors
    /// The step makes more ratios than are ever told.
    pub(super) fn between(&self, low: f64, high: f64) -> Result<Vec<f64>, CamError> {
        let parts = match self.ratios {
            Ratios::Count(count) => (count - 1) as f64,
            Ratios::Step(step) => (high - low) / step,
        };
        if parts >= MOST_RATIOS as f64 {
            let Ratios::Step(found) = self.ratios else { return Ok(Vec::new()) };
            let constraint = "large enough for at most 100000 ratios";
            return Err(CamError::Setting { option: "--step", found, constraint });
        }
        let whole = (parts + 1e-9).floor() as usize;
        let by = (high - low) / parts;
        let mut ratios: Vec<f64> = (0..=whole).map(|i| low + by * i as f64).collect();
        ratios.retain(|ratio| (high - ratio) > 1e-9 * (high - low));
        ratios.push(high);
        Ok(ratios)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ratios(ratios: Ratios) -> Vec<f64> {
        CamSettings { ratios, ..CamSettings::default() }.between(2.0, 6.0).unwrap()
    }

    #[test]
    fn both_ends_are_always_told() {
        assert_eq!(ratios(Ratios::Count(5)), [2.0, 3.0, 4.0, 5.0, 6.0]);
        assert_eq!(ratios(Ratios::Step(1.5)), [2.0, 3.5, 5.0, 6.0]);
        assert_eq!(ratios(Ratios::Step(0.1)).len(), 41);
        assert_eq!(ratios(Ratios::Step(9.0)), [2.0, 6.0]);
        let tiny = CamSettings { ratios: Ratios::Step(1e-9), ..CamSettings::default() };
        assert!(tiny.between(2.0, 6.0).is_err());
        let one = CamSettings { ratios: Ratios::Count(1), ..CamSettings::default() };
        assert!(one.check().is_err());
    }
}
