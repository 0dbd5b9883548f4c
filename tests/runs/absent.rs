//! What cannot be checked here is said aloud, past the capture of a test's output; where all is to
//! be checked (`CHECKS_COMPLETE`, set by `.ci/run`), it is a failure.

use std::io::Write;
use std::process::{Command, Stdio};

/// Whether a program is there and runs; if not, that is said.
pub fn is_there(program: &str, arguments: &[&str], package: &str) -> bool {
    let mut command = Command::new(program);
    let tried = command.args(arguments).stdout(Stdio::null()).stderr(Stdio::null()).status();
    let there = tried.is_ok_and(|status| status.success());
    if !there {
        not_checked(&format!("{program} cannot be run here: apt-get install {package}"));
    }
    there
}

/// Something cannot be checked here.
pub fn not_checked(why: &str) {
    let test = std::thread::current().name().unwrap_or_default().to_owned();
    let told = format!("NOT CHECKED: {test}: {why}");
    assert!(std::env::var_os("CHECKS_COMPLETE").is_none(), "{told}");
    let _ = writeln!(std::io::stderr(), "{told}");
}
