//! Screening: a pool of candidates streamed through `evaluate`.

mod identity;
mod pool;
mod sorter;

pub use pool::{Batch, LineFault, Pool, PoolError, PoolLine};
