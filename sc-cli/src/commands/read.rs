//! The text of a section file, and the rendering of what is wrong with it.

use crate::input::{Fault, render_faults};
use crate::outcome::{Outcome, Status};
use crate::section::Objection;
use std::fs;
use std::io::{self, IsTerminal, Read};
use std::path::Path;

/// A section file larger than this is taken for something else.
const MAX_BYTES: u64 = 64 << 20;

/// Name for messages and text of a file; `-` is standard input.
///
/// # Errors
/// The outcome to end with if it cannot be read or is not UTF-8.
pub fn source(path: &Path) -> Result<(String, String), Outcome> {
    let is_stdin = path.as_os_str() == "-";
    let name = if is_stdin { "standard input".to_owned() } else { path.display().to_string() };
    let wrong = |why: String| Outcome::failed(Status::Wrong, format!("error: {name} {why}\n"));
    let read = if is_stdin { limited(io::stdin().lock()) } else { fs::File::open(path).and_then(limited) };
    let bytes = read.map_err(|e| wrong(format!("cannot be read: {e}")))?;
    if bytes.len() as u64 > MAX_BYTES {
        return Err(wrong("is no section file: it is larger than 64 MB".to_owned()));
    }
    match String::from_utf8(bytes) {
        Ok(text) => Ok((name, text)),
        Err(e) => {
            let at = e.utf8_error().valid_up_to();
            let line = e.as_bytes()[..at].iter().filter(|&&b| b == b'\n').count() + 1;
            Err(wrong(format!("is not UTF-8 text: line {line} holds other bytes")))
        }
    }
}

fn limited(from: impl Read) -> io::Result<Vec<u8>> {
    let mut bytes = Vec::new();
    from.take(MAX_BYTES + 1).read_to_end(&mut bytes)?;
    Ok(bytes)
}

/// The end of a command whose section file has faults.
pub fn refused(name: &str, text: &str, faults: &[Fault<Objection>]) -> Outcome {
    let messages = render_faults(name, text, faults, colour());
    let status = faults.iter().map(|f| f.kind.status()).max().unwrap_or(Status::Wrong);
    Outcome::failed(status, messages)
}

/// Whether messages are in colour: on a terminal, unless `NO_COLOR` is set.
pub(crate) fn colour() -> bool {
    io::stderr().is_terminal() && std::env::var_os("NO_COLOR").is_none_or(|v| v.is_empty())
}
