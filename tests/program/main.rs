//! The program run as a user runs it.

mod alone;
mod assess;
mod cam;
mod designs;
mod developers;
mod extremes;
mod glass;
mod help;
mod laser;
mod mistakes;
mod optimise;
mod page;
mod program;
mod quantities;
mod readme;
mod retune;
mod shipped;
mod shop;
mod signals;
mod slips;
mod start;
mod streams;
mod sweep;
mod tolerance;
mod trace;
