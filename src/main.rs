//! Parses, dispatches and sets the exit status.

use std::process::ExitCode;

use lineclear::cli::{self, Exit};

fn main() -> ExitCode {
    let exit = cli::run().unwrap_or_else(|error| {
        let exit = error.exit();
        if exit != Exit::Answered {
            eprintln!("lineclear: {error}");
        }
        exit
    });
    exit.into()
}
