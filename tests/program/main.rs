//! The program run as a user runs it.
