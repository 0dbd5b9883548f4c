//! Checks that cannot fail are worth nothing: a program that writes carelessly turns them red.

use crate::job::Program;
use crate::{injected, journals, kills};

type Check = fn() -> Result<(), String>;

#[test]
fn a_careless_program_is_found_out() {
    if !injected::can_trace() {
        return;
    }
    let checks: [(&str, Check); 4] = [
        ("random kills", || kills::check(Program::Careless)),
        ("a kill at every call", || injected::check_kills(Program::Careless)),
        ("a full disk at every call", || injected::check_errors(Program::Careless, "ENOSPC", true)),
        ("a journal cut within its last line", || journals::check_cuts(Program::Careless, 97)),
    ];
    for (what, check) in checks {
        assert!(check().is_err(), "{what}: not noticed");
    }
}
