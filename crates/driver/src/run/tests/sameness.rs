//! The same result however a run was cut up.

use super::*;

#[test]
fn interruptions_and_threads_change_nothing() {
    let whole = in_memory();
    let expected = finished_run(whole.path(), 300);
    for seed in 0..10 {
        let folder = in_memory();
        let mut result = None;
        for round in 0.. {
            let chance = yield_of(1000 * seed + round).value;
            let threads = 1 + (chance * 8.0) as usize;
            let stop_after = Some(1 + (chance * 97.0) as usize % 60);
            let work = Digits::default();
            let (end, keeper) =
                session(folder.path(), Share::WHOLE, &work, &units(300), threads, stop_after)
                    .unwrap();
            if end.stop == Stop::Complete {
                result = Some(keeper.result(&end));
                break;
            }
            assert_eq!(end.stop, Stop::Interrupted);
            assert!(end.tally.finished < 300);
        }
        assert_eq!(result.as_deref(), Some(expected.as_str()));
    }
}

#[test]
fn a_finished_run_computes_nothing_and_a_larger_one_only_what_is_new() {
    let folder = in_memory();
    let of_100 = finished_run(folder.path(), 100);
    let again = |count| {
        let work = Digits::default();
        let (end, keeper) =
            session(folder.path(), Share::WHOLE, &work, &units(count), 3, None).unwrap();
        (work.performed.into_inner(), keeper.result(&end))
    };
    assert_eq!(again(100), (0, of_100.clone()));
    let (performed, of_150) = again(150);
    assert_eq!(performed, 50);
    let fresh = in_memory();
    assert_eq!(finished_run(fresh.path(), 150), of_150);
    assert_eq!(again(100), (0, of_100), "fewer units are the first ones");
}

#[test]
fn a_target_ends_the_run_at_the_first_unit_that_reaches_it() {
    let first = (0..).find(|&number| yield_of(number).value <= 0.01).unwrap();
    let mut results = Vec::new();
    for threads in [1, 2, 3, 8] {
        let folder = in_memory();
        let work = Digits::default();
        let stop_after = Some(first as usize / 2);
        let open = Budget { target_merit: Some(0.01), ..Budget::default() };
        let (end, _) =
            session(folder.path(), Share::WHOLE, &work, &open, threads, stop_after).unwrap();
        assert!([Stop::Interrupted, Stop::Sufficed].contains(&end.stop));
        let (end, keeper) =
            session(folder.path(), Share::WHOLE, &work, &open, threads, None).unwrap();
        assert_eq!((end.stop, end.tally.finished), (Stop::Sufficed, first + 1));
        assert_eq!(end.counted_below, Some(first + 1));
        results.push(keeper.result(&end));
    }
    assert!(results.windows(2).all(|pair| pair[0] == pair[1]));
}

#[test]
fn parts_in_one_folder_make_up_the_whole() {
    let whole = in_memory();
    let expected = finished_run(whole.path(), 101);
    let shared = in_memory();
    std::thread::scope(|scope| {
        for share in Share::all(4) {
            let path = shared.path();
            scope.spawn(move || {
                let work = Digits::default();
                let (end, _) = session(path, share, &work, &units(101), 1, None).unwrap();
                assert_eq!(end.tally.finished, share.count(101));
            });
        }
    });
    let survey = Survey::of(shared.path()).unwrap();
    assert_eq!(survey.parts.len(), 4);
    let mut merged = Keeper::default();
    for part in survey.parts.iter().rev() {
        assert_eq!(part.holder, None);
        let facts = part.read(&mut |unit| merged.found(unit)).unwrap();
        assert!(facts.complete && facts.units == Some(101));
    }
    let all = RunEnd {
        stop: Stop::Complete,
        tally: Tally {
            finished: 101,
            in_session: 0,
            wanted: None,
            run_seconds: 0.0,
            session: std::time::Duration::ZERO,
        },
        unsaved: None,
        counted_below: None,
    };
    assert_eq!(merged.result(&all), expected);
}

#[test]
fn time_ends_a_session_or_the_run() {
    let folder = in_memory();
    let short = Some(std::time::Duration::from_millis(60));
    let session_of = |budget: Budget| {
        session(folder.path(), Share::WHOLE, &Digits::default(), &budget, 1, None).unwrap().0
    };
    let limited = session_of(Budget { session_time: short, ..Budget::default() });
    assert_eq!(limited.stop, Stop::SessionTime);
    let more = session_of(Budget { session_time: short, ..Budget::default() });
    assert_eq!(more.stop, Stop::SessionTime);
    assert!(more.tally.finished > limited.tally.finished && more.tally.run_seconds > 0.11);
    let used_up = session_of(Budget { run_time: short, ..Budget::default() });
    assert_eq!((used_up.stop, used_up.tally.in_session), (Stop::RunTime, 0));
    let survey = Survey::of(folder.path()).unwrap();
    let facts = survey.parts[0].read::<Yield>(&mut |_| ()).unwrap();
    assert!(facts.complete, "that the hours are used up is kept");
}
