//! Rows of the mixture look-up.

use serde::Serialize;

use super::csv_line::{CsvLine, CsvRow};
use super::json::rounded;
use super::text_table::{TextColumn, TextTable};
use crate::quantity::Dimension;
use crate::quantity::number::{self, LOOK_UP_DIGITS};
use crate::quantity::unit::digits_for_reading;

/// What stands behind a value of a mixture.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum MixtureStatus {
    /// Computed by the model.
    Calculated,
    /// Taken from a measurement.
    Measured,
    /// Something it needs is missing; the detail says what.
    NotAssessable,
    /// An iteration did not reach its tolerance.
    NotConverged,
}

impl MixtureStatus {
    /// The word of the `status` column.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Calculated => "calculated",
            Self::Measured => "measured",
            Self::NotAssessable => "not-assessable",
            Self::NotConverged => "not-converged",
        }
    }
}

/// One quantity of one component, or of the whole, by one model.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct MixtureRow<'a> {
    /// Name of the quantity.
    pub quantity: &'a str,
    /// Component, from 1; `None` for the whole.
    pub component: Option<u32>,
    /// The value in SI; `None` where there is none.
    #[serde(serialize_with = "rounded")]
    pub value: Option<f64>,
    /// Its SI unit; empty for a bare number.
    pub unit: &'a str,
    /// Identifier of the model.
    pub model: &'a str,
    /// What stands behind it.
    pub status: MixtureStatus,
    /// Flags, or the reason why there is no value.
    pub detail: String,
    /// Lower end of the 90 % interval, where there is one.
    #[serde(serialize_with = "rounded")]
    pub low: Option<f64>,
    /// Upper end.
    #[serde(serialize_with = "rounded")]
    pub high: Option<f64>,
}

impl CsvRow for MixtureRow<'_> {
    const HEAD: &'static str = "quantity,component,value,unit,model,status,detail,low,high";

    fn write_csv(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        line.text(self.quantity);
        match self.component {
            Some(component) => line.integer(u64::from(component)),
            None => line.empty(),
        };
        line.number_or_empty(self.value, LOOK_UP_DIGITS)
            .text(self.unit)
            .text(self.model)
            .text(self.status.id())
            .text(&self.detail)
            .number_or_empty(self.low, LOOK_UP_DIGITS)
            .number_or_empty(self.high, LOOK_UP_DIGITS);
        line.end();
    }
}

/// A mixture for people: models side by side, a row for each quantity and
/// component, reasons below the table.
///
/// `components` are the names, in order.
pub fn mixture_text(rows: &[MixtureRow<'_>], components: &[&str], width: Option<usize>) -> String {
    let mut models: Vec<&str> = Vec::new();
    let mut lines: Vec<(&str, Option<u32>)> = Vec::new();
    for row in rows {
        if !models.contains(&row.model) {
            models.push(row.model);
        }
        if !lines.contains(&(row.quantity, row.component)) {
            lines.push((row.quantity, row.component));
        }
    }
    let mut columns = vec![
        TextColumn::text("quantity"),
        TextColumn::text("component"),
        TextColumn::text("unit"),
    ];
    let with_interval: Vec<bool> = models
        .iter()
        .map(|model| {
            rows.iter()
                .any(|row| row.model == *model && row.low.is_some())
        })
        .collect();
    for (model, with_interval) in models.iter().zip(&with_interval) {
        columns.push(TextColumn::number(*model, ""));
        if *with_interval {
            columns.extend(["low", "high"].map(|end| TextColumn::number(end, "")));
        }
    }
    let mut table = TextTable::new(columns);
    let mut notes: Vec<String> = Vec::new();
    for (quantity, component) in lines {
        let name = component
            .and_then(|component| components.get(component as usize - 1))
            .copied()
            .unwrap_or_default();
        let mut cells = vec![quantity.to_owned(), name.to_owned(), String::new()];
        for (model, with_interval) in models.iter().zip(&with_interval) {
            let row = rows.iter().find(|row| {
                (row.quantity, row.component, row.model) == (quantity, component, *model)
            });
            let mut cell = match row.and_then(|row| row.value) {
                Some(value) if row.is_some_and(|row| row.unit == "K") => {
                    digits_for_reading(value, Dimension::Temperature)
                }
                Some(value) => number::for_reading(value),
                None => "–".to_owned(),
            };
            if let Some(row) = row {
                row.unit.clone_into(&mut cells[2]);
                if !row.detail.is_empty() {
                    let note = match row.detail.starts_with(*model) {
                        true => row.detail.clone(),
                        false => format!("{model}: {}", row.detail),
                    };
                    let mark = match notes.iter().position(|known| *known == note) {
                        Some(known) => known + 1,
                        None => {
                            notes.push(note);
                            notes.len()
                        }
                    };
                    cell.push_str(&format!(" [{mark}]"));
                }
            }
            cells.push(cell);
            if *with_interval {
                let ends = [row.and_then(|row| row.low), row.and_then(|row| row.high)];
                cells.extend(ends.map(|end| end.map_or(String::new(), number::for_reading)));
            }
        }
        table.add(cells);
    }
    let mut text = table.render(width);
    for (position, note) in notes.iter().enumerate() {
        text.push_str(&format!("[{}] {note}\n", position + 1));
    }
    text
}
