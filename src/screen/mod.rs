//! Screening: a pool of candidates streamed through `evaluate`.
//!
//! Lines are read in batches, evaluated on all cores, and written down in the
//! order of the pool; memory does not grow with its length. Entry points:
//! [`Pool::open`], [`Screening::run`].

mod identity;
mod ledger;
mod measured_column;
mod pool;
mod resolved;
mod screening;
mod sorter;
mod stoppable;
#[cfg(test)]
pub(crate) mod uncertain_runs;

pub use measured_column::ColumnFault;
pub use pool::{Batch, Columns, LineFault, Pool, PoolError, PoolLine, Stated};
pub use resolved::{Resolved, Unresolved};
pub use screening::{FILES, ScreenError, Screened, Screening};
pub use stoppable::StoppableReader;
