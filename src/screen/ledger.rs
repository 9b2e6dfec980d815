//! What was found out about each line, kept until the whole pool is read.
//!
//! Whether a line is a duplicate, and whether it is kept in the ranking, shows
//! only at the end; until then its record waits in a temporary file beside the
//! results (in memory while the pool is small).

use std::io::{self, BufReader, BufWriter, Read, Seek, SeekFrom, Write};
use std::path::Path;

use tempfile::SpooledTempFile;

use crate::quantity::Dimension;
use crate::run::Outcome;

/// Bytes of records that stay in memory.
const MEMORY: usize = 16 << 20;

/// A line of the pool with what came of it.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Entry {
    pub(super) line: u64,
    pub(super) name: String,
    pub(super) smiles: String,
    pub(super) finding: Finding,
    pub(super) carried: Vec<String>,
}

/// What came of a line before duplicates and the cut of the ranking are known.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Finding {
    /// Every must is met.
    Qualified {
        score: f64,
        known: f64,
        variance: f64,
        probability: f64,
        /// Canonical SMILES: decides between equal scores.
        key: String,
        /// Empty where it waits until the ranking is known.
        shown: Shown,
    },
    /// It fell, or could not be judged or read.
    Fell {
        outcome: Outcome,
        /// What it is counted under.
        label: String,
        value: Option<(f64, Dimension)>,
        wanted: String,
        reason: String,
    },
}

/// What a row of the ranking shows of a candidate.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Shown {
    pub(super) figures: Vec<Option<f64>>,
    /// Those there are, by the position of their figure.
    pub(super) intervals: Vec<(u32, (f64, f64))>,
    pub(super) notes: String,
}

impl Default for Finding {
    fn default() -> Self {
        Self::Fell {
            outcome: Outcome::Refused,
            label: String::new(),
            value: None,
            wanted: String::new(),
            reason: String::new(),
        }
    }
}

impl Entry {
    /// Appends the record, length first.
    pub(super) fn write(&self, out: &mut Vec<u8>) {
        let start = out.len();
        out.extend_from_slice(&[0; 4]);
        out.extend_from_slice(&self.line.to_le_bytes());
        put_text(out, &self.name);
        put_text(out, &self.smiles);
        match &self.finding {
            Finding::Qualified {
                score,
                known,
                variance,
                probability,
                key,
                shown,
            } => {
                out.push(u8::MAX);
                for number in [score, known, variance, probability] {
                    out.extend_from_slice(&number.to_le_bytes());
                }
                put_text(out, key);
                put_length(out, shown.figures.len());
                for figure in &shown.figures {
                    put_number(out, *figure);
                }
                put_length(out, shown.intervals.len());
                for (figure, (low, high)) in &shown.intervals {
                    out.extend_from_slice(&figure.to_le_bytes());
                    out.extend_from_slice(&low.to_le_bytes());
                    out.extend_from_slice(&high.to_le_bytes());
                }
                put_text(out, &shown.notes);
            }
            Finding::Fell {
                outcome,
                label,
                value,
                wanted,
                reason,
            } => {
                out.push(*outcome as u8);
                put_text(out, label);
                put_number(out, value.map(|(value, _)| value));
                let dimension = value.map_or(Dimension::Number, |(_, dimension)| dimension);
                let position = Dimension::ALL.iter().position(|&known| known == dimension);
                out.push(position.expect("every dimension is listed") as u8);
                put_text(out, wanted);
                put_text(out, reason);
            }
        }
        put_length(out, self.carried.len());
        for cell in &self.carried {
            put_text(out, cell);
        }
        let length = u32::try_from(out.len() - start - 4).expect("a line has a size limit");
        out[start..start + 4].copy_from_slice(&length.to_le_bytes());
    }

    fn read(bytes: &[u8]) -> Self {
        let mut cursor = Cursor(bytes);
        let line = u64::from_le_bytes(cursor.array());
        let name = cursor.text();
        let smiles = cursor.text();
        let tag = cursor.array::<1>()[0];
        let finding = if tag == u8::MAX {
            Finding::Qualified {
                score: cursor.float(),
                known: cursor.float(),
                variance: cursor.float(),
                probability: cursor.float(),
                key: cursor.text(),
                shown: Shown {
                    figures: (0..cursor.length()).map(|_| cursor.number()).collect(),
                    intervals: (0..cursor.length())
                        .map(|_| {
                            let figure = u32::from_le_bytes(cursor.array());
                            (figure, (cursor.float(), cursor.float()))
                        })
                        .collect(),
                    notes: cursor.text(),
                },
            }
        } else {
            let label = cursor.text();
            let value = cursor.number();
            let dimension = Dimension::ALL[usize::from(cursor.array::<1>()[0])];
            Finding::Fell {
                outcome: Outcome::ALL[usize::from(tag)],
                label,
                value: value.map(|value| (value, dimension)),
                wanted: cursor.text(),
                reason: cursor.text(),
            }
        };
        let carried = (0..cursor.length()).map(|_| cursor.text()).collect();
        Self {
            line,
            name,
            smiles,
            finding,
            carried,
        }
    }
}

fn put_length(out: &mut Vec<u8>, length: usize) {
    let length = u32::try_from(length).expect("a line has a size limit");
    out.extend_from_slice(&length.to_le_bytes());
}

fn put_text(out: &mut Vec<u8>, text: &str) {
    put_length(out, text.len());
    out.extend_from_slice(text.as_bytes());
}

/// A number or its absence; NaN never leaves a room, so it can stand for none here.
fn put_number(out: &mut Vec<u8>, value: Option<f64>) {
    out.extend_from_slice(&value.unwrap_or(f64::NAN).to_le_bytes());
}

struct Cursor<'a>(&'a [u8]);

impl Cursor<'_> {
    fn array<const N: usize>(&mut self) -> [u8; N] {
        let (head, rest) = self.0.split_at(N);
        self.0 = rest;
        head.try_into().expect("just split off")
    }

    fn length(&mut self) -> usize {
        u32::from_le_bytes(self.array()) as usize
    }

    fn text(&mut self) -> String {
        let length = self.length();
        let (head, rest) = self.0.split_at(length);
        self.0 = rest;
        String::from_utf8(head.to_vec()).expect("written from text")
    }

    fn float(&mut self) -> f64 {
        f64::from_le_bytes(self.array())
    }

    fn number(&mut self) -> Option<f64> {
        Some(self.float()).filter(|value| !value.is_nan())
    }
}

/// Records in the order of the lines.
pub(super) struct Ledger {
    file: BufWriter<SpooledTempFile>,
}

impl Ledger {
    /// An empty ledger that goes to a temporary file in `folder` when it grows.
    pub(super) fn new(folder: &Path) -> Self {
        let file = tempfile::spooled_tempfile_in(MEMORY, folder);
        Self {
            file: BufWriter::with_capacity(1 << 16, file),
        }
    }

    /// Appends records as [`Entry::write`] made them.
    pub(super) fn add(&mut self, records: &[u8]) -> io::Result<()> {
        self.file.write_all(records)
    }

    /// Ends writing.
    pub(super) fn finish(self) -> io::Result<WrittenLedger> {
        let file = self
            .file
            .into_inner()
            .map_err(io::IntoInnerError::into_error)?;
        Ok(WrittenLedger {
            file: BufReader::with_capacity(1 << 16, file),
        })
    }
}

/// A ledger that is read, as often as wanted.
pub(super) struct WrittenLedger {
    file: BufReader<SpooledTempFile>,
}

impl WrittenLedger {
    /// Calls `each` with every entry, in order.
    pub(super) fn for_each(
        &mut self,
        mut each: impl FnMut(Entry) -> io::Result<()>,
    ) -> io::Result<()> {
        self.file.seek(SeekFrom::Start(0))?;
        let mut bytes = Vec::new();
        loop {
            let mut length = [0; 4];
            match self.file.read_exact(&mut length) {
                Ok(()) => {}
                Err(error) if error.kind() == io::ErrorKind::UnexpectedEof => return Ok(()),
                Err(error) => return Err(error),
            }
            bytes.resize(u32::from_le_bytes(length) as usize, 0);
            self.file.read_exact(&mut bytes)?;
            each(Entry::read(&bytes))?;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn entries_come_back_as_they_went() {
        let entries = [
            Entry {
                line: 2,
                name: "a".into(),
                smiles: "CCO".into(),
                finding: Finding::Qualified {
                    score: 0.25,
                    known: 0.5,
                    variance: 0.01,
                    probability: 0.75,
                    key: "CCO".into(),
                    shown: Shown {
                        figures: vec![Some(351.4), None],
                        intervals: vec![(0, (340.0, 360.0))],
                        notes: "n".into(),
                    },
                },
                carried: vec!["x".into(), String::new()],
            },
            Entry {
                line: 3,
                finding: Finding::Fell {
                    outcome: Outcome::NotQualified,
                    label: "boiling_point".into(),
                    value: Some((300.0, Dimension::Temperature)),
                    wanted: "at least 390 K".into(),
                    reason: String::new(),
                },
                ..Entry::default()
            },
        ];
        let folder = tempfile::tempdir().unwrap();
        let mut ledger = Ledger::new(folder.path());
        for entry in &entries {
            let mut bytes = Vec::new();
            entry.write(&mut bytes);
            ledger.add(&bytes).unwrap();
        }
        let mut written = ledger.finish().unwrap();
        for _ in 0..2 {
            let mut read = Vec::new();
            written
                .for_each(|entry| {
                    read.push(entry);
                    Ok(())
                })
                .unwrap();
            assert_eq!(read, entries);
        }
    }
}
