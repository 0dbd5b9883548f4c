//! Files of a run that are not what was written.

use super::*;
use crate::write_whole::{Existing, write_whole};

const UNITS: u64 = 6;

struct Scene {
    folder: tempfile::TempDir,
    journal: Vec<u8>,
    expected: String,
}

fn scene() -> Scene {
    let folder = in_memory();
    let expected = finished_run(folder.path(), UNITS);
    let journal = std::fs::read(folder.path().join("journal.jsonl")).unwrap();
    Scene { folder, journal, expected }
}

impl Scene {
    /// Puts a journal in place of the whole one and goes on.
    fn go_on(&self, journal: &[u8]) -> Result<(String, Earlier), RunError> {
        self.put("journal.jsonl", journal);
        let work = Digits::default();
        let (end, keeper) =
            session(self.folder.path(), Share::WHOLE, &work, &units(UNITS), 2, None)?;
        Ok((keeper.result(&end), keeper.earlier.unwrap()))
    }

    fn put(&self, name: &str, text: &[u8]) {
        write_whole(&self.folder.path().join(name), text, Existing::Replace).unwrap();
    }

    fn lines(&self) -> Vec<&[u8]> {
        self.journal.split_inclusive(|&byte| byte == b'\n').collect()
    }
}

#[test]
fn a_journal_cut_anywhere_goes_on_to_the_same_end() {
    let scene = scene();
    let mut whole_lines = 0;
    for cut in 0..=scene.journal.len() {
        let kept = &scene.journal[..cut];
        let (result, earlier) = scene.go_on(kept).unwrap();
        assert_eq!(result, scene.expected, "cut at {cut}");
        let end_of_lines = kept.iter().rposition(|&byte| byte == b'\n').map_or(0, |at| at + 1);
        assert_eq!(earlier.dropped_bytes, (cut - end_of_lines) as u64);
        let lines = kept.iter().filter(|&&byte| byte == b'\n').count() as u64;
        // The first line begins the session and the last ends it.
        assert_eq!(earlier.finished, lines.saturating_sub(1).min(UNITS));
        whole_lines = whole_lines.max(lines);
        assert_eq!(scene.go_on_again().1.dropped_bytes, 0, "what was torn is gone for good");
    }
    assert_eq!(whole_lines, UNITS + 2);
}

impl Scene {
    fn go_on_again(&self) -> (String, Earlier) {
        let journal = std::fs::read(self.folder.path().join("journal.jsonl")).unwrap();
        self.go_on(&journal).unwrap()
    }
}

#[test]
fn zeros_garbage_and_spoilt_bytes_at_the_end_are_dropped() {
    let scene = scene();
    let lines = scene.lines();
    let valid: usize = lines[..4].iter().map(|line| line.len()).sum();
    let last = lines[4];
    for bit in [0, 3, 7] {
        for at in 0..last.len() {
            let mut journal = scene.journal[..valid + last.len()].to_vec();
            journal[valid + at] ^= 1 << bit;
            // A byte that has become the end of a line leaves two lines, and both are bad.
            let split = journal[valid..].iter().filter(|&&byte| byte == b'\n').count() > 1;
            if split {
                assert!(matches!(scene.go_on(&journal), Err(RunError::Damaged { .. })));
                continue;
            }
            let (result, earlier) = scene.go_on(&journal).unwrap();
            assert_eq!((result, earlier.finished), (scene.expected.clone(), 3), "byte {at}");
        }
    }
    for tail in [&[0; 4096][..], b"garbage", b"{}", b"\n", b"null\n", &[0xff; 100]] {
        let journal = [&scene.journal[..valid], tail].concat();
        let (result, earlier) = scene.go_on(&journal).unwrap();
        assert_eq!((result, earlier.finished), (scene.expected.clone(), 3));
        assert_eq!(earlier.dropped_bytes, tail.len() as u64);
    }
}

#[test]
fn damage_before_the_last_line_is_named_and_nothing_is_touched() {
    let scene = scene();
    let lines = scene.lines();
    for (number, line) in lines.iter().enumerate().take(lines.len() - 1) {
        let begin: usize = lines[..number].iter().map(|line| line.len()).sum();
        // Without the last but one newline the last line is longer, and torn.
        for at in (0..line.len() - 1).step_by(5) {
            let mut journal = scene.journal.clone();
            journal[begin + at] ^= 0x04;
            let error = scene.go_on(&journal).unwrap_err();
            let told = error.to_string();
            assert!(matches!(error, RunError::Damaged { .. }), "{told}");
            let (here, next) = (format!("line {} ", number + 1), format!("line {} ", number + 2));
            assert!(told.contains(&here) || told.contains(&next), "{told}");
            let left = std::fs::read(scene.folder.path().join("journal.jsonl")).unwrap();
            assert_eq!(left, journal);
        }
    }
}

#[test]
fn a_journal_of_another_run_is_not_taken_up() {
    let scene = scene();
    let other = in_memory();
    let other_ask = Ask { seed: 8, ..ask(Share::WHOLE) };
    let run = RunFolder::open(other.path(), &other_ask).unwrap();
    perform(&run, &Digits::default(), &units(UNITS), 1, &mut Keeper::default()).unwrap();
    let journal = std::fs::read(other.path().join("journal.jsonl")).unwrap();
    let error = scene.go_on(&journal).unwrap_err();
    assert!(error.to_string().contains("line 1 is damaged: it belongs to another"), "{error}");
}

#[test]
fn a_spoilt_description_is_told() {
    let scene = scene();
    let run = String::from_utf8(std::fs::read(scene.folder.path().join("run.json")).unwrap());
    let run = run.unwrap();
    let asked = std::fs::read(scene.folder.path().join("asked.json")).unwrap();
    let told = |name: &str, text: &str| {
        scene.put(name, text.as_bytes());
        let error = scene.go_on(&scene.journal).unwrap_err();
        let newer = matches!(error, RunError::Newer { .. });
        assert!(newer || matches!(error, RunError::Damaged { .. }), "{error}");
        scene.put("run.json", run.as_bytes());
        scene.put("asked.json", &asked);
        error.to_string()
    };
    for cut in 0..run.trim_end().len() {
        told("run.json", &run[..cut]);
    }
    let newer = told("run.json", &run.replace("drawtube-run/1", "drawtube-run/2"));
    assert!(newer.contains("a newer drawtube"), "{newer}");
    told("run.json", &run.replace("drawtube-run/1", "something/1"));
    told("run.json", "[]");
    let spoilt = told("asked.json", "{}");
    assert!(spoilt.contains("asked.json: it is not the file that run.json speaks of"), "{spoilt}");
    assert_eq!(scene.go_on(&scene.journal).unwrap().0, scene.expected);
}
