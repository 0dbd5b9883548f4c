//! Movement curves: where every group stands at any ratio between the designed states.
//!
//! A zoom is designed at a few ratios and used at all of them. Between two states the positions
//! of the groups are those that hold ratio and collimation ([`merit_function::movement`] says
//! of what), found by continuation from state to state. Where only one group moves, the ratio alone
//! is held and the collimation is what comes of it. Where the states are wanted focused, the focus
//! is held in its place (`exit.rs`).
//!
//! Each point is then assessed as a zoom state of its own: wavefronts, limits, goals. Start
//! reading at [`movement_curve`].

mod barrel;
mod document;
mod error;
mod exit;
mod finding;
mod findings;
mod limits_between;
mod settings;
mod stations;
mod stretch;
mod table;
mod telling;
#[cfg(test)]
mod tests;
mod walk;

use merit_function::assessment::{Assessment, assess};
use merit_function::goals::{FocusGoalDocument, Goals, GoalsDocument};
use merit_function::movement::{
    Equations, FROM_A_STATE, HeldFault, Point, Slide, Stop, knots_of, wavelengths_nm,
};
use merit_function::wishes::Wishes;
use surface_model::design::{Design, ZoomState};
use surface_model::laser::Laser;

use exit::{Exit, left_out};
use findings::Look;
use stations::{Station, stations};
use telling::Teller;
use walk::walk;

pub use barrel::{Barrel, Groove, USUAL_TURN_DEG};
pub use document::{CurvePoint, DesignedState, GroupAtRatio, GroupWay, Hold, MovementCurve, Part};
pub use error::CamError;
pub use finding::{Finding, FindingKind};
pub use settings::{CamSettings, Ratios};
pub use table::csv_table;

/// Works out the movement curve of a design.
///
/// Ratio and collimation (or, where the states want `exit_focus_m`, that focus) are held at the
/// beam's first wavelength, or at the states' own first one
/// where they all share another. At the designed states the curve holds both exactly, which the
/// designed positions do to within the goals; the difference is told.
///
/// # Errors
/// See [`CamError`]. A curve that breaks off between two states is no error: it is told among the
/// findings.
pub fn movement_curve(
    design: &Design,
    wishes: &Wishes,
    settings: &CamSettings,
) -> Result<MovementCurve, CamError> {
    settings.check()?;
    let (exit, alike) = Exit::of_the_first(wishes);
    let knots = knots_of(design, &alike)?;
    let stations = stations(design, &knots, settings)?;
    let wavelengths_nm = wavelengths_nm(design);
    let slide = Slide::of(design);
    let positions = design.all_positions_mm();
    let starts: Vec<Vec<f64>> = knots.iter().map(|&k| slide.pick(&positions[k])).collect();
    let mut equations = Equations::leaving_with(design, &knots, exit.vergence_per_mm())?
        .ok_or(CamError::NothingMoves)?;
    let roots = roots(design, &mut equations, exit, &knots, &starts)?;
    let (reached, mut findings) = walk(design, &mut equations, &knots, &roots, &stations);
    let guided: Vec<usize> = equations.guides.iter().map(|(j, _)| slide.moving()[*j]).collect();

    let assessment = assess_points(design, wishes, exit, &slide, &reached, &wavelengths_nm);
    let ends = [stations[0].ratio, stations[stations.len() - 1].ratio];
    let teller = Teller { design, slide: &slide, settings, ends, exit };
    let fine: Vec<CurvePoint> = reached
        .iter()
        .enumerate()
        .map(|(k, (station, point))| teller.point(station, point, &assessment, k))
        .collect();
    let groups = teller.ways(&fine, &guided);
    let look = Look {
        design,
        wishes,
        settings,
        knots: &knots,
        groups: &groups,
        points: &fine,
        assessment: &assessment,
    };
    findings.extend(look.findings());
    findings.extend(left_out(design, wishes, exit, &knots));
    let told = reached.iter().zip(&fine).filter(|((station, _), _)| station.told);
    let points = told.map(|(_, point)| point.clone()).collect();
    Ok(MovementCurve {
        format: "drawtube-cam/1",
        title: design.title.clone(),
        wavelength_nm: wavelengths_nm[0],
        held: held(&equations, exit),
        exit_focus_m: exit.focus_m(),
        barrel: settings.barrel,
        states: designed_states(design, &slide, &knots, &roots),
        groups,
        points,
        fine,
        sound: findings.iter().all(|finding| !finding.wrong),
        findings,
    })
}

/// What is held along the curve.
fn held(equations: &Equations, exit: Exit) -> Hold {
    match (equations.hold_collimation, exit.focus_m()) {
        (true, None) => Hold::RatioAndCollimation,
        (true, Some(_)) => Hold::RatioAndFocus,
        (false, _) => Hold::Ratio,
    }
}

/// The designed states beside the points of the curve there.
fn designed_states(
    design: &Design,
    slide: &Slide,
    knots: &[usize],
    roots: &[Point],
) -> Vec<DesignedState> {
    let positions = design.all_positions_mm();
    let states = knots.iter().zip(roots).map(|(&k, root)| {
        let curve = slide.positions_mm(&root.moving_mm);
        DesignedState {
            name: design.states[k].name.clone(),
            ratio: design.states[k].ratio,
            curve_less_design_mm: curve.iter().zip(&positions[k]).map(|(a, b)| a - b).collect(),
        }
    });
    states.collect()
}

/// The point of the curve at every designed state.
fn roots(
    design: &Design,
    equations: &mut Equations,
    exit: Exit,
    knots: &[usize],
    starts: &[Vec<f64>],
) -> Result<Vec<Point>, CamError> {
    let solve = |(&k, start): (&usize, &Vec<f64>)| {
        let state = &design.states[k];
        equations.solve(state.ratio, start, FROM_A_STATE).map_err(|stop| CamError::State {
            state: state.name.clone(),
            ratio: state.ratio,
            and: match (equations.hold_collimation, exit.focus_m()) {
                (false, _) => "",
                (true, None) => "and collimate",
                (true, Some(_)) => "and focus where it is wanted",
            },
            reason: reason(design, stop),
        })
    };
    knots.iter().zip(starts).map(solve).collect()
}

fn reason(design: &Design, stop: Stop) -> String {
    match stop {
        Stop::Fault(HeldFault::Ray(fault)) => design.fault_in_words(&fault),
        Stop::Fault(fault) => fault.to_string(),
        Stop::NoSolution => "Newton's method finds none".into(),
    }
}

/// The points as zoom states, assessed. State k is called k.
fn assess_points(
    design: &Design,
    wishes: &Wishes,
    exit: Exit,
    slide: &Slide,
    reached: &[(Station, Point)],
    wavelengths_nm: &[f64],
) -> Assessment {
    let state = |(k, (station, point)): (usize, &(Station, Point))| ZoomState {
        name: k.to_string(),
        ratio: station.ratio,
        spacings_mm: slide.spacings_mm(&point.moving_mm),
        wavelengths_nm: wavelengths_nm.to_vec(),
    };
    let states = reached.iter().enumerate().map(state).collect();
    let mut between = Design { states, ..design.clone() };
    // The real beam and its hazards are told of the designed states.
    between.beam.laser = Laser::default();
    // A focus alone is wanted here: wavefronts are told about it.
    let exit_focus_m = exit.focus_m().map(|wanted| FocusGoalDocument { wanted, within: 1.0 });
    let goals = GoalsDocument { exit_focus_m, ..GoalsDocument::default() };
    let goals = Goals::of_state(&goals, None, 1.0);
    let limits = wishes.limits.in_the_states();
    let wishes = Wishes { states: vec![goals; reached.len()], limits, ..wishes.clone() };
    assess(&between, &wishes)
}
