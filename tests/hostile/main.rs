//! Files as a careless or hostile user writes them: whatever a file says, the library answers
//! with a place in the text, a typed error, or finite numbers.

mod briefs;
mod bytes;
mod everything;
mod limits;
mod many_states;
mod once_broken;
mod one_change;
mod way;
mod words;

/// Memory that all tests together may hold at once; who asks for more is ended.
const MOST_BYTES: usize = 2 << 30;

#[global_allocator]
static MEMORY: cap::Cap<std::alloc::System> = cap::Cap::new(std::alloc::System, MOST_BYTES);
