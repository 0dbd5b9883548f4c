//! The program run as a user runs it.

mod assess;
mod designs;
mod extremes;
mod glass;
mod help;
mod laser;
mod mistakes;
mod optimise;
mod program;
mod readme;
mod signals;
mod streams;
mod tolerance;
mod trace;
