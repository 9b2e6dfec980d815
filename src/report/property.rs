//! Rows of the property look-up.

use serde::Serialize;

use super::csv_line::{CsvLine, CsvRow};
use super::json::rounded;
use super::text_table::{TextColumn, TextTable};
use crate::quantity::number::{self, LOOK_UP_DIGITS};
use crate::quantity::unit::{digits_for_reading, reading_unit, si_symbol, to_table};
use crate::quantity::{Dimension, Outcome, Property, Status};

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
    /// What the method says where the value is measured, in the same unit.
    #[serde(serialize_with = "rounded")]
    pub estimated_value: Option<f64>,
    /// Identifier of that method; empty where there is no such value.
    pub estimated_method: &'static str,
    /// The estimate less the measured value, in the same unit.
    #[serde(serialize_with = "rounded")]
    pub difference: Option<f64>,
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
                if let Some(note) = &estimate.note {
                    if !detail.is_empty() {
                        detail.push_str("; ");
                    }
                    detail.push_str(note);
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
                    estimated_value: None,
                    estimated_method: "",
                    difference: None,
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
                estimated_value: None,
                estimated_method: "",
                difference: None,
            },
        }
    }

    /// The same row with what the methods say without measured data: shown
    /// where the value is measured and the methods have one.
    #[must_use]
    pub fn beside(mut self, estimate: &Outcome) -> Self {
        let (Some(measured), Ok(estimate)) = (self.value, estimate) else {
            return self;
        };
        if self.status == Status::Measured.id() && estimate.status == Status::Estimated {
            let value = to_table(estimate.value, self.property.dimension());
            self.estimated_value = Some(value);
            self.estimated_method = estimate.method;
            self.difference = Some(value - measured);
        }
        self
    }
}

impl CsvRow for PropertyRow<'_> {
    const HEAD: &'static str = "line,name,smiles,property,temperature_k,value,unit,low,high,method,status,detail,\
         estimated_value,estimated_method,difference";

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
            .text(&self.detail)
            .number_or_empty(self.estimated_value, LOOK_UP_DIGITS)
            .text(self.estimated_method)
            .number_or_empty(self.difference, LOOK_UP_DIGITS);
        line.end();
    }
}

pub(super) fn property_id<S: serde::Serializer>(
    property: &Property,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    serializer.serialize_str(property.id())
}

/// The properties of one molecule for people, in the units people read; where
/// a value is measured, what the methods say and how far off it is.
pub fn property_text<'a>(
    rows: impl IntoIterator<Item = &'a PropertyRow<'a>>,
    width: Option<usize>,
) -> String {
    let mut table = TextTable::new([
        TextColumn::text("property"),
        TextColumn::number("value", ""),
        TextColumn::number("low", ""),
        TextColumn::number("high", ""),
        TextColumn::text("unit"),
        TextColumn::number("at", "K"),
        TextColumn::text("by"),
        TextColumn::number("estimate", ""),
        TextColumn::number("difference", ""),
        TextColumn::number("", "%"),
        TextColumn::text("detail"),
    ]);
    for row in rows {
        let dimension = row.property.dimension();
        let shown = |value: Option<f64>| value.map(|value| in_reading_unit(value, dimension));
        let symbol = match row.value {
            Some(_) => reading_unit(dimension).map_or("", |unit| unit.symbol),
            None => "",
        };
        let value =
            shown(row.value).map_or("–".into(), |value| digits_for_reading(value, dimension));
        let end = |value: Option<f64>| {
            shown(value).map_or(String::new(), |value| digits_for_reading(value, dimension))
        };
        let estimate = shown(row.estimated_value);
        let (difference, percent) = match (row.value, row.difference) {
            (Some(measured), Some(difference)) => (
                signed(digits_for_reading(
                    in_reading_unit(difference, dimension),
                    dimension,
                )),
                percent(difference, measured, row.property),
            ),
            _ => (String::new(), String::new()),
        };
        table.add([
            row.property.id().into(),
            value,
            end(row.low),
            end(row.high),
            symbol.into(),
            row.temperature_k.map(number::short).unwrap_or_default(),
            // A measured value says so in place of a method, an absent one in its detail.
            row.method.into(),
            estimate.map_or(String::new(), |value| digits_for_reading(value, dimension)),
            difference,
            percent,
            match row.estimated_method {
                "" => row.detail.clone(),
                method => format!("estimate by {method}; {}", row.detail),
            },
        ]);
    }
    table.render(width)
}

/// A value of a table, or a difference of two, in the unit that people read;
/// none of these has its zero elsewhere.
pub(super) fn in_reading_unit(value: f64, dimension: Dimension) -> f64 {
    match reading_unit(dimension) {
        // Where tables and readers share a unit, the value is in it already.
        Some(unit) if unit.symbol != si_symbol(dimension) => unit.from_si(value),
        _ => value,
    }
}

/// A difference with its sign, whichever way it points.
pub(super) fn signed(digits: String) -> String {
    match digits.starts_with('-') {
        true => digits,
        false => format!("+{digits}"),
    }
}

/// A difference in percent of the measured value; empty where that says
/// nothing, as of a temperature or of what is counted from a chosen zero.
pub(super) fn percent(difference: f64, measured: f64, property: Property) -> String {
    if property.has_natural_zero() && measured > 0.0 {
        signed(format!("{:.1}", 100.0 * difference / measured))
    } else {
        String::new()
    }
}
