use std::collections::HashSet;

use serde_json::json;
use surface_model::document::Document;

use super::*;
use crate::brief::BriefFile;
use crate::design_file::DesignFile;
use crate::search::{SearchProblem, SearchSettings};

fn opened(plan: Value, about: &[u8], parts: u64) -> Sweep {
    let file = PlanFile::read(Document::from_value("plan.json", plan)).unwrap();
    let subject = file.read_subject(Document::parse("river.json", about).unwrap()).unwrap();
    Sweep::new(file.resolve(&subject).unwrap(), subject, parts)
}

fn sweep(change: impl FnOnce(&mut Value)) -> Sweep {
    let mut plan = json!({
        "format": "drawtube-plan/1",
        "design": "river.json",
        "axes": [{ "at": "/states/6x/ratio", "range": { "from": 5.0, "to": 7.0, "steps": 5 } }]
    });
    change(&mut plan);
    opened(plan, include_bytes!("../../../../configs/river-lidar-2x-6x.json"), 1)
}

/// Over the track of the river brief; at the first point no layout fits.
fn brief_sweep(parts: u64) -> Sweep {
    let plan = json!({
        "format": "drawtube-plan/1",
        "brief": "river.json",
        "axes": [{ "at": "/housing/track_mm", "values": [20.0, 130.0, 150.0] }],
        "front": ["/housing/track_mm", "merit"]
    });
    opened(plan, include_bytes!("../../../../configs/river-brief.json"), parts)
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
fn a_brief_is_begun_anew_at_every_point_whatever_was_computed_before() {
    let interrupt = Interrupt::default();
    let (forward, backward) = (brief_sweep(1), brief_sweep(1));
    let all: Vec<_> = (0..3).map(|n| forward.point(n, &interrupt).unwrap()).collect();
    for number in (0..3).rev() {
        assert_eq!(backward.point(number, &interrupt).unwrap(), all[number]);
    }
    for point in &all {
        let track_mm = point.values[0].as_f64().unwrap();
        let Some(reached) = &point.reached else {
            assert_eq!(track_mm, 20.0, "{point:?}");
            assert!(point.no_layout.is_some() && point.fault.is_none(), "{point:?}");
            continue;
        };
        assert_eq!(reached.design["housing"]["track_mm"], track_mm);
        assert!(reached.meets && reached.track_mm <= track_mm + 1e-9, "{point:?}");
    }
    let plan = forward.plan();
    let points = all.iter().map(|point| point.as_ref().clone()).collect();
    let results = SweepResults::new(plan, points);
    assert_eq!((results.failed, results.without_layout), (0, 1));
    assert!(!results.front.is_empty() && results.weighed.len() == 2);
}

#[test]
fn the_lenses_of_a_neighbour_serve_a_brief_that_allows_them() {
    let brief = |change: &dyn Fn(&mut Value)| {
        let text = include_str!("../../../../configs/river-brief.json");
        let mut value: Value = serde_json::from_str(text).unwrap();
        change(&mut value);
        BriefFile::read(Document::from_value("b.json", value)).unwrap()
    };
    let problem =
        |brief: &BriefFile| SearchProblem::of_brief(brief, SearchSettings::default()).unwrap();
    let never = std::sync::atomic::AtomicBool::new(false);
    let found = problem(&brief(&|_| {})).start(0, 0, &never).unwrap().found.unwrap();
    let file = DesignFile::read(Document::from_value("d.json", found.design)).unwrap();
    let merit = |brief: &BriefFile| {
        let attempt = problem(brief).improve(&file, "taken over", &never).unwrap();
        attempt.found.map(|found| found.merit)
    };
    assert!(merit(&brief(&|_| {})).unwrap() <= found.merit * (1.0 + 1e-6));
    let wider = brief(&|brief| {
        brief["beam"]["diameter_mm"] = json!(2.6);
        brief["housing"]["track_mm"] = json!(155.0);
        brief["ratios"][4] = json!(6.2);
    });
    assert!(merit(&wider).is_some());
    assert_eq!(merit(&brief(&|brief| brief["glasses_allowed"] = json!(["N-BK7"]))), None);
    assert_eq!(merit(&brief(&|brief| brief["ratios"] = json!([2, 6]))), None);
    assert_eq!(merit(&brief(&|brief| brief["groups"][0]["elements"] = json!(2))), None);
}

#[test]
fn units_of_a_run_in_parts_are_the_points_of_the_whole() {
    let sweep = |parts| {
        let mut sweep = brief_sweep(parts);
        sweep.units.sort_unstable();
        sweep.units
    };
    assert_eq!((sweep(1), sweep(2)), (vec![0, 1, 2], vec![0, 1, 2]));
    let called = brief_sweep(1).called(0);
    assert_eq!(called, "point 0 (/housing/track_mm=130.0)");
}
