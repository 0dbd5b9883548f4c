//! What must hold of any input, for tests and for the search for inputs that break it: [`judges`].
//! Else nothing but tests lives here: `published/` holds the checks against outside sources,
//! `program/` the whole-program runs, `runs/` the runs cut short, `hostile/` the spoilt inputs.

pub mod judges;
