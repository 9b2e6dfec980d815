//! The parameter files: read, written, and put to use.

use std::fmt::Write as _;
use std::str::FromStr;
use std::sync::{Arc, OnceLock};

use super::count::CountModel;
use super::described::{Described, INPUTS, Known, PRODUCTS, SIZES};
use super::error::ParameterError;
use super::model::{
    Model, Prediction, Relatives, Supporting, has_new_kind_of_atom, unknown_environments,
};
use super::quantity::{Level, Quantity};
use super::scale::{Ground, Scale, Standing};
use super::support::{Likeness, Support};
use super::table::{EnvironmentEntry, EnvironmentTable};
use crate::groups::environment::{EnvironmentCounts, EnvironmentKey, Order};
use crate::quantity::Absent;

/// A parameter file: its name for messages and its text.
type File = (&'static str, &'static str);

macro_rules! file {
    ($name:literal) => {
        (
            concat!("estimates/", $name),
            include_str!(concat!("../../../groups/estimates/", $name)),
        )
    };
}

const ENVIRONMENTS: File = file!("environments.csv");
const MOLECULES: File = file!("molecules.csv");

/// Files of the models at structure level, in the order of [`Quantity::ALL`].
const STRUCTURE: [File; Quantity::COUNT] = [
    file!("structure-boiling_point.csv"),
    file!("structure-molar_volume.csv"),
    file!("structure-critical_temperature.csv"),
    file!("structure-critical_pressure.csv"),
    file!("structure-critical_volume.csv"),
    file!("structure-enthalpy_of_vaporization_298.csv"),
    file!("structure-vapor_pressure_slope.csv"),
    file!("structure-flash_point.csv"),
    file!("structure-melting_point.csv"),
    file!("structure-liquid_viscosity.csv"),
    file!("structure-surface_tension.csv"),
    file!("structure-hansen_dispersion.csv"),
    file!("structure-hansen_polar.csv"),
    file!("structure-hansen_hydrogen_bonding.csv"),
    file!("structure-log_p_octanol_water.csv"),
    file!("structure-ideal_gas_enthalpy_of_formation.csv"),
];

/// Files of the models at count level, in the order of [`Quantity::ALL`].
const COUNT: [File; Quantity::COUNT] = [
    file!("count-boiling_point.csv"),
    file!("count-molar_volume.csv"),
    file!("count-critical_temperature.csv"),
    file!("count-critical_pressure.csv"),
    file!("count-critical_volume.csv"),
    file!("count-enthalpy_of_vaporization_298.csv"),
    file!("count-vapor_pressure_slope.csv"),
    file!("count-flash_point.csv"),
    file!("count-melting_point.csv"),
    file!("count-liquid_viscosity.csv"),
    file!("count-surface_tension.csv"),
    file!("count-hansen_dispersion.csv"),
    file!("count-hansen_polar.csv"),
    file!("count-hansen_hydrogen_bonding.csv"),
    file!("count-log_p_octanol_water.csv"),
    file!("count-ideal_gas_enthalpy_of_formation.csv"),
];

/// Room for the environments of a molecule that count in distances: few have more.
const USUAL_ENVIRONMENTS: usize = 40;

const SOUND: &str = "built-in parameter files are sound (tested)";

/// The fitted estimates with their parameters.
///
/// Files are read when they are first asked for.
#[derive(Debug)]
pub struct Fitted {
    table: EnvironmentTable,
    support: OnceLock<Support>,
    structure: [OnceLock<Model>; Quantity::COUNT],
    count: [OnceLock<Model>; Quantity::COUNT],
}

impl Fitted {
    /// The estimates that are built in.
    pub fn built_in() -> Self {
        Self {
            table: read_environments(ENVIRONMENTS.0, ENVIRONMENTS.1).expect(SOUND),
            support: OnceLock::new(),
            structure: [const { OnceLock::new() }; Quantity::COUNT],
            count: [const { OnceLock::new() }; Quantity::COUNT],
        }
    }

    /// The files, for a fingerprint.
    pub fn texts() -> impl Iterator<Item = (&'static str, &'static str)> {
        [ENVIRONMENTS, MOLECULES]
            .into_iter()
            .chain(STRUCTURE)
            .chain(COUNT)
    }

    /// The environments of the fit.
    pub fn table(&self) -> &EnvironmentTable {
        &self.table
    }

    /// The file of a model: what its head says of data and cross-validation.
    pub fn text(quantity: Quantity, level: Level) -> (&'static str, &'static str) {
        match level {
            Level::Structure => STRUCTURE[quantity as usize],
            Level::Count => COUNT[quantity as usize],
        }
    }

    /// A model.
    pub fn model(&self, quantity: Quantity, level: Level) -> &Model {
        let models = match level {
            Level::Structure => &self.structure,
            Level::Count => &self.count,
        };
        models[quantity as usize].get_or_init(|| {
            let (file, text) = Self::text(quantity, level);
            read_model(file, text, &self.table, quantity, level).expect(SOUND)
        })
    }

    /// The count-level model of a quantity, taken apart.
    pub fn count_model(&self, quantity: Quantity) -> CountModel<'_> {
        CountModel::new(self.model(quantity, Level::Count), &self.table)
    }

    fn support(&self) -> &Support {
        self.support.get_or_init(|| {
            let molecules = read_molecules(MOLECULES.0, MOLECULES.1, &self.table).expect(SOUND);
            let models = Quantity::ALL.map(|quantity| self.model(quantity, Level::Structure));
            Support::of_models(&self.table, &molecules, models)
        })
    }

    /// Looks a molecule up; the distances to the molecules of the fit are left to be
    /// found when a model first asks for them.
    pub fn describe(&self, counts: &EnvironmentCounts, described: &mut FittedInput) {
        described.molecule.fill(&self.table, counts);
        described.likeness.clear();
    }

    /// The value of a quantity with its interval.
    ///
    /// `known` holds what the quantity rests on; it may be `None` for those
    /// that rest on nothing.
    ///
    /// # Errors
    ///
    /// The molecule has no environments (too large), an input is missing, or
    /// the sum is outside what the closing function takes.
    pub fn predict(
        &self,
        quantity: Quantity,
        level: Level,
        input: &mut FittedInput,
        known: Option<Known>,
    ) -> Result<Prediction, Absent> {
        let method = level.id();
        if input.molecule.found.is_empty() {
            return Err(Absent::OutsideDomain {
                method,
                what: "the molecule is larger than anything the method was fitted on",
            });
        }
        // without its inputs a sum would be a number that means nothing
        if quantity.terms(level).rests_on_others && known.is_none() {
            return Err(Absent::OutsideDomain {
                method,
                what: "it rests on boiling point and liquid density, and one of them is absent",
            });
        }
        let model = self.model(quantity, level);
        if has_new_kind_of_atom(&input.molecule, &model.occurrences) {
            return Err(Absent::OutsideDomain {
                method,
                what: "the molecule has a kind of atom that no molecule of the fit has",
            });
        }
        let mut sum = model.linear(&self.table, &input.molecule, known);
        let mut relatives = Relatives::unknown();
        if level == Level::Structure {
            let support = self.support();
            let (correction, most_similar) =
                support.correction(&self.table, &input.molecule, quantity, &mut input.likeness);
            sum += correction;
            relatives = model.relatives(support.near(&input.likeness), most_similar);
        }
        let ground = Ground {
            sum,
            rarity: model.rarity(&input.molecule),
            unknown_environments: unknown_environments(&input.molecule, level),
            unknown_atoms: model.has_unknown_atoms(&input.molecule),
            relatives: &relatives,
        };
        let standing = Standing::of(&input.molecule, &ground);
        let half = model.scale.half_width(&standing);
        let sum = quantity.settled(sum);
        let closed = |sum: f64| quantity.closed(sum, input.molecule.heavy_atoms, known);
        let outside = || Absent::OutsideDomain {
            method,
            what: "the sum of its parts is outside what the closing function takes",
        };
        let value = closed(sum).ok_or_else(outside)?;
        // an end that the closing function does not take lies where it takes nothing any more
        let low = closed(sum - half).unwrap_or(0.0);
        let high = closed(sum + half).ok_or_else(outside)?;
        Ok(Prediction {
            value,
            interval: (low, high),
            unknown_atoms: ground.unknown_atoms,
        })
    }
}

/// A molecule as [`Fitted`] sees it, with scratch memory.
#[derive(Clone, Debug, Default)]
pub struct FittedInput {
    /// Its environments.
    pub molecule: Described,
    /// How like it is to the molecules of the fit, as far as models asked.
    likeness: Likeness,
}

// ------------------------------------------------------------------- reading

/// Lines that are no part of the head, with their numbers.
fn lines(text: &str) -> impl Iterator<Item = (usize, &str)> {
    text.lines()
        .enumerate()
        .map(|(at, line)| (at + 1, line))
        .filter(|(_, line)| !line.starts_with('#') && !line.is_empty())
}

fn fault(file: &str, line: usize, what: impl Into<String>) -> ParameterError {
    ParameterError {
        file: file.to_owned(),
        line,
        what: what.into(),
    }
}

fn number<T: FromStr>(file: &str, line: usize, cell: Option<&str>) -> Result<T, ParameterError> {
    let cell = cell.ok_or_else(|| fault(file, line, "has too few cells"))?;
    cell.parse()
        .map_err(|_| fault(file, line, format!("`{cell}` is not a number")))
}

/// The text up to a mark, which is taken off; much of the time that reading takes
/// goes by here, and the texts are too short for a search made for long ones.
fn next_cell<'a>(text: &mut &'a str, mark: u8) -> &'a str {
    let whole = *text;
    match whole.bytes().position(|byte| byte == mark) {
        Some(at) => {
            *text = &whole[at + 1..];
            &whole[..at]
        }
        None => {
            *text = "";
            whole
        }
    }
}

/// A text of digits, few enough for a number that `f32` holds as it is.
fn whole(text: &str) -> Option<u32> {
    let is_whole = (1..=6).contains(&text.len()) && text.bytes().all(|byte| byte.is_ascii_digit());
    let digits = text.bytes().map(|byte| u32::from(byte - b'0'));
    is_whole.then(|| digits.fold(0, |number, digit| 10 * number + digit))
}

fn order_id(order: Order) -> &'static str {
    match order {
        Order::Atom => "atom",
        Order::First => "first",
        Order::Second => "second",
        Order::Shape => "shape",
        Order::Pair => "pair",
    }
}

fn read_environments(file: &str, text: &str) -> Result<EnvironmentTable, ParameterError> {
    let mut entries = Vec::new();
    for (line, row) in lines(text).skip(1) {
        let mut cells = row.splitn(6, ',');
        let key = cells.next().unwrap_or_default();
        let key = u64::from_str_radix(key, 16)
            .map_err(|_| fault(file, line, format!("`{key}` is not a key")))?;
        let order = cells.next().unwrap_or_default();
        let order = [
            Order::Atom,
            Order::First,
            Order::Second,
            Order::Shape,
            Order::Pair,
        ]
        .into_iter()
        .find(|known| order_id(*known) == order)
        .ok_or_else(|| fault(file, line, format!("`{order}` is not an order")))?;
        entries.push(EnvironmentEntry {
            key: EnvironmentKey(key),
            order,
            molecules: number(file, line, cells.next())?,
            distance_weight: number(file, line, cells.next())?,
            classes: number(file, line, cells.next())?,
            words: Arc::from(cells.next().unwrap_or_default()),
        });
    }
    Ok(EnvironmentTable::new(entries))
}

fn read_molecules(
    file: &str,
    text: &str,
    table: &EnvironmentTable,
) -> Result<Vec<Described>, ParameterError> {
    let mut molecules = Vec::new();
    for (line, row) in lines(text).skip(1) {
        let mut molecule = Described::default();
        molecule.found.reserve_exact(USUAL_ENVIRONMENTS);
        let mut rest = row;
        while !rest.is_empty() {
            let pair = next_cell(&mut rest, b' ');
            let (position, count) = match whole(pair) {
                Some(position) => (position, 1.0),
                None => {
                    let mut pair = pair;
                    let position = number(file, line, Some(next_cell(&mut pair, b':')))?;
                    let count = match whole(pair) {
                        Some(count) => count as f32,
                        None => number(file, line, Some(pair))?,
                    };
                    (position, count)
                }
            };
            if position as usize >= table.entries().len() {
                return Err(fault(
                    file,
                    line,
                    format!("there is no environment {position}"),
                ));
            }
            molecule.found.push((position, count));
        }
        molecules.push(molecule);
    }
    Ok(molecules)
}

/// Number of terms that [`Described::each_term`] may name.
pub(super) fn term_count(table: &EnvironmentTable) -> usize {
    2 * table.entries().len() + SIZES + 2 * PRODUCTS + INPUTS
}

/// The numbers of a scale by the names of their lines.
fn scale_parts(scale: &mut Scale) -> [(&'static str, &mut [f64]); 7] {
    [
        ("weights", &mut scale.weights),
        ("least", &mut scale.least),
        ("most", &mut scale.most),
        ("families", &mut scale.families),
        ("sizes", &mut scale.sizes),
        ("nearness_ends", &mut scale.nearness_ends),
        ("nearness", &mut scale.nearness),
    ]
}

fn read_model(
    file: &str,
    text: &str,
    table: &EnvironmentTable,
    quantity: Quantity,
    level: Level,
) -> Result<Model, ParameterError> {
    let mut model = Model {
        quantity,
        level,
        intercept: 0.0,
        weights: vec![0.0; term_count(table)],
        support: Vec::new(),
        occurrences: vec![0; table.entries().len()],
        scale: Scale::default(),
        errors: Vec::new(),
    };
    for (line, row) in lines(text) {
        let mut rest = row;
        let mut cells = std::iter::from_fn(|| match rest.is_empty() {
            true => None,
            false => Some(next_cell(&mut rest, b',')),
        });
        match cells.next().unwrap_or_default() {
            "intercept" => model.intercept = number(file, line, cells.next())?,
            "scale" => {
                let part = cells.next().unwrap_or_default();
                let numbers = scale_parts(&mut model.scale)
                    .into_iter()
                    .find_map(|(name, numbers)| (name == part).then_some(numbers))
                    .ok_or_else(|| fault(file, line, format!("`{part}` is no part of a scale")))?;
                for one in numbers {
                    *one = number(file, line, cells.next())?;
                }
            }
            "term" => {
                let term: usize = number(file, line, cells.next())?;
                let weight = number(file, line, cells.next())?;
                *model
                    .weights
                    .get_mut(term)
                    .ok_or_else(|| fault(file, line, format!("there is no term {term}")))? = weight;
            }
            "seen" => {
                let position: usize = number(file, line, cells.next())?;
                let molecules = number(file, line, cells.next())?;
                *model.occurrences.get_mut(position).ok_or_else(|| {
                    fault(file, line, format!("there is no environment {position}"))
                })? = molecules;
            }
            "support" => {
                model.support.push(Supporting {
                    molecule: number(file, line, cells.next())?,
                    part: number(file, line, cells.next())?,
                    error: number(file, line, cells.next())?,
                });
            }
            other => return Err(fault(file, line, format!("`{other}` is no kind of line"))),
        }
    }
    model.index();
    Ok(model)
}

// ------------------------------------------------------------------- writing

/// The text of `environments.csv`; `head` are its facts.
pub fn write_environments(head: &str, table: &EnvironmentTable) -> String {
    let mut text = format!("{head}key,order,molecules,distance_weight,classes,words\n");
    for entry in table.entries() {
        let _ = writeln!(
            text,
            "{:016x},{},{},{},{},{}",
            entry.key.0,
            order_id(entry.order),
            entry.molecules,
            entry.distance_weight,
            entry.classes,
            entry.words
        );
    }
    text
}

/// The text of `molecules.csv`.
pub fn write_molecules(head: &str, table: &EnvironmentTable, molecules: &[Described]) -> String {
    let mut text = format!("{head}environments\n");
    for molecule in molecules {
        let mut first = true;
        for &(position, count) in &molecule.found {
            if table.entries()[position as usize].distance_weight > 0.0 {
                let gap = if first { "" } else { " " };
                first = false;
                let _ = match count {
                    1.0 => write!(text, "{gap}{position}"),
                    _ => write!(text, "{gap}{position}:{}", (count * 1e3).round() / 1e3),
                };
            }
        }
        text.push('\n');
    }
    text
}

/// The text of a model's file.
pub fn write_model(head: &str, model: &Model) -> String {
    let mut text = format!("{head}intercept,{}\n", model.intercept);
    let mut scale = model.scale;
    for (name, numbers) in scale_parts(&mut scale) {
        let _ = write!(text, "scale,{name}");
        for number in numbers {
            let _ = write!(text, ",{number:.5}");
        }
        text.push('\n');
    }
    for (term, weight) in model.weights.iter().enumerate() {
        if *weight != 0.0 {
            let _ = writeln!(text, "term,{term},{weight:.5e}");
        }
    }
    for (position, molecules) in model.occurrences.iter().enumerate() {
        if *molecules > 0 {
            let _ = writeln!(text, "seen,{position},{molecules}");
        }
    }
    for other in &model.support {
        let _ = writeln!(
            text,
            "support,{},{:.4e},{:.2}",
            other.molecule, other.part, other.error
        );
    }
    text
}
