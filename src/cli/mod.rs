//! The command line: what was typed, the question, the answer, shown.

mod assemble;
mod attribute;
mod audit;
mod bench;
mod choose;
mod climb;
mod contrast;
mod convert;
mod describe;
mod error;
mod exit;
mod export;
mod forget;
mod given;
mod import;
mod instrument;
mod interrupt;
mod line;
mod marks;
mod mix;
mod optics;
mod options;
mod pairs;
mod passband;
mod predict;
mod progress;
mod scan;
mod source;
mod sources;
mod survey;
mod table_file;
mod tune;
mod vet;
mod window;

use clap::{Parser, Subcommand};

pub use error::CliError;
pub use exit::Exit;

use crate::show::{Format, Sheet};
use options::CatalogueOptions;

/// Atomic energy levels and spectral lines: which lines fall in a window, and what gets in the way.
#[derive(Debug, Parser)]
#[command(name = "lineclear", version, about, arg_required_else_help = true)]
struct Cli {
    #[command(flatten)]
    catalogue: CatalogueOptions,
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    Window(window::Arguments),
    Marks(marks::Arguments),
    Vet(vet::Arguments),
    Pairs(Box<pairs::Arguments>),
    Predict(predict::Arguments),
    Audit(audit::Arguments),
    Contrast(contrast::Arguments),
    Tune(tune::Arguments),
    Climb(climb::Arguments),
    Passband(Box<passband::Arguments>),
    Attribute(attribute::Arguments),
    Convert(convert::Arguments),
    Import(import::Arguments),
    Export(export::Arguments),
    Sources(sources::Arguments),
    Forget(forget::Arguments),
}

/// What a command hands back.
struct Outcome {
    sheet: Sheet,
    format: Format,
    exit: Exit,
}

/// Parses the arguments of the process, runs the command and prints its answer.
///
/// # Errors
/// One sentence for standard error, with the kind that sets the exit status.
pub fn run() -> Result<Exit, CliError> {
    let cli = match Cli::try_parse() {
        Ok(cli) => cli,
        Err(error) => return exit::of_clap(&error),
    };
    let context = &cli.catalogue;
    let outcome = match cli.command {
        Command::Window(arguments) => window::run(arguments, context)?,
        Command::Attribute(arguments) => attribute::run(&arguments, context)?,
        Command::Pairs(arguments) => pairs::run(&arguments, context)?,
        Command::Predict(arguments) => predict::run(&arguments, context)?,
        Command::Marks(arguments) => marks::run(&arguments, context)?,
        Command::Vet(arguments) => vet::run(arguments, context)?,
        Command::Audit(arguments) => audit::run(&arguments, context)?,
        Command::Contrast(arguments) => contrast::run(&arguments, context)?,
        Command::Tune(arguments) => tune::run(arguments, context)?,
        Command::Climb(arguments) => climb::run(arguments, context)?,
        Command::Passband(arguments) => passband::run(*arguments, context)?,
        Command::Convert(arguments) => convert::run(&arguments)?,
        Command::Import(arguments) => import::run(&arguments, context)?,
        Command::Export(arguments) => return export::run(&arguments, context),
        Command::Sources(arguments) => sources::run(&arguments, context)?,
        Command::Forget(arguments) => forget::run(&arguments, context)?,
    };
    outcome
        .sheet
        .print(outcome.format)
        .map_err(CliError::Output)?;
    Ok(outcome.exit)
}
