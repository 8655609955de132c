//! Readers of published level and line tables. Each format turns bytes into one stream of
//! [`record`]s; none of them knows a database.
//!
//! [`source::SourceDescription`] says what a table is and how its columns map;
//! [`read_source`] turns its tables into records and hands them to a [`Sink`].

pub mod delimited;
pub mod detect;
pub mod ecsv;
pub mod error;
pub mod explain;
pub mod fits;
pub mod fixed;
pub mod handover;
pub mod infer;
pub mod input;
pub mod jsonl;
pub mod limits;
pub mod lines;
pub mod mapping;
pub mod mrt;
pub mod number;
pub mod parquet;
pub mod read;
pub mod record;
pub mod row;
pub mod sink;
pub mod source;
pub mod spectral;
pub mod table;
pub mod unit;
pub mod unpack;
pub mod votable;
pub mod xml;
pub mod xsams;

pub use error::ImportError;
pub use limits::Limits;
pub use read::{Opener, ReadOptions, open_file, read_source};
pub use sink::{ReadReport, Refusal, Sink, SinkError};
