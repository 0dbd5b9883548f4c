//! Points to try and random numbers to shake them with, each a function of its number alone.
//!
//! A search, a sweep or a yield asks for point 4711 and gets the same bits whether points 0 to 4710
//! were asked for before, on this thread or on another machine:
//!
//! - [`stream`]: random numbers keyed by a seed and a number;
//! - [`Sobol`]: points that fill the unit cube evenly, however many are taken;
//! - [`LatinHypercube`]: a fixed count of points, every coordinate evenly spread over its range.

mod direction_numbers;
mod latin_hypercube;
mod sobol;
mod stream;

pub(crate) use latin_hypercube::LatinHypercube;
pub use sobol::Sobol;
pub(crate) use stream::{RandomStream, stream};
