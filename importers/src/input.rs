//! From the bytes of a file to UTF-8 text: encodings are declared, never guessed, and what does
//! not decode is an error.

use std::io::{self, Read};

use encoding_rs::{Decoder, DecoderResult, Encoding, UTF_8};

/// Finds an encoding by its WHATWG label; `None` where it is plain UTF-8.
///
/// # Errors
/// The label, where there is no such encoding.
pub fn encoding(label: Option<&str>) -> Result<Option<&'static Encoding>, String> {
    let Some(label) = label else {
        return Ok(None);
    };
    let found = Encoding::for_label(label.as_bytes()).ok_or_else(|| label.to_owned())?;
    Ok((found != UTF_8).then_some(found))
}

/// Turns text in a declared encoding into UTF-8.
pub struct Decoded<R> {
    input: R,
    decoder: Decoder,
    name: &'static str,
    raw: Box<[u8]>,
    raw_at: usize,
    raw_filled: usize,
    ready: Box<[u8]>,
    ready_at: usize,
    ready_filled: usize,
    ended: bool,
}

const BLOCK: usize = 16 * 1024;

impl<R: Read> Decoded<R> {
    /// Decodes `input`, without regard to a byte order mark of another encoding.
    pub fn new(input: R, encoding: &'static Encoding) -> Self {
        Self {
            input,
            decoder: encoding.new_decoder_with_bom_removal(),
            name: encoding.name(),
            raw: vec![0; BLOCK].into_boxed_slice(),
            raw_at: 0,
            raw_filled: 0,
            ready: vec![0; 4 * BLOCK].into_boxed_slice(),
            ready_at: 0,
            ready_filled: 0,
            ended: false,
        }
    }

    fn decode_block(&mut self) -> io::Result<()> {
        if self.raw_at == self.raw_filled && !self.ended {
            self.raw_at = 0;
            self.raw_filled = self.input.read(&mut self.raw)?;
            self.ended = self.raw_filled == 0;
        }
        let source = &self.raw[self.raw_at..self.raw_filled];
        let (result, read, written) =
            self.decoder
                .decode_to_utf8_without_replacement(source, &mut self.ready, self.ended);
        self.raw_at += read;
        self.ready_at = 0;
        self.ready_filled = written;
        match result {
            DecoderResult::Malformed(..) => Err(io::Error::new(
                io::ErrorKind::InvalidData,
                format!("bytes that are no text in {}", self.name),
            )),
            DecoderResult::InputEmpty | DecoderResult::OutputFull => Ok(()),
        }
    }
}

impl<R: Read> Read for Decoded<R> {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        while self.ready_at == self.ready_filled {
            if self.ended && self.raw_at == self.raw_filled && self.ready_filled == 0 {
                return Ok(0);
            }
            let was_ended = self.ended;
            self.decode_block()?;
            if was_ended && self.ready_filled == 0 {
                return Ok(0);
            }
        }
        let count = out.len().min(self.ready_filled - self.ready_at);
        out[..count].copy_from_slice(&self.ready[self.ready_at..self.ready_at + count]);
        self.ready_at += count;
        Ok(count)
    }
}
