//! Reads the tables of a user into the collection and checks them.

use std::sync::Arc;

use smallvec::SmallVec;

use super::activity_rows::ActivityColumns;
use super::collection::PairData;
use super::excess_volume::MOST_COEFFICIENTS;
use super::series::SAME_TEMPERATURE_K;
use super::{ActivityParameters, Dilution, ExcessVolume, PLAUSIBLE_LN_GAMMA_INFINITY, Pairs};
use crate::chem::{Canonicalizer, Keys, Molecule, Reader};
use crate::data::load::{Sources, positive};
use crate::data::{DataError, NameError, Substances, TableText};
use crate::quantity::number;
use crate::table::{Column, Row, Table, TableError};

/// Temperatures in K below and above which a cell was hardly meant in K.
const LIKELY_TEMPERATURES_K: std::ops::RangeInclusive<f64> = 100.0..=1500.0;

/// Largest excess volume taken for one, in m³/mol: measured ones stay within a few cm³/mol.
const LARGEST_EXCESS_VOLUME_M3_PER_MOL: f64 = 20e-6;

/// By how much, as a part of it, a number may differ from one that it repeats:
/// tables in other units keep four digits or so.
const SAME_NUMBER: f64 = 1e-4;

/// The pair tables of a user; any of them may be missing.
///
/// `groups/pairs/README.md` describes their columns.
#[derive(Clone, Copy, Debug, Default)]
pub struct PairTables<'a> {
    /// Activity coefficients at infinite dilution.
    pub gamma_infinity: Option<TableText<'a>>,
    /// Redlich–Kister coefficients of excess volumes.
    pub excess_volume: Option<TableText<'a>>,
    /// Parameters of activity models.
    pub activity_parameters: Option<TableText<'a>>,
}

impl Pairs {
    /// Reads pair tables; substances are named by any name or CAS number of
    /// `substances`, or by SMILES.
    ///
    /// # Errors
    ///
    /// [`DataError::Tables`] with every fault of every table.
    pub fn read(substances: &Substances, tables: &PairTables<'_>) -> Result<Self, DataError> {
        let mut loader = Loader {
            substances,
            pairs: Self::default(),
            faults: Vec::new(),
            reader: Reader::new(),
            molecule: Molecule::default(),
            canonicalizer: Canonicalizer::new(),
            keys: Keys::default(),
        };
        loader.read(tables.gamma_infinity, Loader::gamma_infinity);
        loader.read(tables.excess_volume, Loader::excess_volume);
        loader.read(tables.activity_parameters, Loader::activity_parameters);
        if !loader.faults.is_empty() {
            return Err(DataError::Tables {
                faults: loader.faults,
            });
        }
        let mut pairs = loader.pairs;
        for data in pairs.by_members.values_mut() {
            for series in &mut data.dilutions {
                series.sort_by(|a, b| a.temperature_k.total_cmp(&b.temperature_k));
            }
            let volumes = &mut data.volumes;
            volumes.sort_by(|a, b| a.temperature_k.total_cmp(&b.temperature_k));
        }
        Ok(pairs)
    }
}

struct Loader<'s> {
    substances: &'s Substances,
    pairs: Pairs,
    faults: Vec<TableError>,
    reader: Reader,
    molecule: Molecule,
    canonicalizer: Canonicalizer,
    keys: Keys,
}

impl Loader<'_> {
    fn read(
        &mut self,
        text: Option<TableText<'_>>,
        rows: impl Fn(&mut Self, &Table) -> Result<(), TableError>,
    ) {
        let Some(TableText { file, text }) = text else {
            return;
        };
        if let Err(fault) = Table::read_user(file, text).and_then(|table| rows(self, &table)) {
            self.faults.push(fault);
        }
    }

    /// Keeps what is sound and notes what is not, so that a row tells all its faults.
    fn sound<T>(&mut self, found: Result<T, TableError>) -> Option<T> {
        found.map_err(|fault| self.faults.push(fault)).ok()
    }

    // ------------------------------------------------------------- who it is

    /// Both substances of a row; they may not be the same.
    fn pair(&mut self, row: Row<'_>, columns: [Column; 2]) -> Option<[u32; 2]> {
        let both = columns.map(|column| {
            let found = self.member(row, column);
            self.sound(found)
        });
        let [Some(first), Some(second)] = both else {
            return None;
        };
        if first == second {
            let name = Arc::clone(self.pairs.members.name(first));
            let fault = format!("is the other substance of the row again, `{name}`");
            self.faults.push(row.fault(columns[1], fault));
            return None;
        }
        Some([first, second])
    }

    fn member(&mut self, row: Row<'_>, column: Column) -> Result<u32, TableError> {
        let text = row.required_text(column)?;
        let name = match self.substances.find(text) {
            Ok(substance) => {
                self.reader
                    .read_into(substance.smiles(), &mut self.molecule)
                    .expect("the structure was read when its table was loaded");
                self.canonicalizer.keys_into(&self.molecule, &mut self.keys);
                Arc::clone(substance.name())
            }
            Err(error) => {
                self.reader
                    .read_into(text, &mut self.molecule)
                    .map_err(|_| row.fault(column, unknown(&error)))?;
                self.canonicalizer.keys_into(&self.molecule, &mut self.keys);
                match self.substances.find_structure(&self.keys) {
                    Some((substance, flags)) if flags.is_empty() => Arc::clone(substance.name()),
                    _ => Arc::from(text),
                }
            }
        };
        Ok(self.pairs.members.add(&name, &self.keys))
    }

    /// The data of a pair, and whether the first of the row is component 2 there.
    fn data(&mut self, [first, second]: [u32; 2]) -> (&mut PairData, bool) {
        let members = (first.min(second), first.max(second));
        let data = self.pairs.by_members.entry(members).or_default();
        (data, first > second)
    }

    // -------------------------------------------------------- gamma infinity

    fn gamma_infinity(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let who = [table.column("solute")?, table.column("solvent")?];
        let gamma = table.column_in("gamma_infinity", "-")?;
        let temperature = table.column_in("temperature", "K")?;
        let uncertainty = optional_in(table, "uncertainty", "-")?;
        let source = table.column("source")?;
        for row in table.rows() {
            let pair = self.pair(row, who);
            let ln_gamma = self.sound(ln_gamma(row, gamma));
            let temperature_k = self.sound(likely_temperature(row, temperature));
            let uncertainty =
                self.sound(
                    uncertainty.map_or(Ok(None), |column| match row.number(column)? {
                        Some(value) if value < 0.0 => Err(row.fault(column, "is negative")),
                        other => Ok(other),
                    }),
                );
            let source = self.sound(sources.get(row, source));
            let (Some(pair), Some(ln_gamma), Some(temperature_k), Some(uncertainty), Some(source)) =
                (pair, ln_gamma, temperature_k, uncertainty, source)
            else {
                continue;
            };
            let (data, turned) = self.data(pair);
            let series = &mut data.dilutions[usize::from(turned)];
            let known = series
                .iter()
                .find(|other| (other.temperature_k - temperature_k).abs() < SAME_TEMPERATURE_K);
            if let Some(known) = known {
                let fault = format!(
                    "stands twice for this pair at {temperature_k} K: {} here, {} in line {}",
                    row.text(gamma),
                    readable(known.ln_gamma.exp()),
                    known.line
                );
                self.faults.push(row.fault(gamma, fault));
                continue;
            }
            series.push(Dilution {
                temperature_k,
                ln_gamma,
                uncertainty,
                source,
                line: row.line(),
            });
        }
        Ok(())
    }

    // --------------------------------------------------------- excess volume

    fn excess_volume(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let who = [table.column("first")?, table.column("second")?];
        let mut coefficients = vec![table.column_in("a0", "cm3/mol")?];
        for k in 1..MOST_COEFFICIENTS {
            let name = format!("a{k}");
            coefficients.extend(optional_in(table, &name, "cm3/mol")?);
        }
        let temperature = table.column_in("temperature", "K")?;
        let ends = [
            table.column_in("x1_low", "-")?,
            table.column_in("x1_high", "-")?,
        ];
        let source = table.column("source")?;
        for row in table.rows() {
            let pair = self.pair(row, who);
            let series = self.sound(redlich_kister(row, &coefficients));
            let temperature_k = self.sound(likely_temperature(row, temperature));
            let x1_range = self.sound(composition_range(row, ends));
            let source = self.sound(sources.get(row, source));
            let (Some(pair), Some(series), Some(temperature_k), Some(x1_range), Some(source)) =
                (pair, series, temperature_k, x1_range, source)
            else {
                continue;
            };
            let volume = ExcessVolume {
                coefficients_m3_per_mol: series,
                temperature_k,
                x1_range,
                source,
                line: row.line(),
            };
            let added = self.add_volume(row, &coefficients, pair, volume);
            self.sound(added);
        }
        Ok(())
    }

    fn add_volume(
        &mut self,
        row: Row<'_>,
        columns: &[Column],
        pair: [u32; 2],
        volume: ExcessVolume,
    ) -> Result<(), TableError> {
        let (low, high) = volume.x1_range;
        let largest = (0..=20)
            .map(|step| volume.at(low + f64::from(step) / 20.0 * (high - low)))
            .max_by(|a, b| a.abs().total_cmp(&b.abs()))
            .unwrap_or(0.0);
        if largest.abs() > LARGEST_EXCESS_VOLUME_M3_PER_MOL {
            let fault = format!(
                "the coefficients give an excess volume of {} cm3/mol, no liquid has more than {}",
                readable(1e6 * largest),
                readable(1e6 * LARGEST_EXCESS_VOLUME_M3_PER_MOL)
            );
            return Err(row.fault(columns[0], fault));
        }
        let (data, turned) = self.data(pair);
        let known = data
            .volumes
            .iter()
            .find(|other| (other.temperature_k - volume.temperature_k).abs() < SAME_TEMPERATURE_K);
        if let Some(known) = known {
            // Compared in the order of this row.
            let (known, order) = match turned {
                true => (known.reversed(), ", turned to the order of this row,"),
                false => (known.clone(), ""),
            };
            let at = |set: &ExcessVolume, k: usize| {
                let coefficient = set.coefficients_m3_per_mol.get(k);
                1e6 * coefficient.copied().unwrap_or(0.0)
            };
            let differs = (0..MOST_COEFFICIENTS).find(|&k| !same(at(&volume, k), at(&known, k)));
            let t = volume.temperature_k;
            let line = known.line;
            return Err(match differs {
                None => row.fault(
                    columns[0],
                    format!("stands twice for this pair at {t} K: line {line} has the same"),
                ),
                Some(k) => row.fault(
                    columns[k.min(columns.len() - 1)],
                    format!(
                        "contradicts line {line} for this pair at {t} K: a{k} is {} here and{order} {} there",
                        readable(at(&volume, k)),
                        readable(at(&known, k))
                    ),
                ),
            });
        }
        data.volumes.push(match turned {
            true => volume.reversed(),
            false => volume,
        });
        Ok(())
    }

    // --------------------------------------------------- activity parameters

    fn activity_parameters(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let columns = ActivityColumns::of(table)?;
        for row in table.rows() {
            let pair = self.pair(row, columns.who);
            let parameters = columns.parameters(row, &mut self.faults);
            let ends = [columns.low, columns.high];
            let range_k = self.sound(temperature_range(row, ends));
            let source = self.sound(sources.get(row, columns.source));
            let (Some(pair), Some(parameters), Some(range_k), Some(source)) =
                (pair, parameters, range_k, source)
            else {
                continue;
            };
            let set = ActivityParameters {
                parameters,
                range_k,
                source,
                line: row.line(),
            };
            let added = self.add_parameters(row, &columns, pair, set);
            self.sound(added);
        }
        Ok(())
    }

    fn add_parameters(
        &mut self,
        row: Row<'_>,
        columns: &ActivityColumns,
        pair: [u32; 2],
        set: ActivityParameters,
    ) -> Result<(), TableError> {
        for temperature_k in [set.range_k.0, set.range_k.1] {
            if let Some(ln_gamma) = set.parameters.implausible(temperature_k) {
                let fault = format!(
                    "the parameters give ln gamma infinity {} at {temperature_k} K, outside {} to {}: are unit and convention right?",
                    readable(ln_gamma),
                    PLAUSIBLE_LN_GAMMA_INFINITY.start(),
                    PLAUSIBLE_LN_GAMMA_INFINITY.end()
                );
                return Err(row.fault(columns.a12, fault));
            }
        }
        let (data, turned) = self.data(pair);
        for known in &data.parameters {
            // Compared in the order of this row.
            let known = match turned {
                true => known.reversed(),
                false => known.clone(),
            };
            if known.parameters.model() != set.parameters.model() {
                continue;
            }
            let Some((low, high)) = set.overlap_k(&known) else {
                continue;
            };
            let line = known.line;
            let of = |set: &ActivityParameters, t: f64| set.parameters.ln_gamma_infinity(t);
            let differs = [low, high].into_iter().find(|&t| {
                let [here, there] = [of(&set, t), of(&known, t)];
                !same(here[0], there[0]) || !same(here[1], there[1])
            });
            return Err(match differs {
                None => row.fault(
                    columns.model,
                    format!("stands twice for this pair from {low} K to {high} K: line {line} has the same"),
                ),
                Some(t) => row.fault(
                    columns.model,
                    format!(
                        "contradicts line {line} for this pair from {low} K to {high} K: at {t} K ln gamma infinity of the two is {} here, {} there",
                        of(&set, t).map(readable).join(" and "),
                        of(&known, t).map(readable).join(" and ")
                    ),
                ),
            });
        }
        data.parameters.push(match turned {
            true => set.reversed(),
            false => set,
        });
        Ok(())
    }
}

/// Why a text is no substance; that it reads as no SMILES either matters only
/// where it is like no name.
fn unknown(error: &NameError) -> String {
    match error {
        NameError::Unknown { nearest, .. } if nearest.is_empty() => {
            "is neither a known name nor a SMILES; list the substance in substances.csv or give its SMILES"
                .to_owned()
        }
        other => other.to_string(),
    }
}

fn ln_gamma(row: Row<'_>, column: Column) -> Result<f64, TableError> {
    let ln_gamma = positive(row, column)?.ln();
    if PLAUSIBLE_LN_GAMMA_INFINITY.contains(&ln_gamma) {
        Ok(ln_gamma)
    } else {
        let fault = format!(
            "is beyond belief: its logarithm, {}, lies outside {} to {}",
            readable(ln_gamma),
            PLAUSIBLE_LN_GAMMA_INFINITY.start(),
            PLAUSIBLE_LN_GAMMA_INFINITY.end()
        );
        Err(row.fault(column, fault))
    }
}

/// A temperature that can have been meant in K.
fn likely_temperature(row: Row<'_>, column: Column) -> Result<f64, TableError> {
    let temperature_k = positive(row, column)?;
    if LIKELY_TEMPERATURES_K.contains(&temperature_k) {
        Ok(temperature_k)
    } else {
        let fault = format!(
            "is no temperature of a liquid in K ({} to {} are taken)",
            LIKELY_TEMPERATURES_K.start(),
            LIKELY_TEMPERATURES_K.end()
        );
        Err(row.fault(column, fault))
    }
}

/// Temperatures in K that data were measured between; they may be one.
fn temperature_range(row: Row<'_>, [low, high]: [Column; 2]) -> Result<(f64, f64), TableError> {
    let low_k = likely_temperature(row, low)?;
    let high_k = likely_temperature(row, high)?;
    if low_k <= high_k {
        Ok((low_k, high_k))
    } else {
        let fault = format!("is below the lower end of the range, {low_k} K");
        Err(row.fault(high, fault))
    }
}

fn composition_range(row: Row<'_>, ends: [Column; 2]) -> Result<(f64, f64), TableError> {
    let mut range = [0.0; 2];
    for (end, column) in range.iter_mut().zip(ends) {
        *end = row.required_number(column)?;
        if !(0.0..=1.0).contains(end) {
            return Err(row.fault(column, "is not a mole fraction from 0 to 1"));
        }
    }
    let [low, high] = range;
    if low < high {
        Ok((low, high))
    } else {
        let fault = format!("is not above the lower end of the range, {low}");
        Err(row.fault(ends[1], fault))
    }
}

/// The coefficients of a row in m³/mol; those behind the last may be blank.
fn redlich_kister(
    row: Row<'_>,
    columns: &[Column],
) -> Result<SmallVec<[f64; MOST_COEFFICIENTS]>, TableError> {
    let mut coefficients = SmallVec::new();
    for &column in columns {
        let Some(value) = row.number(column)? else {
            break;
        };
        coefficients.push(1e-6 * value);
    }
    if coefficients.is_empty() {
        return Err(row.fault(columns[0], "is blank"));
    }
    let behind = columns[coefficients.len()..].iter();
    for &column in behind {
        if row.number(column)?.is_some() {
            let blank = columns[coefficients.len()];
            return Err(row.fault(
                blank,
                "is blank, while a later coefficient is given; write 0 for a term that is not there",
            ));
        }
    }
    Ok(coefficients)
}

/// A column that may be missing, and is given in this unit where it is there.
pub(super) fn optional_in(
    table: &Table,
    name: &str,
    unit: &str,
) -> Result<Option<Column>, TableError> {
    match table.optional_column(name) {
        None => Ok(None),
        Some(_) => table.column_in(name, unit).map(Some),
    }
}

/// Whether two numbers say the same, but for rounding.
fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= SAME_NUMBER * a.abs().max(b.abs()).max(1e-3)
}

/// A number in a message.
fn readable(value: f64) -> String {
    if value.is_finite() {
        number::text(value, 6)
    } else {
        "beyond any number".to_owned()
    }
}
