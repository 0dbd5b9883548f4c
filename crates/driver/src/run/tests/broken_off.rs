//! Units that end in a panic.

use super::*;

/// As [`Digits`], but one unit panics.
struct Faulty {
    digits: Digits,
    at: u64,
}

impl Work for Faulty {
    type Done = Yield;

    fn perform(&self, number: u64, interrupt: &Interrupt) -> Result<Yield, Interrupted> {
        assert!(number != self.at, "digit {number} is one too many");
        self.digits.perform(number, interrupt)
    }

    fn called(&self, number: u64) -> String {
        format!("digit {number}")
    }
}

#[test]
fn a_panic_is_an_error_that_names_its_unit_and_loses_nothing() {
    let whole = in_memory();
    let expected = finished_run(whole.path(), 40);
    for threads in [1, 2, 8] {
        let folder = in_memory();
        let work = Faulty { digits: Digits::default(), at: 17 };
        let run = RunFolder::open(folder.path(), &ask(Share::WHOLE)).unwrap();
        let ended = perform(&run, &work, &units(40), threads, &mut Keeper::default());
        let error = ended.unwrap_err();
        let RunError::BrokenOff { path, unit, told } = &error else { panic!("{error}") };
        assert_eq!((path.as_path(), unit.as_str()), (folder.path(), "digit 17"));
        assert_eq!(told, "digit 17 is one too many");
        drop(run);
        // What was finished is there, and only the rest is computed once the fault is mended.
        let mended = Digits::default();
        let (end, keeper) =
            session(folder.path(), Share::WHOLE, &mended, &units(40), threads, None).unwrap();
        let before = keeper.earlier.unwrap().finished;
        assert!(before < 40 && (threads > 1 || before == 17), "{before}");
        assert_eq!(mended.performed.into_inner(), 40 - before);
        assert_eq!((end.stop, keeper.result(&end)), (Stop::Complete, expected.clone()));
    }
}
