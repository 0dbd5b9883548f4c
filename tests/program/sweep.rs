//! `sweep`.

use std::path::Path;

use serde_json::{Value, json};

use crate::program::{program, root, run, run_on};

/// A small plan: 3 × 3 points of the river transmitter.
fn plan() -> Value {
    json!({
        "format": "drawtube-plan/1",
        "design": "configs/river-lidar-2x-6x.json",
        "axes": [
            { "at": "/housing/track_mm", "range": { "from": 140.0, "to": 160.0, "steps": 3 } },
            { "at": "/states/6x/ratio", "values": [5.5, 6.0, 6.5] }
        ],
        "front": ["/housing/track_mm", "merit"]
    })
}

/// The river brief in three tubes, the first too short for any layout.
fn brief_plan() -> Value {
    json!({
        "format": "drawtube-plan/1",
        "title": "Which tube?",
        "brief": "configs/river-brief.json",
        "axes": [{ "at": "/housing/track_mm", "values": [20.0, 130.0, 150.0] }],
        "front": ["/housing/track_mm", "merit"]
    })
}

fn sweep(plan: &Value, folder: &Path, more: &str) -> crate::program::Ended {
    run_on(&format!("sweep - --run {} {more}", folder.display()), &plan.to_string())
}

fn points(folder: &Path) -> (Vec<u8>, Vec<u8>) {
    let read = |name: &str| std::fs::read(folder.join(name)).unwrap();
    (read("points.json"), read("points.csv"))
}

#[test]
fn every_point_is_optimised_and_told() {
    let folder = tempfile::tempdir().unwrap();
    let run_folder = folder.path().join("run");
    let ended = sweep(&plan(), &run_folder, "--progress none");
    assert_eq!(ended.status, 0, "{}", ended.err);
    insta::assert_snapshot!(ended.out.replace(&run_folder.display().to_string(), "RUN"));
    let (json, table) = points(&run_folder);
    let document: Value = serde_json::from_slice(&json).unwrap();
    assert_eq!(document["format"], "drawtube-sweep/1");
    assert_eq!(document["points"].as_array().unwrap().len(), 9);
    assert_eq!(String::from_utf8(table).unwrap().lines().count(), 10);
    for point in document["points"].as_array().unwrap() {
        let design = &point["reached"]["design"];
        assert_eq!(design["housing"]["track_mm"], point["values"][0]);
        let ended = run_on("assess - --json", &design.to_string());
        assert_eq!(ended.json()["merit"]["total"], point["reached"]["merit"]);
    }
    assert!(run_folder.join("best/01.json").exists());
}

#[test]
fn a_brief_is_answered_at_every_point_or_told_to_have_no_layout() {
    let folder = tempfile::tempdir().unwrap();
    let run_folder = folder.path().join("run");
    let ended = sweep(&brief_plan(), &run_folder, "--progress none");
    // That there is no layout is an answer, not a failure.
    assert_eq!(ended.status, 0, "{}", ended.err);
    insta::assert_snapshot!(ended.out.replace(&run_folder.display().to_string(), "RUN"));
    let (json, table) = points(&run_folder);
    let document: Value = serde_json::from_slice(&json).unwrap();
    assert_eq!((&document["failed"], &document["without_layout"]), (&json!(0), &json!(1)));
    assert!(String::from_utf8(table).unwrap().contains(",no layout: "));
    for point in document["points"].as_array().unwrap() {
        let design = &point["reached"]["design"];
        if design.is_null() {
            assert!(point["no_layout"].is_string() && point["fault"].is_null(), "{point}");
            continue;
        }
        assert_eq!(design["housing"]["track_mm"], point["values"][0]);
        let ended = run_on("assess - --json", &design.to_string());
        assert_eq!(ended.json()["merit"]["total"], point["reached"]["merit"]);
        assert_eq!(ended.json()["meets"], true, "{point}");
    }
    let required = sweep(&brief_plan(), &run_folder, "--quiet --require");
    assert_eq!(required.status, 3, "{}", required.err);
}

#[test]
fn threads_parts_and_interruptions_change_nothing() {
    end_in_the_same_bytes(&plan(), 5);
    end_in_the_same_bytes(&brief_plan(), 2);
}

/// Runs a plan in many ways; `first_half` points are in part 1 of 2.
fn end_in_the_same_bytes(plan: &Value, first_half: u64) {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name);
    sweep(plan, &at("one"), "--threads 1 --quiet");
    let whole = points(&at("one"));
    sweep(plan, &at("three"), "--threads 3 --quiet");
    assert_eq!(points(&at("three")), whole);

    // Left at once, again and again; then to the end.
    for _ in 0..3 {
        let ended = sweep(plan, &at("left"), "--time-limit 0 --quiet");
        assert!(matches!(ended.status, 75 | 0), "{}", ended.err);
    }
    assert_eq!(sweep(plan, &at("left"), "--quiet").status, 0);
    assert_eq!(points(&at("left")), whole);

    // In parts, of which the second begins first.
    assert_eq!(sweep(plan, &at("parts"), "--part 2/2 --quiet").status, 0);
    let gather = format!("gather {} -o {}", at("parts").display(), at("all").display());
    let early = run(&gather);
    assert_eq!(early.status, 3, "{}", early.err);
    let missing = format!("--part 1/2  {first_half} points missing");
    assert!(early.out.contains(&missing), "{}", early.out);
    assert_eq!(sweep(plan, &at("parts"), "--part 1/2 --quiet").status, 0);
    let picture = format!("--picture {}", at("all.svg").display());
    assert_eq!(run(&format!("{gather} {picture}")).status, 0);
    assert!(std::fs::read_to_string(at("all.svg")).unwrap().contains("The trade"));
    assert_eq!(points(&at("all")), whole);
}

#[test]
fn killed_it_goes_on_and_ends_in_the_same_bytes() {
    let mut of_design = plan();
    of_design["axes"][0]["range"]["steps"] = json!(6);
    of_design["starts"] = json!(3);
    survives_kills(of_design, "design");
    survives_kills(brief_plan(), "brief");
}

/// `about` is what the plan names.
fn survives_kills(mut plan: Value, about: &str) {
    let folder = tempfile::tempdir().unwrap();
    let whole = folder.path().join("whole");
    assert_eq!(sweep(&plan, &whole, "--quiet").status, 0);
    let file = folder.path().join("plan.json");
    let named = root().join(plan[about].as_str().unwrap());
    std::fs::copy(named, folder.path().join("named.json")).unwrap();
    plan[about] = json!("named.json");
    driver::write_whole::write_whole(
        &file,
        plan.to_string().as_bytes(),
        driver::write_whole::Existing::Keep,
    )
    .unwrap();
    let killed = folder.path().join("killed");
    for milliseconds in [5, 20, 40, 80] {
        let mut child = program()
            .args(["sweep", file.to_str().unwrap(), "--quiet", "--run", killed.to_str().unwrap()])
            .spawn()
            .unwrap();
        std::thread::sleep(std::time::Duration::from_millis(milliseconds));
        let _ = child.kill();
        let _ = child.wait();
    }
    let ended = run(&format!("sweep {} --quiet --run {}", file.display(), killed.display()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert_eq!(points(&killed), points(&whole));
}

#[test]
fn a_point_that_fails_is_told_and_the_others_stand() {
    let folder = tempfile::tempdir().unwrap();
    let mut plan = plan();
    plan["axes"] = json!([{ "at": "/groups/exit/elements/0/glasses/0",
                            "values": ["fused-silica", "N-BK8", "N-BK7"] }]);
    plan.as_object_mut().unwrap().remove("front");
    let ended = sweep(&plan, &folder.path().join("run"), "--progress none");
    assert_eq!(ended.status, 3, "{}", ended.err);
    assert!(ended.out.contains("1 could not be optimised"), "{}", ended.out);
    assert!(ended.out.contains("there is no glass named \"N-BK8\""), "{}", ended.out);
}

#[test]
fn points_are_listed_before_anything_is_computed() {
    let ended = run("sweep configs/track-and-ratio.json --dry-run");
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(ended.out.ends_with("441 points.\n"));
    let drawn = run("sweep configs/wider-beam.json --dry-run");
    insta::assert_snapshot!(drawn.told());
    let document = run("sweep configs/wider-beam.json --dry-run --json").json();
    assert_eq!(document["points"].as_array().unwrap().len(), 12);
}

#[test]
fn what_is_wrong_in_a_plan_is_told_with_its_place() {
    let wrong = |change: &dyn Fn(&mut Value)| {
        let mut plan = plan();
        change(&mut plan);
        let text = serde_json::to_string_pretty(&plan).unwrap();
        let ended = run_on("sweep - --dry-run", &text);
        assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{text}");
        ended.err
    };
    let told = [
        wrong(&|plan| plan["axes"][0]["at"] = json!("/housing/track")),
        wrong(&|plan| plan["axes"][0]["at"] = json!("/hosing/track_mm")),
        wrong(&|plan| plan["axes"][0]["range"]["scale"] = json!("log")),
        wrong(&|plan| plan["axes"][0]["range"]["steps"] = json!(0)),
        wrong(&|plan| plan["axes"][0]["values"] = json!([1])),
        wrong(&|plan| plan["sample"] = json!({ "kind": "sobol", "points": 4 })),
        wrong(&|plan| plan["front"] = json!(["merit", "worst_rms_wave"])),
        wrong(&|plan| plan["starts"] = json!(0)),
        wrong(&|plan| plan["brief"] = json!("configs/river-brief.json")),
        wrong(&|plan| drop(plan.as_object_mut().unwrap().remove("design"))),
        wrong(&|plan| plan["design"] = json!("configs/river-brief.json")),
        wrong(&|plan| {
            *plan = brief_plan();
            plan["axes"][0]["at"] = json!("/housing/trak_mm");
            plan["front"][0] = json!("/beam/diameter_mm");
        }),
        wrong(&|plan| plan["format"] = json!("drawtube/1")),
        wrong(&|plan| plan["design"] = json!("configs/none.json")),
        wrong(&|plan| plan["axes"][0]["range"]["steps"] = json!(100_000)),
    ];
    insta::assert_snapshot!(told.join("\n"));
}

#[test]
fn another_plan_in_the_same_folder_is_refused() {
    let folder = tempfile::tempdir().unwrap();
    let place = folder.path().join("run");
    let mut small = plan();
    small["axes"][0]["range"]["steps"] = json!(1);
    assert_eq!(sweep(&small, &place, "--quiet").status, 0);
    assert_eq!(sweep(&plan(), &place, "--quiet").status, 6);
}

#[test]
fn pictures_show_a_curve_a_map_a_plane_strips_a_trade_or_names() {
    let folder = tempfile::tempdir().unwrap();
    let drawn = |name: &str, change: &dyn Fn(&mut Value)| {
        let mut plan = plan();
        change(&mut plan);
        let file = folder.path().join(format!("{name}.svg"));
        let more = format!("--quiet --picture {}", file.display());
        let ended = sweep(&plan, &folder.path().join(name), &more);
        assert_eq!(ended.status, 0, "{}", ended.err);
        std::fs::read_to_string(file).unwrap()
    };
    let map = drawn("map", &|_| {});
    for word in ["140", "160", "5.5", "6x, ratio", "housing, track, mm", "The trade"] {
        assert!(map.contains(word), "{word}: {map}");
    }
    let curve = drawn("curve", &|plan| {
        plan["axes"].as_array_mut().unwrap().truncate(1);
        plan.as_object_mut().unwrap().remove("front");
    });
    assert!(curve.contains("housing, track, mm") && !curve.contains("The trade"), "{curve}");
    let names = drawn("names", &|plan| {
        plan["axes"] = json!([
            { "at": "/groups/exit/elements/0/glasses/0", "values": ["fused-silica", "N-BK7"] }
        ]);
        plan.as_object_mut().unwrap().remove("front");
    });
    assert!(names.contains("N-BK7"), "{names}");
    let range =
        |at: &str, from: f64, to: f64| json!({ "at": at, "range": { "from": from, "to": to } });
    let ranges = [range("/housing/track_mm", 140.0, 160.0), range("/states/6x/ratio", 5.5, 6.5)];
    let sample = json!({ "kind": "sobol", "points": 4 });
    let plane = drawn("plane", &|plan| {
        plan["axes"] = json!(ranges);
        plan["sample"] = sample.clone();
        plan.as_object_mut().unwrap().remove("front");
    });
    for word in ["Merit at every point", "6x, ratio", "housing, track, mm", "ringed: the best"] {
        assert!(plane.contains(word), "{word}: {plane}");
    }
    assert!(plane.matches("<circle").count() == 4 + 1, "four points and a ring: {plane}");
    let strips = drawn("strips", &|plan| {
        let third = range("/groups/exit/elements/0/thicknesses_mm/0", 4.0, 6.0);
        plan["axes"] = json!([ranges[0], ranges[1], third]);
        plan["sample"] = sample.clone();
        plan.as_object_mut().unwrap().remove("front");
    });
    for word in ["over each axis", "6x, ratio", "exit, element 0, thickness 0, mm"] {
        assert!(strips.contains(word), "{word}: {strips}");
    }
    assert!(strips.matches("<circle").count() == 3 * (4 + 1), "{strips}");
    let again = sweep(
        &plan(),
        &folder.path().join("other"),
        &format!("--picture {}", folder.path().join("map.svg").display()),
    );
    assert_eq!(again.status, 7, "{}", again.err);
    assert!(!folder.path().join("other").exists());
}
