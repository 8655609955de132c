//! Answers as tables, CSV, JSON and Markdown. No physics here.

mod attribute;
mod audit;
mod choose;
mod climb;
mod contrast;
mod csv;
mod json;
mod line;
mod listing;
mod markdown;
mod marks;
mod number;
mod pairs;
mod passband;
mod predict;
mod prior;
mod sheet;
mod table;
pub mod text;
mod tune;
mod vet;
mod window;

pub use attribute::attribute;
pub use audit::{AuditWish, audit};
pub use choose::chosen;
pub use climb::{ClimbWish, climb};
pub use contrast::contrast;
pub use listing::{explained, forgotten, imported, sources};
pub use marks::marks;
pub use pairs::{Measured, pairs, plot};
pub use passband::passband;
pub use predict::predict;
pub use sheet::{Align, Column, Context, Format, Sheet};
pub use tune::{TuneWish, tune};
pub use vet::{WORTH_A_ROW, vet};
pub use window::{Wish, window};
