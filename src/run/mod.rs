//! A long run as such: asking it to stop, hearing what it does, writing its
//! files whole or not at all, and the record it leaves.
//!
//! This room knows no chemistry and no terminal. The stop flag is raised by
//! whoever hears the signal; events go to whoever listens; nothing is printed.
//! Entry points: [`StopFlag`], [`Listener`], [`NewFile`], [`RunRecord`].

mod error;
mod event;
mod file;
mod fingerprint;
mod record;
mod stop;

pub use error::FileError;
pub use event::{Event, Listener, Quiet};
pub use file::{NewFile, make_folder, remove_stale, write_whole};
pub use fingerprint::Fingerprint;
pub use record::{
    AssemblyRecord, BriefRecord, Counts, Ending, InputRecord, MeasurementRecord, Outcome,
    RECORD_FORMAT, RankingRecord, RunRecord, TablesRecord, Timing,
};
pub use stop::StopFlag;
