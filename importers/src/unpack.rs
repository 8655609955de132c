//! One layer of gzip, recognised by its first bytes and bound in size.

use std::cell::Cell;
use std::io::{self, Read};
use std::rc::Rc;

use flate2::read::MultiGzDecoder;

use crate::limits::Limits;

/// Unpacks a gzip file; passes anything else through.
///
/// # Errors
/// A failing input.
pub fn unpack(mut input: Box<dyn Read>, limits: &Limits) -> io::Result<Box<dyn Read>> {
    let mut head = Vec::with_capacity(2);
    input.by_ref().take(2).read_to_end(&mut head)?;
    let packed = head == [0x1f, 0x8b];
    let whole = io::Cursor::new(head).chain(input);
    if !packed {
        return Ok(Box::new(whole));
    }
    let taken = Rc::new(Cell::new(0));
    let counted = Counted {
        input: whole,
        taken: Rc::clone(&taken),
    };
    Ok(Box::new(Bounded {
        input: MultiGzDecoder::new(counted),
        taken,
        given: 0,
        limits: limits.clone(),
    }))
}

struct Counted<R> {
    input: R,
    taken: Rc<Cell<u64>>,
}

impl<R: Read> Read for Counted<R> {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        let count = self.input.read(out)?;
        self.taken.set(self.taken.get() + count as u64);
        Ok(count)
    }
}

struct Bounded<R> {
    input: R,
    taken: Rc<Cell<u64>>,
    given: u64,
    limits: Limits,
}

/// Small files may unpack to this much whatever the ratio.
const FREE_BYTES: u64 = 1 << 20;

impl<R: Read> Read for Bounded<R> {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        let count = self.input.read(out)?;
        self.given += count as u64;
        if self.given > self.limits.unpacked_bytes {
            return Err(refusal(format!(
                "the file unpacks to more than the limit of {} bytes",
                self.limits.unpacked_bytes
            )));
        }
        let ratio = self.limits.unpack_ratio;
        if self.given > FREE_BYTES && self.given > ratio.saturating_mul(self.taken.get()) {
            return Err(refusal(format!(
                "the file unpacks to more than {ratio} times its size"
            )));
        }
        Ok(count)
    }
}

fn refusal(message: String) -> io::Error {
    io::Error::new(io::ErrorKind::InvalidData, message)
}

#[cfg(test)]
mod tests {
    use super::*;
    use flate2::Compression;
    use flate2::write::GzEncoder;
    use std::io::Write;

    fn packed(bytes: &[u8]) -> Vec<u8> {
        let mut encoder = GzEncoder::new(Vec::new(), Compression::best());
        encoder.write_all(bytes).unwrap();
        encoder.finish().unwrap()
    }

    fn unpacked(bytes: Vec<u8>) -> io::Result<Vec<u8>> {
        let mut out = Vec::new();
        unpack(Box::new(io::Cursor::new(bytes)), &Limits::default())?.read_to_end(&mut out)?;
        Ok(out)
    }

    #[test]
    fn packed_and_plain_files_read_alike() {
        assert_eq!(unpacked(b"abc".to_vec()).unwrap(), b"abc");
        assert_eq!(unpacked(packed(b"abc")).unwrap(), b"abc");
        let two = [packed(b"abc"), packed(b"def")].concat();
        assert_eq!(unpacked(two).unwrap(), b"abcdef");
        assert_eq!(unpacked(vec![0x1f]).unwrap(), [0x1f]);
    }

    #[test]
    fn bombs_and_damaged_files_are_errors() {
        let bomb = packed(&vec![0; 50 << 20]);
        assert!(
            unpacked(bomb)
                .unwrap_err()
                .to_string()
                .contains("200 times")
        );
        let mut broken = packed(b"some text that is long enough");
        let end = broken.len() - 6;
        broken[end] ^= 1;
        assert!(unpacked(broken).is_err());
        let mut short = packed(b"some text that is long enough");
        short.truncate(20);
        assert!(unpacked(short).is_err());
    }
}
