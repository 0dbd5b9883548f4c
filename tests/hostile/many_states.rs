//! Ten thousand zoom states: time in proportion, memory bounded.

use std::time::{Duration, Instant};

use driver::design_file::DesignFile;
use driver::optimise::{merit_of, optimise};
use driver::solve::{Settings, Unwatched};
use merit_function::assessment::assess;
use merit_function::block::BlockProblem;
use serde_json::{Value, json};
use surface_model::document::Document;

use checks::judges::shipped::changed;

/// A shipped design with `count` states from its first to its last, under as many kinds of limit as
/// there are.
fn with_states(name: &str, count: usize, fixed: &Value) -> Value {
    let limits = json!({
        "edge_thickness_mm": { "min": 0.5 }, "spacing_mm": { "min": 0.1 },
        "edge_gap_mm": { "min": 0.01 },
        "track_mm": { "max": 400.0 }, "incidence_deg": { "max": 60.0 }, "internal_focus": "forbid"
    });
    let free = json!(["radii", { "at": "/states/*/spacings_mm/*", "min": 0.1, "max": 300.0 }]);
    let held = json!(["/states/*/spacings_mm/0", "/groups/0"]);
    let mut root = changed(
        name,
        &[("/limits", limits), ("/free", free), ("/held", held), ("/housing/fixed", fixed.clone())],
    );
    let states = root["states"].as_array().unwrap().clone();
    let (first, last) = (&states[0], &states[states.len() - 1]);
    let state = |k: usize| {
        let share = k as f64 / (count - 1) as f64;
        let between = |pointer: &str| {
            let [a, b] =
                [first, last].map(|state| state.pointer(pointer).unwrap().as_f64().unwrap());
            json!(a + share * (b - a))
        };
        let spacings = first["spacings_mm"].as_array().unwrap().len();
        let spacings = (0..spacings).map(|after| between(&format!("/spacings_mm/{after}")));
        json!({
            "name": format!("state {k}"), "ratio": between("/ratio"),
            "spacings_mm": spacings.collect::<Vec<_>>(),
        })
    };
    root["states"] = (0..count).map(state).collect();
    root
}

/// Time to read, assess, evaluate and write a file, and with `iterations` to optimise it.
fn whole_way(value: &Value, iterations: Option<u64>) -> Duration {
    let text = value.to_string();
    let began = Instant::now();
    let document = Document::parse("many.json", text.as_bytes()).unwrap();
    let file = DesignFile::read(document).unwrap();
    let states = file.design.states.len();
    let read = began.elapsed();
    assert_eq!(assess(&file.design, &file.wishes).states.len(), states);
    let assessed = began.elapsed();
    let mut merit = merit_of(&file).unwrap();
    let variables = merit.variables().start().to_vec();
    merit.residuals(&variables, &mut vec![0.0; merit.shape().residuals()]).unwrap();
    merit.limits(&variables, &mut Vec::new()).unwrap();
    let mut design = file.design.clone();
    merit.variables().write(&variables, &mut design);
    assert!(file.with_numbers_of(&design).unwrap().text().len() > 50 * states);
    let evaluated = began.elapsed();
    if let Some(iterations) = iterations {
        let settings = Settings::default().with_max_iterations(iterations).unwrap();
        let optimised = optimise(&file, &settings, &mut Unwatched).unwrap();
        assert_eq!(optimised.report.end.states.len(), states);
    }
    let all = began.elapsed();
    println!(
        "{states} states: read {read:?}, assessed {assessed:?}, evaluated {evaluated:?}, {all:?}"
    );
    all
}

/// Most memory this process has had, MiB.
fn most_memory_mib() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM:"))?;
    Some(line.split_whitespace().nth(1)?.parse::<f64>().ok()? / 1024.0)
}

#[test]
fn time_grows_with_the_number_of_states_and_no_faster() {
    // A fixed middle group's position is shared by all states and a limit in each: a step that
    // presses many states against it costs more than in proportion, so none is taken here.
    for (name, fixed, iterations) in [
        ("river", json!(["exit"]), Some(2)),
        ("river", json!([]), Some(2)),
        ("river", json!(["runner"]), None),
        ("asphere", json!(["entry", "exit"]), Some(2)),
        ("asphere", json!(["front runner"]), None),
    ] {
        println!("{name}, {fixed} fixed");
        let few = whole_way(&with_states(name, 1_000, &fixed), iterations);
        let many = whole_way(&with_states(name, 10_000, &fixed), iterations);
        // Ten times the states; a hundred times the time if anything were quadratic.
        assert!(many < 30 * few, "{few:?} became {many:?}");
    }
    let memory = most_memory_mib();
    println!("{memory:?} MiB at most");
    assert!(memory.is_none_or(|mib| mib < 1_500.0), "{memory:?} MiB");
}
