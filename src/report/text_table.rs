//! Aligned tables for terminals.

use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

/// What stands in a column and how it is aligned.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TextColumn {
    head: String,
    unit: String,
    is_number: bool,
}

impl TextColumn {
    /// A column of words, aligned left.
    pub fn text(head: impl Into<String>) -> Self {
        Self {
            head: head.into(),
            unit: String::new(),
            is_number: false,
        }
    }

    /// A column of numbers, aligned at their decimal points, with the unit
    /// below the head.
    pub fn number(head: impl Into<String>, unit: impl Into<String>) -> Self {
        Self {
            head: head.into(),
            unit: unit.into(),
            is_number: true,
        }
    }
}

impl TextColumn {
    /// The head, broken at blanks where a number column may be narrower.
    fn head_lines(&self, width: usize) -> Vec<String> {
        let head = printable(&self.head);
        if head.is_empty() {
            return Vec::new();
        }
        if !self.is_number {
            return vec![head];
        }
        let longest_word = head.split(' ').map(UnicodeWidthStr::width).max();
        let width = width.max(longest_word.unwrap_or(0));
        let mut lines = Vec::new();
        let mut line = String::new();
        for word in head.split(' ') {
            if !line.is_empty() && line.width() + 1 + word.width() > width {
                lines.push(std::mem::take(&mut line));
            }
            if !line.is_empty() {
                line.push(' ');
            }
            line.push_str(word);
        }
        lines.push(line);
        lines
    }
}

/// Columns are not made narrower than this to fit a width.
const NARROWEST: usize = 10;

/// Blanks between columns.
const GAP: usize = 2;

/// A table that is laid out once all its rows are known.
///
/// Widths are those of a terminal (a CJK character takes two cells, a
/// combining mark none). Control characters, which could move the cursor or
/// change colors, are shown as `·`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TextTable {
    columns: Vec<TextColumn>,
    rows: Vec<Vec<String>>,
}

impl TextTable {
    /// A table without rows.
    pub fn new(columns: impl Into<Vec<TextColumn>>) -> Self {
        Self {
            columns: columns.into(),
            rows: Vec::new(),
        }
    }

    /// Adds a row.
    ///
    /// # Panics
    ///
    /// If it has another number of cells than the table has columns.
    pub fn add(&mut self, cells: impl Into<Vec<String>>) {
        let cells = cells.into();
        assert_eq!(cells.len(), self.columns.len());
        self.rows
            .push(cells.iter().map(|cell| printable(cell)).collect());
    }

    /// Whether there are no rows.
    pub fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// The table as lines of text, at most `width` cells wide where one is given.
    ///
    /// Heads of number columns are broken at blanks where their numbers are
    /// narrower. To fit, columns of words are shortened, the widest first, and cut cells
    /// end in `…`. Numbers are never shortened: a table of many numbers may stay
    /// wider than asked for. Columns without any content are left out.
    pub fn render(&self, width: Option<usize>) -> String {
        let shown: Vec<usize> = (0..self.columns.len())
            .filter(|&at| self.rows.iter().any(|row| !row[at].is_empty()))
            .collect();
        let cells: Vec<Vec<String>> = shown.iter().map(|&at| self.aligned(at)).collect();
        let mut widths = Vec::with_capacity(shown.len());
        let mut heads = Vec::with_capacity(shown.len());
        for (&at, cells) in shown.iter().zip(&cells) {
            let column = &self.columns[at];
            let widest = cells.iter().map(|cell| cell.width()).max().unwrap_or(0);
            let head = column.head_lines(widest.max(column.unit.width()));
            let head_width = head.iter().map(|line| line.width()).max().unwrap_or(0);
            widths.push(widest.max(column.unit.width()).max(head_width));
            heads.push(head);
        }
        if let Some(width) = width {
            self.shrink(&shown, &mut widths, width);
        }

        let mut text = String::new();
        let head_lines = heads.iter().map(Vec::len).max().unwrap_or(0);
        for line in 0..head_lines {
            // Short heads stand at the bottom, next to their numbers.
            let cells = heads.iter().map(|head| {
                (line + head.len())
                    .checked_sub(head_lines)
                    .map_or("", |line| head[line].as_str())
            });
            self.push_line(&mut text, &shown, &widths, cells);
        }
        if shown.iter().any(|&at| !self.columns[at].unit.is_empty()) {
            let units = shown.iter().map(|&at| self.columns[at].unit.as_str());
            self.push_line(&mut text, &shown, &widths, units);
        }
        for row in 0..self.rows.len() {
            let line = cells.iter().map(|column| column[row].as_str());
            self.push_line(&mut text, &shown, &widths, line);
        }
        text
    }

    /// The cells of a column, numbers padded so that their points meet.
    fn aligned(&self, at: usize) -> Vec<String> {
        let cells = self.rows.iter().map(|row| row[at].as_str());
        if !self.columns[at].is_number {
            return cells.map(str::to_owned).collect();
        }
        // What follows the last digit before the point: `.25`, ` [1]`, `e-7`.
        let tail = |cell: &str| {
            let digits = cell
                .trim_start_matches('-')
                .bytes()
                .take_while(u8::is_ascii_digit)
                .count();
            match digits {
                0 => None,
                _ => Some(cell.trim_start_matches('-')[digits..].width()),
            }
        };
        let longest = cells.clone().filter_map(tail).max().unwrap_or(0);
        cells
            .map(|cell| {
                let padding = tail(cell).map_or(0, |own| longest - own);
                format!("{cell}{:padding$}", "")
            })
            .collect()
    }

    fn shrink(&self, shown: &[usize], widths: &mut [usize], width: usize) {
        let gaps = GAP * shown.len().saturating_sub(1);
        let mut excess = (widths.iter().sum::<usize>() + gaps).saturating_sub(width);
        while excess > 0 {
            let widest = (0..shown.len())
                .filter(|&at| !self.columns[shown[at]].is_number && widths[at] > NARROWEST)
                .max_by_key(|&at| (widths[at], at));
            let Some(widest) = widest else {
                return;
            };
            widths[widest] -= 1;
            excess -= 1;
        }
    }

    fn push_line<'a>(
        &self,
        text: &mut String,
        shown: &[usize],
        widths: &[usize],
        cells: impl Iterator<Item = &'a str>,
    ) {
        let start = text.len();
        for (position, cell) in cells.enumerate() {
            if position > 0 {
                text.push_str(&" ".repeat(GAP));
            }
            let cell = shortened(cell, widths[position]);
            let padding = " ".repeat(widths[position].saturating_sub(cell.width()));
            if self.columns[shown[position]].is_number {
                text.push_str(&padding);
                text.push_str(&cell);
            } else {
                text.push_str(&cell);
                text.push_str(&padding);
            }
        }
        let end = start + text[start..].trim_end().len();
        text.truncate(end);
        text.push('\n');
    }
}

fn printable(cell: &str) -> String {
    cell.chars()
        .map(|character| match character {
            c if c.is_control() => '·',
            c => c,
        })
        .collect()
}

fn shortened(cell: &str, width: usize) -> String {
    if cell.width() <= width {
        return cell.to_owned();
    }
    let mut short = String::new();
    let mut used = 0;
    for character in cell.chars() {
        let own = character.width().unwrap_or(0);
        if used + own + 1 > width {
            break;
        }
        used += own;
        short.push(character);
    }
    short.push('…');
    short
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sample() -> TextTable {
        let mut table = TextTable::new([
            TextColumn::text("name"),
            TextColumn::number("boiling point", "K"),
            TextColumn::text("empty"),
        ]);
        table.add(["water".into(), "373.15".into(), String::new()]);
        table.add(["水".into(), "1000".into(), String::new()]);
        table.add([
            "bad\u{1b}[31m name of great length".into(),
            "–".into(),
            String::new(),
        ]);
        table
    }

    #[test]
    fn numbers_meet_at_the_point_and_wide_characters_take_two_cells() {
        assert_eq!(
            sample().render(None),
            [
                "                               boiling",
                "name                             point",
                "                                     K",
                "water                           373.15",
                "水                             1000",
                "bad·[31m name of great length        –",
                "",
            ]
            .join("\n")
        );
    }

    #[test]
    fn words_are_cut_to_fit_and_numbers_are_not() {
        let text = sample().render(Some(30));
        assert!(text.lines().all(|line| line.width() <= 30), "{text}");
        assert!(text.contains("bad·[31m name of gre…"), "{text}");
        let narrow = sample().render(Some(5));
        assert!(narrow.contains("373.15"), "{narrow}");
    }

    #[test]
    fn a_table_without_rows_is_empty() {
        assert_eq!(TextTable::new([TextColumn::text("name")]).render(None), "");
    }
}
