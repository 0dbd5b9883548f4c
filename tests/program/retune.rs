//! `retune`.

use serde_json::Value;

use crate::designs::{RIVER, every_key, text};
use crate::program::{root, run, run_on};

/// A finished design that the project ships.
const BUILT: &str = "configs/river-as-designed.json";

const THICKER: &str = "--change /groups/exit/elements/0/thicknesses_mm/0=5.4";

#[test]
fn stages_stand_side_by_side() {
    insta::assert_snapshot!(
        run(&format!(
            "retune {BUILT} --made exit {THICKER} \
             --change /groups/exit/elements/0/glasses/0=1.46140@532 \
             --change /states/6x/ratio=6.1"
        ))
        .told()
    );
}

#[test]
fn what_is_all_made_leaves_the_spacings() {
    let ended = run(&format!("retune {BUILT} --made /groups/* {THICKER}"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(!ended.out.contains("not made"), "{}", ended.out);
    insta::assert_snapshot!(ended.told());
}

/// What every kind of `retune` prints fits a terminal, however long addresses are.
#[test]
fn every_table_fits_eighty_columns() {
    let four_groups = "configs/four-groups-asphere.json --change /housing/track_mm=1";
    let four_groups = four_groups.replace("track_mm=1", "track_mm=181");
    for arguments in [
        format!(
            "{BUILT} --made exit {THICKER} --change /groups/exit/elements/0/glasses/0=1.46140@532"
        ),
        format!("{BUILT} --tool-radii configs/shop-radii.csv"),
        format!("{BUILT} --batch configs/river-units.csv"),
        four_groups,
    ] {
        let ended = run(&format!("retune {arguments}"));
        assert!(matches!(ended.status, 0 | 1), "{}", ended.err);
        for line in ended.out.lines() {
            assert!(line.chars().count() <= 80, "{arguments}: {line}");
        }
    }
}

#[test]
fn the_document_tells_the_same_for_machines() {
    let ended = run(&format!("retune {BUILT} --made exit {THICKER} --json"));
    let document = ended.json();
    assert_eq!(document["format"], "drawtube-retune/1");
    assert_eq!(document["made"], serde_json::json!(["/groups/exit"]));
    let stages = document["stages"].as_array().unwrap();
    let moving: Vec<&Value> = stages.iter().map(|stage| &stage["moving"]).collect();
    assert_eq!(moving, ["as_designed", "nothing", "spacings", "unmade"]);
    let merit = |stage: usize| stages[stage]["merit"]["total"].as_f64().unwrap();
    assert!(merit(1) > merit(0) && merit(2) < merit(1) && merit(3) <= merit(2) * (1.0 + 1e-9));
    assert_eq!(stages[0]["assessment"], run(&format!("assess {BUILT} --json")).json());
    let cost = &document["costs"][0];
    let (derivative, traced) =
        (cost["by_derivatives"].as_f64().unwrap(), cost["traced"].as_f64().unwrap());
    assert!((derivative / traced - 1.0).abs() < 0.05, "{cost}");
    for difference in stages[2]["differs"].as_array().unwrap() {
        assert!(difference["at"].as_str().unwrap().starts_with("/states/"), "{difference}");
    }
}

#[test]
fn the_design_that_is_written_is_that_of_the_last_stage() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("retuned.json");
    let ended = run(&format!("retune {BUILT} --made exit {THICKER} --json -o {}", path.display()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let stages = ended.json()["stages"].clone();
    let last = &stages.as_array().unwrap().last().unwrap()["assessment"];
    assert_eq!(run(&format!("assess {} --json", path.display())).json(), *last);
    let written: Value = serde_json::from_slice(&std::fs::read(&path).unwrap()).unwrap();
    let held: Vec<&str> =
        written["held"].as_array().unwrap().iter().map(|at| at.as_str().unwrap()).collect();
    assert_eq!(held, ["/groups/exit/elements/0/thicknesses_mm/0", "/groups/exit"]);
    let exit = |design: &Value| design["groups"][2]["elements"][0]["radii_mm"].clone();
    let before: Value =
        serde_json::from_slice(&std::fs::read(root().join(BUILT)).unwrap()).unwrap();
    assert_eq!(exit(&written), exit(&before), "what is made did not move");
    let again = run(&format!("retune {BUILT} {THICKER} -o {}", path.display()));
    assert_eq!(again.status, 7, "nothing is overwritten without --force");
}

#[test]
fn nothing_changed_costs_nothing() {
    let ended = run(&format!("retune {BUILT} --json"));
    let stages = ended.json()["stages"].clone();
    assert_eq!(stages[0]["merit"], stages[1]["merit"]);
    assert!(stages[2]["recovered_percent"].is_null());
}

#[test]
fn fixed_ends_are_kept_by_the_spacings() {
    let design = "configs/moving-collimator.json";
    let ended =
        run(&format!("retune {design} --change /groups/1/elements/0/thicknesses_mm/0=4.2 --json"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let document = ended.json();
    assert!(!document["taken_up"].as_array().unwrap().is_empty());
    let track = |stage: usize, state: usize| {
        document["stages"][stage]["assessment"]["states"][state]["track_mm"].as_f64().unwrap()
    };
    let stages = document["stages"].as_array().unwrap().len();
    for stage in 1..stages {
        for state in 0..document["stages"][0]["assessment"]["states"].as_array().unwrap().len() {
            assert!((track(stage, state) - track(0, 0)).abs() < 1e-6);
        }
    }
}

#[test]
fn states_come_and_go() {
    let changed = format!(
        "retune {BUILT} --made /groups/* --change /states/2x=null \
         --change /states/-={{\"name\":\"4.5x\",\"ratio\":4.5}} --json"
    );
    let document = run(&changed).json();
    let states = |stage: usize| {
        let states = document["stages"][stage]["assessment"]["states"].as_array().unwrap();
        states.iter().map(|s| s["name"].as_str().unwrap().to_owned()).collect::<Vec<_>>()
    };
    assert_eq!(states(0), ["2x", "3x", "4x", "5x", "6x"]);
    assert_eq!(states(2), ["3x", "4x", "5x", "6x", "4.5x"]);
    let last = &document["stages"][2]["assessment"]["states"][4];
    assert!(last["ratio_error_percent"].as_f64().unwrap().abs() < 0.2, "{last}");
    assert_eq!(document["costs"][0]["without_derivative"], "other states");
}

#[test]
fn other_makers_glasses_are_ranked() {
    let ended = run(&format!("retune {BUILT} --equivalents fused-silica --most 3"));
    insta::assert_snapshot!(ended.told());
    let document =
        run("retune configs/two-colour-pairs.json --equivalents N-SF6 --most 4 --json").json();
    let found = document["equivalents"].as_array().unwrap();
    assert_eq!(found.len(), 4);
    let merits: Vec<f64> = found.iter().map(|one| one["merit_unmade"].as_f64().unwrap()).collect();
    assert!(merits.is_sorted(), "{merits:?}");
    assert!(found.iter().all(|one| one["glass"]["maker"] != "Schott"));
}

#[test]
fn radii_move_to_tools_the_cheapest_first() {
    let ended =
        run(&format!("retune {BUILT} --tool-radii configs/shop-radii.csv --made entry --json"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let tools = &ended.json()["tool_radii"];
    let moves = tools["moves"].as_array().unwrap();
    assert_eq!(moves.len(), 4, "the entry lens is made: {moves:?}");
    let list = std::fs::read_to_string(root().join("configs/shop-radii.csv")).unwrap();
    let listed: Vec<f64> =
        list.lines().filter_map(|line| line.split(',').next()?.parse().ok()).collect();
    let mut before = tools["merit_before"].as_f64().unwrap();
    for one in moves {
        assert!(listed.contains(&one["to_mm"].as_f64().unwrap().abs()), "{one}");
        let merit = one["merit"].as_f64().unwrap();
        assert!((one["cost"].as_f64().unwrap() - (merit - before)).abs() < 1e-12, "{one}");
        before = merit;
    }
    let table = run(&format!("retune {BUILT} --tool-radii configs/shop-radii.csv --made entry"));
    let from = table.out.find("radius moved to a tool").unwrap();
    insta::assert_snapshot!(table.out[from..]);
}

#[test]
fn a_batch_gives_every_unit_its_own_spacings() {
    let line = format!("retune {BUILT} --batch configs/river-units.csv");
    insta::assert_snapshot!(run(&line).told());
    let document = run(&format!("{line} --json")).json();
    assert_eq!(document["totals"]["units"], 3);
    // One unit by itself is the same as in the batch.
    let alone = run_on(
        &format!("retune {BUILT} --batch - --json"),
        "serial,/groups/runner/elements/0/thicknesses_mm/0\nT-019,2.004\n",
    );
    let with_glass = run_on(
        &format!(
            "retune {BUILT} --change /groups/exit/elements/0/glasses/0=1.46060@532 --batch - --json"
        ),
        "serial,/groups/runner/elements/0/thicknesses_mm/0\nT-019,2.004\n",
    );
    assert_ne!(alone.json()["units"][0], document["units"][2]);
    assert_eq!(with_glass.json()["units"][0], document["units"][2]);
    let table = run(&format!("{line} -o -"));
    assert!(table.out.starts_with("serial,meets,merit,/states/2x/spacings_mm/0,"), "{}", table.out);
    assert_eq!(table.out.lines().count(), 4);
    assert!(table.err.contains("The table was written to standard output."));
}

#[test]
fn the_same_on_any_number_of_threads() {
    for line in [
        format!("retune {BUILT} --batch configs/river-units.csv --json"),
        format!("retune {BUILT} --equivalents fused-silica --most 3 --json"),
    ] {
        let on = |threads: &str| {
            let mut command = crate::program::program();
            let output =
                command.args(line.split_whitespace()).env("RAYON_NUM_THREADS", threads).output();
            output.unwrap().stdout
        };
        assert_eq!(on("1"), on("3"), "{line}");
    }
}

#[test]
fn what_is_wrong_is_told_with_its_place() {
    let told: Vec<String> = [
        "--change /groups/exti/elements/0/thicknesses_mm/0=5",
        "--change /groups/exit/elements/0/thicknesses_mm/0=-5 --change /housing/trak_mm=3",
        "--made exti",
        "--made /housing",
        "--equivalents N-BK7",
        "--equivalents fused-silica --made /groups/*",
        "--equivalents fused-silica --most 0",
        "--tool-radii no-such-file.csv",
        "--batch configs/shop-radii.csv",
        "--tool-radii configs/river-units.csv",
    ]
    .iter()
    .map(|arguments| {
        let ended = run(&format!("retune {RIVER} {arguments}"));
        assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{arguments}");
        format!("$ drawtube retune {RIVER} {arguments}\n{}", ended.err)
    })
    .collect();
    insta::assert_snapshot!(told.join("\n"));
    let tables: Vec<String> = [
        "serial,/groups/exit/elements/0/thicknesses_mm/0\nA,5\nB,thick\n",
        "serial,/groups/exit/elements/0/thicknesses_mm/0\nA,5\nA,5\n",
        "serial,/groups/exti/elements/0/thicknesses_mm/0\nA,5\n",
        "serial,/groups/exit/elements/0/thicknesses_mm/0\nA,5,6\n",
    ]
    .iter()
    .map(|table| run_on(&format!("retune {RIVER} --batch -"), table).told())
    .collect();
    insta::assert_snapshot!(tables.join("\n"));
}

#[test]
fn remarks_survive_a_change() {
    let ended = run_on("retune - --change /housing/track_mm=161 -o -", &text(&every_key()));
    assert_eq!(ended.status, 0, "{}", ended.err);
    let after: Value = serde_json::from_str(&ended.out).unwrap();
    assert_eq!(after["note"], every_key()["note"]);
    assert_eq!(after["housing"]["track_mm"], 161);
}
