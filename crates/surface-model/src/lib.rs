//! surface-model
