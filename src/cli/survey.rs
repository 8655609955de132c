//! What `attribute`, `marks` and `pairs` ask and state alike: a span, how weak a line may be, what is
//! held there, under which conditions, from which sources.

use serde_json::json;
use vocabulary::atom::SpeciesRequest;
use vocabulary::light::{Air, Medium, SpectralRange, TypedRange};
use vocabulary::spectrum::Line;

use super::assemble::{self, Assembled};
use super::options::{Checked, ConditionOptions};
use super::{CliError, describe};
use crate::advise::window::REACH_WIDTHS;
use crate::catalogue::Catalogue;
use crate::show::Context;

/// A span as typed, and the conditions that hold there.
pub fn span(
    typed: &str,
    medium: Medium,
    conditions: &ConditionOptions,
) -> Result<(SpectralRange, Checked), CliError> {
    let typed: TypedRange = typed.parse()?;
    let range = typed.resolve(medium, Air::standard())?;
    let mut checked = conditions.check(&range)?;
    if range.unit_assumed {
        checked.assumed.push("nm, as the span has no unit".into());
    }
    Ok((range, checked))
}

/// The weakest line wanted, over the strongest.
pub fn weakest(fraction: f64) -> Result<f64, CliError> {
    if (0.0..1.0).contains(&fraction) {
        Ok(fraction)
    } else {
        Err(CliError::Options(
            "--weakest takes a part of one, such as 0.01",
        ))
    }
}

/// What is held of these species in a span and as far beyond as wings reach.
pub fn held(
    catalogue: &Catalogue,
    requests: &[SpeciesRequest],
    checked: &Checked,
    range: &SpectralRange,
) -> Result<Assembled, CliError> {
    let margin_nm = REACH_WIDTHS * checked.width.at_nm(range.vacuum_high_nm);
    let mut held = assemble::spectra(catalogue, requests, &checked.amounts, range, margin_nm)?;
    assemble::complete(catalogue, &mut held.spectra, &checked.conditions)?;
    Ok(held)
}

/// Conditions and assumptions of an answer over a range.
pub fn context(
    command: &'static str,
    medium: Medium,
    range: &SpectralRange,
    checked: &Checked,
) -> Context {
    let mut conditions = describe::conditions(
        &checked.conditions,
        checked.te,
        checked.gas,
        &checked.amounts,
    );
    let fwhm_nm = checked.width.at_nm(range.centre_vacuum_nm());
    conditions.insert("fwhm_nm".into(), json!(fwhm_nm));
    conditions.insert(
        "range_vacuum_nm".into(),
        json!([range.vacuum_low_nm, range.vacuum_high_nm]),
    );
    Context {
        command,
        medium: medium.to_string(),
        conditions,
        assumed: checked.assumed.clone(),
        ..Context::default()
    }
}

/// Adds the sources of lines.
pub fn cite(catalogue: &Catalogue, lines: &[&Line], context: &mut Context) -> Result<(), CliError> {
    describe::cite(context, catalogue, lines.iter().copied())
}
