//! What a command leaves behind: results, messages, an exit status.

use std::io::{self, Write};
use std::process::ExitCode;

/// How a command ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Default)]
pub enum Status {
    /// Done.
    #[default]
    Done,
    /// The section was understood and cannot be answered, or a check that was asked for failed.
    Unanswered,
    /// The file or the command line is wrong.
    Wrong,
    /// Answered, with an error above the tolerance asked for.
    Inexact,
}

impl Status {
    /// The number the program exits with.
    pub fn code(self) -> u8 {
        match self {
            Self::Done => 0,
            Self::Unanswered => 1,
            Self::Wrong => 2,
            Self::Inexact => 3,
        }
    }
}

/// The end of a command. Commands return it and print nothing, so that a test can call them.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Outcome {
    /// For standard output.
    pub results: String,
    /// For standard error.
    pub messages: String,
    /// The exit status.
    pub status: Status,
}

impl Outcome {
    /// Done, with results.
    pub fn done(results: impl Into<String>) -> Self {
        Self { results: results.into(), ..Self::default() }
    }

    /// Not done, with messages.
    pub fn failed(status: Status, messages: impl Into<String>) -> Self {
        Self { messages: messages.into(), status, ..Self::default() }
    }

    /// Writes results and messages, and turns the status into the program's.
    ///
    /// A reader that closes the pipe has what it wants: that is no error.
    pub fn deliver(&self) -> ExitCode {
        let written = write_all(&mut io::stderr().lock(), &self.messages)
            .and_then(|()| write_all(&mut io::stdout().lock(), &self.results));
        match written {
            Err(e) if e.kind() != io::ErrorKind::BrokenPipe => {
                // Nobody is left to tell if this fails too.
                let _ = writeln!(io::stderr(), "error: the results cannot be written: {e}");
                ExitCode::from(Status::Wrong.code())
            }
            _ => ExitCode::from(self.status.code()),
        }
    }
}

fn write_all(to: &mut dyn Write, text: &str) -> io::Result<()> {
    to.write_all(text.as_bytes())?;
    to.flush()
}
