//! Movement curves: where every group stands at any ratio between the designed states.
//!
//! A zoom is designed at a few ratios and used at all of them. Between two states the positions
//! of the groups are those that hold ratio and collimation ([`collimation`] says of what), found
//! by continuation from state to state ([`follow`]). Two moving groups are just enough for the
//! two conditions; where more move, the ones whose help is needed least follow the monotone cubic
//! through the designed states ([`guide`]), and the other two are solved for. Where only one
//! moves, the ratio alone is held and the collimation is what comes of it.
//!
//! Each point is then assessed as a zoom state of its own: wavefronts, limits, goals. Start
//! reading at [`movement_curve`].

mod barrel;
mod collimation;
mod document;
mod error;
mod findings;
mod follow;
mod guide;
mod settings;
mod slide;
mod stations;
mod table;
#[cfg(test)]
mod tests;

use merit_function::assessment::{Assessment, assess};
use merit_function::goals::{Goals, GoalsDocument};
use merit_function::wishes::Wishes;
use surface_model::design::{Design, ZoomState};
use surface_model::laser::Laser;

use collimation::Gauge;
use findings::Look;
use follow::{Equations, Point, Stop};
use guide::MonotoneCubic;
use slide::Slide;
use stations::{Station, knots, stations};

pub use barrel::{Barrel, Groove, USUAL_TURN_DEG};
pub use document::{CurvePoint, DesignedState, GroupAtRatio, GroupWay, Hold, MovementCurve, Part};
pub use error::CamError;
pub use findings::{Finding, FindingKind};
pub use settings::{CamSettings, Ratios};
pub use table::csv_table;

/// Two solutions at one ratio are the same when no group is farther off than this, mm.
const SAME_PLACE_MM: f64 = 1e-4;

/// Works out the movement curve of a design.
///
/// Ratio and collimation are held at the beam's first wavelength, or at the states' own first one
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
    let focused = wishes.states.iter().position(|goals| goals.exit_focus_m.is_some());
    if let Some(state) = focused.and_then(|k| design.states.get(k)) {
        return Err(CamError::Focused(state.name.clone()));
    }
    let knots = knots(design)?;
    let stations = stations(design, &knots, settings)?;
    let wavelengths_nm = wavelengths(design);
    let slide = Slide::of(design);
    let positions = design.all_positions_mm();
    let starts: Vec<Vec<f64>> = knots.iter().map(|&k| slide.pick(&positions[k])).collect();
    let mut equations = equations(design, &slide, &knots, &starts, wavelengths_nm[0])?;
    let roots = roots(design, &mut equations, &knots, &starts)?;
    let (reached, mut findings) = walk(design, &mut equations, &knots, &roots, &stations);
    let hold = if equations.hold_collimation { Hold::RatioAndCollimation } else { Hold::Ratio };
    let guided: Vec<usize> = equations.guides.iter().map(|(j, _)| slide.moving()[*j]).collect();

    let assessment = assess_points(design, wishes, &slide, &reached, &wavelengths_nm);
    let ends = [stations[0].ratio, stations[stations.len() - 1].ratio];
    let teller = Teller { design, slide: &slide, settings, ends };
    let fine: Vec<CurvePoint> = reached
        .iter()
        .enumerate()
        .map(|(k, (station, point))| teller.point(station, point, &assessment, k))
        .collect();
    let groups = teller.ways(&fine, &guided);
    let look =
        Look { design, wishes, settings, groups: &groups, points: &fine, assessment: &assessment };
    findings.extend(look.findings());
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
) -> Result<Equations<'a>, CamError> {
    let moving = slide.moving().len();
    if moving == 0 {
        return Err(CamError::NothingMoves);
    }
    let gauge = Gauge::new(design, &design.states[knots[0]], wavelength_nm)?;
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
    knots: &[usize],
    starts: &[Vec<f64>],
) -> Result<Vec<Point>, CamError> {
    let solve = |(&k, start): (&usize, &Vec<f64>)| {
        let state = &design.states[k];
        equations.solve(state.ratio, start).map_err(|stop| CamError::State {
            state: state.name.clone(),
            ratio: state.ratio,
            and: if equations.hold_collimation { "and collimate" } else { "" },
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

/// Goes from state to state; where the way forward ends, comes back from the next one.
fn walk(
    design: &Design,
    equations: &mut Equations<'_>,
    knots: &[usize],
    roots: &[Point],
    stations: &[Station],
) -> (Vec<(Station, Point)>, Vec<Finding>) {
    let mut reached: Vec<(Station, Point)> = Vec::new();
    let mut findings = Vec::new();
    let mut rest = stations;
    for (pair, ends) in roots.windows(2).zip(knots.windows(2)) {
        let (from, to) = (&pair[0], &pair[1]);
        let count = rest.iter().position(|station| station.state == Some(ends[1])).unwrap_or(0);
        let (inner, next) = (&rest[1..count], &rest[count..]);
        reached.push((rest[0], from.clone()));
        let ratios: Vec<f64> =
            inner.iter().map(|station| station.ratio).chain([to.ratio]).collect();
        let (mut points, stopped) = equations.follow(from, &ratios);
        let name = |k: usize| design.states[k].name.as_str();
        let names = (name(ends[0]), name(ends[1]));
        if stopped.is_none() {
            let end = points.pop();
            if let Some(end) = end.filter(|end| away_mm(end, to) > SAME_PLACE_MM) {
                findings.push(other_branch(names, from, to, &end, equations.slide, design));
            }
        }
        reached.extend(inner.iter().copied().zip(points.iter().cloned()));
        if let Some((last, stop)) = stopped {
            let missing = &inner[points.len().min(inner.len())..];
            let back: Vec<f64> = missing.iter().rev().map(|station| station.ratio).collect();
            let (points, stopped) = equations.follow(to, &back);
            let first = stopped.map_or(back.last().copied().unwrap_or(to.ratio), |(at, _)| at);
            findings.push(broken(names, last, first, stop));
            let behind = missing[missing.len() - points.len()..].iter().copied();
            reached.extend(behind.zip(points.into_iter().rev()));
        }
        rest = next;
    }
    if let (Some(station), Some(root)) = (rest.first(), roots.last()) {
        reached.push((*station, root.clone()));
    }
    (reached, findings)
}

fn away_mm(a: &Point, b: &Point) -> f64 {
    let pairs = a.moving_mm.iter().zip(&b.moving_mm);
    pairs.map(|(a, b)| (a - b).abs()).fold(0.0, f64::max)
}

/// Two states whose curves do not meet.
fn other_branch(
    (from_name, to_name): (&str, &str),
    from: &Point,
    to: &Point,
    end: &Point,
    slide: &Slide,
    design: &Design,
) -> Finding {
    let places: Vec<String> = slide
        .moving()
        .iter()
        .zip(end.moving_mm.iter().zip(&to.moving_mm))
        .map(|(&group, (here, there))| {
            format!("{} at {here:.3} mm, not {there:.3} mm", design.groups[group].name)
        })
        .collect();
    Finding {
        kind: FindingKind::BranchChange,
        wrong: true,
        ratios: [from.ratio, to.ratio],
        what: format!("{from_name}, {to_name}"),
        worst: Some(away_mm(end, to)),
        told: format!(
            "no continuous movement leads from {from_name} to {to_name}: followed from \
             {from_name}, the curve ends with {}",
            places.join(", ")
        ),
    }
}

/// A curve that ends between two states.
fn broken((from, to): (&str, &str), last: f64, first: f64, stop: Stop) -> Finding {
    let why = match stop {
        Stop::NoSolution => "the curve turns back there".to_owned(),
        Stop::Fault(fault) => fault.to_string(),
    };
    Finding {
        kind: FindingKind::BranchChange,
        wrong: true,
        ratios: [last.min(first), first.max(last)],
        what: format!("{from}, {to}"),
        worst: None,
        told: format!(
            "no continuous movement leads from {from} to {to}: from {from} the curve reaches only \
             {last:.4}x, from {to} {first:.4}x ({why})"
        ),
    }
}

/// The points as zoom states, assessed. State k is called k.
fn assess_points(
    design: &Design,
    wishes: &Wishes,
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
    let none = Goals::of_state(&GoalsDocument::default(), None, 1.0);
    let wishes = Wishes { states: vec![none; reached.len()], ..wishes.clone() };
    assess(&between, &wishes)
}

/// Puts together what is told of each point.
struct Teller<'a> {
    design: &'a Design,
    slide: &'a Slide,
    settings: &'a CamSettings,
    /// Smallest and largest ratio.
    ends: [f64; 2],
}

impl Teller<'_> {
    fn point(
        &self,
        station: &Station,
        point: &Point,
        assessment: &Assessment,
        k: usize,
    ) -> CurvePoint {
        let [low, high] = self.ends;
        let barrel = self.settings.barrel;
        let positions = self.slide.positions_mm(&point.moving_mm);
        let by_position = self.slide.by_position(&point.held.collimation_by_spacing);
        let moving = self.slide.moving();
        let groups = self.design.groups.iter().enumerate().map(|(g, group)| {
            let place = moving.iter().position(|&other| other == g);
            let slope = place.map_or(0.0, |place| point.slopes_mm[place]);
            GroupAtRatio {
                name: group.name.clone(),
                position_mm: positions[g],
                slope_mm_per_ratio: slope,
                collimation_urad_per_um: by_position[g] * 1e3,
                groove: barrel.filter(|_| place.is_some()).map(|b| b.groove(slope, low, high)),
            }
        });
        let state = &assessment.states[k];
        CurvePoint {
            ratio: station.ratio,
            state: station.state.map(|k| self.design.states[k].name.clone()),
            barrel_deg: barrel.map(|barrel| barrel.turned_deg(station.ratio, low, high)),
            groups: groups.collect(),
            spacings_mm: state.spacings_mm.clone(),
            collimation_urad: point.held.collimation_rad * 1e6,
            ratio_error_percent: state.ratio_error_percent,
            exit_slope_urad: state.exit_slope_urad,
            wavefront: state.wavefront.clone(),
        }
    }

    fn ways(&self, fine: &[CurvePoint], guided: &[usize]) -> Vec<GroupWay> {
        let way = |(g, group): (usize, &surface_model::design::Group)| {
            let at = fine.iter().map(|point| &point.groups[g]);
            let (mut low, mut high, mut steepest) = (f64::INFINITY, f64::NEG_INFINITY, 0.0_f64);
            for place in at {
                low = low.min(place.position_mm);
                high = high.max(place.position_mm);
                steepest = steepest.max(place.slope_mm_per_ratio.abs());
            }
            GroupWay {
                name: group.name.clone(),
                part: if !self.slide.moving().contains(&g) {
                    Part::Still
                } else if guided.contains(&g) {
                    Part::Guided
                } else {
                    Part::Solved
                },
                from_to_mm: [low, high],
                travel_mm: high - low,
                steepest_mm_per_ratio: steepest,
            }
        };
        self.design.groups.iter().enumerate().map(way).collect()
    }
}
