//! Rows as CSV: one column per JSON key, inner objects flattened with `_`, missing is empty.

use std::io::{self, Write};

use serde_json::{Map, Value};

use super::sheet::Sheet;

pub(super) fn write(sheet: &Sheet, out: &mut dyn Write) -> io::Result<()> {
    let rows: Vec<Vec<(String, String)>> = sheet
        .list()
        .iter()
        .filter_map(Value::as_object)
        .map(|object| {
            let mut cells = Vec::new();
            flatten("", object, &mut cells);
            cells
        })
        .collect();
    let mut header: Vec<&str> = Vec::new();
    for (key, _) in rows.iter().flatten() {
        if !header.contains(&key.as_str()) {
            header.push(key);
        }
    }
    // Where an inner object is missing in one row and there in another, its own key falls away.
    let headed: Vec<&str> = header
        .iter()
        .copied()
        .filter(|key| {
            !header
                .iter()
                .any(|k| k.starts_with(&format!("{key}_")) && is_gap(&rows, key))
        })
        .collect();
    let mut writer = ::csv::Writer::from_writer(out);
    if !headed.is_empty() {
        writer.write_record(&headed)?;
    }
    for row in &rows {
        let cell = |key: &&str| {
            row.iter()
                .find(|(k, _)| k == key)
                .map_or("", |(_, v)| v.as_str())
        };
        writer.write_record(headed.iter().map(cell))?;
    }
    writer.flush()
}

/// A key that is empty wherever it stands.
fn is_gap(rows: &[Vec<(String, String)>], key: &str) -> bool {
    rows.iter()
        .flatten()
        .filter(|(k, _)| k == key)
        .all(|(_, value)| value.is_empty())
}

fn flatten(prefix: &str, object: &Map<String, Value>, cells: &mut Vec<(String, String)>) {
    for (key, value) in object {
        let key = if prefix.is_empty() {
            key.clone()
        } else {
            format!("{prefix}_{key}")
        };
        match value {
            Value::Object(inner) => flatten(&key, inner, cells),
            Value::Array(list) => {
                let parts: Vec<String> = list.iter().map(plain).collect();
                cells.push((key, parts.join(";")));
            }
            other => cells.push((key, plain(other))),
        }
    }
}

fn plain(value: &Value) -> String {
    match value {
        Value::Null => String::new(),
        Value::String(text) => text.clone(),
        other => other.to_string(),
    }
}
