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
