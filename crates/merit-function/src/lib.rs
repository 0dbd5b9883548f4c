//! merit-function

pub mod assessment;
pub mod block;
mod bounds;
mod edge;
pub mod fault;
pub mod goals;
mod limit_item;
mod limit_rows;
pub mod limits;
pub mod problem;
#[cfg(test)]
mod problem_tests;
mod ray_weights;
mod row_evaluation;
pub mod variables;
mod warnings;
pub mod wishes;
