//! `glass`.

use crate::program::run;

#[test]
fn a_search() {
    insta::assert_snapshot!(run("glass schott nd=1.7..1.75 vd=..30 --at-nm 532").told());
}

#[test]
fn the_nearest_of_a_glass() {
    insta::assert_snapshot!(run("glass --nearest N-BK7 --most 4 --at-nm 532").told());
    let document = run("glass --nearest N-BK7 --most 4 --at-nm 532 --json").json();
    assert_eq!(document["format"], "drawtube-glasses/1");
    let glasses = document["glasses"].as_array().unwrap();
    assert_eq!(glasses.len(), 4);
    assert!(glasses.iter().all(|glass| glass["indices"][0]["index"].is_number()));
    assert!(glasses.iter().all(|glass| glass["rms_index_difference"].is_number()));
}

#[test]
fn all_of_them_without_a_word() {
    let ended = run("glass");
    assert_eq!(ended.status, 0);
    assert!(ended.out.lines().count() > 1000);
}

#[test]
fn what_is_not_found_is_told() {
    let told: Vec<String> = [
        "glass no-such-glass",
        "glass no-such-glass --json",
        "glass nd=high",
        "glass nd=high --errors json",
        "glass --nearest N-BK8",
        "glass --nearest F2",
        "glass schott --nearest N-BK7",
        "glass --at-nm -1",
        "glass --nearest N-BK7 --at-nm 20000",
    ]
    .iter()
    .map(|arguments| format!("{arguments}\n{}", run(arguments).told()))
    .collect();
    insta::assert_snapshot!(told.join("\n"));
}
