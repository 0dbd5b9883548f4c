//! Checks against published values; each names its source.

mod certified_regression;
mod glass;
mod least_squares;
mod smooth;
