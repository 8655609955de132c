//! How much a reader takes from a file it does not trust.

/// Limits on what a file may ask for; all of them can be raised by the caller.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Longest cell, bytes (1 MiB).
    pub cell_bytes: usize,
    /// Longest row, bytes (16 MiB).
    pub row_bytes: usize,
    /// Most columns of a table (4096).
    pub columns: usize,
    /// Longest header or description, bytes (64 MiB).
    pub header_bytes: usize,
    /// Deepest nesting of elements (256).
    pub nesting: usize,
    /// Most bytes of a file after unpacking (2 GiB); only packed files are bound by it.
    pub unpacked_bytes: u64,
    /// Highest ratio of unpacked to packed bytes (200).
    pub unpack_ratio: u64,
    /// Most distinct identifiers kept for links inside one file (4 million).
    pub links: usize,
}

impl Default for Limits {
    fn default() -> Self {
        Self {
            cell_bytes: 1 << 20,
            row_bytes: 16 << 20,
            columns: 4096,
            header_bytes: 64 << 20,
            nesting: 256,
            unpacked_bytes: 2 << 30,
            unpack_ratio: 200,
            links: 4_000_000,
        }
    }
}

/// Names of the limits, as a user writes them.
pub const NAMES: [&str; 8] = [
    "cell-bytes",
    "row-bytes",
    "columns",
    "header-bytes",
    "nesting",
    "unpacked-bytes",
    "unpack-ratio",
    "links",
];

impl Limits {
    /// Sets a limit by a text such as `cell-bytes=4MiB` or `columns=10000`.
    ///
    /// # Errors
    /// A sentence that says what was expected.
    pub fn set(&mut self, text: &str) -> Result<(), String> {
        let (name, number) = text.split_once('=').ok_or_else(|| {
            format!("`{text}` is no limit; write NAME=NUMBER, such as cell-bytes=4MiB")
        })?;
        let value = number_of(number.trim()).ok_or_else(|| {
            format!("`{number}` is no whole number above zero, such as 500 or 4MiB")
        })?;
        let size = usize::try_from(value).unwrap_or(usize::MAX);
        match name.trim() {
            "cell-bytes" => self.cell_bytes = size,
            "row-bytes" => self.row_bytes = size,
            "columns" => self.columns = size,
            "header-bytes" => self.header_bytes = size,
            "nesting" => self.nesting = size,
            "unpacked-bytes" => self.unpacked_bytes = value,
            "unpack-ratio" => self.unpack_ratio = value,
            "links" => self.links = size,
            other => {
                let known = NAMES.join(", ");
                return Err(format!("no limit is called `{other}`; there are {known}"));
            }
        }
        Ok(())
    }
}

fn number_of(text: &str) -> Option<u64> {
    let units = [("KiB", 1 << 10), ("MiB", 1 << 20), ("GiB", 1 << 30)];
    let found = units
        .iter()
        .find_map(|(unit, factor)| Some((text.strip_suffix(unit)?, *factor)));
    let (digits, factor) = found.unwrap_or((text, 1));
    let value: u64 = digits.trim().parse().ok()?;
    value.checked_mul(factor).filter(|value| *value > 0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_limit_is_set_by_its_name() {
        let mut limits = Limits::default();
        for name in NAMES {
            let before = limits.clone();
            limits.set(&format!("{name}=7KiB")).unwrap();
            assert_ne!(limits, before, "{name}");
        }
        assert_eq!(limits.cell_bytes, 7168);
        for text in [
            "x=1",
            "columns",
            "columns=0",
            "columns=-1",
            "columns=1.5",
            "links=99999999999GiB",
        ] {
            assert!(limits.set(text).is_err(), "{text}");
        }
    }
}
