//! What a run tells while it goes.

use std::path::Path;

use super::record::{Counts, Ending};

/// Something a listener may want to show or log.
#[derive(Clone, Copy, Debug, PartialEq)]
#[non_exhaustive]
pub enum Event<'a> {
    /// Work begins.
    Started {
        /// What is worked through: `lines`, `assemblies`.
        unit: &'static str,
        /// Bytes of input, where they are known beforehand: what progress is measured in.
        input_bytes: Option<u64>,
        /// Threads at work.
        threads: usize,
    },
    /// Some work is done. Sent at intervals, not for every line; a listener
    /// that wants a rate or a time left takes it from two of these and its own clock.
    Progress {
        /// Lines (or assemblies) finished.
        done: u64,
        /// Bytes of input taken in so far, before decompression.
        input_bytes: u64,
        /// Candidates that qualified so far.
        qualified: u64,
        /// The best score so far, where it is known before the end.
        best: Option<f64>,
    },
    /// Something a person should know; the run goes on.
    Warning {
        /// In one sentence.
        text: &'a str,
    },
    /// A file was put into place.
    Wrote {
        /// Its path.
        path: &'a Path,
    },
    /// Work is over.
    Finished {
        /// Why it ended.
        ending: Ending,
        /// How the candidates came out.
        counts: &'a Counts,
    },
}

/// Hears the events of a run, from any thread.
pub trait Listener: Sync {
    /// Called for each event; has to return soon.
    fn hear(&self, event: Event<'_>);
}

/// Hears nothing.
#[derive(Clone, Copy, Debug, Default)]
pub struct Quiet;

impl Listener for Quiet {
    fn hear(&self, _event: Event<'_>) {}
}

impl<F: Fn(Event<'_>) + Sync> Listener for F {
    fn hear(&self, event: Event<'_>) {
        self(event);
    }
}
