//! surface-model

pub mod document;
