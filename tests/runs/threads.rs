//! The number of threads changes nothing, nor does the time a session may take.

use crate::job::{Chance, Program, STARTS, Scene, go_on_to_the_end, said, same};

#[test]
fn any_number_of_threads_gives_the_same_bytes() {
    for threads in [1, 2, 3, 8] {
        let scene = Scene::new();
        let more = format!("--threads {threads} --quiet");
        assert!(scene.command(Program::Drawtube, &more).status().unwrap().success());
        same(&scene.result()).unwrap();
    }
}

#[test]
fn so_does_going_on_with_another() {
    let mut chance = Chance(5);
    for _ in 0..3 {
        let scene = Scene::new();
        let mut starts = 0;
        while starts < STARTS {
            starts = (starts + 1 + (chance.next() * 4.0) as u64).min(STARTS);
            let threads = 1 + (chance.next() * 8.0) as u64;
            let more = format!("--threads {threads} --starts {starts} --quiet");
            assert!(scene.command(Program::Drawtube, &more).status().unwrap().success());
        }
        same(&scene.result()).unwrap();
    }
}

#[test]
fn a_time_limit_ends_a_session_and_hours_end_the_run() {
    let scene = Scene::new();
    let limited = scene.command(Program::Drawtube, "--time-limit 0").output().unwrap();
    let told = said(&limited);
    assert_eq!(limited.status.code(), Some(75), "{told}");
    assert!(told.contains("The time limit is reached."), "{told}");
    let hours = "--hours 0 --starts 100000";
    let used_up = scene.command(Program::Drawtube, hours).output().unwrap();
    let told = said(&used_up);
    // Whether any start came to its end in no time is not the point.
    assert!([Some(0), Some(1)].contains(&used_up.status.code()), "{told}");
    assert!(told.contains("The hours are used up."), "{told}");
    go_on_to_the_end(&scene, Program::Drawtube).unwrap();
}

#[test]
fn a_target_gives_the_same_bytes_on_any_number_of_threads() {
    let results: Vec<_> = [1, 3]
        .map(|threads| {
            let scene = Scene::new();
            let more = format!("--starts 1000 --target-merit 1e9 --threads {threads}");
            let output = scene.command(Program::Drawtube, &more).output().unwrap();
            assert_eq!(output.status.code(), Some(0), "{}", said(&output));
            assert!(said(&output).contains("The target is reached."));
            scene.result()
        })
        .into();
    assert_eq!(results[0], results[1]);
}
