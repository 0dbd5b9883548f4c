//! Putting together what the parts of a sweep have come to.

use std::collections::BTreeMap;

use super::KIND;
use super::plan::Plan;
use super::point::PointResult;
use crate::run::{RunError, Share, Survey};

/// The parts of one sweep, from one folder or several. The order of folders does not matter, and a
/// part that is there twice counts once.
#[derive(Debug)]
pub struct SweepGathering {
    /// By unit of the run.
    units: BTreeMap<u64, PointResult>,
    of: u64,
    wanted: u64,
}

impl SweepGathering {
    /// Reads the parts in these folders, of a sweep of this plan.
    ///
    /// # Errors
    /// They are not of the same sweep, or one is damaged or has points that the plan has not, or two
    /// disagree about a point.
    pub fn of(surveys: &[Survey], plan: &Plan) -> Result<Self, RunError> {
        let of = surveys.first().map_or(1, |survey| survey.run.parts);
        let numbers = plan.units(of);
        let number = |unit: u64| numbers.get(usize::try_from(unit).ok()?).copied();
        let wanted = numbers.len() as u64;
        let mut gathering = Self { units: BTreeMap::new(), of, wanted };
        for survey in surveys {
            if survey.run.kind != KIND {
                let reason = format!("it holds work of another kind, {:?}", survey.run.kind);
                return Err(RunError::NotARun { path: survey.path.clone(), reason });
            }
            if let Some(difference) = surveys[0].run.difference(&survey.run) {
                return Err(RunError::AnotherRun { path: survey.path.clone(), difference });
            }
            for part in &survey.parts {
                let mut disagree = None;
                let mut strange = None;
                part.read::<PointResult>(&mut |unit| match gathering.units.get(&unit.number) {
                    _ if !number(unit.number).is_some_and(|n| plan.has(n, &unit.done)) => {
                        strange = strange.or(Some(unit.number));
                    }
                    None => {
                        gathering.units.insert(unit.number, unit.done);
                    }
                    Some(there) if *there == unit.done => {}
                    Some(there) => disagree = disagree.or(Some(there.number)),
                })?;
                if let Some(unit) = strange {
                    return Err(RunError::another_result(&part.place, &format!("unit {unit}")));
                }
                if let Some(point) = disagree {
                    let reason =
                        format!("it has another result of point {point} than another folder");
                    return Err(RunError::Damaged { path: part.place.clone(), reason });
                }
            }
        }
        Ok(gathering)
    }

    /// Into how many parts the sweep is split.
    #[must_use]
    pub fn of_parts(&self) -> u64 {
        self.of
    }

    /// Parts of which points are missing, and how many.
    #[must_use]
    pub fn missing(&self) -> Vec<(Share, u64)> {
        let there =
            |share: Share| self.units.keys().filter(|&&unit| share.holds(unit)).count() as u64;
        Share::all(self.of)
            .map(|share| (share, share.count(self.wanted) - there(share)))
            .filter(|(_, missing)| *missing > 0)
            .collect()
    }

    /// The finished points, in order of their numbers.
    #[must_use]
    pub fn into_points(self) -> Vec<PointResult> {
        let mut points: Vec<PointResult> = self.units.into_values().collect();
        points.sort_by_key(|point| point.number);
        points
    }
}
