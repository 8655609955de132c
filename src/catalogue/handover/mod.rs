//! Handing data on, and taking in what was handed on: reports as they are kept, without a mapping.

mod give;
mod rows;
mod take;

pub use give::{Receiver, Selection};
pub use take::HandedOver;
