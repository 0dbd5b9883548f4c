//! Checks against published values; each names its source.

mod aberration;
mod by_hand;
mod certified_regression;
mod first_order;
mod glass;
mod least_squares;
mod real_beam;
mod retune;
mod scipy;
mod smooth;
mod sweep;
mod temperature;
mod tolerance;
mod trace;
