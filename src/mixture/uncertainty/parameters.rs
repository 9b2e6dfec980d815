//! From the table of parameters to the error models.

use super::class::{ChemicalClass, Likeness};
use super::dilution::{ActivityErrors, CLASSES, Cell, ErrorModel, Pair, Slopes};
use crate::mixture::{ActivityModel, ModelStatus, TableFile};
use crate::table::{Column, Row, Table, TableError};

/// Parameters of one model while they are read.
struct Reading {
    model: ActivityModel,
    middle: Effects,
    ln_scale: Effects,
    slopes: Slopes,
    quantiles: (f64, f64),
    pairs: [[Pair; 2]; Likeness::FITTED.len()],
    rows: [[u32; CLASSES]; 2],
}

/// A constant, an effect of each class, and one of each two classes together.
#[derive(Default)]
struct Effects {
    constant: f64,
    of_solute: [f64; CLASSES],
    of_solvent: [f64; CLASSES],
    of_both: [[f64; CLASSES]; CLASSES],
}

impl Effects {
    fn put(&mut self, solute: Option<usize>, solvent: Option<usize>, value: f64) {
        match (solute, solvent) {
            (None, None) => self.constant = value,
            (Some(solute), None) => self.of_solute[solute] = value,
            (None, Some(solvent)) => self.of_solvent[solvent] = value,
            (Some(solute), Some(solvent)) => self.of_both[solute][solvent] = value,
        }
    }

    fn at(&self, solute: usize, solvent: usize) -> f64 {
        self.constant
            + self.of_solute[solute]
            + self.of_solvent[solvent]
            + self.of_both[solute][solvent]
    }
}

struct Columns {
    model: Column,
    term: Column,
    solute: Column,
    solvent: Column,
    value: Column,
}

impl ActivityErrors {
    /// What is built into the program.
    ///
    /// # Errors
    ///
    /// None unless the built-in file is broken, which the tests rule out.
    pub fn built_in() -> Result<Self, TableError> {
        Self::read(Self::BUILT_IN)
    }

    /// Reads a table of parameters, one a row: `model,term,solute,solvent,value`.
    ///
    /// Terms: `middle` and `ln_scale` (blank classes: the constant; classes that
    /// are not listed have an effect of 0, so that they are taken for average);
    /// `slope` with `magnitude`, `negative`, `solute_surface`,
    /// `solvent_surface` or `cold` in place of the solute class; `quantile` with `low` or
    /// `high` in its place; `correlation` and `factor` with the likeness of two
    /// solutes in its place and `water` or blank for the solvent; `rows`.
    ///
    /// # Errors
    ///
    /// [`TableError`] with line and column: a model, term or class that is not
    /// known, a correlation outside −1 to 1, a low quantile above the high one.
    pub fn read(file: TableFile<'_>) -> Result<Self, TableError> {
        let table = Table::read(file.name, file.text)?;
        let columns = Columns {
            model: table.column("model")?,
            term: table.column("term")?,
            solute: table.column("solute")?,
            solvent: table.column("solvent")?,
            value: table.column_in("value", "-")?,
        };
        let mut models: Vec<Reading> = Vec::new();
        for row in table.rows() {
            let model = match ActivityModel::from_id(row.text(columns.model)) {
                Some(ModelStatus::BuiltIn(model)) => model,
                _ => return Err(row.fault(columns.model, "is no built-in activity model")),
            };
            let at = models.iter().position(|known| known.model == model);
            let at = at.unwrap_or_else(|| {
                models.push(Reading::new(model));
                models.len() - 1
            });
            models[at].row(row, &columns)?;
        }
        let models = models.into_iter().map(Reading::finish).collect();
        Ok(Self { models })
    }
}

impl Reading {
    fn new(model: ActivityModel) -> Self {
        Self {
            model,
            middle: Effects::default(),
            ln_scale: Effects::default(),
            slopes: Slopes::default(),
            quantiles: (0.0, 0.0),
            pairs: Default::default(),
            rows: Default::default(),
        }
    }

    fn row(&mut self, row: Row<'_>, columns: &Columns) -> Result<(), TableError> {
        let value = row.required_number(columns.value)?;
        let class = |column: Column| match row.text(column) {
            "" => Ok(None),
            id => match ChemicalClass::from_id(id) {
                Some(class) => Ok(Some(class as usize)),
                None => Err(row.fault(column, "is no chemical class")),
            },
        };
        match row.text(columns.term) {
            "middle" => {
                let (solute, solvent) = (class(columns.solute)?, class(columns.solvent)?);
                self.middle.put(solute, solvent, value);
            }
            "ln_scale" => {
                let (solute, solvent) = (class(columns.solute)?, class(columns.solvent)?);
                self.ln_scale.put(solute, solvent, value);
            }
            "rows" => {
                for (side, column) in [columns.solute, columns.solvent].into_iter().enumerate() {
                    if let Some(class) = class(column)? {
                        self.rows[side][class] = value as u32;
                    }
                }
            }
            "slope" => {
                *match row.text(columns.solute) {
                    "magnitude" => &mut self.slopes.magnitude,
                    "negative" => &mut self.slopes.negative,
                    "solute_surface" => &mut self.slopes.solute_surface,
                    "solvent_surface" => &mut self.slopes.solvent_surface,
                    "cold" => &mut self.slopes.cold,
                    _ => return Err(row.fault(columns.solute, "is no slope")),
                } = value;
            }
            "quantile" => {
                *match row.text(columns.solute) {
                    "low" => &mut self.quantiles.0,
                    "high" => &mut self.quantiles.1,
                    _ => return Err(row.fault(columns.solute, "is neither `low` nor `high`")),
                } = value;
            }
            term @ ("correlation" | "factor") => {
                let likeness = row.text(columns.solute);
                let at = Likeness::FITTED
                    .iter()
                    .position(|known| known.id() == likeness)
                    .ok_or_else(|| row.fault(columns.solute, "is no likeness"))?;
                let water = match row.text(columns.solvent) {
                    "" => 0,
                    "water" => 1,
                    _ => return Err(row.fault(columns.solvent, "is neither blank nor `water`")),
                };
                let pair = &mut self.pairs[at][water];
                if term == "factor" {
                    pair.factor = value;
                } else if (-1.0..=1.0).contains(&value) {
                    pair.correlation = value;
                } else {
                    return Err(row.fault(columns.value, "is no correlation from -1 to 1"));
                }
            }
            _ => return Err(row.fault(columns.term, "is no term of an error model")),
        }
        Ok(())
    }

    fn finish(self) -> ErrorModel {
        let cell = |solute: usize, solvent: usize| Cell {
            middle: self.middle.at(solute, solvent),
            ln_scale: self.ln_scale.at(solute, solvent),
        };
        ErrorModel {
            model: self.model,
            cells: std::array::from_fn(|solute| {
                std::array::from_fn(|solvent| cell(solute, solvent))
            }),
            slopes: self.slopes,
            quantiles: self.quantiles,
            pairs: self.pairs,
            rows: self.rows,
        }
    }
}
