use std::collections::HashSet;

use serde_json::json;
use surface_model::document::Document;

use super::*;

fn design() -> DesignFile {
    let text = include_bytes!("../../../../configs/river-lidar-2x-6x.json");
    DesignFile::read(Document::parse("river.json", text).unwrap()).unwrap()
}

fn sweep(change: impl FnOnce(&mut Value)) -> Sweep {
    let mut plan = json!({
        "format": "drawtube-plan/1",
        "design": "river.json",
        "axes": [{ "at": "/states/6x/ratio", "range": { "from": 5.0, "to": 7.0, "steps": 5 } }]
    });
    change(&mut plan);
    let file = PlanFile::read(Document::from_value("plan.json", plan)).unwrap();
    let plan = file.resolve(&design()).unwrap();
    Sweep::new(plan, design())
}

#[test]
fn a_range_has_both_ends_and_equal_steps_or_ratios() {
    let numbers = |scale: &str| {
        let sweep = sweep(|plan| plan["axes"][0]["range"]["scale"] = json!(scale));
        let mut numbers: Vec<f64> =
            sweep.plan().points.iter().map(|point| point[0].as_f64().unwrap()).collect();
        numbers.sort_by(f64::total_cmp);
        numbers
    };
    assert_eq!(numbers("linear"), [5.0, 5.5, 6.0, 6.5, 7.0]);
    let ratios = numbers("logarithmic");
    assert_eq!((ratios[0], ratios[4]), (5.0, 7.0));
    for pair in ratios.windows(2) {
        assert!((pair[1] / pair[0] - 1.4_f64.powf(0.25)).abs() < 1e-14);
    }
}

#[test]
fn samples_fill_their_ranges() {
    for kind in ["sobol", "latin-hypercube"] {
        let sweep = sweep(|plan| {
            plan["axes"] = json!([
                { "at": "/states/6x/ratio", "range": { "from": 5.0, "to": 7.0 } },
                { "at": "/housing/track_mm", "range": { "from": 140.0, "to": 180.0 } }
            ]);
            plan["sample"] = json!({ "kind": kind, "points": 16 });
        });
        let eighths = |axis: usize, from: f64, to: f64| {
            let share = |point: &Vec<Value>| (point[axis].as_f64().unwrap() - from) / (to - from);
            sweep
                .plan()
                .points
                .iter()
                .map(|point| (share(point) * 8.0) as usize)
                .collect::<HashSet<_>>()
        };
        assert_eq!(eighths(0, 5.0, 7.0).len(), 8, "{kind}");
        assert_eq!(eighths(1, 140.0, 180.0).len(), 8, "{kind}");
    }
}

#[test]
fn a_point_is_the_same_whatever_was_computed_before() {
    let interrupt = Interrupt::default();
    let forward = sweep(|plan| plan["starts"] = json!(3));
    let backward = sweep(|plan| plan["starts"] = json!(3));
    let all: Vec<_> = (0..5).map(|n| forward.point(n, &interrupt).unwrap()).collect();
    for number in (0..5).rev() {
        let point = backward.point(number, &interrupt).unwrap();
        assert_eq!(point, all[number]);
        let back: PointResult =
            serde_json::from_str(&serde_json::to_string(point.as_ref()).unwrap()).unwrap();
        assert_eq!(back, *point, "it comes back from JSON as it went");
    }
    let from = |n: usize| all[n].reached.as_ref().unwrap().from_point;
    assert_eq!(from(0), None);
    assert!((1..5).any(|n| from(n).is_some()), "some start warm");
}

#[test]
fn more_starts_are_never_worse() {
    let merit = |starts: u32| {
        let sweep = sweep(|plan| plan["starts"] = json!(starts));
        let point = sweep.point(0, &Interrupt::default()).unwrap();
        point.reached.as_ref().unwrap().merit
    };
    assert!(merit(6) <= merit(1));
}

#[test]
fn an_interrupted_point_yields_nothing() {
    let interrupt = Interrupt::default();
    interrupt.raise();
    assert_eq!(sweep(|_| {}).point(3, &interrupt), Err(Interrupted));
}

#[test]
fn the_front_is_what_nothing_beats_in_both() {
    let point = |merit: f64, track_mm: f64| PointResult {
        values: vec![],
        reached: Some(Reached {
            merit,
            meets: true,
            limits_crossed: 0,
            worst_rms_waves: None,
            worst_ratio_error_percent: None,
            worst_exit_slope_urad: None,
            track_mm,
            from_point: None,
            iterations: 1,
            design: json!({}),
        }),
        fault: None,
    };
    let points =
        [(1.0, 9.0), (2.0, 5.0), (2.0, 4.0), (3.0, 4.0), (4.0, 1.0), (5.0, 2.0), (1.0, 9.0)];
    let numbered: Vec<(u64, PointResult)> =
        (0..).zip(points.map(|(merit, track)| point(merit, track))).collect();
    let by = [Quantity::merit(), Quantity::read("track_mm", &design()).unwrap()];
    assert_eq!(front(&numbered, &by), [0, 2, 4]);
}
