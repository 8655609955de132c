//! The answers of `import`, `sources` and `forget`.

use importers::detect::Detected;
use importers::explain::Explanation;
use importers::row::ColumnInfo;
use serde_json::{Value, json};

use super::sheet::{Align, Column, Context, Sheet};
use crate::catalogue::{ImportSummary, SourceRow};

fn context(command: &'static str) -> Context {
    Context {
        command,
        ..Context::default()
    }
}

/// What an import did.
pub fn imported(summary: &ImportSummary, dry_run: bool) -> Sheet {
    let mut object = context("import").object(&[]);
    let refused: Vec<Value> = summary
        .refused
        .iter()
        .map(|r| {
            let place = format!("{}:{}", r.file, r.line);
            json!({"place": place, "column": r.column, "text": r.text, "reason": r.reason})
        })
        .collect();
    let skipped: Vec<Value> = summary
        .skipped
        .iter()
        .map(|(why, n)| json!({"reason": why, "rows": n}))
        .collect();
    for (key, value) in [
        ("source", json!(summary.source)),
        ("dry_run", json!(dry_run)),
        ("unchanged", json!(summary.unchanged)),
        ("read", json!(summary.read)),
        ("kept", json!(summary.kept)),
        ("merged", json!(summary.merged)),
        ("skipped", Value::Array(skipped)),
        ("refused", Value::Array(refused)),
        ("warnings", json!(summary.warnings)),
    ] {
        object.insert(key.into(), value);
    }
    let refused_row = |r: &importers::Refusal| {
        let column = r.column.clone().unwrap_or_default();
        vec![
            format!("{}:{}", r.file, r.line),
            column,
            r.text.clone(),
            r.reason.clone(),
        ]
    };
    Sheet {
        headline: vec![import_words(summary, dry_run)],
        columns: ["place", "column", "text", "refused because"]
            .map(|title| Column::wrapped(title, Align::Left))
            .to_vec(),
        rows: summary.refused.iter().map(refused_row).collect(),
        notes: summary.warnings.clone(),
        object,
        list: "refused",
    }
}

fn import_words(summary: &ImportSummary, dry_run: bool) -> String {
    let key = &summary.source;
    if summary.unchanged {
        return format!("{key}: these very tables are held already; nothing was changed.");
    }
    let skipped: u64 = summary.skipped.iter().map(|(_, n)| n).sum();
    let left_out = if skipped > 0 {
        format!(", {skipped} skipped by rule")
    } else {
        String::new()
    };
    let end = if dry_run {
        " Dry run: nothing was changed."
    } else {
        ""
    };
    format!(
        "{key}: {} rows read, {} kept, {} merged with what was held{left_out}, {} refused.{end}",
        summary.read,
        summary.kept,
        summary.merged,
        summary.refused.len()
    )
}

/// What a `forget` did.
pub fn forgotten(key: &str, reports: u64) -> Sheet {
    let mut object = context("forget").object(&[]);
    object.insert("source".into(), json!(key));
    object.insert("reports".into(), json!(reports));
    Sheet {
        headline: vec![format!("{key}: taken out, {reports} reports.")],
        columns: Vec::new(),
        rows: Vec::new(),
        notes: Vec::new(),
        object,
        list: "forgotten",
    }
}

const SOURCE_COLUMNS: [Column; 7] = [
    Column::whole("key", Align::Left),
    Column::whole("kind", Align::Left),
    Column::whole("species", Align::Right),
    Column::whole("levels", Align::Right),
    Column::whole("lines", Align::Right),
    Column::whole("licence", Align::Left),
    Column::wrapped("citation", Align::Left),
];

/// What is loaded.
pub fn sources(rows: &[SourceRow], path: &str) -> Sheet {
    let mut object = context("sources").object(&[]);
    let list: Vec<Value> = rows
        .iter()
        .map(|r| {
            json!({
                "key": r.key, "title": r.title, "citation": r.citation, "licence": r.licence,
                "kind": r.kind, "bundled": r.bundled, "species": r.species,
                "levels": r.levels, "lines": r.lines, "notes": r.notes,
            })
        })
        .collect();
    object.insert("catalogue".into(), json!(path));
    object.insert("list".into(), Value::Array(list));
    let cells = |r: &SourceRow| {
        vec![
            r.key.clone(),
            r.kind.clone(),
            r.species.to_string(),
            r.levels.to_string(),
            r.lines.to_string(),
            r.licence.clone(),
            r.citation.clone(),
        ]
    };
    let of = |computed: bool| {
        let rows = rows.iter().filter(|r| (r.kind == "computed") == computed);
        rows.map(|r| r.lines).sum::<u64>()
    };
    let made = match of(true) {
        0 => String::new(),
        made => format!(" and {made} computed lines or rates"),
    };
    Sheet {
        headline: vec![format!(
            "{} sources with {} line reports{made} in {path}.",
            rows.len(),
            of(false)
        )],
        columns: SOURCE_COLUMNS.to_vec(),
        rows: rows.iter().map(cells).collect(),
        notes: Vec::new(),
        object,
        list: "list",
    }
}

const EXPLAINED_COLUMNS: [Column; 4] = [
    Column::wrapped("column", Align::Left),
    Column::wrapped("unit", Align::Left),
    Column::wrapped("kind of quantity", Align::Left),
    Column::wrapped("taken for", Align::Left),
];

/// What a file is, and a mapping to edit.
pub fn explained(name: &str, explanation: &Explanation) -> Sheet {
    let mut object = context("import").object(&explanation.notes);
    let list: Vec<Value> = explanation
        .columns
        .iter()
        .map(
            |(c, target)| json!({"column": c.name, "unit": c.unit, "ucd": c.ucd, "target": target}),
        )
        .collect();
    object.insert("columns".into(), Value::Array(list));
    if !explanation.mapping.is_empty() {
        object.insert("mapping".into(), json!(explanation.mapping));
    }
    let cells = |(column, target): &(ColumnInfo, Option<&'static str>)| {
        let or_dash = |text: &Option<String>| text.clone().unwrap_or_else(|| "–".into());
        let target = target.unwrap_or("not used").to_owned();
        vec![
            column.name.clone(),
            or_dash(&column.unit),
            or_dash(&column.ucd),
            target,
        ]
    };
    let what = match explanation.detected {
        Detected::Table(format) => format!("{format:?}").to_lowercase(),
        other => format!("{other:?}").to_lowercase(),
    };
    let count = explanation.columns.len();
    Sheet {
        headline: vec![format!("{name}: {what}, {count} columns.")],
        columns: EXPLAINED_COLUMNS.to_vec(),
        rows: explanation.columns.iter().map(cells).collect(),
        notes: explanation.notes.clone(),
        object,
        list: "columns",
    }
}
