//! Screening: a pool of candidates streamed through `evaluate`.

mod pool;

pub use pool::{Batch, LineFault, Pool, PoolError, PoolLine};
