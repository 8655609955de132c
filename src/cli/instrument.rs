//! The form of an instrument's response as it is typed.

use std::path::Path;

use super::CliError;
use super::table_file::TableFile;
use crate::advise::InstrumentForm;
use crate::calc::shape::ResponseCurve;

/// Reads `--instrument`.
pub fn form(typed: Option<&str>) -> Result<InstrumentForm, CliError> {
    let Some(typed) = typed.map(str::trim) else {
        return Ok(InstrumentForm::Gaussian);
    };
    match typed.to_ascii_lowercase().as_str() {
        "gaussian" => Ok(InstrumentForm::Gaussian),
        "triangular" => Ok(InstrumentForm::Triangular),
        "rectangular" => Ok(InstrumentForm::Rectangular),
        lower if lower.ends_with(".csv") => measured(Path::new(typed)),
        _ => Err(CliError::Usage(format!(
            "--instrument: `{typed}` is no form of a response; write gaussian, triangular, \
             rectangular, or the name of a file .csv with columns offset_nm and response"
        ))),
    }
}

fn measured(path: &Path) -> Result<InstrumentForm, CliError> {
    let table = TableFile::read(path)?;
    let offset = table.needed(&["offset_nm"])?;
    let response = table.needed(&["response"])?;
    let mut points = Vec::with_capacity(table.len());
    for row in 0..table.len() {
        points.push((table.number(row, offset)?, table.number(row, response)?));
    }
    let curve = ResponseCurve::new(&points).map_err(|cause| CliError::Response {
        path: path.to_owned(),
        cause,
    })?;
    if curve.density(0.0) <= 0.0 {
        return Err(CliError::Usage(format!(
            "{}: the response is zero at offset 0, which is where the instrument is set to; measure \
             offsets from the position that it reads",
            path.display()
        )));
    }
    Ok(InstrumentForm::Measured(curve))
}
