//! How the program ends.

use std::process::ExitCode;

/// Exit codes, as documented in the README.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[repr(u8)]
pub(super) enum Exit {
    /// Done.
    Done = 0,
    /// Done, but nothing qualified or no row could be answered.
    Nothing = 1,
    /// Brief, arguments or tables are wrong.
    Wrong = 2,
    /// The run failed.
    Failed = 3,
    /// Stopped; what is there is marked unfinished.
    Stopped = 4,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit as u8)
    }
}
