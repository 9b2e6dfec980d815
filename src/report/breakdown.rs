//! Rows of the breakdown look-up.

use serde::Serialize;

use super::csv_line::{CsvLine, CsvRow};
use super::text_table::{TextColumn, TextTable};

/// How far a breakdown got.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum BreakdownStatus {
    /// Every atom is in a group.
    Complete,
    /// Some atoms are in no group of the set.
    Partial,
    /// The line is no molecule.
    Unreadable,
}

impl BreakdownStatus {
    /// The word of the `status` column.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Complete => "complete",
            Self::Partial => "partial",
            Self::Unreadable => "unreadable",
        }
    }
}

/// One molecule in one set.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct BreakdownRow<'a> {
    /// Line of the input, or position of the argument, from 1.
    pub line: u64,
    /// Name as given; may be empty.
    pub name: &'a str,
    /// SMILES; may be empty where the line is unreadable.
    pub smiles: &'a str,
    /// Identifier of the set.
    pub set: &'a str,
    /// How far it got.
    pub status: BreakdownStatus,
    /// `number:count` joined by `;`, ascending.
    pub groups: &'a str,
    /// What is not covered, or why the line is unreadable.
    pub detail: &'a str,
}

impl CsvRow for BreakdownRow<'_> {
    const HEAD: &'static str = "line,name,smiles,set,status,groups,detail";

    fn write_csv(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        line.integer(self.line)
            .text(self.name)
            .text(self.smiles)
            .text(self.set)
            .text(self.status.id())
            .text(self.groups)
            .text(self.detail);
        line.end();
    }
}

impl<R: CsvRow> CsvRow for &R {
    const HEAD: &'static str = R::HEAD;

    fn write_csv(&self, out: &mut Vec<u8>) {
        (*self).write_csv(out);
    }
}

/// Breakdowns for people. `readable` gives the groups of a row in formulas
/// (`2 CH3, 1 OH`), since numbers say little to a reader.
pub fn breakdown_text<'a>(
    rows: impl IntoIterator<Item = (BreakdownRow<'a>, &'a str)>,
    width: Option<usize>,
) -> String {
    let mut table = TextTable::new([
        TextColumn::text("molecule"),
        TextColumn::text("set"),
        TextColumn::text("status"),
        TextColumn::text("groups"),
        TextColumn::text("detail"),
    ]);
    let mut last = None;
    for (row, readable) in rows {
        // A molecule is named once, on the first of its rows.
        // Arguments and lines of a file are both counted from 1.
        let this = (row.line, row.name, row.smiles);
        let molecule = match last.replace(this) {
            Some(known) if known == this => "",
            _ if row.name.is_empty() => row.smiles,
            _ => row.name,
        };
        table.add([
            molecule.into(),
            row.set.into(),
            row.status.id().into(),
            readable.into(),
            row.detail.into(),
        ]);
    }
    table.render(width)
}
