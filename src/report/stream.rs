//! Rows written one by one, so that a long look-up holds none of them.

use std::io::{self, Write};

use serde::Serialize;

use super::csv_line::CsvRow;

/// The form of streamed rows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum RowForm {
    /// A head and a line for each row.
    Csv,
    /// One array, a row on each line.
    Json,
}

/// Rows of one kind going to a sink as they come.
pub struct RowStream<W> {
    sink: W,
    form: RowForm,
    rows: u64,
    buffer: Vec<u8>,
}

impl<W: Write> RowStream<W> {
    /// Begins with the head of `R`, or the bracket of the array.
    ///
    /// # Errors
    ///
    /// What the sink says; a closed pipe comes through as it is.
    pub fn begin<R: CsvRow>(mut sink: W, form: RowForm) -> io::Result<Self> {
        match form {
            RowForm::Csv => {
                sink.write_all(R::HEAD.as_bytes())?;
                sink.write_all(b"\n")?;
            }
            RowForm::Json => sink.write_all(b"[")?,
        }
        Ok(Self {
            sink,
            form,
            rows: 0,
            buffer: Vec::new(),
        })
    }

    /// Writes a row.
    ///
    /// # Errors
    ///
    /// As [`begin`](Self::begin).
    pub fn add<R: CsvRow + Serialize>(&mut self, row: &R) -> io::Result<()> {
        self.buffer.clear();
        match self.form {
            RowForm::Csv => row.write_csv(&mut self.buffer),
            RowForm::Json => {
                let between: &[u8] = if self.rows == 0 { b"\n  " } else { b",\n  " };
                self.buffer.extend_from_slice(between);
                serde_json::to_writer(&mut self.buffer, row).map_err(io::Error::from)?;
            }
        }
        self.rows += 1;
        self.sink.write_all(&self.buffer)
    }

    /// Ends the rows and flushes the sink.
    ///
    /// # Errors
    ///
    /// As [`begin`](Self::begin).
    pub fn end(mut self) -> io::Result<()> {
        if self.form == RowForm::Json {
            let closing: &[u8] = if self.rows == 0 { b"]\n" } else { b"\n]\n" };
            self.sink.write_all(closing)?;
        }
        self.sink.flush()
    }
}

/// Writes rows that are all there.
///
/// # Errors
///
/// What the sink says; a closed pipe comes through as it is.
pub fn write_rows<R: CsvRow + Serialize>(
    sink: &mut impl Write,
    form: RowForm,
    rows: impl IntoIterator<Item = R>,
) -> io::Result<()> {
    let mut stream = RowStream::begin::<R>(sink, form)?;
    for row in rows {
        stream.add(&row)?;
    }
    stream.end()
}
