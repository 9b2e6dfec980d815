//! CSV lines written into a byte buffer.

use crate::quantity::number::{write_integer, write_number};

/// One line of CSV under construction, as RFC 4180 has it but for the line end,
/// which is a line feed alone.
///
/// A cell with a comma, a quote, a line feed or a carriage return is quoted;
/// quotes in it are doubled. No cell allocates.
#[derive(Debug)]
pub struct CsvLine<'a> {
    out: &'a mut Vec<u8>,
    is_first: bool,
}

impl<'a> CsvLine<'a> {
    /// Begins a line at the end of the buffer.
    pub fn new(out: &'a mut Vec<u8>) -> Self {
        Self {
            out,
            is_first: true,
        }
    }

    fn begin_cell(&mut self) {
        if !self.is_first {
            self.out.push(b',');
        }
        self.is_first = false;
    }

    /// An empty cell: there is no value.
    pub fn empty(&mut self) -> &mut Self {
        self.begin_cell();
        self
    }

    /// A text.
    pub fn text(&mut self, text: &str) -> &mut Self {
        self.begin_cell();
        let bytes = text.as_bytes();
        if bytes
            .iter()
            .any(|byte| matches!(byte, b',' | b'"' | b'\n' | b'\r'))
        {
            self.out.push(b'"');
            let mut pieces = bytes.split(|&byte| byte == b'"');
            if let Some(first) = pieces.next() {
                self.out.extend_from_slice(first);
            }
            for piece in pieces {
                self.out.extend_from_slice(b"\"\"");
                self.out.extend_from_slice(piece);
            }
            self.out.push(b'"');
        } else {
            self.out.extend_from_slice(bytes);
        }
        self
    }

    /// A whole number.
    pub fn integer(&mut self, value: u64) -> &mut Self {
        self.begin_cell();
        write_integer(self.out, value);
        self
    }

    /// A finite number with at most so many significant digits.
    ///
    /// # Panics
    ///
    /// If it is not finite; see [`write_number`].
    pub fn number(&mut self, value: f64, digits: u32) -> &mut Self {
        self.begin_cell();
        write_number(self.out, value, digits);
        self
    }

    /// A finite number, or an empty cell where there is none.
    ///
    /// # Panics
    ///
    /// As [`number`](Self::number).
    pub fn number_or_empty(&mut self, value: Option<f64>, digits: u32) -> &mut Self {
        match value {
            Some(value) => self.number(value, digits),
            None => self.empty(),
        }
    }

    /// Ends the line.
    pub fn end(self) {
        self.out.push(b'\n');
    }
}

/// A row of a table with fixed columns.
pub trait CsvRow {
    /// The column names, joined by commas, without a line end.
    const HEAD: &'static str;

    /// Appends the row as one line.
    fn write_csv(&self, out: &mut Vec<u8>);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cells_are_quoted_where_they_have_to_be() {
        let mut out = Vec::new();
        let mut line = CsvLine::new(&mut out);
        line.empty()
            .text("1,2-ethanediol")
            .text("the \"dry\" one")
            .text("\"")
            .text("two\nlines")
            .text("plain µ")
            .text("")
            .integer(7)
            .number(0.1 + 0.2, 9)
            .number_or_empty(None, 9);
        line.end();
        let text = String::from_utf8(out).unwrap();
        assert_eq!(
            text,
            ",\"1,2-ethanediol\",\"the \"\"dry\"\" one\",\"\"\"\",\"two\nlines\",plain µ,,7,0.3,\n"
        );
        // The reader the pools are read with sees what went in.
        let record = csv::ReaderBuilder::new()
            .has_headers(false)
            .from_reader(text.as_bytes())
            .records()
            .next()
            .unwrap()
            .unwrap();
        assert_eq!(
            record.iter().collect::<Vec<_>>(),
            [
                "",
                "1,2-ethanediol",
                "the \"dry\" one",
                "\"",
                "two\nlines",
                "plain µ",
                "",
                "7",
                "0.3",
                ""
            ]
        );
    }
}
