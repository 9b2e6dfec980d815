//! The table text and its typed cells.

use super::TableError;

const REQUIRED_FACTS: [&str; 4] = ["title", "source", "transcribed", "checked"];

/// Who writes a table, which decides how much of its form is asked for.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Author {
    Program,
    User,
}

/// The text of a line of the head, `None` past its end.
///
/// Spreadsheets put quotes around a line that holds a comma and add a comma for every empty cell.
fn head_line(line: &str, author: Author) -> Option<&str> {
    match (line.strip_prefix('#'), author) {
        (comment, Author::Program) => comment,
        (Some(comment), Author::User) => Some(comment.trim_end().trim_end_matches(',')),
        (None, Author::User) => {
            let comment = line.strip_prefix("\"#")?.trim_end().trim_end_matches(',');
            Some(comment.strip_suffix('"').unwrap_or(comment))
        }
    }
}

/// A table file, split into head, columns and rows; nothing is interpreted yet.
#[derive(Clone, Debug)]
pub struct Table {
    file: String,
    facts: Vec<(String, String)>,
    columns: Vec<String>,
    units: Vec<String>,
    heads_line: u64,
    /// The text of every data cell, one after the other.
    text: String,
    /// Where each cell ends in `text`, row by row.
    ends: Vec<u32>,
    /// Line of each row.
    lines: Vec<u64>,
}

/// The position of a column, looked up once by name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Column(usize);

/// One data row of a [`Table`].
#[derive(Clone, Copy, Debug)]
pub struct Row<'a> {
    table: &'a Table,
    row: usize,
}

impl Table {
    /// Splits the text of a table file; `file` is the name used in messages.
    ///
    /// # Errors
    ///
    /// A missing fact in the head, a duplicate column, a row of another length.
    pub fn read(file: &str, text: &str) -> Result<Self, TableError> {
        Self::read_as(file, text, Author::Program)
    }

    /// The same for a table that a user keeps, perhaps in a spreadsheet: the
    /// head may lack facts or be missing, and rows of blank cells are passed over.
    ///
    /// # Errors
    ///
    /// Those of [`read`](Self::read), without the missing facts; columns parted by
    /// anything but commas; no row of units.
    pub fn read_user(file: &str, text: &str) -> Result<Self, TableError> {
        Self::read_as(file, text, Author::User)
    }

    fn read_as(file: &str, text: &str, author: Author) -> Result<Self, TableError> {
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        // the CSV reader counts the two characters of a line end to different lines
        let unix = text.contains('\r').then(|| text.replace("\r\n", "\n"));
        let text = unix.as_deref().unwrap_or(text);
        let mut facts = Vec::new();
        let mut head_lines = 0;
        let mut body_start = 0;
        for line in text.split_inclusive('\n') {
            let Some(comment) = head_line(line, author) else {
                break;
            };
            if let Some((key, value)) = comment.split_once(':') {
                facts.push((key.trim().to_owned(), value.trim().to_owned()));
            }
            head_lines += 1;
            body_start += line.len();
        }
        let required: &[&'static str] = match author {
            Author::Program => &REQUIRED_FACTS,
            Author::User => &[],
        };
        for &fact in required {
            if !facts
                .iter()
                .any(|(key, value)| key == fact && !value.is_empty())
            {
                return Err(TableError::MissingFact {
                    file: file.to_owned(),
                    fact,
                });
            }
        }

        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(false)
            .trim(csv::Trim::All)
            .from_reader(&text.as_bytes()[body_start..]);
        let mut record = csv::StringRecord::new();
        let mut next = |record: &mut csv::StringRecord| {
            let found = reader
                .read_record(record)
                .map_err(|error| TableError::Csv {
                    file: file.to_owned(),
                    line: head_lines + error.position().map_or(0, csv::Position::line),
                    reason: error.to_string(),
                })?;
            let line = head_lines + record.position().map_or(0, csv::Position::line);
            Ok::<_, TableError>(found.then_some(line))
        };
        let mut heads = |what: &str| match next(&mut record)? {
            Some(line) => Ok((line, record.iter().map(str::to_owned).collect::<Vec<_>>())),
            None => Err(TableError::Column {
                file: file.to_owned(),
                line: head_lines + 1,
                column: what.to_owned(),
                fault: "row is missing: a table begins with its column names and, below them, their units",
            }),
        };
        let (heads_line, columns) = heads("column names")?;
        if let [one] = columns.as_slice()
            && one.contains([';', '\t'])
        {
            return Err(TableError::Column {
                file: file.to_owned(),
                line: heads_line,
                column: one.clone(),
                fault: "is several: columns are parted by commas, not by `;` or tabs, and numbers have a decimal point",
            });
        }
        let (_, units) = heads("units")?;
        if author == Author::User && !matches!(units[0].as_str(), "-" | "") {
            return Err(TableError::Column {
                file: file.to_owned(),
                line: heads_line,
                column: columns[0].clone(),
                fault: "has data right below it, where the row of units belongs (`-` under a column without one)",
            });
        }
        for (position, column) in columns.iter().enumerate() {
            if !column.is_empty() && columns[..position].contains(column) {
                return Err(TableError::Column {
                    file: file.to_owned(),
                    line: heads_line,
                    column: column.clone(),
                    fault: "stands twice",
                });
            }
        }
        let mut table = Self {
            file: file.to_owned(),
            facts,
            columns,
            units,
            heads_line,
            text: String::with_capacity(text.len() - body_start),
            ends: Vec::new(),
            lines: Vec::new(),
        };
        while let Some(line) = next(&mut record)? {
            if author == Author::User && record.iter().all(str::is_empty) {
                continue;
            }
            table.lines.push(line);
            for cell in &record {
                table.text.push_str(cell);
                let end = u32::try_from(table.text.len()).map_err(|_| TableError::Csv {
                    file: file.to_owned(),
                    line,
                    reason: "the table is larger than 4 GiB".into(),
                })?;
                table.ends.push(end);
            }
        }
        Ok(table)
    }

    /// The file name used in messages.
    pub fn file(&self) -> &str {
        &self.file
    }

    /// Every value of a fact of the head, in order (`source` may repeat).
    pub fn facts<'a>(&'a self, key: &'a str) -> impl Iterator<Item = &'a str> {
        self.facts
            .iter()
            .filter(move |(name, _)| name == key)
            .map(|(_, value)| value.as_str())
    }

    /// The first value of a fact of the head.
    pub fn fact<'a>(&'a self, key: &'a str) -> Option<&'a str> {
        self.facts(key).next()
    }

    /// The column of this name.
    ///
    /// # Errors
    ///
    /// [`TableError::Column`] if there is none.
    pub fn column(&self, name: &str) -> Result<Column, TableError> {
        self.columns
            .iter()
            .position(|column| column == name)
            .map(Column)
            .ok_or_else(|| TableError::Column {
                file: self.file.clone(),
                line: self.heads_line,
                column: name.to_owned(),
                fault: "is missing",
            })
    }

    /// The column of this name if the table has it.
    pub fn optional_column(&self, name: &str) -> Option<Column> {
        self.columns
            .iter()
            .position(|column| column == name)
            .map(Column)
    }

    /// The column of this name, which has to be given in `unit`.
    ///
    /// # Errors
    ///
    /// No such column, or another unit in the units row.
    pub fn column_in(&self, name: &str, unit: &str) -> Result<Column, TableError> {
        let column = self.column(name)?;
        if self.units[column.0] == unit {
            Ok(column)
        } else {
            Err(self.unit_fault(column, unit))
        }
    }

    /// Whether every column is one of those known, so that none is overlooked
    /// because its name is misspelled.
    ///
    /// # Errors
    ///
    /// [`TableError::Column`] for the first that is not.
    pub fn knows_only(&self, known: &[&str]) -> Result<(), TableError> {
        let other = |column: &&String| !column.is_empty() && !known.contains(&column.as_str());
        match self.columns.iter().find(other) {
            None => Ok(()),
            Some(column) => Err(TableError::Column {
                file: self.file.clone(),
                line: self.heads_line,
                column: column.clone(),
                fault: "is none of this table (remarks go into a column `notes`)",
            }),
        }
    }

    /// A fault of the unit of a column.
    pub fn unit_fault(&self, column: Column, expected: &str) -> TableError {
        TableError::Unit {
            file: self.file.clone(),
            line: self.heads_line + 1,
            column: self.columns[column.0].clone(),
            found: self.units[column.0].clone(),
            expected: expected.to_owned(),
        }
    }

    /// The unit of a column as written in the units row.
    pub fn unit(&self, column: Column) -> &str {
        &self.units[column.0]
    }

    /// The names of all columns, in order.
    pub fn columns(&self) -> &[String] {
        &self.columns
    }

    /// The data rows, in order.
    pub fn rows(&self) -> impl ExactSizeIterator<Item = Row<'_>> {
        (0..self.lines.len()).map(|row| Row { table: self, row })
    }
}

impl<'a> Row<'a> {
    /// Line of the row in its file, from 1.
    pub fn line(self) -> u64 {
        self.table.lines[self.row]
    }

    /// The cell as text, possibly empty.
    pub fn text(self, column: Column) -> &'a str {
        let cell = self.row * self.table.columns.len() + column.0;
        let end = self.table.ends[cell] as usize;
        let start = match cell {
            0 => 0,
            _ => self.table.ends[cell - 1] as usize,
        };
        &self.table.text[start..end]
    }

    /// The cell as text that may not be empty.
    ///
    /// # Errors
    ///
    /// [`TableError::Cell`] if it is blank.
    pub fn required_text(self, column: Column) -> Result<&'a str, TableError> {
        match self.text(column) {
            "" => Err(self.fault(column, "is blank")),
            text => Ok(text),
        }
    }

    /// The cell as a finite number, `None` where it is blank.
    ///
    /// # Errors
    ///
    /// [`TableError::Cell`] if it is something else.
    pub fn number(self, column: Column) -> Result<Option<f64>, TableError> {
        let text = self.text(column);
        if text.is_empty() {
            return Ok(None);
        }
        match text.parse::<f64>() {
            Ok(value) if value.is_finite() => Ok(Some(value)),
            _ => Err(self.fault(
                column,
                match self.text(column).contains(',') {
                    true => "is not a finite number; decimals take a point",
                    false => "is not a finite number",
                },
            )),
        }
    }

    /// The cell as a finite number that may not be blank.
    ///
    /// # Errors
    ///
    /// [`TableError::Cell`] if it is blank or not a number.
    pub fn required_number(self, column: Column) -> Result<f64, TableError> {
        self.number(column)?
            .ok_or_else(|| self.fault(column, "is blank"))
    }

    /// The cell as a whole number from 0 to 65535 that may not be blank.
    ///
    /// # Errors
    ///
    /// [`TableError::Cell`] if it is anything else.
    pub fn required_integer(self, column: Column) -> Result<u16, TableError> {
        self.text(column)
            .parse()
            .map_err(|_| self.fault(column, "is not a whole number from 0 to 65535"))
    }

    /// A fault at a cell of this row, for checks of the caller's own.
    pub fn fault(self, column: Column, fault: impl Into<String>) -> TableError {
        TableError::Cell {
            file: self.table.file.clone(),
            line: self.line(),
            column: self.table.columns[column.0].clone(),
            found: self.text(column).to_owned(),
            fault: fault.into(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const HEAD: &str = "# title: t\n# source: s\n# transcribed: d\n# checked: c\n";

    #[test]
    fn cells_know_their_line_and_column() {
        let text = format!("{HEAD}number,r\n-,m\n1,0.5\n2,x\n");
        let table = Table::read("a.csv", &text).unwrap();
        let r = table.column_in("r", "m").unwrap();
        let rows: Vec<_> = table.rows().collect();
        assert_eq!(rows[0].required_number(r), Ok(0.5));
        assert_eq!(
            rows[1].required_number(r).unwrap_err().to_string(),
            "a.csv:8: column `r`: is not a finite number (found `x`)"
        );
    }

    #[test]
    fn a_table_without_a_source_is_refused() {
        let error = Table::read("a.csv", "# title: t\nnumber\n-\n").unwrap_err();
        assert_eq!(
            error,
            TableError::MissingFact {
                file: "a.csv".into(),
                fact: "source"
            }
        );
    }

    #[test]
    fn a_user_s_table_may_come_from_a_spreadsheet() {
        let text = "\u{feff}\"# source: k: A, B\",\r\nname,r\r\n-,m\r\na,1\r\n,\r\nb,2\r\n";
        let table = Table::read_user("a.csv", text).unwrap();
        assert_eq!(table.fact("source"), Some("k: A, B"));
        let lines: Vec<_> = table.rows().map(Row::line).collect();
        assert_eq!(lines, [4, 6]);
        for (text, wanted) in [
            (
                "name;r\n-;m\na;1,5\n",
                "a.csv:1: column `name;r` is several: columns are parted by commas, not by `;` or tabs, and numbers have a decimal point",
            ),
            (
                "name,r\na,1\n",
                "a.csv:1: column `name` has data right below it, where the row of units belongs (`-` under a column without one)",
            ),
        ] {
            let error = Table::read_user("a.csv", text).unwrap_err();
            assert_eq!(error.to_string(), wanted);
        }
        let error = Table::read_user("a.csv", "name,t\n-,-\n").unwrap();
        assert!(error.knows_only(&["name"]).is_err());
    }

    #[test]
    fn duplicate_columns_and_short_rows_are_refused() {
        assert!(Table::read("a.csv", &format!("{HEAD}n,n\n-,-\n")).is_err());
        assert!(Table::read("a.csv", &format!("{HEAD}n,m\n-,-\n1\n")).is_err());
    }
}
