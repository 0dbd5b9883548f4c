//! Checks against published values; each names its source.

mod least_squares;
mod smooth;
