//! Movement curves: where every group stands at any ratio between the designed states.
//!
//! A zoom is designed at a few ratios and used at all of them. Between two states the positions
//! of the groups are those that hold ratio and collimation (`collimation.rs` says of what), found
//! by continuation from state to state (`follow.rs`). Two moving groups are just enough for the
//! two conditions; where more move, the ones whose help is needed least follow the monotone cubic
//! through the designed states (`guide.rs`), and the other two are solved for. Where only one
//! moves, the ratio alone is held and the collimation is what comes of it. Where the states are
//! wanted focused, the focus is held in its place (`exit.rs`).
//!
//! Each point is then assessed as a zoom state of its own: wavefronts, limits, goals. Start
//! reading at [`movement_curve`].

mod barrel;
mod collimation;
mod document;
mod error;
mod exit;
mod findings;
mod follow;
mod guide;
mod settings;
mod slide;
mod stations;
mod table;
mod telling;
#[cfg(test)]
mod tests;
mod walk;

use merit_function::assessment::{Assessment, assess};
use merit_function::goals::{FocusGoalDocument, Goals, GoalsDocument};
use merit_function::wishes::Wishes;
use surface_model::design::{Design, ZoomState};
use surface_model::laser::Laser;

use collimation::Gauge;
use exit::{Exit, left_out};
use findings::Look;
use follow::{Equations, FROM_A_STATE, Point, Stop};
use guide::MonotoneCubic;
use slide::Slide;
use stations::{Station, knots, stations};
use telling::Teller;
use walk::walk;

pub use barrel::{Barrel, Groove, USUAL_TURN_DEG};
pub use document::{CurvePoint, DesignedState, GroupAtRatio, GroupWay, Hold, MovementCurve, Part};
pub use error::CamError;
pub use findings::{Finding, FindingKind};
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
    let knots = knots(design, &alike)?;
    let stations = stations(design, &knots, settings)?;
    let wavelengths_nm = wavelengths(design);
    let slide = Slide::of(design);
    let positions = design.all_positions_mm();
    let starts: Vec<Vec<f64>> = knots.iter().map(|&k| slide.pick(&positions[k])).collect();
    let mut equations = equations(design, &slide, &knots, &starts, wavelengths_nm[0], exit)?;
    let roots = roots(design, &mut equations, exit, &knots, &starts)?;
    let (reached, mut findings) = walk(design, &mut equations, &knots, &roots, &stations);
    let hold = match (equations.hold_collimation, exit.focus_m()) {
        (true, None) => Hold::RatioAndCollimation,
        (true, Some(_)) => Hold::RatioAndFocus,
        (false, _) => Hold::Ratio,
    };
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
    let states = knots.iter().zip(&roots).map(|(&k, root)| {
        let curve = slide.positions_mm(&root.moving_mm);
        DesignedState {
            name: design.states[k].name.clone(),
            ratio: design.states[k].ratio,
            curve_less_design_mm: curve.iter().zip(&positions[k]).map(|(a, b)| a - b).collect(),
        }
    });
    Ok(MovementCurve {
        format: "drawtube-cam/1",
        title: design.title.clone(),
        wavelength_nm: wavelengths_nm[0],
        held: hold,
        exit_focus_m: exit.focus_m(),
        barrel: settings.barrel,
        states: states.collect(),
        groups,
        points,
        fine,
        sound: findings.iter().all(|finding| !finding.wrong),
        findings,
    })
}

/// The wavelengths all states share, or those of the beam.
fn wavelengths(design: &Design) -> Vec<f64> {
    let first = design.states.first().map(|state| &state.wavelengths_nm);
    match first {
        Some(own) if design.states.iter().all(|state| state.wavelengths_nm == *own) => own.clone(),
        _ => design.beam.wavelengths_nm.clone(),
    }
}

/// As many equations as groups that move.
fn equations<'a>(
    design: &Design,
    slide: &'a Slide,
    knots: &[usize],
    starts: &[Vec<f64>],
    wavelength_nm: f64,
    exit: Exit,
) -> Result<Equations<'a>, CamError> {
    let moving = slide.moving().len();
    if moving == 0 {
        return Err(CamError::NothingMoves);
    }
    let mut gauge = Gauge::new(design, &design.states[knots[0]], wavelength_nm)?;
    gauge.want_vergence(exit.vergence_per_mm());
    let mut equations =
        Equations { slide, gauge, hold_collimation: moving > 1, guides: Vec::new() };
    if moving > 2 {
        let solved = best_pair(&mut equations, starts, moving);
        let ratios: Vec<f64> = knots.iter().map(|&k| design.states[k].ratio).collect();
        let guided = (0..moving).filter(|j| !solved.contains(j));
        equations.guides = guided
            .map(|j| {
                let at_states: Vec<f64> = starts.iter().map(|start| start[j]).collect();
                (j, MonotoneCubic::through(&ratios, &at_states))
            })
            .collect();
    }
    Ok(equations)
}

/// The two moving groups that command ratio and collimation best: those whose determinant of
/// derivatives is largest at the state where it is smallest.
fn best_pair(equations: &mut Equations<'_>, starts: &[Vec<f64>], moving: usize) -> [usize; 2] {
    let slide = equations.slide;
    let mut derivatives = Vec::new();
    for start in starts {
        if let Ok(held) = equations.gauge.measure(&slide.spacings_mm(start)) {
            let by_ratio = slide.pick(&slide.by_position(&held.ratio_by_spacing));
            let by_slope = slide.pick(&slide.by_position(&held.collimation_by_spacing));
            derivatives.push((by_ratio, by_slope));
        }
    }
    let command = |i: usize, j: usize| {
        let determinants = derivatives.iter().map(|(r, c)| (r[i] * c[j] - r[j] * c[i]).abs());
        determinants.fold(f64::INFINITY, f64::min)
    };
    let pairs = (0..moving).flat_map(|i| (i + 1..moving).map(move |j| [i, j]));
    let best = pairs.max_by(|a, b| command(a[0], a[1]).total_cmp(&command(b[0], b[1])));
    best.unwrap_or([0, 1])
}

/// The point of the curve at every designed state.
fn roots(
    design: &Design,
    equations: &mut Equations<'_>,
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
            reason: reason(stop),
        })
    };
    knots.iter().zip(starts).map(solve).collect()
}

fn reason(stop: Stop) -> String {
    match stop {
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
    let wishes = Wishes { states: vec![goals; reached.len()], ..wishes.clone() };
    assess(&between, &wishes)
}
