//! What is tried once more where a run of the solver has ended short of what is wanted, because of
//! what it cannot see from where it stood.

use merit_function::assessment::{Assessment, LimitAssessment, assess};
use merit_function::limits::LimitKind;
use merit_function::problem::MeritFunction;

use super::{OptimiseError, Widened};
use crate::design_file::DesignFile;
use crate::solve::{self, Observer, Outcome, Settings, Stopped};

/// What a run of the solver came to.
pub(super) struct Ended {
    pub(super) outcome: Outcome,
    /// The file with the numbers found.
    pub(super) file: DesignFile,
    pub(super) assessment: Assessment,
}

impl Ended {
    pub(super) fn of(
        file: &DesignFile,
        merit: &MeritFunction,
        outcome: Outcome,
    ) -> Result<Self, OptimiseError> {
        let mut design = file.design.clone();
        merit.variables().write(&outcome.variables, &mut design);
        let file = file.with_numbers_of(&design).map_err(OptimiseError::Result)?;
        let assessment = assess(&file.design, &file.wishes);
        Ok(Self { outcome, file, assessment })
    }

    /// Whether nobody asked for this end and there were iterations left.
    fn came_to_an_end(&self) -> bool {
        use Stopped::{Interrupted, IterationLimit, Observer};
        !matches!(self.outcome.stopped, Interrupted | IterationLimit | Observer)
    }

    /// The merit, what limits add included.
    fn total(&self) -> f64 {
        self.assessment.merit.total.unwrap_or(f64::INFINITY)
    }

    /// Whether the outermost ray comes to a focus inside where that is forbidden.
    fn has_a_focus(&self) -> bool {
        let of_focus = |limit: &&LimitAssessment| limit.limit == LimitKind::InternalFocus;
        let mut limits = self.assessment.limits.iter().filter(of_focus);
        limits.any(|limit| limit.value.is_some() && !limit.met)
    }
}

/// What is needed to run the solver once more.
pub(super) struct Retry<'a> {
    pub(super) file: &'a DesignFile,
    pub(super) merit: &'a mut MeritFunction,
    pub(super) settings: &'a Settings,
    pub(super) observer: &'a mut dyn Observer,
    /// Takes up what runs have cost that are not told otherwise.
    pub(super) spent: &'a mut Widened,
}

impl Retry<'_> {
    /// Where goals are missed under limits on ghosts, tries from the same start without these, and
    /// then with them from where that has led. A ghost's focus crosses a lens as other numbers
    /// change: a wall in the way of the solver, with open ground behind.
    pub(super) fn past_the_ghosts(
        &mut self,
        ended: Ended,
        start: &[f64],
    ) -> Result<Ended, OptimiseError> {
        let ghosts = [LimitKind::GhostClearanceMm, LimitKind::DoubleGhostClearanceMm];
        let limited = ghosts.iter().any(|&kind| self.file.wishes.limits.range(kind).is_some());
        if ended.assessment.meets || !limited || !ended.came_to_an_end() {
            return Ok(ended);
        }
        self.merit.look_at_ghosts(false);
        let without = solve::run(self.merit, start, self.settings, self.observer);
        self.merit.look_at_ghosts(true);
        // What was found stands where anything else cannot be begun.
        let Ok(without) = without else { return Ok(ended) };
        let again = self.again(&without);
        self.spent.take(without);
        self.better(ended, again)
    }

    /// Where the outermost ray crosses the axis although the paraxial one does not, goes on with
    /// both kept from it.
    pub(super) fn clear_of_a_focus(&mut self, ended: Ended) -> Result<Ended, OptimiseError> {
        if !ended.has_a_focus() || !ended.came_to_an_end() {
            return Ok(ended);
        }
        self.merit.keep_the_edge_ray_from_a_focus();
        let again = self.again(&ended.outcome);
        self.better(ended, again)
    }

    fn again(&mut self, outcome: &Outcome) -> Option<Outcome> {
        solve::run(self.merit, &outcome.variables, self.settings, self.observer).ok()
    }

    /// The better of two ends, which tells that the user has stopped the second.
    fn better(&mut self, first: Ended, second: Option<Outcome>) -> Result<Ended, OptimiseError> {
        let Some(second) = second else { return Ok(first) };
        let mut second = Ended::of(self.file, self.merit, second)?;
        let asked = matches!(second.outcome.stopped, Stopped::Interrupted | Stopped::Observer);
        let mut first = first;
        if second.total() < first.total() {
            std::mem::swap(&mut first, &mut second);
        } else if asked {
            first.outcome.stopped = second.outcome.stopped;
        }
        self.spent.take(second.outcome);
        Ok(first)
    }
}

#[cfg(test)]
mod tests {
    use serde_json::{Value, json};
    use surface_model::document::Document;

    use super::*;
    use crate::optimise::optimise;
    use crate::solve::Unwatched;

    /// A marking laser's expander whose tube has become too short for it.
    fn marker() -> Value {
        let lens = |radii: [f64; 2], thickness: f64, diameter: f64| {
            json!([{ "radii_mm": radii, "glasses": ["fused-silica"],
                     "thicknesses_mm": [thickness], "diameter_mm": diameter }])
        };
        let state = |ratio: f64, spacings: [f64; 2]| json!({ "name": format!("{ratio}x"), "ratio": ratio, "spacings_mm": spacings });
        json!({
            "format": "drawtube/1",
            "beam": { "wavelengths_nm": [1064], "diameter_mm": 2 },
            "groups": [
                { "name": "entry", "elements": lens([14.1157, -29.6909], 1.8981, 5.5) },
                { "name": "runner", "elements": lens([-21.0032, 3.5321], 1.0, 3.5) },
                { "name": "exit", "elements": lens([506.1658, -110.7408], 3.3836, 35.5) },
            ],
            "housing": { "track_mm": 180 },
            "states": [
                state(2.0, [12.029, 162.5724]),
                state(3.0, [11.3217, 172.9885]),
                state(4.0, [10.6146, 178.2116]),
                state(6.0, [9.1998, 183.4203]),
                state(8.0, [7.7855, 185.9328]),
            ],
            "goals": {
                "wavefront_rms_waves": { "within": 0.05 },
                "ratio_percent": { "within": 1 },
                "exit_slope_urad": { "within": 30 },
            },
            "limits": {
                "spacing_mm": { "min": 1 },
                "edge_thickness_mm": { "min": 1.5 },
                "internal_focus": "forbid",
            },
        })
    }

    fn end(document: Value) -> Assessment {
        let file = DesignFile::read(Document::from_value("marker", document)).unwrap();
        optimise(&file, &Settings::default(), &mut Unwatched).unwrap().report.end
    }

    /// The design found without the limit on ghosts keeps it, so the limit may not stand in the way
    /// of finding it.
    #[test]
    fn a_limit_on_ghosts_that_can_be_kept_costs_no_goal() {
        let mut document = marker();
        let without = end(document.clone());
        document["limits"]["ghost_clearance_mm"] = json!({ "min": 2 });
        let with = end(document);
        assert!(without.meets && with.meets);
        let (without, with) = (without.merit.total.unwrap(), with.merit.total.unwrap());
        assert!((with / without - 1.0).abs() < 1e-3, "{with} {without}");
    }

    /// Bent so strongly, the entry lens makes the outermost ray cross the axis where the paraxial
    /// one does not.
    #[test]
    fn the_outermost_ray_is_kept_from_a_focus_too() {
        let mut document = marker();
        document["groups"][0]["elements"][0]["radii_mm"] = json!([3.7975, 5.2346]);
        document["groups"][1]["elements"][0]["radii_mm"] = json!([-9.1549, 4.7892]);
        document["groups"][2]["elements"][0]["radii_mm"] = json!([437.4031, -104.1761]);
        document["states"] =
            json!([{ "name": "2x", "ratio": 2, "spacings_mm": [9.5546, 149.1581] }]);
        document["free"] = json!(["spacings"]);
        let of_focus = |end: &Assessment| {
            let mut limits = end.limits.iter();
            limits.find(|limit| limit.limit == LimitKind::InternalFocus).unwrap().clone()
        };
        let file = DesignFile::read(Document::from_value("marker", document.clone())).unwrap();
        let start = assess(&file.design, &file.wishes);
        assert!(of_focus(&start).value.unwrap() < -0.03, "the outermost ray crosses the axis");
        let end = end(document);
        assert!(of_focus(&end).met, "{:?}", of_focus(&end));
    }
}
