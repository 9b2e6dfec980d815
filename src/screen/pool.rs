//! Candidate lists: CSV with a header, or `SMILES name` lines, plain or gzip.
//!
//! A pool is read in batches of lines; a line that cannot be used is handed on
//! as such and never ends the run. Blank lines are skipped and not counted.

use std::collections::VecDeque;
use std::fs::File;
use std::io::{self, BufRead, BufReader, Read};
use std::ops::Range;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

use flate2::bufread::MultiGzDecoder;
use thiserror::Error;

use super::measured_column::{ColumnFault, MeasuredColumn, MeasuredHeads};
use crate::quantity::{Estimate, Property};

/// Longest physical line that is looked at, in bytes; the SMILES in it has a
/// limit of its own.
const LINE_LIMIT: usize = 64 * 1024;
/// Most physical lines one quoted CSV record may span.
const RECORD_LINES: usize = 64;

/// Why a pool cannot be used at all.
#[derive(Debug, Error)]
pub enum PoolError {
    /// The file cannot be opened.
    #[error("cannot open the candidate list {}: {reason}", path.display())]
    Open {
        /// The file.
        path: PathBuf,
        /// What the system said.
        reason: io::Error,
    },
    /// A directory stands where a file is wanted.
    #[error("{} is a directory; give the file of candidates in it", path.display())]
    Directory {
        /// The directory.
        path: PathBuf,
    },
    /// Reading failed after it had begun.
    #[error("reading {name} failed after line {line}: {reason}")]
    Read {
        /// The file.
        name: String,
        /// Lines read before.
        line: u64,
        /// What the system said.
        reason: io::Error,
    },
    /// Nothing in it.
    #[error("{name} holds no candidates{}", if *header_only { ": there is a header and no line after it" } else { ": it is empty" })]
    Empty {
        /// The file.
        name: String,
        /// Whether there is a header at least.
        header_only: bool,
    },
    /// Not a text file.
    #[error(
        "{name} is not a text file (a zero byte near its start); wanted: CSV with a `smiles`, `name` or `cas` column, or `SMILES name` lines, either of them plain or .gz"
    )]
    NotText {
        /// The file.
        name: String,
    },
    /// A CSV without a column that is needed.
    #[error(
        "{name}: no column is headed {}; its columns are {}",
        quoted(wanted, " or "),
        quoted(columns, ", ")
    )]
    NoColumn {
        /// The file.
        name: String,
        /// The columns one of which is needed.
        wanted: Vec<String>,
        /// The columns it has.
        columns: Vec<String>,
    },
    /// Two columns of one name.
    #[error("{name}: the column `{column}` stands twice in the header; rename or remove one")]
    DuplicateColumn {
        /// The file.
        name: String,
        /// The column.
        column: String,
    },
    /// A column of measured values that cannot be used.
    #[error("{name}: the column `{column}` {fault}")]
    Measured {
        /// The file.
        name: String,
        /// The column.
        column: String,
        /// What is wrong with it.
        fault: ColumnFault,
    },
    /// The header line itself cannot be read.
    #[error("{name}: the header line {fault}")]
    Header {
        /// The file.
        name: String,
        /// What is wrong with it.
        fault: LineFault,
    },
}

fn quoted(names: &[String], between: &str) -> String {
    let names: Vec<String> = names.iter().map(|name| format!("`{name}`")).collect();
    names.join(between)
}

/// Why one line of a pool is not even a candidate.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum LineFault {
    /// Bytes that are not UTF-8.
    #[error("is not UTF-8 text from byte {0} on")]
    NotUtf8(usize),
    /// Longer than 64 KiB.
    #[error("is longer than 64 KiB")]
    TooLong,
    /// A quote that is never closed.
    #[error("has a quote that is not closed within 64 lines")]
    OpenQuote,
    /// More or fewer cells than the header.
    #[error("has {found} cells where the header has {wanted}")]
    Cells {
        /// Cells of the line.
        found: usize,
        /// Cells of the header.
        wanted: usize,
    },
    /// Nothing that says which molecule it is.
    #[error("names no molecule: its {} empty", match .cells { 1 => "cell of SMILES is", _ => "cells of SMILES, name and CAS number are" })]
    NoMolecule {
        /// How many cells there are to name one.
        cells: usize,
    },
    /// A measured value that is none.
    #[error("has `{value}` in its column `{column}`, {why}")]
    Value {
        /// The column.
        column: Arc<str>,
        /// The cell.
        value: Arc<str>,
        /// What is wrong with it.
        why: &'static str,
    },
}

impl LineFault {
    /// A short name to count refusals by.
    pub const fn reason(&self) -> &'static str {
        match self {
            Self::NotUtf8(_) => "not-text",
            Self::TooLong => "line-too-long",
            Self::OpenQuote => "open-quote",
            Self::Cells { .. } => "cell-count",
            Self::NoMolecule { .. } => "no-molecule",
            Self::Value { .. } => "measured-value",
        }
    }
}

/// Heads of the columns that are looked for in a CSV pool, where they are not
/// the usual ones; case does not matter.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Columns<'a> {
    /// The column of SMILES; `None` for `smiles`, which may be missing where
    /// there are names or CAS numbers.
    pub smiles: Option<&'a str>,
    /// The column of names; `None` for `name`, which may be missing.
    pub name: Option<&'a str>,
}

/// Head of the column of CAS numbers.
const CAS: &str = "cas";

/// How a pool is laid out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Layout {
    /// CSV.
    Csv(Cells),
    /// `SMILES name` lines.
    Lines,
}

/// Where the wanted cells of a CSV line are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Cells {
    smiles: Option<usize>,
    name: Option<usize>,
    cas: Option<usize>,
    /// How many there are in all.
    all: usize,
}

impl Cells {
    /// Whether the other columns are carried along with this one among them.
    fn carries(&self, position: usize) -> bool {
        Some(position) != self.smiles && Some(position) != self.name
    }
}

/// How a line says which molecule it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stated<'b> {
    /// By its structure.
    Smiles(&'b str),
    /// By name, CAS number or both; at least one is not empty.
    Named {
        /// The name.
        name: &'b str,
        /// The CAS number.
        cas: &'b str,
    },
}

/// One line of a [`Batch`].
#[derive(Clone, Copy, Debug)]
pub struct PoolLine<'b> {
    /// Line in the file, from 1.
    pub line: u64,
    /// The molecule as it stands, or why there is none.
    pub molecule: Result<Stated<'b>, &'b LineFault>,
    /// The name, empty where there is none.
    pub name: &'b str,
    /// Of a faulty line: the line as it stands, or its beginning.
    pub text: &'b str,
    batch: &'b Batch,
    entry: &'b Entry,
}

impl<'b> PoolLine<'b> {
    /// The cells of the other columns, in the order of [`Pool::carried`].
    pub fn carried(&self) -> impl Iterator<Item = &'b str> + use<'b> {
        let batch = self.batch;
        batch.carried[self.entry.carried.clone()]
            .iter()
            .map(|range| &batch.text[range.clone()])
    }

    /// The measured values of the line, in the order of their columns.
    pub fn measured(&self) -> impl Iterator<Item = (Property, Estimate)> + use<'b> {
        let batch = self.batch;
        batch.values[self.entry.values.clone()]
            .iter()
            .map(|&(column, value)| batch.columns[column].estimate(value))
    }
}

#[derive(Clone, Debug)]
struct Entry {
    line: u64,
    /// The SMILES; empty where the molecule is named.
    smiles: Result<Range<usize>, LineFault>,
    name: Range<usize>,
    cas: Range<usize>,
    /// The line as it stands; empty unless it is faulty.
    text: Range<usize>,
    carried: Range<usize>,
    values: Range<usize>,
}

/// Some consecutive lines of a pool; the memory is reused.
#[derive(Clone, Debug, Default)]
pub struct Batch {
    text: String,
    entries: Vec<Entry>,
    carried: Vec<Range<usize>>,
    /// Measured values in SI, with their column.
    values: Vec<(usize, f64)>,
    columns: Arc<[MeasuredColumn]>,
}

impl Batch {
    /// Number of lines.
    pub fn len(&self) -> usize {
        self.entries.len()
    }

    /// The text of the lines, one after the other: what a fingerprint is taken of.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Whether there is no line.
    pub fn is_empty(&self) -> bool {
        self.entries.is_empty()
    }

    /// The line at a position.
    pub fn line(&self, index: usize) -> PoolLine<'_> {
        let entry = &self.entries[index];
        let text = |range: &Range<usize>| &self.text[range.clone()];
        let name = text(&entry.name);
        PoolLine {
            line: entry.line,
            molecule: entry.smiles.as_ref().map(|smiles| match text(smiles) {
                "" => Stated::Named {
                    name,
                    cas: text(&entry.cas),
                },
                smiles => Stated::Smiles(smiles),
            }),
            name,
            text: text(&entry.text),
            batch: self,
            entry,
        }
    }

    fn clear(&mut self) {
        self.text.clear();
        self.entries.clear();
        self.carried.clear();
        self.values.clear();
    }

    fn keep(&mut self, text: &str) -> Range<usize> {
        let start = self.text.len();
        self.text.push_str(text);
        start..self.text.len()
    }
}

/// An open candidate list.
pub struct Pool {
    name: String,
    source: Box<dyn BufRead + Send>,
    layout: Layout,
    carried: Vec<String>,
    measured: Arc<[MeasuredColumn]>,
    notes: Vec<String>,
    line: u64,
    /// Lines read ahead while looking for a closing quote.
    ahead: VecDeque<(Vec<u8>, bool)>,
    splitter: Splitter,
    found_any: bool,
    bytes: Option<u64>,
    bytes_read: Arc<AtomicU64>,
}

/// Counts what goes through it.
struct Counted<R> {
    reader: R,
    bytes: Arc<AtomicU64>,
}

impl<R: Read> Read for Counted<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let read = self.reader.read(buffer)?;
        self.bytes.fetch_add(read as u64, Ordering::Relaxed);
        Ok(read)
    }
}

impl Pool {
    /// Opens a file; `.smi` and `.txt` (and their `.gz`) hold `SMILES name`
    /// lines, anything else is CSV. Compression is told by the content.
    ///
    /// # Errors
    ///
    /// Every [`PoolError`] but `Read`.
    pub fn open(path: &Path, columns: Columns<'_>) -> Result<Self, PoolError> {
        let open = |reason| PoolError::Open {
            path: path.to_owned(),
            reason,
        };
        if path.is_dir() {
            return Err(PoolError::Directory {
                path: path.to_owned(),
            });
        }
        let file = File::open(path).map_err(open)?;
        let bytes = file
            .metadata()
            .ok()
            .filter(|facts| facts.is_file())
            .map(|facts| facts.len());
        let plain = path.to_string_lossy().to_ascii_lowercase();
        let plain = plain.strip_suffix(".gz").unwrap_or(&plain);
        let lines = plain.ends_with(".smi") || plain.ends_with(".txt");
        let mut pool = Self::from_reader(
            Box::new(file),
            &path.display().to_string(),
            Some(!lines),
            columns,
        )?;
        pool.bytes = bytes;
        Ok(pool)
    }

    /// Reads a pool from anything; `csv` says whether it is CSV, and where that
    /// is not known (standard input) a first line with a `smiles` cell does.
    ///
    /// # Errors
    ///
    /// As [`open`](Self::open).
    pub fn from_reader(
        reader: Box<dyn Read + Send>,
        name: &str,
        csv: Option<bool>,
        columns: Columns<'_>,
    ) -> Result<Self, PoolError> {
        let read = |reason| PoolError::Read {
            name: name.to_owned(),
            line: 0,
            reason,
        };
        let bytes_read = Arc::new(AtomicU64::new(0));
        let reader = Counted {
            reader,
            bytes: Arc::clone(&bytes_read),
        };
        let mut raw = BufReader::with_capacity(LINE_LIMIT, reader);
        let compressed = raw.fill_buf().map_err(read)?.starts_with(&[0x1f, 0x8b]);
        let mut source: Box<dyn BufRead + Send> = if compressed {
            Box::new(BufReader::with_capacity(
                LINE_LIMIT,
                MultiGzDecoder::new(raw),
            ))
        } else {
            Box::new(raw)
        };
        let start = source.fill_buf().map_err(read)?;
        if start.is_empty() {
            return Err(PoolError::Empty {
                name: name.to_owned(),
                header_only: false,
            });
        }
        if start.contains(&0) {
            return Err(PoolError::NotText {
                name: name.to_owned(),
            });
        }
        if start.starts_with("\u{feff}".as_bytes()) {
            source.consume(3);
        }
        let mut pool = Self {
            name: name.to_owned(),
            source,
            layout: Layout::Lines,
            carried: Vec::new(),
            measured: Arc::default(),
            notes: Vec::new(),
            line: 0,
            ahead: VecDeque::new(),
            splitter: Splitter::new(),
            found_any: false,
            bytes: None,
            bytes_read,
        };
        if csv != Some(false) {
            pool.read_header(csv == Some(true), columns)?;
        }
        Ok(pool)
    }

    /// What to call the pool in messages.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Size of the file in bytes, where it is known.
    pub fn input_bytes(&self) -> Option<u64> {
        self.bytes
    }

    /// Bytes of the file taken in so far, before decompression.
    pub fn input_bytes_read(&self) -> u64 {
        self.bytes_read.load(Ordering::Relaxed)
    }

    /// Heads of the columns besides `smiles` and `name`, in file order.
    pub fn carried(&self) -> &[String] {
        &self.carried
    }

    /// Whether there are columns of measured values.
    pub fn has_measured(&self) -> bool {
        !self.measured.is_empty()
    }

    /// What a reader should know of the columns: those that look like measured
    /// values and are not used.
    pub fn notes(&self) -> &[String] {
        &self.notes
    }

    /// Reads the next `most` lines into `batch`; an empty batch is the end.
    ///
    /// # Errors
    ///
    /// [`PoolError::Read`] when the system fails, [`PoolError::Empty`] when the
    /// pool ends without a single line.
    pub fn read_batch(&mut self, batch: &mut Batch, most: usize) -> Result<(), PoolError> {
        batch.clear();
        batch.columns = Arc::clone(&self.measured);
        let mut bytes = Vec::new();
        while batch.len() < most {
            let Some(cut) = self.next_line(&mut bytes)? else {
                break;
            };
            let line = self.line;
            if !cut && bytes.iter().all(u8::is_ascii_whitespace) {
                continue;
            }
            self.found_any = true;
            let entry = if cut {
                Err(LineFault::TooLong)
            } else {
                match self.layout {
                    Layout::Lines => split_line(&bytes, batch, line),
                    Layout::Csv(cells) => self.split_record(&mut bytes, batch, line, cells)?,
                }
            };
            let entry = entry.unwrap_or_else(|fault| Entry {
                line,
                smiles: Err(fault),
                name: 0..0,
                cas: 0..0,
                text: batch.keep(&as_it_stands(&bytes)),
                carried: 0..0,
                values: 0..0,
            });
            batch.entries.push(entry);
        }
        if batch.is_empty() && !self.found_any {
            let header_only = self.layout != Layout::Lines;
            return Err(PoolError::Empty {
                name: self.name.clone(),
                header_only,
            });
        }
        Ok(())
    }

    fn read_header(&mut self, certain: bool, columns: Columns<'_>) -> Result<(), PoolError> {
        let name = self.name.clone();
        let mut bytes = Vec::new();
        loop {
            let Some(cut) = self.next_line(&mut bytes)? else {
                return Err(PoolError::Empty {
                    name,
                    header_only: false,
                });
            };
            if cut {
                return Err(PoolError::Header {
                    name,
                    fault: LineFault::TooLong,
                });
            }
            if !bytes.iter().all(u8::is_ascii_whitespace) {
                break;
            }
        }
        let text = std::str::from_utf8(&bytes).map_err(|error| PoolError::Header {
            name: name.clone(),
            fault: LineFault::NotUtf8(error.valid_up_to() + 1),
        })?;
        let heads: Vec<String> = match self.splitter.split(text.as_bytes()) {
            Some(cells) => cells
                .iter()
                .map(|cell| String::from_utf8_lossy(cell).trim().to_owned())
                .collect(),
            None => {
                return Err(PoolError::Header {
                    name,
                    fault: LineFault::OpenQuote,
                });
            }
        };
        let place = |wanted: &str| {
            heads
                .iter()
                .position(|head| head.eq_ignore_ascii_case(wanted))
        };
        let cells = Cells {
            smiles: place(columns.smiles.unwrap_or("smiles")),
            name: place(columns.name.unwrap_or("name")),
            cas: place(CAS),
            all: heads.len(),
        };
        let missing = |wanted: &[&str]| PoolError::NoColumn {
            name: name.clone(),
            wanted: wanted.iter().map(|&head| head.to_owned()).collect(),
            columns: heads.clone(),
        };
        if [cells.smiles, cells.name, cells.cas] == [None; 3] {
            if certain {
                let usual = |head, usual| Option::unwrap_or(head, usual);
                let (smiles, name) = (usual(columns.smiles, "smiles"), usual(columns.name, "name"));
                return Err(missing(&[smiles, name, CAS]));
            }
            self.ahead.push_front((bytes, false));
            self.line -= 1;
            return Ok(());
        }
        // A column that was asked for by its name has to be there.
        for (head, place) in [(columns.smiles, cells.smiles), (columns.name, cells.name)] {
            if let (Some(head), None) = (head, place) {
                return Err(missing(&[head]));
            }
        }
        for (position, head) in heads.iter().enumerate() {
            let known = heads[..position]
                .iter()
                .any(|other| other.eq_ignore_ascii_case(head));
            if known && !head.is_empty() {
                return Err(PoolError::DuplicateColumn {
                    name,
                    column: head.clone(),
                });
            }
        }
        let measured =
            MeasuredHeads::read(&name, &heads).map_err(|(column, fault)| PoolError::Measured {
                name: name.clone(),
                column,
                fault,
            })?;
        self.measured = measured.columns.into();
        self.notes = measured.notes;
        self.layout = Layout::Csv(cells);
        self.carried = heads
            .into_iter()
            .enumerate()
            .filter(|(position, _)| cells.carries(*position))
            .map(|(_, head)| head)
            .collect();
        Ok(())
    }

    /// The next physical line without its end; `true` where it was cut at the
    /// limit, `None` at the end.
    fn next_line(&mut self, bytes: &mut Vec<u8>) -> Result<Option<bool>, PoolError> {
        if let Some((line, cut)) = self.ahead.pop_front() {
            *bytes = line;
            self.line += 1;
            return Ok(Some(cut));
        }
        bytes.clear();
        let mut cut = false;
        let mut any = false;
        loop {
            let buffer = self.source.fill_buf().map_err(|reason| PoolError::Read {
                name: self.name.clone(),
                line: self.line,
                reason,
            })?;
            if buffer.is_empty() {
                break;
            }
            any = true;
            let end = buffer.iter().position(|&byte| byte == b'\n');
            let part = &buffer[..end.unwrap_or(buffer.len())];
            let room = LINE_LIMIT - bytes.len();
            bytes.extend_from_slice(&part[..part.len().min(room)]);
            cut |= part.len() > room;
            let used = end.map_or(buffer.len(), |end| end + 1);
            self.source.consume(used);
            if end.is_some() {
                break;
            }
        }
        if !any {
            return Ok(None);
        }
        if bytes.last() == Some(&b'\r') {
            bytes.pop();
        }
        self.line += 1;
        Ok(Some(cut))
    }

    /// Splits a CSV record that starts with `bytes`, reading on while a quote is open.
    fn split_record(
        &mut self,
        bytes: &mut Vec<u8>,
        batch: &mut Batch,
        line: u64,
        at: Cells,
    ) -> Result<Result<Entry, LineFault>, PoolError> {
        let mut taken: Vec<(Vec<u8>, bool)> = Vec::new();
        while self.splitter.split(bytes).is_none() {
            let mut more = Vec::new();
            let next = if taken.len() < RECORD_LINES {
                self.next_line(&mut more)?
            } else {
                None
            };
            match next {
                Some(cut) if !cut && bytes.len() + more.len() < LINE_LIMIT => {
                    bytes.push(b'\n');
                    bytes.extend_from_slice(&more);
                    taken.push((more, cut));
                }
                end => {
                    // Not a record after all: refuse its first line only.
                    if let Some(cut) = end {
                        taken.push((more, cut));
                    }
                    self.line -= taken.len() as u64;
                    for line in taken.into_iter().rev() {
                        self.ahead.push_front(line);
                    }
                    return Ok(Err(LineFault::OpenQuote));
                }
            }
        }
        let cells = self.splitter.cells();
        if cells.len() != at.all {
            return Ok(Err(LineFault::Cells {
                found: cells.len(),
                wanted: at.all,
            }));
        }
        if let Err(error) = std::str::from_utf8(bytes) {
            return Ok(Err(LineFault::NotUtf8(error.valid_up_to() + 1)));
        }
        let text = |position: usize| {
            std::str::from_utf8(&cells[position])
                .expect("cells of UTF-8 text are UTF-8")
                .trim()
        };
        let cell = |position: Option<usize>| position.map_or("", text);
        let (smiles, name, cas) = (cell(at.smiles), cell(at.name), cell(at.cas));
        if smiles.is_empty() && name.is_empty() && cas.is_empty() {
            let cells = [at.smiles, at.name, at.cas].iter().flatten().count();
            return Ok(Err(LineFault::NoMolecule { cells }));
        }
        let first_value = batch.values.len();
        for (column, measured) in self.measured.iter().enumerate() {
            let cell = text(measured.position);
            match measured.value(cell) {
                Ok(value) => batch.values.extend(value.map(|value| (column, value))),
                Err(why) => {
                    return Ok(Err(LineFault::Value {
                        column: Arc::clone(&measured.head),
                        value: cell.into(),
                        why,
                    }));
                }
            }
        }
        let first = batch.carried.len();
        for position in (0..at.all).filter(|&position| at.carries(position)) {
            let kept = batch.keep(text(position));
            batch.carried.push(kept);
        }
        Ok(Ok(Entry {
            line,
            smiles: Ok(batch.keep(smiles)),
            name: batch.keep(name),
            cas: batch.keep(if smiles.is_empty() { cas } else { "" }),
            text: 0..0,
            carried: first..batch.carried.len(),
            values: first_value..batch.values.len(),
        }))
    }
}

/// Splits `SMILES name`: the name is all after the first blank.
fn split_line(bytes: &[u8], batch: &mut Batch, line: u64) -> Result<Entry, LineFault> {
    let text = std::str::from_utf8(bytes)
        .map_err(|error| LineFault::NotUtf8(error.valid_up_to() + 1))?
        .trim();
    let (smiles, name) = text.split_once([' ', '\t']).unwrap_or((text, ""));
    Ok(Entry {
        line,
        smiles: Ok(batch.keep(smiles)),
        name: batch.keep(name.trim()),
        cas: 0..0,
        text: 0..0,
        carried: 0..0,
        values: 0..0,
    })
}

/// Most characters of a faulty line that are shown.
const SHOWN: usize = 200;

/// The first physical line of what was read, cut where it is long.
fn as_it_stands(bytes: &[u8]) -> String {
    let line = bytes
        .split(|&byte| byte == b'\n')
        .next()
        .unwrap_or_default();
    // A character has at most four bytes; the rest of a long line is not looked at.
    let text = String::from_utf8_lossy(&line[..line.len().min(4 * SHOWN + 4)]);
    let text = text.trim();
    match text.char_indices().nth(SHOWN) {
        Some((end, _)) => format!("{}…", &text[..end]),
        None => text.to_owned(),
    }
}

/// CSV cells of one record.
struct Splitter {
    core: csv_core::Reader,
    output: Vec<u8>,
    ends: Vec<usize>,
    cells: Vec<Vec<u8>>,
}

impl Splitter {
    fn new() -> Self {
        Self {
            core: csv_core::Reader::new(),
            output: Vec::new(),
            ends: Vec::new(),
            cells: Vec::new(),
        }
    }

    /// The cells, or `None` where a quote is still open at the end.
    fn split(&mut self, record: &[u8]) -> Option<&[Vec<u8>]> {
        self.core.reset();
        self.output.resize(record.len() + 2, 0);
        self.ends
            .resize(record.iter().filter(|&&byte| byte == b',').count() + 2, 0);
        let (_, read, written, ended) =
            self.core
                .read_record(record, &mut self.output, &mut self.ends);
        let (result, _, more, more_ends) = self.core.read_record(
            if read == record.len() { b"\n" } else { b"" },
            &mut self.output[written..],
            &mut self.ends[ended..],
        );
        if !matches!(result, csv_core::ReadRecordResult::Record) {
            return None;
        }
        debug_assert!(
            written + more <= self.output.len(),
            "cells are no longer than the record"
        );
        let mut start = 0;
        self.cells.clear();
        for &end in &self.ends[..ended + more_ends] {
            self.cells.push(self.output[start..end].to_vec());
            start = end;
        }
        Some(&self.cells)
    }

    fn cells(&self) -> &[Vec<u8>] {
        &self.cells
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn pool(text: &str, csv: Option<bool>) -> Result<Pool, PoolError> {
        Pool::from_reader(
            Box::new(io::Cursor::new(text.as_bytes().to_vec())),
            "list",
            csv,
            Columns::default(),
        )
    }

    type Lines = Vec<(u64, Result<String, LineFault>, String)>;

    fn lines(text: &str, csv: Option<bool>) -> Lines {
        let mut pool = pool(text, csv).unwrap();
        let mut batch = Batch::default();
        let mut all = Vec::new();
        loop {
            pool.read_batch(&mut batch, 2).unwrap();
            if batch.is_empty() {
                return all;
            }
            for index in 0..batch.len() {
                let line = batch.line(index);
                all.push((
                    line.line,
                    match line.molecule {
                        Ok(Stated::Smiles(smiles)) => Ok(smiles.to_owned()),
                        Ok(Stated::Named { name, cas }) => Ok(format!("{name}/{cas}")),
                        Err(fault) => Err(fault.clone()),
                    },
                    line.name.to_owned(),
                ));
            }
        }
    }

    #[test]
    fn csv_with_quotes_crlf_and_byte_order_mark() {
        let text = "\u{feff}name,SMILES,note\r\n\"a, b\",CCO,x\r\n\r\n\"two\nlines\",CC,\"say \"\"hi\"\"\"\r\n";
        assert_eq!(
            lines(text, Some(true)),
            [
                (2, Ok("CCO".into()), "a, b".into()),
                (4, Ok("CC".into()), "two\nlines".into())
            ]
        );
        let mut pool = pool(text, Some(true)).unwrap();
        assert_eq!(pool.carried(), ["note"]);
        let mut batch = Batch::default();
        pool.read_batch(&mut batch, 9).unwrap();
        assert_eq!(batch.line(1).carried().collect::<Vec<_>>(), ["say \"hi\""]);
    }

    #[test]
    fn faulty_lines_are_told_one_by_one() {
        let found = lines("smiles,name\nCC,a,b\n\"open,x\nCCO,c\n,d\n,\n", Some(true));
        assert_eq!(
            found,
            [
                (
                    2,
                    Err(LineFault::Cells {
                        found: 3,
                        wanted: 2
                    }),
                    String::new()
                ),
                (3, Err(LineFault::OpenQuote), String::new()),
                (4, Ok("CCO".into()), "c".into()),
                (5, Ok("d/".into()), "d".into()),
                (6, Err(LineFault::NoMolecule { cells: 2 }), String::new()),
            ]
        );
    }

    #[test]
    fn lines_of_smiles_and_name_need_no_header() {
        let wanted = [
            (1, Ok("CCO".into()), "ethyl alcohol".into()),
            (2, Ok("C".into()), "".into()),
        ];
        assert_eq!(lines("CCO ethyl alcohol\nC\n", Some(false)), wanted);
        assert_eq!(lines("CCO ethyl alcohol\nC\n", None), wanted);
        assert_eq!(
            lines("name,smiles\nx,C\n", None),
            [(2, Ok("C".into()), "x".into())]
        );
    }

    #[test]
    fn unusable_pools_are_told_apart() {
        assert!(matches!(
            pool("", None),
            Err(PoolError::Empty {
                header_only: false,
                ..
            })
        ));
        assert!(matches!(pool("a\0b", None), Err(PoolError::NotText { .. })));
        assert!(matches!(
            pool("a,b\n", Some(true)),
            Err(PoolError::NoColumn { .. })
        ));
        assert!(matches!(
            pool("smiles,x,X\n", Some(true)),
            Err(PoolError::DuplicateColumn { .. })
        ));
        let mut header_only = pool("smiles\n\n", Some(true)).unwrap();
        assert!(matches!(
            header_only.read_batch(&mut Batch::default(), 5),
            Err(PoolError::Empty {
                header_only: true,
                ..
            })
        ));
    }

    #[test]
    fn a_line_without_end_is_cut_and_the_rest_read() {
        let text = format!("smiles\n{}\nCC\n", "C".repeat(3 * LINE_LIMIT));
        assert_eq!(
            lines(&text, Some(true)),
            [
                (2, Err(LineFault::TooLong), String::new()),
                (3, Ok("CC".into()), String::new())
            ]
        );
    }

    #[test]
    fn bytes_that_are_not_text_are_refused_by_line() {
        let bytes = b"smiles\nC\xff\nCC\n".to_vec();
        let mut pool = Pool::from_reader(
            Box::new(io::Cursor::new(bytes)),
            "list",
            Some(true),
            Columns::default(),
        )
        .unwrap();
        let mut batch = Batch::default();
        pool.read_batch(&mut batch, 9).unwrap();
        assert_eq!(batch.line(0).molecule, Err(&LineFault::NotUtf8(2)));
        assert_eq!(batch.line(1).molecule, Ok(Stated::Smiles("CC")));
    }
}
