//! What is said of lines without a rate that a prior bounds.

use serde_json::{Map, Value, json};

use super::number::percent;
use crate::advise::CHANCE_CHANGED;
use crate::advise::window::{WindowFeature, WindowLine};

/// Keys of the prior of a line; null for a line with a rate, and where no prior is to be had.
pub(super) fn put_prior(object: &mut Map<String, Value>, line: &WindowLine) {
    let prior = line.prior;
    let mut put = |key: &str, value: Option<f64>| object.insert(key.to_owned(), json!(value));
    put("prior_rate_per_s", prior.map(|p| p.median_rate_per_s()));
    put("prior_sigma_dex", prior.map(|p| p.sigma_dex));
    put("prior_light_fraction", line.prior_light_fraction);
}

/// That a prior was used, and for how many features.
pub(super) fn prior_note(features: &[WindowFeature]) -> Option<String> {
    let count = features.iter().filter(|f| f.prior_chance.is_some()).count();
    let features = match count {
        0 => return None,
        1 => "one feature".to_owned(),
        n => format!("{n} features"),
    };
    Some(format!(
        "Near {features}, lines without a rate are bounded by a prior learned from rated lines of \
         like kind; a verdict stands where the chance that they change it is at most {}.",
        percent(CHANCE_CHANGED)
    ))
}
