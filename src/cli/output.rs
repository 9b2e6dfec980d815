//! Standard output and standard error.

use std::io::{self, BufWriter, StdoutLock, Write};

/// Standard output, buffered.
pub(super) fn stdout() -> BufWriter<StdoutLock<'static>> {
    BufWriter::new(io::stdout().lock())
}

/// Cells of a line of the terminal; `None` where output goes elsewhere, so
/// that nothing is shortened in files.
pub(super) fn width() -> Option<usize> {
    let (columns, _) = terminal_size::terminal_size_of(io::stdout())?;
    Some(usize::from(columns.0))
}

/// Says what is wrong. Nothing can be done where that fails too.
pub(super) fn complain(text: &str) {
    let _ = writeln!(io::stderr(), "groupsmith: {text}");
}

/// Notes and warnings, unless they were not wanted.
#[derive(Clone, Copy, Debug)]
pub(super) struct Notes {
    quiet: bool,
}

impl Notes {
    pub(super) fn new(quiet: bool) -> Self {
        Self { quiet }
    }

    /// Whether nothing is to be said.
    pub(super) fn are_quiet(self) -> bool {
        self.quiet
    }

    /// Says something that is no result.
    pub(super) fn say(self, text: &str) {
        if !self.quiet {
            let _ = writeln!(io::stderr(), "{text}");
        }
    }
}
