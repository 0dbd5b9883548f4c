//! Charts over the ratio: positions, collimation, wavefront, sensitivities, groove angles.

use driver::cam::{CurvePoint, Hold, MovementCurve, Part};
use merit_function::wishes::Wishes;

use super::axis::Axis;
use super::chart::{Chart, Level, Series, chart, room_of};
use super::panel::Panel;

/// A curve over the ratio, interrupted where the movement curve breaks off.
fn over_ratio(
    curve: &MovementCurve,
    value: impl Fn(&CurvePoint) -> Option<f64>,
) -> Vec<(f64, Option<f64>)> {
    let [low, high] = curve.ends();
    // Ratios are looked at in steps of at most a 200th of the way; a wider step is a gap.
    let gap = 1.5 * (high - low) / 200.0;
    let mut points: Vec<(f64, Option<f64>)> = Vec::new();
    for point in &curve.fine {
        if let Some(&(last, _)) = points.last()
            && point.ratio - last > gap
        {
            points.push((0.5 * (last + point.ratio), None));
        }
        points.push((point.ratio, value(point)));
    }
    points
}

fn over(
    curve: &MovementCurve,
    title: &str,
    y: Axis,
    series: Vec<Series>,
    levels: Vec<Level>,
) -> Chart {
    let marks = curve.states.iter().map(|state| (state.ratio, state.name.clone()));
    Chart {
        title: title.into(),
        x: Axis::linear("ratio", ""),
        y,
        y_holds: Vec::new(),
        series,
        levels,
        names_room: names_room(curve),
        marks: if curve.states.len() <= 12 { marks.collect() } else { Vec::new() },
    }
}

const EXACT: &str = "exact rays";

fn still(group: &str) -> String {
    format!("{group} (still)")
}

/// Room for every name that a chart over the ratio may have: their ratios stand below each other.
fn names_room(curve: &MovementCurve) -> f64 {
    let groups = curve.groups.iter().map(|group| room_of(&still(&group.name)));
    groups.fold(room_of(EXACT), f64::max)
}

/// A curve for every group that moves, in the colour it has in the layout.
fn of_groups(
    curve: &MovementCurve,
    value: impl Fn(&CurvePoint, usize) -> Option<f64>,
) -> Vec<Series> {
    let series = curve.moving().map(|group| Series {
        name: curve.groups[group].name.clone(),
        points: over_ratio(curve, |point| value(point, group)),
        style: group,
        dots: false,
    });
    series.collect()
}

/// Positions of the moving groups, a field each: a short way shows beside a long one.
#[must_use]
pub(crate) fn positions(curve: &MovementCurve, width: f64) -> Panel {
    const GAP: f64 = 18.0;
    let series = of_groups(curve, |point, group| Some(point.groups[group].position_mm));
    let columns = series.len().clamp(1, 2);
    let each = (width - GAP * (columns as f64 - 1.0)) / columns as f64;
    let fields = series.into_iter().map(|series| {
        let y = Axis::linear("first vertex from the front datum", "mm");
        let title = format!("Movement curve of {}", series.name);
        let unnamed = Series { name: String::new(), ..series };
        let field = Chart { names_room: 0.0, ..over(curve, &title, y, vec![unnamed], Vec::new()) };
        chart(&field, each, 240.0)
    });
    Panel::grid(fields.collect(), columns, GAP)
}

/// Slopes of the movement curves.
#[must_use]
pub(crate) fn slopes(curve: &MovementCurve, width: f64) -> Panel {
    let series = of_groups(curve, |point, group| Some(point.groups[group].slope_mm_per_ratio));
    let y = Axis::linear("d position/d ratio", "mm");
    chart(&over(curve, "Slopes of the movement curves", y, series, Vec::new()), width, 200.0)
}

/// Pressure angles, where a barrel is given.
#[must_use]
pub(crate) fn pressure_angles(curve: &MovementCurve, width: f64) -> Option<Panel> {
    let barrel = curve.barrel?;
    let series = of_groups(curve, |point, group| Some(point.groups[group].groove?.pressure_deg));
    let y = Axis::linear(
        &format!("barrel of radius {} mm turning {}°", barrel.radius_mm, barrel.turn_deg),
        "degrees",
    );
    Some(chart(&over(curve, "Pressure angles", y, series, Vec::new()), width, 200.0))
}

/// Collimation: what the curve holds on exact rays, and the paraxial slope that goes with it.
#[must_use]
pub(crate) fn collimation(curve: &MovementCurve, wishes: &Wishes, width: f64) -> Panel {
    let exact = Series {
        name: EXACT.into(),
        points: over_ratio(curve, |point| Some(point.collimation_urad)),
        style: 0,
        dots: false,
    };
    let paraxial = Series {
        name: "paraxial".into(),
        points: over_ratio(curve, |point| point.paraxial_off_urad),
        style: 1,
        dots: false,
    };
    let goal = goal(wishes, |goals| goals.exit_slope_urad);
    let levels = goal.into_iter().flat_map(|within| {
        [("goal", within), ("goal", -within)]
            .map(|(name, value)| Level { name: name.into(), value })
    });
    let what = match (curve.exit_focus_m, curve.held) {
        (None, Hold::Ratio) => "Collimation with one group moving".to_owned(),
        (None, _) => "Collimation along the curve".to_owned(),
        (Some(focus_m), Hold::Ratio) => format!("Off the focus at {focus_m} m, one group moving"),
        (Some(focus_m), _) => format!("Off the focus at {focus_m} m along the curve"),
    };
    let title = &format!("{what}: exit slope at the 1/e² radius");
    let y = Axis::linear("", "µrad");
    chart(&over(curve, title, y, vec![exact, paraxial], levels.collect()), width, 200.0)
}

/// The one value of a goal, if all states share it.
fn goal(
    wishes: &Wishes,
    pick: impl Fn(&merit_function::goals::Goals) -> Option<f64>,
) -> Option<f64> {
    let first = pick(wishes.states.first()?)?;
    wishes.states.iter().all(|goals| pick(goals) == Some(first)).then_some(first)
}

/// RMS wavefront error between and at the states.
#[must_use]
pub(crate) fn wavefront(curve: &MovementCurve, wishes: &Wishes, width: f64) -> Panel {
    let wavelengths = curve.fine.first().map_or(&[][..], |point| &point.wavefront);
    let series = wavelengths.iter().enumerate().map(|(w, at)| Series {
        name: format!("{} nm", at.wavelength_nm),
        points: over_ratio(curve, |point| point.wavefront.get(w)?.rms_waves),
        style: w,
        dots: false,
    });
    let levels = goal(wishes, |goals| goals.wavefront_rms_waves)
        .map(|value| Level { name: "goal".into(), value });
    let y = Axis::linear("RMS", "waves");
    let chart_of = over(
        curve,
        "Wavefront error along the curve",
        y,
        series.collect(),
        levels.into_iter().collect(),
    );
    chart(&chart_of, width, 200.0)
}

/// What the collimation changes by when a group is out of place.
#[must_use]
pub(crate) fn sensitivities(curve: &MovementCurve, width: f64) -> Panel {
    let groups = 0..curve.groups.len();
    let series = groups.map(|group| Series {
        name: match curve.groups[group].part {
            Part::Still => still(&curve.groups[group].name),
            _ => curve.groups[group].name.clone(),
        },
        points: over_ratio(curve, |point| Some(point.groups[group].collimation_urad_per_um)),
        style: group,
        dots: false,
    });
    let y = Axis::linear("change of the exit slope", "µrad per µm");
    let title = match curve.exit_focus_m {
        None => "Sensitivity of collimation to each group's position",
        Some(_) => "Sensitivity of the focus to each group's position",
    };
    chart(&over(curve, title, y, series.collect(), Vec::new()), width, 200.0)
}
