//! What cannot be checked here is said aloud, past the capture of a test's output. Where all tools
//! are to be there (`CHECKS_COMPLETE`, set by `.ci/run`), a missing one is a failure.

use std::io::Write;
use std::process::{Command, Stdio};

/// Whether a program is there and runs; if not, that is said.
pub fn is_there(program: &str, arguments: &[&str], package: &str) -> bool {
    let mut command = Command::new(program);
    let tried = command.args(arguments).stdout(Stdio::null()).stderr(Stdio::null()).status();
    let there = tried.is_ok_and(|status| status.success());
    if !there {
        let is_failure = std::env::var_os("CHECKS_COMPLETE").is_some();
        assert!(!is_failure, "{program} cannot be run here, and everything is to be checked");
        not_checked(&format!("{program} cannot be run here: apt-get install {package}"));
    }
    there
}

/// Something cannot be checked here.
pub fn not_checked(why: &str) {
    let test = std::thread::current().name().unwrap_or_default().to_owned();
    let _ = writeln!(std::io::stderr(), "NOT CHECKED: {test}: {why}");
}
