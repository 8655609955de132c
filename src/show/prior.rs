//! What is said of lines without a rate that a prior bounds.

use serde_json::{Map, Value, json};

use super::number::percent;
use crate::advise::window::{WindowFeature, WindowLine};
use crate::advise::{CHANCE_CHANGED, EmissionModel};

/// Keys of the prior of a line; null for a line with a rate, and where no prior is to be had.
pub(super) fn put_prior(object: &mut Map<String, Value>, line: &WindowLine) {
    let prior = line.prior;
    let mut put = |key: &str, value: Option<f64>| object.insert(key.to_owned(), json!(value));
    put("prior_rate_per_s", prior.map(|p| p.median_rate_per_s()));
    put("prior_sigma_dex", prior.map(|p| p.sigma_dex));
    put("prior_light_fraction", line.prior_light_fraction);
}

/// That a prior was used, and for how many features.
pub(super) fn prior_note(features: &[WindowFeature], model: EmissionModel) -> Option<String> {
    let count = features.iter().filter(|f| f.prior_chance.is_some()).count();
    let features = match count {
        0 => return None,
        1 => "one feature".to_owned(),
        n => format!("{n} features"),
    };
    let which = if model == EmissionModel::Coronal {
        "lines without a rate or a known excitation are bounded by what is usual (rated lines of \
         like kind; collision strengths within a factor of 10)"
    } else {
        "lines without a rate are bounded by a prior learned from rated lines of like kind"
    };
    Some(format!(
        "Near {features}, {which}; a verdict stands where the chance that they change it is at \
         most {}.",
        percent(CHANCE_CHANGED)
    ))
}
