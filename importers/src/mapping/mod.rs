//! From rows to records: a description bound to the columns of one table.

mod bind;
mod cell;
mod level;
mod line;
mod plan;
mod position;
mod problem;
mod rate;
mod species;

pub(crate) use bind::range_name;
pub use plan::{MappingError, Plan};
pub use problem::{CellFault, Fault, Problem};
