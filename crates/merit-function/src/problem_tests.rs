//! The block Jacobian and the limit gradients against central differences, on designs that have
//! everything: conics, aspheres, cemented pairs, two wavelengths, every kind of housing and limit.

use surface_model::design::Design;
use surface_model::document::Document;
use surface_model::optics_document::OpticsDocument;
use surface_model::place::Place;

use crate::block::{BlockProblem, Bounds, Linearisation};
use crate::goals::GoalsDocument;
use crate::limits::LimitsDocument;
use crate::movement::Aspect;
use crate::problem::MeritFunction;
use crate::variables::{FreePlace, Variables};
use crate::wishes::{Wishes, WishesDocument};

const LIMITS: &str = r#"{
    "edge_thickness_mm": { "min": 1.0, "max": 9.0 }, "edge_gap_mm": { "min": 0.2 },
    "spacing_mm": { "min": 0.5, "max": 200.0 }, "travel_mm": { "min": 1.0, "max": 30.0 },
    "incidence_deg": { "max": 20.0 }, "track_mm": { "max": 149.0 }, "internal_focus": "forbid",
    "fluence_j_cm2": { "max": 1.0 }, "ghost_clearance_mm": { "min": 1.0 },
    "double_ghost_clearance_mm": { "min": 0.5 }, "slope_mm_per_ratio": { "max": 5.0 },
    "monotonic": ["/groups/*"], "between_states": "keep" }"#;

fn design(fixed: &str, track: f64, last: [f64; 2]) -> (Design, Wishes, WishesDocument) {
    let text = format!(
        r#"{{ "format": "drawtube/1", "title": "test",
        "beam": {{ "wavelengths_nm": [532.0, 1064.0], "diameter_mm": 2.4, "traced_to": 1.5,
                   "m_squared": 1.3, "waist_distance_mm": 700.0, "pulse_energy_mj": 3.0 }},
        "groups": [
          {{ "name": "entry", "elements": [
            {{ "radii_mm": [74.76, -20.16], "glasses": ["fused-silica"], "thicknesses_mm": [3.0],
               "diameter_mm": 8.0, "shapes": [ {{ "conic": -0.5 }}, null ] }} ] }},
          {{ "name": "runner", "elements": [
            {{ "radii_mm": [-23.63, 12.0, 8.94], "glasses": ["N-BK7", "N-SF6"],
               "thicknesses_mm": [2.0, 1.5], "diameter_mm": 8.0 }} ] }},
          {{ "name": "exit", "elements": [
            {{ "radii_mm": [426.0, -60.0, -85.6], "glasses": ["N-BK7", "N-SF6"],
               "thicknesses_mm": [5.0, 2.0], "diameter_mm": 26.0 }},
            {{ "radii_mm": ["flat", -300.0], "glasses": ["fused-silica"], "thicknesses_mm": [4.0],
               "diameter_mm": 26.0,
               "shapes": [ null, {{ "conic": -1.2, "asphere": {{ "4": 1.1e-7, "6": 1e-10 }} }} ] }} ],
            "airs_mm": [1.0] }} ],
        "housing": {{ "track_mm": {track}, "fixed": {fixed} }},
        "states": [
          {{ "name": "2x", "ratio": 2.0, "spacings_mm": [13.39, {a}] }},
          {{ "name": "3x", "ratio": 3.0, "spacings_mm": [10.39, {b}], "weight": 2.0,
             "goals": {{ "ratio_percent": {{ "within": 0.5 }},
                        "exit_focus_m": {{ "wanted": 40.0, "within": 2.0 }} }} }} ],
        "goals": {{ "wavefront_rms_waves": {{ "within": 0.05 }}, "ratio_percent": {{ "within": 0.2 }},
                    "exit_slope_urad": {{ "within": 20.0 }}, "divergence_mrad": {{ "within": 0.2 }},
                    "diameter_at_range_mm": {{ "range_m": 30.0, "wanted": 9.0, "within": 1.0 }} }},
        "limits": {LIMITS} }}"#,
        a = last[0],
        b = last[1],
    );
    let document = Document::parse("test", text.as_bytes()).unwrap();
    let optics: OpticsDocument = document.read().unwrap();
    let wishes: WishesDocument = document.read().unwrap();
    (optics.resolve().unwrap(), wishes.resolve().unwrap(), wishes)
}

/// Limits that are ranges of one variable, which make no row.
const BOUNDS: [&str; 4] = ["centre_thickness_mm", "air_mm", "radius_mm", "steepness"];

/// A goal or limit that the designs here do not have is one whose derivative nothing holds.
#[test]
fn the_test_design_has_every_goal_and_every_limit() {
    let (_, _, document) = design("[]", 150.0, [107.22, 108.22]);
    let keys = |schema: schemars::Schema| -> Vec<String> {
        schema.get("properties").unwrap().as_object().unwrap().keys().cloned().collect()
    };
    let goals = serde_json::to_value(document.goals).unwrap();
    let own = serde_json::to_value(document.states[1].goals).unwrap();
    for goal in keys(schemars::schema_for!(GoalsDocument)) {
        assert!(goals.get(&goal).or(own.get(&goal)).is_some(), "no goal {goal}");
    }
    let limits = serde_json::to_value(&document.limits).unwrap();
    for limit in keys(schemars::schema_for!(LimitsDocument)) {
        let is_bound = BOUNDS.contains(&limit.as_str());
        assert_ne!(limits.get(&limit).is_some(), is_bound, "limit {limit}");
    }
}

fn everything(design: &Design) -> Vec<FreePlace> {
    let places = Place::all(design).into_iter();
    places.map(|place| FreePlace { place, own_range: Bounds::FREE }).collect()
}

/// A step that changes each variable by about as much as matters: the smaller the wider its
/// quantity acts.
fn step(place: Option<Place>) -> f64 {
    match place {
        Some(Place::Asphere(_, term)) => 1e-2 / 8_f64.powi(2 * term as i32 + 4),
        Some(Place::Radius(_)) => 1e-6,
        Some(Place::Conic(_)) => 1e-2,
        _ => 1e-4,
    }
}

fn place_of(variables: &Variables, number: usize) -> Option<Place> {
    match variables.shared().get(number) {
        Some(crate::variables::SharedVariable::Glass(place)) => Some(*place),
        _ => None,
    }
}

/// Rounding in a residual: some 1e-14 mm of path, in waves, over a `within` of 0.05.
const NOISE: f64 = 4e-9;
/// Rounding in a position on the way, mm: some 1e-14 mm of path over the little that the collimation
/// changes by when the groups move and the ratio is held.
const POSITION_NOISE: f64 = 1e-8;
/// The same in a slope, mm a unit of ratio: what a polynomial of degree 11 makes of it.
const SLOPE_NOISE: f64 = 5e-6;

fn check(fixed: &str, track: f64, last: [f64; 2]) {
    let (design, wishes, _) = design(fixed, track, last);
    let variables = Variables::new(&design, &wishes.limits, &everything(&design)).unwrap();
    let start = variables.start().to_vec();
    let mut merit = MeritFunction::new(&design, &wishes, variables, 6).unwrap();
    merit.limit_rows.see_everything();
    let mut exact = Linearisation::zeros(merit.shape());
    merit.linearise(&start, &mut exact).unwrap();
    let shape = merit.shape().clone();

    let mut plain = vec![0.0; shape.residuals()];
    merit.residuals(&start, &mut plain).unwrap();
    let packed: Vec<f64> = exact.states.iter().flat_map(|s| s.residuals.iter().copied()).collect();
    assert_eq!(plain, packed, "residuals are the same with and without the Jacobian");

    let mut limits = Vec::new();
    merit.limits(&start, &mut limits).unwrap();
    let on_the_way = merit.limit_rows.on_the_way();
    for aspect in [Aspect::Value, Aspect::Slope] {
        assert!(on_the_way.contains(&Some(aspect)), "there are rows about the way");
    }
    assert_eq!(limits, exact.limits.iter().map(|row| row.value).collect::<Vec<_>>());

    for number in 0..start.len() {
        let place = place_of(merit.variables(), number);
        let h = step(place);
        // A bent surface moves the groups far: beyond these steps the differences of slopes are not
        // those of a polynomial of the fourth degree any more.
        let bent = matches!(place, Some(Place::Asphere(..)));
        let (fine, coarse) = if bent { (0.01 * h, 0.01 * h) } else { (h, 10.0 * h) };
        let mut at = |by: f64| {
            let mut x = start.clone();
            x[number] += by;
            let mut residuals = vec![0.0; shape.residuals()];
            merit.residuals(&x, &mut residuals).unwrap();
            let mut limits = Vec::new();
            merit.limits(&x, &mut limits).unwrap();
            residuals.extend(limits);
            residuals
        };
        // Positions on the way are solved for, to less digits than a trace has.
        let [near, position, slope] =
            [h, fine, coarse].map(|h| (h, [at(h), at(-h), at(2.0 * h), at(-2.0 * h)]));
        let first_limit = shape.residuals();
        let difference = |i: usize| {
            let aspect = i.checked_sub(first_limit).and_then(|limit| on_the_way[limit]);
            let ((h, points), noise) = match aspect {
                None => (&near, NOISE),
                Some(Aspect::Value) => (&position, POSITION_NOISE),
                Some(Aspect::Slope) => (&slope, SLOPE_NOISE),
            };
            let outer = points[2][i] - points[3][i];
            ((8.0 * (points[0][i] - points[1][i]) - outer) / (12.0 * h), noise / h)
        };
        let column: Vec<f64> = exact_column(&exact, &shape, number);
        let largest = column.iter().fold(0.0_f64, |m, x| m.max(x.abs()));
        for (i, &derivative) in column.iter().enumerate() {
            let (by_difference, noise) = difference(i);
            let tolerance = 2e-6 * largest.max(by_difference.abs()) + noise;
            assert!(
                (derivative - by_difference).abs() <= tolerance,
                "fixed {fixed}, variable {number} ({:?}), row {i}: {derivative} {by_difference}",
                place_of(merit.variables(), number)
            );
        }
    }
}

/// One column of the whole Jacobian, limits below residuals, as the blocks have it.
fn exact_column(
    exact: &Linearisation,
    shape: &crate::block::BlockShape,
    number: usize,
) -> Vec<f64> {
    let own =
        |k: usize| shape.own_range(k).contains(&number).then(|| number - shape.own_range(k).start);
    let mut column = Vec::new();
    for (k, block) in exact.states.iter().enumerate() {
        for row in 0..shape.rows[k] {
            column.push(match (number < shape.shared, own(k)) {
                (true, _) => block.by_shared[(row, number)],
                (_, Some(own)) => block.by_own[(row, own)],
                _ => 0.0,
            });
        }
    }
    for row in &exact.limits {
        column.push(match (number < shape.shared, row.state.and_then(own)) {
            (true, _) => row.by_shared[number],
            (_, Some(own)) => row.by_own[own],
            _ => 0.0,
        });
    }
    column
}

#[test]
fn derivatives_with_the_last_group_fixed() {
    check(r#"["exit"]"#, 150.0, [107.22, 108.22]);
}

#[test]
fn derivatives_with_no_group_fixed() {
    check("[]", 150.0, [107.22, 108.22]);
}

#[test]
fn derivatives_with_a_middle_group_fixed() {
    check(r#"["runner"]"#, 150.0, [107.22, 108.22]);
}

#[test]
fn derivatives_with_both_ends_fixed() {
    check(r#"["entry", "exit"]"#, 139.11, [107.22, 110.22]);
}

#[test]
fn derivatives_with_the_last_two_groups_fixed() {
    check(r#"["runner", "exit"]"#, 150.0, [107.22, 107.22]);
}

#[test]
fn derivatives_with_every_group_fixed_but_free_to_be_placed() {
    let (mut design, wishes, _) = design("[]", 150.0, [107.22, 107.22]);
    design.states[1].spacings_mm[0] = design.states[0].spacings_mm[0];
    design.housing.fixed = vec![true; 3];
    design.housing.track_mm = design.length_mm(&design.states[0]);
    let variables = Variables::new(&design, &wishes.limits, &everything(&design)).unwrap();
    let own: usize = (0..2).map(|k| variables.own(k).len()).sum();
    assert_eq!(own, 0, "all spacings follow from the place of the middle group");
}

#[test]
fn with_both_ends_fixed_the_track_is_kept_exactly() {
    let (design, wishes, _) = design(r#"["entry", "exit"]"#, 139.11, [107.22, 110.22]);
    let variables = Variables::new(&design, &wishes.limits, &everything(&design)).unwrap();
    let moved: Vec<f64> = variables
        .start()
        .iter()
        .enumerate()
        .map(|(i, x)| x + 1e-3 * (i as f64 * 1.7).sin() * x.abs().min(1.0))
        .collect();
    let mut changed = design.clone();
    variables.write(&moved, &mut changed);
    for state in &changed.states {
        assert!((changed.length_mm(state) - 139.11).abs() < 1e-12);
    }
    assert_eq!(changed.housing_mismatch(), None);
}

#[test]
fn glass_that_may_grow_between_fixed_groups_needs_a_spacing_that_gives_way() {
    let (design, wishes, _) = design(r#"["entry", "exit"]"#, 139.11, [107.22, 110.22]);
    let free: Vec<FreePlace> = everything(&design)
        .into_iter()
        .filter(|free| !matches!(free.place, Place::Spacing { .. }))
        .collect();
    assert!(Variables::new(&design, &wishes.limits, &free).is_err());
}
