//! A short run, and what it ends in.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::sync::OnceLock;

use tempfile::TempDir;

/// A program under test.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Program {
    /// The real one.
    Drawtube,
    /// The one whose writing is broken on purpose.
    Careless,
}

impl Program {
    pub fn path(self) -> &'static str {
        match self {
            Self::Drawtube => env!("CARGO_BIN_EXE_drawtube-program"),
            Self::Careless => env!("CARGO_BIN_EXE_drawtube-careless"),
        }
    }
}

/// A beam expander of two lenses at one ratio: a start of it takes a moment.
const DESIGN: &str = r#"{
  "format": "drawtube/1",
  "title": "Quay gauge, 2x",
  "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.0, "traced_to": 1.5 },
  "groups": [
    { "name": "entry", "elements": [ { "radii_mm": [-30.0, 30.0],
      "glasses": ["fused-silica"], "thicknesses_mm": [2.0], "diameter_mm": 6.0 } ] },
    { "name": "exit", "elements": [ { "radii_mm": [200.0, -60.0],
      "glasses": ["fused-silica"], "thicknesses_mm": [4.0], "diameter_mm": 16.0 } ] }
  ],
  "housing": { "track_mm": 90.0, "fixed": [] },
  "states": [ { "name": "2x", "ratio": 2.0, "spacings_mm": [60.0] } ],
  "goals": { "wavefront_rms_waves": { "within": 0.05 }, "ratio_percent": { "within": 0.5 },
             "exit_slope_urad": { "within": 50.0 } },
  "limits": { "spacing_mm": { "min": 0.5 }, "radius_mm": { "min": 8.0 },
              "edge_thickness_mm": { "min": 0.8 } }
}
"#;

/// Starts of the run.
pub const STARTS: u64 = 4;
/// Designs in its list.
pub const KEEP: usize = 2;

/// A folder of its own with the design in it; the run folder will be `run`.
pub struct Scene {
    folder: TempDir,
}

impl Scene {
    pub fn new() -> Self {
        let folder = tempfile::tempdir_in("/dev/shm").or_else(|_| tempfile::tempdir()).unwrap();
        write(&folder.path().join("design.json"), DESIGN.as_bytes());
        Self { folder }
    }

    /// The same folder once more.
    pub fn copy(&self) -> Self {
        let copy = Self::new();
        copy_into(&self.run_folder(), &copy.run_folder());
        copy
    }

    pub fn path(&self) -> &Path {
        self.folder.path()
    }

    pub fn run_folder(&self) -> PathBuf {
        self.path().join("run")
    }

    /// The command line of the run, with more arguments.
    pub fn command(&self, program: Program, more: &str) -> Command {
        let mut command = Command::new(program.path());
        self.prepare(&mut command);
        arguments(&mut command, more);
        command
    }

    /// The same under `strace` with these arguments of its own.
    pub fn traced(&self, program: Program, strace: &[String], more: &str) -> Command {
        let mut command = Command::new("strace");
        self.prepare(&mut command);
        command.args(strace).arg(program.path());
        arguments(&mut command, more);
        command
    }

    /// Any other command of the program, in the scene's folder.
    pub fn other(&self, line: &str) -> Output {
        let mut command = Command::new(Program::Drawtube.path());
        self.prepare(&mut command);
        command.args(line.split_whitespace()).output().unwrap()
    }

    fn prepare(&self, command: &mut Command) {
        let path = std::env::var_os("PATH").unwrap_or_default();
        command.env_clear().env("PATH", path).current_dir(self.path()).stdin(Stdio::null());
    }

    /// What a finished run has left, all but the journal and the lock.
    pub fn result(&self) -> BTreeMap<String, Vec<u8>> {
        result_in(&self.run_folder())
    }
}

fn copy_into(from: &Path, to: &Path) {
    std::fs::create_dir(to).unwrap();
    for entry in std::fs::read_dir(from).unwrap() {
        let entry = entry.unwrap();
        let to = to.join(entry.file_name());
        if entry.path().is_dir() {
            copy_into(&entry.path(), &to);
        } else {
            std::fs::copy(entry.path(), to).unwrap();
        }
    }
}

fn arguments(command: &mut Command, more: &str) {
    command.args(["overnight", "design.json", "--run", "run", "--strategy", "multistart"]);
    command.args(["--keep", &KEEP.to_string()]);
    if !more.contains("--starts") {
        command.args(["--starts", &STARTS.to_string()]);
    }
    command.args(more.split_whitespace());
}

/// What a run folder holds, all but its journal and lock.
pub fn result_in(folder: &Path) -> BTreeMap<String, Vec<u8>> {
    let mut found = BTreeMap::new();
    for inner in ["", "best"] {
        for entry in std::fs::read_dir(folder.join(inner)).into_iter().flatten().flatten() {
            let name = entry.file_name().into_string().unwrap();
            let kept = entry.path().is_file() && !["journal.jsonl", "lock"].contains(&&*name);
            if kept {
                let name = Path::new(inner).join(name).display().to_string();
                found.insert(name, std::fs::read(entry.path()).unwrap());
            }
        }
    }
    found
}

/// What the undisturbed run leaves.
pub fn undisturbed() -> &'static BTreeMap<String, Vec<u8>> {
    static UNDISTURBED: OnceLock<BTreeMap<String, Vec<u8>>> = OnceLock::new();
    UNDISTURBED.get_or_init(|| {
        let scene = Scene::new();
        let output = scene.command(Program::Drawtube, "").output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{}", said(&output));
        let result = scene.result();
        for name in ["asked.json", "run.json", "ranking.json", "best/01.json"] {
            assert!(result.contains_key(name), "{name} is missing");
        }
        result
    })
}

/// Goes on until the run is done, and holds what it leaves against the undisturbed run.
pub fn go_on_to_the_end(scene: &Scene, program: Program) -> Result<(), String> {
    let output = scene.command(program, "").output().unwrap();
    if output.status.code() != Some(0) {
        return Err(format!("going on ends with {:?}: {}", output.status, said(&output)));
    }
    same(&scene.result())
}

/// Whether this is what the undisturbed run leaves.
pub fn same(result: &BTreeMap<String, Vec<u8>>) -> Result<(), String> {
    let expected = undisturbed();
    let names: Vec<&String> = result.keys().collect();
    if names != expected.keys().collect::<Vec<_>>() {
        return Err(format!("other files: {names:?}"));
    }
    match result.iter().find(|(name, bytes)| expected[*name] != **bytes) {
        None => Ok(()),
        Some((name, _)) => Err(format!("{name} differs from the undisturbed run")),
    }
}

/// Both streams of a program that has ended, which must not have panicked.
pub fn said(output: &Output) -> String {
    let text = [&output.stdout[..], &output.stderr].concat();
    let text = String::from_utf8(text).unwrap();
    assert!(!text.contains("panicked"), "{text}");
    text
}

pub fn write(path: &Path, text: &[u8]) {
    use driver::write_whole::{Existing, write_whole};
    write_whole(path, text, Existing::Replace).unwrap();
}

/// Numbers that look random, the same in every test run.
pub struct Chance(pub u64);

impl Chance {
    /// From 0 to 1.
    pub fn next(&mut self) -> f64 {
        // Knuth's linear congruential generator (The Art of Computer Programming 2, 3.3.4).
        self.0 =
            self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 11) as f64 / (1u64 << 53) as f64
    }
}
