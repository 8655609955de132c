//! The answer of `audit`.

use std::collections::{BTreeMap, BTreeSet};

use serde_json::{Value, json};

use super::number::percent;
use super::sheet::{Align, Column, Context, Sheet};
use crate::advise::audit::{Audit, Conflict, Finding, KnownFindings, Quantity};

/// How much of an audit is shown.
#[derive(Clone, Debug, Default)]
pub struct AuditWish {
    /// Known findings as well.
    pub known: bool,
    /// The list of conflicts.
    pub conflicts: bool,
    /// Requests that no held species meets.
    pub not_held: Vec<String>,
}

const COLUMNS: [Column; 5] = [
    Column::whole("rule", Align::Left),
    Column::wrapped("source", Align::Left),
    Column::wrapped("place", Align::Left),
    Column::wrapped("size", Align::Right),
    Column::wrapped("what to do", Align::Left),
];

/// What an audit found.
pub fn audit(
    answer: &Audit,
    known: &KnownFindings,
    wish: &AuditWish,
    citations: Vec<(String, String, String)>,
) -> Sheet {
    let decided = |f: &Finding| known.of(f);
    let shown: Vec<&Finding> = answer
        .findings
        .iter()
        .filter(|f| wish.known || decided(f).is_none())
        .collect();
    let conflicts: &[Conflict] = if wish.conflicts {
        &answer.conflicts
    } else {
        &[]
    };
    let unexplained = answer
        .findings
        .iter()
        .filter(|f| decided(f).is_none())
        .count();
    let headline = headline(answer, unexplained, wish);
    let notes = notes(answer, known, wish);
    let keys: BTreeSet<&str> = shown
        .iter()
        .map(|f| f.source.as_str())
        .chain(conflicts.iter().flat_map(|c| [&*c.first.0, &*c.second.0]))
        .collect();
    let context = Context {
        command: "audit",
        medium: "auto".into(),
        conditions: [(
            "air".to_owned(),
            json!("Ciddor 1996, 15 °C, 101325 Pa, dry, 450 ppm CO2"),
        )]
        .into_iter()
        .collect(),
        sources: citations
            .into_iter()
            .filter(|(key, ..)| keys.contains(key.as_str()))
            .map(|(key, citation, licence)| (key, (citation, licence)))
            .collect(),
        ..Context::default()
    };
    let mut object = context.object(&notes);
    let list = shown.iter().map(|f| finding_object(f, decided(f)));
    let list = list.chain(conflicts.iter().map(conflict_object));
    object.insert("findings".into(), Value::Array(list.collect()));
    object.insert("unexplained".into(), json!(unexplained));
    object.insert("known".into(), json!(answer.findings.len() - unexplained));
    object.insert("conflicts".into(), counts_object(answer));
    let rows = shown.iter().map(|f| finding_row(f, decided(f)));
    Sheet {
        headline,
        columns: COLUMNS.to_vec(),
        rows: rows.chain(conflicts.iter().map(conflict_row)).collect(),
        notes,
        object,
        list: "findings",
    }
}

fn headline(answer: &Audit, unexplained: usize, wish: &AuditWish) -> Vec<String> {
    let looked = format!(
        "{} species, {} levels and {} lines of all sources were looked at",
        answer.species, answer.levels, answer.lines
    );
    let found = match unexplained {
        0 => "no finding is unexplained".to_owned(),
        1 => "1 finding is unexplained".to_owned(),
        n => format!("{n} findings are unexplained"),
    };
    let known = match (answer.findings.len() - unexplained, wish.known) {
        (0, _) => "none is known".to_owned(),
        (n, true) => format!("{n} are known and decided"),
        (n, false) => format!("{n} are known and decided (--known lists them)"),
    };
    vec![format!("{looked}: {found}, {known}.")]
}

fn notes(answer: &Audit, known: &KnownFindings, wish: &AuditWish) -> Vec<String> {
    let mut notes = Vec::new();
    for request in &wish.not_held {
        notes.push(format!("Nothing is held of {request}."));
    }
    let mut by_rule: BTreeMap<&str, (usize, usize)> = BTreeMap::new();
    for finding in &answer.findings {
        let counts = by_rule.entry(finding.rule.name()).or_default();
        counts.0 += 1;
        counts.1 += usize::from(known.of(finding).is_some());
    }
    if !by_rule.is_empty() {
        let list: Vec<String> = by_rule
            .iter()
            .map(|(rule, (all, known))| format!("{rule} {all} ({known} known)"))
            .collect();
        notes.push(format!("By rule: {}.", list.join(", ")));
    }
    let counts = answer.counts;
    let share = |some: usize, all: usize| percent(some as f64 / (all as f64).max(1.0));
    let tail = if wish.conflicts {
        ""
    } else {
        " --conflicts lists them."
    };
    notes.push(format!(
        "Sources disagree about positions beyond 3 sigma in {} of {} comparisons ({}), about rates \
         beyond 25 % in {} of {} ({}); these are no findings.{tail}",
        counts.position_conflicts,
        counts.positions,
        share(counts.position_conflicts, counts.positions),
        counts.rate_conflicts,
        counts.rates,
        share(counts.rate_conflicts, counts.rates),
    ));
    notes.push(format!(
        "Sums of rates were compared with measured lifetimes in {} cases (papers in \
         resonance-lines).",
        answer.sums
    ));
    notes
}

fn counts_object(answer: &Audit) -> Value {
    let counts = answer.counts;
    json!({
        "positions_compared": counts.positions,
        "position_conflicts": counts.position_conflicts,
        "rates_compared": counts.rates,
        "rate_conflicts": counts.rate_conflicts,
    })
}

fn finding_object(finding: &Finding, decided: Option<(&str, &str)>) -> Value {
    json!({
        "rule": finding.rule.name(),
        "species": finding.species.to_string(),
        "source": finding.source,
        "place": finding.place.to_string(),
        "subject": finding.place.subject,
        "table": finding.place.row.map(|(table, _)| table.to_string()),
        "row": finding.place.row.map(|(_, row)| row),
        "size": finite(finding.size),
        "unit": finding.unit,
        "advice": finding.advice,
        "reason": decided.map(|d| d.0),
        "decision": decided.map(|d| d.1),
    })
}

fn finite(value: f64) -> Value {
    if value.is_finite() {
        json!(value)
    } else {
        Value::Null
    }
}

fn conflict_words(conflict: &Conflict) -> (&'static str, &'static str, String) {
    let (rule, unit, of) = match conflict.quantity {
        Quantity::Position => ("position-conflict", "sigma", "cm-1"),
        Quantity::Rate => ("rate-conflict", "times", "s-1"),
    };
    let value = |v: f64| match conflict.quantity {
        Quantity::Position => format!("{v:.3}"),
        Quantity::Rate => format!("{v:.3e}"),
    };
    let words = format!(
        "{} {of} here, {} in {} (row {})",
        value(conflict.second.2),
        value(conflict.first.2),
        conflict.first.0,
        conflict.first.1
    );
    (rule, unit, words)
}

fn conflict_object(conflict: &Conflict) -> Value {
    let (rule, unit, words) = conflict_words(conflict);
    json!({
        "rule": rule,
        "species": conflict.species.to_string(),
        "source": &*conflict.second.0,
        "place": format!("{} (lines, row {})", conflict.line, conflict.second.1),
        "subject": conflict.line,
        "table": "lines",
        "row": conflict.second.1,
        "size": finite(conflict.size),
        "unit": unit,
        "advice": words,
        "reason": null,
        "decision": null,
    })
}

fn conflict_row(conflict: &Conflict) -> Vec<String> {
    let (rule, unit, words) = conflict_words(conflict);
    vec![
        rule.into(),
        conflict.second.0.to_string(),
        format!("{} (lines, row {})", conflict.line, conflict.second.1),
        size(conflict.size, unit),
        words,
    ]
}

fn finding_row(finding: &Finding, decided: Option<(&str, &str)>) -> Vec<String> {
    let words = decided.map_or_else(
        || finding.advice.clone(),
        |(reason, decision)| format!("{}. Known: {reason} Decision: {decision}", finding.advice),
    );
    vec![
        finding.rule.to_string(),
        finding.source.clone(),
        finding.place.to_string(),
        size(finding.size, finding.unit),
        words,
    ]
}

/// A size with three digits or so, and its unit.
fn size(value: f64, unit: &str) -> String {
    let number = match value.abs() {
        v if unit == "levels" || unit == "J" || unit == "steps of J" => format!("{v}"),
        v if v >= 1e4 || (v < 1e-3 && v > 0.0) => format!("{value:.2e}"),
        v if v >= 100.0 => format!("{value:.0}"),
        v if v >= 1.0 => format!("{value:.2}"),
        _ => format!("{value:.4}"),
    };
    format!("{number} {unit}")
}
