//! Kernels and whole jobs, with the peers they are held against.
fn main() {}
