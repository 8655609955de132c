//! Parses, dispatches and sets the exit status.

fn main() {}
