//! Readers of published level and line tables. Each format turns bytes into one stream of
//! [`record`]s; none of them knows a database.

pub mod record;
