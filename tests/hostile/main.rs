//! Files as a careless or hostile user writes them: whatever a file says, the library answers
//! with a place in the text, a typed error, or finite numbers.

mod briefs;
mod bytes;
mod judge;
mod limits;
mod many_states;
mod mutants;
mod once_broken;
mod one_change;
mod plans;
mod shipped;
mod words;
