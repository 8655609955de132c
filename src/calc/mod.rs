//! The physics: pure functions on vocabulary types, no I/O.
