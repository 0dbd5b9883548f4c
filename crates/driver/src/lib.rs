//! driver

pub mod design_file;
pub mod freedom;
pub mod optimise;
pub mod solve;
pub mod write_whole;
