//! Rows of the comparison with relatives.

use serde::Serialize;

use super::csv_line::{CsvLine, CsvRow};
use super::json::rounded;
use super::property::{in_reading_unit, percent, property_id, signed};
use super::text_table::{TextColumn, TextTable};
use crate::quantity::Property;
use crate::quantity::number::LOOK_UP_DIGITS;
use crate::quantity::unit::{digits_for_reading, reading_unit, si_symbol};

/// One property of one relative, or of the family as a whole.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct FamilyRow<'a> {
    /// Line of the input, or position of the argument, from 1.
    pub line: u64,
    /// Name of the molecule asked for; may be empty.
    pub name: &'a str,
    /// Its SMILES.
    pub smiles: &'a str,
    /// Its family; empty where none fits.
    pub family: &'a str,
    /// `relative`; of the family `mean`, `mean-absolute`, `worst`; `absent`
    /// where no family fits.
    pub kind: &'static str,
    /// The property; `None` where no family fits.
    #[serde(serialize_with = "maybe_property_id")]
    pub property: Option<Property>,
    /// The temperature of both values, in K, where it matters.
    #[serde(serialize_with = "rounded")]
    pub temperature_k: Option<f64>,
    /// The relative; of a worst error, whose it is.
    pub relative: &'a str,
    /// Its SMILES.
    pub relative_smiles: &'a str,
    /// The measured value, in the unit of tables.
    #[serde(serialize_with = "rounded")]
    pub measured: Option<f64>,
    /// The estimate, without measured data.
    #[serde(serialize_with = "rounded")]
    pub estimated: Option<f64>,
    /// The estimate less the measured value.
    #[serde(serialize_with = "rounded")]
    pub difference: Option<f64>,
    /// Unit of the three.
    pub unit: &'static str,
    /// Method of the estimate.
    pub method: &'static str,
    /// How the family was found, or why a value is absent.
    pub detail: String,
}

fn maybe_property_id<S: serde::Serializer>(
    property: &Option<Property>,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    match property {
        Some(property) => property_id(property, serializer),
        None => serializer.serialize_str(""),
    }
}

/// Means over the relatives of one property, and the worst of them.
fn summed<'a>(rows: &[FamilyRow<'a>]) -> Option<[FamilyRow<'a>; 3]> {
    let compared: Vec<(&FamilyRow<'a>, f64)> = rows
        .iter()
        .filter_map(|row| Some((row, row.difference?)))
        .collect();
    let count = compared.len() as f64;
    let worst = compared
        .iter()
        .max_by(|(_, one), (_, other)| one.abs().total_cmp(&other.abs()))?
        .0;
    let of_all = |kind, difference: f64| FamilyRow {
        kind,
        relative: "",
        relative_smiles: "",
        measured: None,
        estimated: None,
        difference: Some(difference / count),
        method: "",
        detail: format!("of {} relatives", compared.len()),
        ..worst.clone()
    };
    Some([
        of_all("mean", compared.iter().map(|(_, error)| error).sum()),
        of_all(
            "mean-absolute",
            compared.iter().map(|(_, error)| error.abs()).sum(),
        ),
        FamilyRow {
            kind: "worst",
            ..worst.clone()
        },
    ])
}

/// The rows of one property with those of the family after them.
pub fn with_summary(mut rows: Vec<FamilyRow<'_>>) -> Vec<FamilyRow<'_>> {
    let summary = summed(&rows);
    rows.extend(summary.into_iter().flatten());
    rows
}

impl CsvRow for FamilyRow<'_> {
    const HEAD: &'static str = "line,name,smiles,family,kind,property,temperature_k,relative,\
         relative_smiles,measured,estimated,difference,unit,method,detail";

    fn write_csv(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        line.integer(self.line)
            .text(self.name)
            .text(self.smiles)
            .text(self.family)
            .text(self.kind)
            .text(self.property.map_or("", Property::id))
            .number_or_empty(self.temperature_k, LOOK_UP_DIGITS)
            .text(self.relative)
            .text(self.relative_smiles)
            .number_or_empty(self.measured, LOOK_UP_DIGITS)
            .number_or_empty(self.estimated, LOOK_UP_DIGITS)
            .number_or_empty(self.difference, LOOK_UP_DIGITS)
            .text(self.unit)
            .text(self.method)
            .text(&self.detail);
        line.end();
    }
}

/// One property of the relatives for people: those that can be compared, then
/// the mean, the mean absolute and the worst difference.
pub fn family_text(property: Property, rows: &[FamilyRow<'_>], width: Option<usize>) -> String {
    let dimension = property.dimension();
    let unit = reading_unit(dimension).map_or(si_symbol(dimension), |unit| unit.symbol);
    let mut table = TextTable::new([
        TextColumn::text(format!("  {}", property.id())),
        TextColumn::number("measured", unit),
        TextColumn::number("estimate", unit),
        TextColumn::number("difference", unit),
        TextColumn::number("", "%"),
    ]);
    let shown = |value: Option<f64>| {
        value.map_or(String::new(), |value| {
            digits_for_reading(in_reading_unit(value, dimension), dimension)
        })
    };
    for row in rows {
        let Some(difference) = row.difference else {
            continue;
        };
        let what = match row.kind {
            "relative" => row.relative.to_owned(),
            "mean" => format!("mean {}", row.detail),
            "mean-absolute" => "mean absolute".into(),
            kind => format!("{kind}: {}", row.relative),
        };
        let digits = shown(row.difference);
        table.add([
            format!("  {what}"),
            shown(row.measured),
            shown(row.estimated),
            match row.kind {
                "mean-absolute" => digits,
                _ => signed(digits),
            },
            row.measured.map_or(String::new(), |measured| {
                percent(difference, measured, property)
            }),
        ]);
    }
    if table.is_empty() {
        return format!(
            "  {}: no relative is measured and estimated\n",
            property.id()
        );
    }
    table.render(width)
}
