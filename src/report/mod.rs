//! Writing finished rows: CSV and JSON for programs, aligned text for people.
//!
//! This room computes no property and opens no file: rows come in finished and
//! bytes go out, into a reused `Vec<u8>` where a run writes many of them. SI
//! values are converted to the shown unit here and nowhere else. Entry points:
//! the row types ([`BreakdownRow`], [`PropertyRow`], [`MixtureRow`],
//! [`RankedTable`], [`NotRankedRow`]), [`TextTable`] and [`outcome_text`].

mod breakdown;
mod csv_line;
mod family;
mod json;
mod mixture;
mod probability;
mod property;
mod ranking;
mod stream;
mod summary;
mod text_table;

pub use breakdown::{BreakdownRow, BreakdownStatus, breakdown_text};
pub use csv_line::{CsvLine, CsvRow};
pub use family::{FamilyRow, family_text, with_summary};
pub use mixture::{MixtureRow, MixtureStatus, mixture_text};
pub use probability::{missed_in_words, probability_in_words, ranks_in_words};
pub use property::{PropertyRow, property_text};
pub use ranking::{FigureColumn, NotRankedRow, RankedRow, RankedTable, Uncertainty};
pub use stream::{RowForm, RowStream, write_rows};
pub use summary::{TargetLabel, outcome_text};
pub use text_table::{TextColumn, TextTable};
