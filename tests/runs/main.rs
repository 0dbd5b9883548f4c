//! Runs of hours, cut short in every way: killed, failed by the system, out of disk, stopped,
//! split. What they end in must be the same bytes as an undisturbed run.
//!
//! The checks that a careless program must fail take the program they are about, and `careless.rs`
//! turns each of them red.

mod absent;
mod careless;
mod disks;
mod engine;
mod injected;
mod job;
mod journals;
mod kills;
mod parts;
mod showing;
mod signals;
mod threads;
