//! merit-function

pub mod block;
