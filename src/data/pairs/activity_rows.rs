//! Rows of `activity_parameters.csv`: what the stated convention makes of their numbers.
//!
//! Nothing is guessed: the convention names the difference or factor that the
//! numbers are, the unit that of the difference, and a column that the
//! convention has no use for has to be blank.

use std::f64::consts::LN_10;

use super::load::optional_in;
use super::{InverseLinear, PairModel, PairParameters};
use crate::data::load::positive;
use crate::quantity::GAS_CONSTANT_J_PER_MOL_K;
use crate::table::{Column, Row, Table, TableError};

/// The thermochemical calorie, exact by definition.
const J_PER_CAL: f64 = 4.184;

/// Columns that only some models need; a table without them may lack them.
const EXTRAS: [(&str, &str); 10] = [
    ("dependence", "-"),
    ("b12", "-"),
    ("b21", "-"),
    ("alpha", "-"),
    ("volume1", "cm3/mol"),
    ("volume2", "cm3/mol"),
    ("r1", "-"),
    ("r2", "-"),
    ("q1", "-"),
    ("q2", "-"),
];

const DEPENDENCE: usize = 0;
const B12: usize = 1;
const B21: usize = 2;
const ALPHA: usize = 3;
const VOLUMES: [usize; 2] = [4, 5];
const R: [usize; 2] = [6, 7];
const Q: [usize; 2] = [8, 9];

/// The columns of the table.
pub(super) struct ActivityColumns {
    pub(super) who: [Column; 2],
    pub(super) model: Column,
    convention: Column,
    unit: Column,
    pub(super) a12: Column,
    a21: Column,
    extras: [Option<Column>; EXTRAS.len()],
    pub(super) low: Column,
    pub(super) high: Column,
    pub(super) source: Column,
}

/// What the numbers of a row are.
#[derive(Clone, Copy, PartialEq)]
enum Kind {
    /// The internal number itself, times a factor.
    Number { factor: f64 },
    /// Something whose natural logarithm is the internal number.
    Factor,
    /// An energy which, divided by RT and with this sign, is the internal number.
    Energy { sign: f64 },
}

/// Every convention: the model, its word, and what the numbers then are.
const CONVENTIONS: [(PairModel, &str, Kind); 17] = [
    (PairModel::MargulesOne, "ln", Kind::Number { factor: 1.0 }),
    (
        PairModel::MargulesOne,
        "log10",
        Kind::Number { factor: LN_10 },
    ),
    (PairModel::MargulesOne, "energy", Kind::Energy { sign: 1.0 }),
    (PairModel::MargulesTwo, "ln", Kind::Number { factor: 1.0 }),
    (
        PairModel::MargulesTwo,
        "log10",
        Kind::Number { factor: LN_10 },
    ),
    (PairModel::MargulesTwo, "energy", Kind::Energy { sign: 1.0 }),
    (PairModel::VanLaar, "ln", Kind::Number { factor: 1.0 }),
    (PairModel::VanLaar, "log10", Kind::Number { factor: LN_10 }),
    (PairModel::VanLaar, "energy", Kind::Energy { sign: 1.0 }),
    (PairModel::Wilson, "Lambda12", Kind::Factor),
    (
        PairModel::Wilson,
        "ln-Lambda12",
        Kind::Number { factor: 1.0 },
    ),
    (
        PairModel::Wilson,
        "lambda12-lambda11",
        Kind::Energy { sign: -1.0 },
    ),
    (PairModel::Nrtl, "tau12", Kind::Number { factor: 1.0 }),
    (PairModel::Nrtl, "g12-g22", Kind::Energy { sign: 1.0 }),
    (PairModel::Uniquac, "tau12", Kind::Factor),
    (PairModel::Uniquac, "ln-tau12", Kind::Number { factor: 1.0 }),
    (PairModel::Uniquac, "u12-u22", Kind::Energy { sign: -1.0 }),
];

/// How a number depends on temperature.
#[derive(Clone, Copy, PartialEq)]
enum Dependence {
    Constant,
    /// a + b T
    Linear,
    /// a + b/T
    Inverse,
}

impl ActivityColumns {
    pub(super) fn of(table: &Table) -> Result<Self, TableError> {
        let mut extras = [None; EXTRAS.len()];
        for (slot, (name, unit)) in extras.iter_mut().zip(EXTRAS) {
            *slot = optional_in(table, name, unit)?;
        }
        Ok(Self {
            who: [table.column("first")?, table.column("second")?],
            model: table.column("model")?,
            convention: table.column("convention")?,
            unit: table.column("unit")?,
            a12: table.column("a12")?,
            a21: table.column("a21")?,
            extras,
            low: table.column_in("low", "K")?,
            high: table.column_in("high", "K")?,
            source: table.column("source")?,
        })
    }

    /// The parameters of a row in the internal convention; faults are added to
    /// those already found.
    pub(super) fn parameters(
        &self,
        row: Row<'_>,
        faults: &mut Vec<TableError>,
    ) -> Option<PairParameters> {
        let before = faults.len();
        let found = self.read(row, faults);
        match found {
            Err(fault) => {
                faults.push(fault);
                None
            }
            Ok(parameters) => (faults.len() == before).then_some(parameters),
        }
    }

    fn read(
        &self,
        row: Row<'_>,
        faults: &mut Vec<TableError>,
    ) -> Result<PairParameters, TableError> {
        let model = PairModel::from_id(row.text(self.model)).ok_or_else(|| {
            let known = PairModel::ALL.map(PairModel::id).join(", ");
            row.fault(
                self.model,
                format!("is no model of a pair; there are {known}"),
            )
        })?;
        let kind = self.kind(row, model)?;
        let energy = matches!(kind, Kind::Energy { .. });
        self.refuse_unused(row, model, energy, faults);
        let kelvin = self.kelvin_per_unit(row, energy)?;
        let dependence = self.dependence(row, kind)?;
        let term = |a: Column, b: usize| self.term(row, kind, kelvin, dependence, a, b);
        let first = term(self.a12, B12)?;
        if model == PairModel::MargulesOne {
            return Ok(PairParameters::MargulesOne { a: first });
        }
        let second = term(self.a21, B21)?;
        Ok(match model {
            PairModel::MargulesOne => unreachable!("returned above"),
            PairModel::MargulesTwo => PairParameters::MargulesTwo {
                a12: first,
                a21: second,
            },
            PairModel::VanLaar => self.van_laar(row, first, second)?,
            PairModel::Wilson => {
                // ln(V2/V1) is in Λ12 where the numbers are energies.
                let shift = match energy {
                    true => {
                        let [v1, v2] = self.both_positive(row, VOLUMES)?;
                        (v2 / v1).ln()
                    }
                    false => 0.0,
                };
                let shifted = |term: InverseLinear, by: f64| InverseLinear {
                    constant: term.constant + by,
                    ..term
                };
                PairParameters::Wilson {
                    ln_lambda12: shifted(first, shift),
                    ln_lambda21: shifted(second, -shift),
                }
            }
            PairModel::Nrtl => {
                let column = self.needed(row, ALPHA)?;
                let alpha = row.required_number(column)?;
                if !(-1.0..=1.0).contains(&alpha) {
                    return Err(row.fault(column, "is not between -1 and 1"));
                }
                PairParameters::Nrtl {
                    tau12: first,
                    tau21: second,
                    alpha,
                }
            }
            PairModel::Uniquac => PairParameters::Uniquac {
                ln_tau12: first,
                ln_tau21: second,
                r: self.both_positive(row, R)?,
                q: self.both_positive(row, Q)?,
            },
        })
    }

    fn kind(&self, row: Row<'_>, model: PairModel) -> Result<Kind, TableError> {
        let word = row.text(self.convention);
        let of_model = || CONVENTIONS.iter().filter(|(of, ..)| *of == model);
        let known = of_model().find(|(_, known, _)| *known == word);
        known.map(|&(.., kind)| kind).ok_or_else(|| {
            let words: Vec<&str> = of_model().map(|&(_, word, _)| word).collect();
            let what = match word {
                "" => "is blank",
                _ => "is not known",
            };
            let fault = format!("{what}; for {} say {}", model.id(), words.join(" or "));
            row.fault(self.convention, fault)
        })
    }

    /// A number in a column that the convention has no use for was meant for
    /// something.
    fn refuse_unused(
        &self,
        row: Row<'_>,
        model: PairModel,
        energy: bool,
        faults: &mut Vec<TableError>,
    ) {
        let two = model != PairModel::MargulesOne;
        let used = |extra: usize| match extra {
            B21 => two,
            ALPHA => model == PairModel::Nrtl,
            _ if VOLUMES.contains(&extra) => model == PairModel::Wilson && energy,
            _ if R.contains(&extra) || Q.contains(&extra) => model == PairModel::Uniquac,
            _ => true,
        };
        let extras = (0..EXTRAS.len()).filter_map(|at| Some((self.extras[at]?, used(at))));
        for (column, used) in extras.chain([(self.a21, two)]) {
            if !used && !row.text(column).is_empty() {
                let convention = row.text(self.convention);
                faults.push(row.fault(
                    column,
                    format!(
                        "has no use in {} by {convention}; leave it blank",
                        model.id()
                    ),
                ));
            }
        }
    }

    /// K for each unit of energy; 1 where the numbers are no energies.
    fn kelvin_per_unit(&self, row: Row<'_>, energy: bool) -> Result<f64, TableError> {
        match (energy, row.text(self.unit)) {
            (false, "-") => Ok(1.0),
            (false, _) => Err(row.fault(self.unit, "should be - for numbers without a unit")),
            (true, "J/mol") => Ok(1.0 / GAS_CONSTANT_J_PER_MOL_K),
            (true, "cal/mol") => Ok(J_PER_CAL / GAS_CONSTANT_J_PER_MOL_K),
            (true, "K") => Ok(1.0),
            (true, _) => Err(row.fault(
                self.unit,
                "should be J/mol, cal/mol or K (divided by the gas constant) for an energy",
            )),
        }
    }

    fn dependence(&self, row: Row<'_>, kind: Kind) -> Result<Dependence, TableError> {
        let Some(column) = self.extras[DEPENDENCE] else {
            let stated = [B12, B21]
                .into_iter()
                .filter_map(|at| self.extras[at])
                .find(|&column| !row.text(column).is_empty());
            return match stated {
                None => Ok(Dependence::Constant),
                Some(column) => {
                    Err(row.fault(column, "needs a column `dependence`: a+bT or a+b/T"))
                }
            };
        };
        match (row.text(column), kind) {
            ("" | "constant", _) => Ok(Dependence::Constant),
            ("a+bT", Kind::Energy { .. }) => Ok(Dependence::Linear),
            ("a+b/T", Kind::Number { .. }) => Ok(Dependence::Inverse),
            (_, Kind::Energy { .. }) => {
                Err(row.fault(column, "should be constant or a+bT for an energy"))
            }
            (_, Kind::Number { .. }) => Err(row.fault(
                column,
                "should be constant or a+b/T for a number without a unit",
            )),
            (_, Kind::Factor) => Err(row.fault(
                column,
                "should be constant here; give the logarithm (ln-Lambda12, ln-tau12) where it depends on temperature",
            )),
        }
    }

    /// One internal number from `a` and, where it depends on temperature, `b`.
    fn term(
        &self,
        row: Row<'_>,
        kind: Kind,
        kelvin: f64,
        dependence: Dependence,
        a: Column,
        b: usize,
    ) -> Result<InverseLinear, TableError> {
        let value = row.required_number(a)?;
        let slope = match (dependence, self.extras[b]) {
            (Dependence::Constant, None) => 0.0,
            (Dependence::Constant, Some(column)) if row.text(column).is_empty() => 0.0,
            (Dependence::Constant, Some(column)) => {
                let fault = "is given, while `dependence` does not say what it is: a+bT or a+b/T";
                return Err(row.fault(column, fault));
            }
            _ => row.required_number(self.needed(row, b)?)?,
        };
        Ok(match kind {
            Kind::Number { factor } => InverseLinear {
                constant: factor * value,
                slope_k: factor * slope,
            },
            Kind::Factor => InverseLinear {
                constant: positive(row, a)?.ln(),
                slope_k: 0.0,
            },
            Kind::Energy { sign } => InverseLinear {
                constant: sign * kelvin * slope,
                slope_k: sign * kelvin * value,
            },
        })
    }

    /// Between A12 and A21 of opposite signs the equation has a pole.
    fn van_laar(
        &self,
        row: Row<'_>,
        a12: InverseLinear,
        a21: InverseLinear,
    ) -> Result<PairParameters, TableError> {
        let ends = [self.low, self.high].map(|end| row.number(end).ok().flatten());
        for t in ends.into_iter().flatten() {
            if a12.at(t) * a21.at(t) <= 0.0 {
                let fault = format!(
                    "has not the sign of a12, {}: van Laar has no value then",
                    row.text(self.a12)
                );
                return Err(row.fault(self.a21, fault));
            }
        }
        Ok(PairParameters::VanLaar { a12, a21 })
    }

    fn both_positive(&self, row: Row<'_>, extras: [usize; 2]) -> Result<[f64; 2], TableError> {
        let [first, second] = extras;
        Ok([
            positive(row, self.needed(row, first)?)?,
            positive(row, self.needed(row, second)?)?,
        ])
    }

    fn needed(&self, row: Row<'_>, extra: usize) -> Result<Column, TableError> {
        self.extras[extra].ok_or_else(|| {
            let fault = format!("needs a column `{}`, which is missing", EXTRAS[extra].0);
            row.fault(self.model, fault)
        })
    }
}
