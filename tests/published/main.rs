//! Checks against published values; each names its source.

mod glass;
