//! How the beam should leave along the curve: collimated, or to a focus.
//!
//! One movement holds one way of leaving. Where a design has states of several, such as one focused
//! nearby beside those of the collimated beam, the curve is that of the states which want the same
//! as the first of the file; the others are told.

use merit_function::goals::Goals;
use merit_function::wishes::Wishes;
use surface_model::design::Design;

use super::finding::{Finding, FindingKind};

/// How the beam should leave.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Exit {
    /// Distance of the focus behind the last vertex, m; `None` for a collimated beam.
    focus_m: Option<f64>,
}

impl Exit {
    fn of(goals: &Goals) -> Self {
        Self { focus_m: goals.exit_focus_m.map(|goal| goal.wanted_m) }
    }

    /// What the first state wants, and the states that want the same, in the order of the file.
    pub(super) fn of_the_first(wishes: &Wishes) -> (Self, Vec<usize>) {
        let exit = wishes.states.first().map_or(Self { focus_m: None }, Self::of);
        let same = wishes.states.iter().enumerate().filter(|(_, goals)| Self::of(goals) == exit);
        (exit, same.map(|(k, _)| k).collect())
    }

    /// Distance of the focus that is wanted, m.
    pub(super) fn focus_m(self) -> Option<f64> {
        self.focus_m
    }

    /// One over the distance of the focus, 1/mm; zero for a collimated beam.
    pub(super) fn vergence_per_mm(self) -> f64 {
        self.focus_m.map_or(0.0, |focus_m| 1e-3 / focus_m)
    }

    fn told(self) -> String {
        match self.focus_m {
            None => "leave collimated".to_owned(),
            Some(focus_m) => format!("come to a focus at {focus_m} m"),
        }
    }
}

/// The states that the curve does not go through, and why.
pub(super) fn left_out(
    design: &Design,
    wishes: &Wishes,
    exit: Exit,
    knots: &[usize],
) -> Vec<Finding> {
    let states = design.states.iter().zip(&wishes.states).enumerate();
    let others = states.filter(|(k, _)| !knots.contains(k));
    others
        .map(|(_, (state, goals))| {
            let name = &state.name;
            let own = Exit::of(goals);
            let why = if own == exit {
                format!("another state has its ratio of {}", state.ratio)
            } else {
                format!("its beam is to {}, that of the curve to {}", own.told(), exit.told())
            };
            Finding {
                kind: FindingKind::LeftOut,
                wrong: false,
                ratios: [state.ratio, state.ratio],
                what: name.clone(),
                worst: None,
                told: format!("state {name} is not on the curve: {why}"),
            }
        })
        .collect()
}
