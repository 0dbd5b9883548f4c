//! surface-model

pub mod bundle;
pub mod document;
pub mod fault;
pub mod glass;
pub mod quadrature;
pub mod real;
pub mod reverse;
pub mod skew;
pub mod surface;
pub mod trace;
pub mod train;
