//! Reads the table files of `groups/` and of a user's folder.
//!
//! A table is CSV in three parts: a head of `# key: value` lines (at least
//! `title`, `source`, `transcribed` and `checked`; `source` may repeat), a row
//! of column names, a row of units (`-` where a column has none), then data.
//! This room knows cells and places, not what the numbers mean: rooms that own
//! a table ask for typed cells and get errors with file, line and column.

mod error;
mod text;

pub use error::TableError;
pub use text::{Column, Row, Table};
