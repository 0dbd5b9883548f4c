//! Checks against published values; each names its source.

mod aberration;
mod certified_regression;
mod first_order;
mod glass;
mod least_squares;
mod real_beam;
mod scipy;
mod smooth;
mod temperature;
mod tolerance;
mod trace;
