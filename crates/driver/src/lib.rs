//! driver

pub mod solve;
