//! `convert`: one spectral quantity in every form.

use clap::Args;
use vocabulary::light::{Air, Conversion, Medium, SpectralQuantity};

use super::options::{OutputOptions, medium};
use super::{CliError, Exit, Outcome};
use crate::show;

/// Turn a wavelength, frequency, wavenumber or photon energy into all the others
///
/// A wavelength is read in the medium that --medium says. Vacuum and air wavelength, wavenumber,
/// frequency, photon energy and photon momentum come back.
#[derive(Args, Debug)]
#[command(
    after_help = "Examples:\n  lineclear convert 656.28nm\n  lineclear convert 15237.4cm-1 --as json\n  \
    lineclear convert 589.0nm --medium vacuum"
)]
pub struct Arguments {
    /// Quantity with its unit: 656.28nm, 6562.8A, 0.65628um, 15237.4cm-1, 1.889eV, 456.8THz
    #[arg(value_name = "QUANTITY")]
    quantity: String,
    /// Medium of a wavelength: auto is air from 200 nm to 2000 nm, vacuum elsewhere
    #[arg(long, value_parser = medium, default_value = "auto", value_name = "MEDIUM")]
    medium: Medium,
    #[command(flatten)]
    output: OutputOptions,
}

pub(super) fn run(arguments: &Arguments) -> Result<Outcome, CliError> {
    let joined: String = arguments.quantity.split_whitespace().collect();
    let quantity: SpectralQuantity = joined.parse()?;
    let conversion = Conversion::of(quantity, arguments.medium, Air::standard())?;
    Ok(Outcome {
        sheet: show::convert(arguments.quantity.trim(), &conversion, arguments.medium),
        format: arguments.output.format,
        exit: Exit::Answered,
    })
}
