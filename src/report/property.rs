//! Rows of the property look-up.

use serde::Serialize;

use super::csv_line::{CsvLine, CsvRow};
use super::json::rounded;
use super::text_table::{TextColumn, TextTable};
use crate::quantity::number::{self, LOOK_UP_DIGITS};
use crate::quantity::unit::{digits_for_reading, reading_unit, si_symbol, to_table};
use crate::quantity::{Outcome, Property};

/// One property of one molecule, in the unit of tables.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct PropertyRow<'a> {
    /// Line of the input, or position of the argument, from 1.
    pub line: u64,
    /// Name as given; may be empty.
    pub name: &'a str,
    /// SMILES.
    pub smiles: &'a str,
    /// The property.
    #[serde(serialize_with = "property_id")]
    pub property: Property,
    /// The temperature the value belongs to, in K.
    #[serde(serialize_with = "rounded")]
    pub temperature_k: Option<f64>,
    /// The value; `None` where it is absent.
    #[serde(serialize_with = "rounded")]
    pub value: Option<f64>,
    /// Its unit; empty for a bare number.
    pub unit: &'static str,
    /// Lower end of the 90 % interval.
    #[serde(serialize_with = "rounded")]
    pub low: Option<f64>,
    /// Upper end of the 90 % interval.
    #[serde(serialize_with = "rounded")]
    pub high: Option<f64>,
    /// Identifier of the method; empty where the value is absent.
    pub method: &'static str,
    /// `estimated`, `measured` or `absent`.
    pub status: &'static str,
    /// Flags and source, or the reason for the absence.
    pub detail: String,
}

impl<'a> PropertyRow<'a> {
    /// The row of a property; `temperature_k` is the temperature asked for,
    /// shown for properties that depend on it even where the value is absent.
    pub fn new(
        line: u64,
        name: &'a str,
        smiles: &'a str,
        property: Property,
        temperature_k: f64,
        outcome: &Outcome,
    ) -> Self {
        let dimension = property.dimension();
        let asked = property.depends_on_temperature().then_some(temperature_k);
        let unit = si_symbol(dimension);
        match outcome {
            Ok(estimate) => {
                let mut detail = estimate.flags.to_string();
                if let Some(source) = &estimate.source {
                    if !detail.is_empty() {
                        detail.push_str("; ");
                    }
                    detail.push_str(source);
                }
                let interval = estimate.interval;
                Self {
                    line,
                    name,
                    smiles,
                    property,
                    temperature_k: estimate.temperature_k.or(asked),
                    value: Some(to_table(estimate.value, dimension)),
                    unit,
                    low: interval.map(|(low, _)| to_table(low, dimension)),
                    high: interval.map(|(_, high)| to_table(high, dimension)),
                    method: estimate.method,
                    status: estimate.status.id(),
                    detail,
                }
            }
            Err(absent) => Self {
                line,
                name,
                smiles,
                property,
                temperature_k: asked,
                value: None,
                unit,
                low: None,
                high: None,
                method: "",
                status: "absent",
                detail: absent.to_string(),
            },
        }
    }
}

impl CsvRow for PropertyRow<'_> {
    const HEAD: &'static str =
        "line,name,smiles,property,temperature_k,value,unit,low,high,method,status,detail";

    fn write_csv(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        line.integer(self.line)
            .text(self.name)
            .text(self.smiles)
            .text(self.property.id())
            .number_or_empty(self.temperature_k, LOOK_UP_DIGITS)
            .number_or_empty(self.value, LOOK_UP_DIGITS)
            .text(self.unit)
            .number_or_empty(self.low, LOOK_UP_DIGITS)
            .number_or_empty(self.high, LOOK_UP_DIGITS)
            .text(self.method)
            .text(self.status)
            .text(&self.detail);
        line.end();
    }
}

fn property_id<S: serde::Serializer>(
    property: &Property,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    serializer.serialize_str(property.id())
}

/// The properties of one molecule for people, in the units people read.
pub fn property_text<'a>(
    rows: impl IntoIterator<Item = &'a PropertyRow<'a>>,
    width: Option<usize>,
) -> String {
    let mut table = TextTable::new([
        TextColumn::text("property"),
        TextColumn::number("value", ""),
        TextColumn::text("unit"),
        TextColumn::number("at", "K"),
        TextColumn::text("status"),
        TextColumn::text("method"),
        TextColumn::text("detail"),
    ]);
    for row in rows {
        let unit = reading_unit(row.property.dimension());
        let (value, symbol) = match (row.value, unit) {
            (None, _) => (String::from("–"), ""),
            (Some(value), None) => (number::for_reading(value), ""),
            (Some(value), Some(unit)) => {
                // Where tables and readers share a unit, the value is in it already.
                let shown = match unit.symbol == row.unit {
                    true => value,
                    false => unit.from_si(value),
                };
                let shown = digits_for_reading(shown, row.property.dimension());
                (shown, unit.symbol)
            }
        };
        table.add([
            row.property.id().into(),
            value,
            symbol.into(),
            row.temperature_k.map(number::short).unwrap_or_default(),
            row.status.into(),
            row.method.into(),
            row.detail.clone(),
        ]);
    }
    table.render(width)
}
