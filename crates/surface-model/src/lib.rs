//! surface-model

pub mod bundle;
pub mod design;
pub mod design_error;
pub mod document;
pub mod fault;
pub mod first_order;
pub mod glass;
pub mod housing;
pub mod optics_document;
pub mod paraxial;
pub mod place;
pub mod quadrature;
pub mod real;
mod resolve;
pub mod reverse;
pub mod seidel;
pub mod sequence;
pub mod skew;
pub mod solid;
pub mod surface;
pub mod trace;
pub mod train;
pub mod wavefront;
