//! Findings that are known and decided, as `data/known_findings.toml` lists them.

use serde::Deserialize;

use super::Finding;

/// Why a list of known findings cannot be used.
#[derive(Debug, thiserror::Error)]
#[error(
    "the list of known findings cannot be read: {cause}; each entry needs rule, source, place, size, reason and decision"
)]
pub struct KnownError {
    /// What the reader says.
    #[source]
    cause: toml::de::Error,
}

/// One entry of the list.
#[derive(Clone, Debug, Deserialize)]
struct Entry {
    rule: String,
    source: String,
    place: String,
    reason: String,
    decision: String,
}

/// The list.
#[derive(Clone, Debug, Default, Deserialize)]
pub struct KnownFindings {
    #[serde(default, rename = "finding")]
    entries: Vec<Entry>,
}

impl KnownFindings {
    /// Reads a list.
    ///
    /// # Errors
    /// Text that is no such list.
    pub fn parse(text: &str) -> Result<Self, KnownError> {
        toml::from_str(text).map_err(|cause| KnownError { cause })
    }

    /// Reason and decision of a finding that is listed: same rule, and source and place as the
    /// entry gives them, `*` standing for any text.
    pub fn of(&self, finding: &Finding) -> Option<(&str, &str)> {
        self.entries
            .iter()
            .find(|entry| {
                entry.rule == finding.rule.name()
                    && fits(&entry.source, &finding.source)
                    && fits(&entry.place, &finding.place.subject)
            })
            .map(|entry| (entry.reason.as_str(), entry.decision.as_str()))
    }
}

/// Whether a text fits a pattern in which `*` stands for any text.
fn fits(pattern: &str, text: &str) -> bool {
    let Some((head, rest)) = pattern.split_once('*') else {
        return pattern == text;
    };
    let Some(tail) = text.strip_prefix(head) else {
        return false;
    };
    (0..=tail.len())
        .filter(|&at| tail.is_char_boundary(at))
        .any(|at| fits(rest, &tail[at..]))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_star_stands_for_any_text() {
        assert!(fits("Fe I *", "Fe I level 415.933 J=3"));
        assert!(!fits("Fe I *", "Fe II level 415.933 J=3"));
        assert!(fits("* nm", "Fe I 438.3545 nm"));
        assert!(fits("*", ""));
        assert!(!fits("Fe I", "Fe I 1"));
    }
}
