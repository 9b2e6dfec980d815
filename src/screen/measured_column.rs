//! Columns of a pool that hold measured values: what their heads say.
//!
//! A head names a property as briefs do, its unit in square brackets, and the
//! temperature where the property depends on one: `boiling_point [degC]`,
//! `liquid_density [g/cm3] at 20 degC`.

use std::sync::Arc;

use thiserror::Error;

use crate::quantity::unit::{self, Unit, UnitError, nearest};
use crate::quantity::{Dimension, Estimate, Property, STANDARD_ATMOSPHERE_PA, Status};

/// Two temperatures nearer than this are one, K.
const SAME_TEMPERATURE_K: f64 = 0.01;
/// How far a pressure may be from the standard atmosphere, as a share of it.
const NORMAL_PRESSURE_WIDTH: f64 = 1e-3;
/// Temperatures in K above which no molecule is left to measure.
const HIGHEST_TEMPERATURE_K: f64 = 3_000.0;
/// Densities of liquids in kg/m3; what lies outside is in another unit.
const LIQUID_DENSITIES: std::ops::RangeInclusive<f64> = 100.0..=10_000.0;

/// Why a column of measured values cannot be used. The message goes on after
/// the name of the column.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum ColumnFault {
    /// A unit that is none, or of something else.
    #[error("{0}\n  {remedy}", remedy = .0.remedy())]
    Unit(UnitError),
    /// No unit between the brackets.
    #[error("has no unit between its brackets\n  {remedy}", remedy = unit::accepted(*.0))]
    NoUnit(Dimension),
    /// What follows `at` is no quantity.
    #[error("states after `at` what {0}\n  {remedy}", remedy = .0.remedy())]
    At(UnitError),
    /// Something else than `at` after the unit.
    #[error("goes on after its unit with `{rest}`; write {form}")]
    Rest {
        /// What it goes on with.
        rest: String,
        /// The form to write.
        form: String,
    },
    /// A property that depends on temperature, without one.
    #[error("needs the temperature of its values; write {form}")]
    NoTemperature {
        /// The form to write.
        form: String,
    },
    /// A temperature that does not matter.
    #[error("states a temperature, but {property} does not depend on one; write {form}")]
    NeedlessTemperature {
        /// The property.
        property: &'static str,
        /// The form to write.
        form: String,
    },
    /// A boiling point at another pressure.
    #[error(
        "is of another pressure than 101.325 kPa, where a boiling point is not used; the same as a vapor pressure is: `vapor_pressure [kPa] at 80 degC`"
    )]
    OtherPressure,
    /// Two columns for one property at one temperature.
    #[error("says the same as the column `{other}`; leave one of them out")]
    Twice {
        /// The earlier column.
        other: String,
    },
}

/// A column of measured values.
#[derive(Clone, Debug)]
pub(super) struct MeasuredColumn {
    /// Position among the cells of a line.
    pub(super) position: usize,
    pub(super) head: Arc<str>,
    property: Property,
    unit: Option<&'static Unit>,
    temperature_k: Option<f64>,
    source: Arc<str>,
}

/// What the heads of a pool say of measured values.
#[derive(Debug, Default)]
pub(super) struct MeasuredHeads {
    pub(super) columns: Vec<MeasuredColumn>,
    /// Columns that look like measured values and are not used.
    pub(super) notes: Vec<String>,
}

impl MeasuredHeads {
    /// Reads the heads of the pool of this name.
    ///
    /// # Errors
    ///
    /// The head that is at fault, and why.
    pub(super) fn read(pool: &str, heads: &[String]) -> Result<Self, (String, ColumnFault)> {
        let mut all = Self::default();
        for (position, head) in heads.iter().enumerate() {
            let column = match meaning(head).map_err(|fault| (head.clone(), fault))? {
                Meaning::Other => continue,
                Meaning::Unused(why) => {
                    let note =
                        format!("{pool}: the column `{head}` is carried along and not used: {why}");
                    all.notes.push(note);
                    continue;
                }
                Meaning::Measured(property, unit, temperature_k) => MeasuredColumn {
                    position,
                    head: head.as_str().into(),
                    property,
                    unit,
                    temperature_k,
                    source: format!("pool {pool}, column `{head}`").into(),
                },
            };
            if let Some(other) = all.columns.iter().find(|other| column.is_like(other)) {
                let other = other.head.to_string();
                return Err((head.clone(), ColumnFault::Twice { other }));
            }
            all.columns.push(column);
        }
        Ok(all)
    }
}

/// What a head means.
enum Meaning {
    /// No measured values.
    Other,
    /// Perhaps measured values, but not used for this reason.
    Unused(String),
    Measured(Property, Option<&'static Unit>, Option<f64>),
}

fn meaning(head: &str) -> Result<Meaning, ColumnFault> {
    let bracketed = head
        .split_once('[')
        .and_then(|(id, rest)| Some((id, rest.split_once(']')?)));
    let Some((id, (unit, rest))) = bracketed else {
        let id = head.split_once(" at ").map_or(head, |(id, _)| id);
        return Ok(match Property::from_id(&folded(id)) {
            Some(property) if property != Property::MolarMass => {
                Meaning::Unused(format!("it states no unit; write {}", form(property)))
            }
            _ => Meaning::Other,
        });
    };
    let id = folded(id);
    let Some(property) = Property::from_id(&id) else {
        let ids = Property::ALL.into_iter().map(Property::id);
        return Ok(match nearest(&id, ids).and_then(Property::from_id) {
            Some(meant) => Meaning::Unused(format!(
                "there is no property `{id}`; did you mean {}?",
                form(meant)
            )),
            None => Meaning::Other,
        });
    };
    if property == Property::MolarMass {
        let why = "a molar mass follows from the structure".to_owned();
        return Ok(Meaning::Unused(why));
    }
    let dimension = property.dimension();
    let unit = match (unit.trim(), dimension) {
        ("" | "-", Dimension::Number) => None,
        ("", _) => return Err(ColumnFault::NoUnit(dimension)),
        (unit, _) => unit::named(unit, dimension).map_err(ColumnFault::Unit)?,
    };
    let rest = rest.trim();
    let at = match rest.strip_prefix("at ") {
        Some(at) => Some(at),
        None if rest.is_empty() => None,
        None => {
            return Err(ColumnFault::Rest {
                rest: rest.to_owned(),
                form: form(property),
            });
        }
    };
    let temperature_k = match at {
        None if property.depends_on_temperature() => {
            let form = form(property);
            return Err(ColumnFault::NoTemperature { form });
        }
        None => None,
        Some(at) if property.depends_on_temperature() => {
            Some(unit::parse(at, Dimension::Temperature).map_err(ColumnFault::At)?)
        }
        Some(at) if property == Property::BoilingPoint => {
            let pressure_pa = unit::parse(at, Dimension::Pressure).map_err(ColumnFault::At)?;
            if (pressure_pa / STANDARD_ATMOSPHERE_PA - 1.0).abs() > NORMAL_PRESSURE_WIDTH {
                return Err(ColumnFault::OtherPressure);
            }
            None
        }
        Some(_) => {
            return Err(ColumnFault::NeedlessTemperature {
                property: property.id(),
                form: form(property),
            });
        }
    };
    Ok(Meaning::Measured(property, unit, temperature_k))
}

/// The name of a property however a spreadsheet writes it.
fn folded(id: &str) -> String {
    id.trim().to_ascii_lowercase().replace([' ', '-'], "_")
}

/// A head that can be written for a property.
fn form(property: Property) -> String {
    let unit = match property.dimension() {
        Dimension::Number => "-",
        Dimension::Temperature => "degC",
        dimension => unit::reading_unit(dimension).map_or("-", |unit| unit.symbol),
    };
    let at = match property.depends_on_temperature() {
        true => " at 25 degC",
        false => "",
    };
    format!("`{} [{unit}]{at}`", property.id())
}

impl MeasuredColumn {
    /// Whether both columns say the same.
    fn is_like(&self, other: &Self) -> bool {
        let same_temperature = match (self.temperature_k, other.temperature_k) {
            (Some(one), Some(two)) => (one - two).abs() < SAME_TEMPERATURE_K,
            (one, two) => one == two,
        };
        self.property == other.property && same_temperature
    }

    /// The value of a cell in SI; `None` where it is blank.
    ///
    /// # Errors
    ///
    /// What is wrong with it, as the end of a sentence.
    pub(super) fn value(&self, cell: &str) -> Result<Option<f64>, &'static str> {
        if cell.is_empty() {
            return Ok(None);
        }
        let number: f64 = match cell.parse() {
            Ok(number) => number,
            Err(_) if cell.contains(',') => {
                return Err("which is no number; decimals take a point");
            }
            Err(_) => return Err("which is no number"),
        };
        let value = self.unit.map_or(number, |unit| unit.to_si(number));
        if !value.is_finite() {
            return Err("which is no finite number");
        }
        if self.property.is_always_positive() && value <= 0.0 {
            return Err(match self.property.dimension() {
                Dimension::Temperature => "which is not above 0 K",
                _ => "which is not above 0",
            });
        }
        match self.property.dimension() {
            Dimension::Temperature if value > HIGHEST_TEMPERATURE_K => {
                Err("which is above 3000 K, where no molecule lasts")
            }
            Dimension::Density if !LIQUID_DENSITIES.contains(&value) => {
                Err("which is outside 100 to 10000 kg/m3, where liquids lie; is the unit right?")
            }
            _ => Ok(Some(value)),
        }
    }

    /// A value of the column as measured data.
    pub(super) fn estimate(&self, value: f64) -> (Property, Estimate) {
        let mut estimate = Estimate::new(value, "measured");
        estimate.status = Status::Measured;
        estimate.temperature_k = self.temperature_k;
        estimate.source = Some(Arc::clone(&self.source));
        (self.property, estimate)
    }
}
