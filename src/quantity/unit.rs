//! Units: reading text such as `"115 degC"` into SI, and the units tables show.
//!
//! One list holds every unit with its conversion. [`parse`] reads a value and
//! [`parse_difference`] a width (5 degC are 5 K there, not 278.15 K).
//! Output goes through [`table_unit`] for CSV and JSON and [`reading_unit`]
//! for people. How digits are written is [`number`](super::number)'s matter.

use std::borrow::Cow;
use std::fmt;

use thiserror::Error;

use super::number;

/// What a quantity measures; decides the units it may be written in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Dimension {
    /// A bare number.
    Number,
    /// Absolute temperature, K.
    Temperature,
    /// Pressure, Pa.
    Pressure,
    /// Mass density, kg/m3.
    Density,
    /// Molar mass, kg/mol.
    MolarMass,
    /// Molar volume, m3/mol.
    MolarVolume,
    /// Molar energy, J/mol.
    MolarEnergy,
    /// Molar heat capacity or entropy, J/(mol K).
    MolarHeatCapacity,
    /// Dynamic viscosity, Pa s.
    Viscosity,
    /// Surface tension, N/m.
    SurfaceTension,
    /// Solubility parameter, Pa^0.5 inside, MPa^0.5 in tables.
    SolubilityParameter,
}

impl Dimension {
    /// Every dimension, in the order of the declaration.
    pub const ALL: [Self; 11] = [
        Self::Number,
        Self::Temperature,
        Self::Pressure,
        Self::Density,
        Self::MolarMass,
        Self::MolarVolume,
        Self::MolarEnergy,
        Self::MolarHeatCapacity,
        Self::Viscosity,
        Self::SurfaceTension,
        Self::SolubilityParameter,
    ];

    /// What it is called in a sentence, with its article: `a temperature`.
    pub const fn noun(self) -> &'static str {
        match self {
            Self::Number => "a bare number",
            Self::Temperature => "a temperature",
            Self::Pressure => "a pressure",
            Self::Density => "a density",
            Self::MolarMass => "a molar mass",
            Self::MolarVolume => "a molar volume",
            Self::MolarEnergy => "a molar energy",
            Self::MolarHeatCapacity => "a molar heat capacity",
            Self::Viscosity => "a viscosity",
            Self::SurfaceTension => "a surface tension",
            Self::SolubilityParameter => "a solubility parameter",
        }
    }

    /// A text that [`parse`] reads, to show what is meant.
    pub const fn example(self) -> &'static str {
        match self {
            Self::Number => "1.5",
            Self::Temperature => "120 degC",
            Self::Pressure => "101.325 kPa",
            Self::Density => "850 kg/m3",
            Self::MolarMass => "150 g/mol",
            Self::MolarVolume => "98 cm3/mol",
            Self::MolarEnergy => "35 kJ/mol",
            Self::MolarHeatCapacity => "120 J/(mol K)",
            Self::Viscosity => "1.2 mPa s",
            Self::SurfaceTension => "25 mN/m",
            Self::SolubilityParameter => "17.4 MPa^0.5",
        }
    }

    /// The units it may be written in, the usual ones first.
    pub fn units(self) -> impl Iterator<Item = &'static Unit> {
        UNITS.iter().filter(move |unit| unit.dimension == self)
    }

    /// Whether a value below zero has no meaning.
    const fn is_never_negative(self) -> bool {
        matches!(
            self,
            Self::Pressure
                | Self::Density
                | Self::MolarMass
                | Self::MolarVolume
                | Self::Viscosity
                | Self::SurfaceTension
        )
    }
}

/// A unit and its conversion: SI = (value + `offset`) · `times` / `over`.
///
/// Numerator and denominator are kept apart so that a decimal unit converts
/// with one correctly rounded operation: 18.015 g/mol is 0.018015 kg/mol to
/// the last bit, which a factor 0.001 would miss.
#[derive(Debug, PartialEq)]
pub struct Unit {
    /// The spelling shown to people.
    pub symbol: &'static str,
    /// What it measures.
    pub dimension: Dimension,
    aliases: &'static [&'static str],
    offset: f64,
    times: f64,
    over: f64,
}

impl Unit {
    /// Converts a value in this unit to SI.
    pub fn to_si(&self, value: f64) -> f64 {
        (value + self.offset) * self.times / self.over
    }

    /// Converts an SI value to this unit.
    pub fn from_si(&self, value_si: f64) -> f64 {
        value_si * self.over / self.times - self.offset
    }

    /// Converts a difference of two values in this unit to SI.
    pub fn difference_to_si(&self, difference: f64) -> f64 {
        difference * self.times / self.over
    }
}

impl fmt::Display for Unit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol)
    }
}

const fn unit(
    dimension: Dimension,
    symbol: &'static str,
    aliases: &'static [&'static str],
    times: f64,
    over: f64,
) -> Unit {
    Unit {
        symbol,
        dimension,
        aliases,
        offset: 0.0,
        times,
        over,
    }
}

const fn shifted(
    symbol: &'static str,
    aliases: &'static [&'static str],
    offset: f64,
    times: f64,
    over: f64,
) -> Unit {
    Unit {
        symbol,
        dimension: Dimension::Temperature,
        aliases,
        offset,
        times,
        over,
    }
}

/// Every unit, by dimension, the SI unit first.
///
/// Exact by definition: degC, bar, atm, Torr = atm/760, the thermochemical
/// calorie 4.184 J, dyn, P. Conventional: mmHg = 13.5951 · 9.80665 Pa, and
/// psi from lb = 0.45359237 kg, in = 0.0254 m, g = 9.80665 m/s2 (NIST SP 811).
const UNITS: [Unit; 45] = {
    use Dimension as D;
    [
        shifted("K", &[], 0.0, 1.0, 1.0),
        shifted("degC", &["C"], 273.15, 1.0, 1.0),
        shifted("degF", &["F"], 459.67, 5.0, 9.0),
        unit(D::Pressure, "Pa", &[], 1.0, 1.0),
        unit(D::Pressure, "kPa", &[], 1e3, 1.0),
        unit(D::Pressure, "MPa", &[], 1e6, 1.0),
        unit(D::Pressure, "hPa", &[], 1e2, 1.0),
        unit(D::Pressure, "bar", &[], 1e5, 1.0),
        unit(D::Pressure, "mbar", &[], 1e2, 1.0),
        unit(D::Pressure, "atm", &[], 101_325.0, 1.0),
        unit(D::Pressure, "mmHg", &["mm Hg"], 133.322_387_415, 1.0),
        unit(D::Pressure, "Torr", &["torr"], 101_325.0, 760.0),
        unit(D::Pressure, "psi", &[], 6_894.757_293_168_361, 1.0),
        unit(D::Density, "kg/m3", &[], 1.0, 1.0),
        unit(D::Density, "g/cm3", &["g/ccm", "g/cc"], 1e3, 1.0),
        unit(D::Density, "g/mL", &["g/ml"], 1e3, 1.0),
        unit(D::Density, "kg/L", &["kg/l", "kg/dm3"], 1e3, 1.0),
        unit(D::Density, "g/L", &["g/l", "g/dm3"], 1.0, 1.0),
        unit(D::MolarMass, "kg/mol", &[], 1.0, 1.0),
        unit(D::MolarMass, "g/mol", &[], 1.0, 1e3),
        unit(D::MolarMass, "kg/kmol", &[], 1.0, 1e3),
        unit(D::MolarVolume, "m3/mol", &[], 1.0, 1.0),
        unit(
            D::MolarVolume,
            "cm3/mol",
            &["mL/mol", "ml/mol", "cc/mol"],
            1.0,
            1e6,
        ),
        unit(
            D::MolarVolume,
            "L/mol",
            &["l/mol", "dm3/mol", "m3/kmol"],
            1.0,
            1e3,
        ),
        unit(D::MolarEnergy, "J/mol", &[], 1.0, 1.0),
        unit(D::MolarEnergy, "kJ/mol", &["MJ/kmol"], 1e3, 1.0),
        unit(D::MolarEnergy, "kJ/kmol", &[], 1.0, 1.0),
        unit(D::MolarEnergy, "cal/mol", &[], 4.184, 1.0),
        unit(D::MolarEnergy, "kcal/mol", &[], 4_184.0, 1.0),
        unit(
            D::MolarHeatCapacity,
            "J/(mol K)",
            &["J/mol/K", "J/mol K"],
            1.0,
            1.0,
        ),
        unit(
            D::MolarHeatCapacity,
            "kJ/(mol K)",
            &["kJ/mol/K", "kJ/mol K"],
            1e3,
            1.0,
        ),
        unit(
            D::MolarHeatCapacity,
            "kJ/(kmol K)",
            &["kJ/kmol/K", "kJ/kmol K"],
            1.0,
            1.0,
        ),
        unit(
            D::MolarHeatCapacity,
            "cal/(mol K)",
            &["cal/mol/K", "cal/mol K"],
            4.184,
            1.0,
        ),
        unit(D::Viscosity, "Pa s", &[], 1.0, 1.0),
        unit(D::Viscosity, "mPa s", &[], 1.0, 1e3),
        unit(D::Viscosity, "uPa s", &[], 1.0, 1e6),
        unit(D::Viscosity, "cP", &[], 1.0, 1e3),
        unit(D::Viscosity, "P", &[], 1.0, 1e1),
        unit(D::SurfaceTension, "N/m", &["J/m2"], 1.0, 1.0),
        unit(D::SurfaceTension, "mN/m", &["mJ/m2"], 1.0, 1e3),
        unit(D::SurfaceTension, "dyn/cm", &["dyne/cm"], 1.0, 1e3),
        unit(D::SolubilityParameter, "Pa^0.5", &["(J/m3)^0.5"], 1.0, 1.0),
        unit(D::SolubilityParameter, "MPa^0.5", &[], 1e3, 1.0),
        unit(
            D::SolubilityParameter,
            "(J/cm3)^0.5",
            &["(J/mL)^0.5"],
            1e3,
            1.0,
        ),
        // The square root of 4.184e6, to the nearest double.
        unit(
            D::SolubilityParameter,
            "(cal/cm3)^0.5",
            &["(cal/mL)^0.5"],
            2_045.482_828_087_295_3,
            1.0,
        ),
    ]
};

/// Why a text is not a quantity of the wanted dimension.
///
/// The message continues a sentence whose subject is the place the text came
/// from: "`at_least` *is given in `g/mol`, which is not a temperature*".
#[derive(Clone, Debug, PartialEq, Error)]
pub enum UnitError {
    /// The text does not begin with a number.
    #[error("does not begin with a number (found `{text}`)")]
    NotANumber {
        /// The text as written.
        text: String,
        /// What was wanted.
        wanted: Dimension,
    },
    /// A decimal comma, or a comma between thousands.
    #[error("has a comma in its number (found `{text}`); decimals take a point")]
    Comma {
        /// The text as written.
        text: String,
        /// What was wanted.
        wanted: Dimension,
    },
    /// The number is infinite, or too large for a double.
    #[error("is not a finite number (found `{text}`)")]
    NotFinite {
        /// The text as written.
        text: String,
        /// What was wanted.
        wanted: Dimension,
    },
    /// A bare number where a unit is needed.
    #[error("is `{text}` without a unit, but {} needs one", .wanted.noun())]
    NoUnit {
        /// The text as written.
        text: String,
        /// What was wanted.
        wanted: Dimension,
    },
    /// A unit of another dimension.
    #[error("is given in `{unit}`, which is not {}", .wanted.noun())]
    OtherDimension {
        /// The unit as written.
        unit: String,
        /// What it measures.
        found: Dimension,
        /// What was wanted.
        wanted: Dimension,
    },
    /// A unit nobody knows here.
    #[error("is given in `{unit}`, which is not a known unit{}", Nearest(*.nearest))]
    UnknownUnit {
        /// The unit as written.
        unit: String,
        /// The unit it may have been meant for.
        nearest: Option<&'static str>,
        /// What was wanted.
        wanted: Dimension,
    },
    /// A temperature below 0 K.
    #[error("is `{text}`, which is {kelvin:.2} K, below absolute zero")]
    BelowAbsoluteZero {
        /// The text as written.
        text: String,
        /// The temperature in K.
        kelvin: f64,
    },
    /// A negative value of a quantity that has none.
    #[error("is `{text}`, but {} is never negative", .wanted.noun())]
    Negative {
        /// The text as written.
        text: String,
        /// What was wanted.
        wanted: Dimension,
    },
}

struct Nearest(Option<&'static str>);

impl fmt::Display for Nearest {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            Some(name) => write!(f, "; nearest is `{name}`"),
            None => Ok(()),
        }
    }
}

impl UnitError {
    /// What was wanted.
    pub const fn wanted(&self) -> Dimension {
        match self {
            Self::NotANumber { wanted, .. }
            | Self::Comma { wanted, .. }
            | Self::NotFinite { wanted, .. }
            | Self::NoUnit { wanted, .. }
            | Self::OtherDimension { wanted, .. }
            | Self::UnknownUnit { wanted, .. }
            | Self::Negative { wanted, .. } => *wanted,
            Self::BelowAbsoluteZero { .. } => Dimension::Temperature,
        }
    }

    /// How to mend it: the accepted units and an example, on one line.
    pub fn remedy(&self) -> String {
        accepted(self.wanted())
    }
}

/// The accepted units of a dimension and an example, as one line of help.
pub fn accepted(dimension: Dimension) -> String {
    let mut line = String::from("accepted: ");
    if dimension == Dimension::Number {
        line.push_str("a number without a unit");
    }
    for (position, unit) in dimension.units().enumerate() {
        if position > 0 {
            line.push_str(", ");
        }
        line.push_str(unit.symbol);
    }
    line.push_str(" — for example ");
    if dimension == Dimension::Number {
        line.push_str(dimension.example());
    } else {
        line.push('"');
        line.push_str(dimension.example());
        line.push('"');
    }
    line
}

/// Reads a quantity such as `115 degC` into the SI unit of its dimension.
///
/// The number takes a decimal point and an optional exponent; the blank before
/// the unit may be left out. `°C`, `m³`, `m^3`, `·` and `*` are read as
/// `degC`, `m3`, `m3` and a blank. A [`Dimension::Number`] has no unit. Units
/// are case-sensitive, since mPa and MPa differ by nine orders of magnitude.
///
/// # Errors
///
/// See [`UnitError`]: no number, not finite, no unit or one of another
/// dimension, below absolute zero, negative where that has no meaning.
///
/// # Example
///
/// ```
/// use groupsmith::quantity::{Dimension, unit};
/// assert_eq!(unit::parse("1.01325 bar", Dimension::Pressure), Ok(101_325.0));
/// assert!(unit::parse("345", Dimension::Temperature).is_err());
/// ```
pub fn parse(text: &str, wanted: Dimension) -> Result<f64, UnitError> {
    let (value, unit) = read(text, wanted)?;
    let value_si = match unit {
        Some(unit) => unit.to_si(value),
        None => value,
    };
    if !value_si.is_finite() {
        return Err(UnitError::NotFinite {
            text: text.trim().to_owned(),
            wanted,
        });
    }
    if wanted == Dimension::Temperature && value_si < 0.0 {
        return Err(UnitError::BelowAbsoluteZero {
            text: text.trim().to_owned(),
            kelvin: value_si,
        });
    }
    if value_si < 0.0 && wanted.is_never_negative() {
        return Err(UnitError::Negative {
            text: text.trim().to_owned(),
            wanted,
        });
    }
    Ok(value_si)
}

/// The unit of a dimension by any of its spellings; `None` for a bare number.
///
/// # Errors
///
/// As [`parse`] has of a unit: none, unknown, or of another dimension.
pub fn named(unit: &str, wanted: Dimension) -> Result<Option<&'static Unit>, UnitError> {
    read(&format!("1 {unit}"), wanted).map(|(_, unit)| unit)
}

/// Reads a width such as `5 degC` (which is 5 K) into SI.
///
/// # Errors
///
/// As [`parse`]; a negative width is refused for every dimension.
pub fn parse_difference(text: &str, wanted: Dimension) -> Result<f64, UnitError> {
    let (value, unit) = read(text, wanted)?;
    let difference_si = match unit {
        Some(unit) => unit.difference_to_si(value),
        None => value,
    };
    if !difference_si.is_finite() {
        return Err(UnitError::NotFinite {
            text: text.trim().to_owned(),
            wanted,
        });
    }
    if difference_si < 0.0 {
        return Err(UnitError::Negative {
            text: text.trim().to_owned(),
            wanted,
        });
    }
    Ok(difference_si)
}

/// The unit CSV and JSON show: SI, but MPa^0.5 for solubility parameters.
/// `None` for a bare number.
pub fn table_unit(dimension: Dimension) -> Option<&'static Unit> {
    named_unit(dimension, si_symbol(dimension))
}

/// The unit tables for people show, chosen for short numbers (g/mol, kJ/mol,
/// mPa s). `None` for a bare number.
pub fn reading_unit(dimension: Dimension) -> Option<&'static Unit> {
    let symbol = match dimension {
        Dimension::Pressure => "kPa",
        Dimension::MolarMass => "g/mol",
        Dimension::MolarVolume => "cm3/mol",
        Dimension::MolarEnergy => "kJ/mol",
        Dimension::Viscosity => "mPa s",
        Dimension::SurfaceTension => "mN/m",
        other => si_symbol(other),
    };
    named_unit(dimension, symbol)
}

/// The symbol of [`table_unit`]; empty for a bare number.
pub const fn si_symbol(dimension: Dimension) -> &'static str {
    match dimension {
        Dimension::Number => "",
        Dimension::Temperature => "K",
        Dimension::Pressure => "Pa",
        Dimension::Density => "kg/m3",
        Dimension::MolarMass => "kg/mol",
        Dimension::MolarVolume => "m3/mol",
        Dimension::MolarEnergy => "J/mol",
        Dimension::MolarHeatCapacity => "J/(mol K)",
        Dimension::Viscosity => "Pa s",
        Dimension::SurfaceTension => "N/m",
        Dimension::SolubilityParameter => "MPa^0.5",
    }
}

/// The ending that names [`table_unit`] in a column name, such as `_k` or
/// `_kg_per_m3`; empty for a bare number.
pub const fn column_suffix(dimension: Dimension) -> &'static str {
    match dimension {
        Dimension::Number => "",
        Dimension::Temperature => "_k",
        Dimension::Pressure => "_pa",
        Dimension::Density => "_kg_per_m3",
        Dimension::MolarMass => "_kg_per_mol",
        Dimension::MolarVolume => "_m3_per_mol",
        Dimension::MolarEnergy => "_j_per_mol",
        Dimension::MolarHeatCapacity => "_j_per_mol_k",
        Dimension::Viscosity => "_pa_s",
        Dimension::SurfaceTension => "_n_per_m",
        Dimension::SolubilityParameter => "_sqrt_mpa",
    }
}

/// A value as people read it, in the unit of [`reading_unit`]: four digits, but
/// a temperature to a hundredth of a kelvin, as it is stated.
pub fn reading_text(value_si: f64, dimension: Dimension) -> String {
    let shown = match reading_unit(dimension) {
        Some(unit) => unit.from_si(value_si),
        None => value_si,
    };
    digits_for_reading(shown, dimension)
}

/// The digits of [`reading_text`] for a value that is in its unit already.
pub fn digits_for_reading(shown: f64, dimension: Dimension) -> String {
    match dimension {
        Dimension::Temperature => format!("{shown:.2}"),
        _ => number::for_reading(shown),
    }
}

/// A value with its unit, as tables show it: `351.44 K`.
pub fn table_text(value_si: f64, dimension: Dimension) -> String {
    let shown = number::short(to_table(value_si, dimension));
    match si_symbol(dimension) {
        "" => shown,
        symbol => format!("{shown} {symbol}"),
    }
}

/// Converts an SI value to the unit CSV and JSON show.
pub fn to_table(value_si: f64, dimension: Dimension) -> f64 {
    match dimension {
        Dimension::SolubilityParameter => value_si / 1e3,
        _ => value_si,
    }
}

fn named_unit(dimension: Dimension, symbol: &str) -> Option<&'static Unit> {
    dimension.units().find(|unit| unit.symbol == symbol)
}

/// Splits a text into its number and its unit of the wanted dimension.
fn read(text: &str, wanted: Dimension) -> Result<(f64, Option<&'static Unit>), UnitError> {
    let text = text.trim();
    let plain_minus: Cow<'_, str> = match text.strip_prefix('\u{2212}') {
        Some(rest) => Cow::Owned(format!("-{rest}")),
        None => Cow::Borrowed(text),
    };
    let end = number_end(&plain_minus);
    let (number, unit) = plain_minus.split_at(end);
    let value = match number.parse::<f64>() {
        Ok(value) => value,
        Err(_) if ["inf", "nan"].iter().any(|word| names(text, word)) => {
            return Err(UnitError::NotFinite {
                text: text.to_owned(),
                wanted,
            });
        }
        Err(_) => {
            return Err(UnitError::NotANumber {
                text: text.to_owned(),
                wanted,
            });
        }
    };
    if unit.starts_with(',') {
        return Err(UnitError::Comma {
            text: text.to_owned(),
            wanted,
        });
    }
    if !value.is_finite() {
        return Err(UnitError::NotFinite {
            text: text.to_owned(),
            wanted,
        });
    }
    let unit = unit.trim();
    if unit.is_empty() {
        return match wanted {
            Dimension::Number => Ok((value, None)),
            _ => Err(UnitError::NoUnit {
                text: text.to_owned(),
                wanted,
            }),
        };
    }
    let normal = normalized(unit);
    let mut found = None;
    for candidate in &UNITS {
        if candidate.symbol == normal || candidate.aliases.contains(&normal.as_str()) {
            found = Some(candidate);
        }
    }
    match found {
        Some(found) if found.dimension == wanted => Ok((value, Some(found))),
        Some(found) => Err(UnitError::OtherDimension {
            unit: unit.to_owned(),
            found: found.dimension,
            wanted,
        }),
        None => Err(UnitError::UnknownUnit {
            unit: unit.to_owned(),
            nearest: nearest_unit(&normal, wanted),
            wanted,
        }),
    }
}

/// Whether the text, sign aside, begins with a word, in any case.
fn names(text: &str, word: &str) -> bool {
    text.trim_start_matches(['+', '-'])
        .get(..word.len())
        .is_some_and(|start| start.eq_ignore_ascii_case(word))
}

/// Where the leading decimal number ends, in bytes.
fn number_end(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |mut at: usize| {
        while bytes.get(at).is_some_and(u8::is_ascii_digit) {
            at += 1;
        }
        at
    };
    let mut at = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    at = digits_from(at);
    if bytes.get(at) == Some(&b'.') {
        at = digits_from(at + 1);
    }
    // An exponent counts only with digits behind it: `5 eV` is no exponent.
    if matches!(bytes.get(at), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
        let end = digits_from(at + 1 + sign);
        if end > at + 1 + sign {
            at = end;
        }
    }
    at
}

/// One spelling for the many ways a unit is typed.
fn normalized(unit: &str) -> String {
    let mut plain = String::with_capacity(unit.len());
    for character in unit.chars() {
        match character {
            '°' | 'º' => plain.push_str("deg"),
            '²' => plain.push('2'),
            '³' => plain.push('3'),
            'µ' | 'μ' => plain.push('u'),
            '·' | '⋅' | '*' => plain.push(' '),
            c if c.is_whitespace() => plain.push(' '),
            c => plain.push(c),
        }
    }
    let plain = plain
        .replace("^2", "2")
        .replace("^3", "3")
        .replace("^(1/2)", "^0.5")
        .replace("^1/2", "^0.5")
        .replace("deg ", "deg");
    let mut normal = String::with_capacity(plain.len());
    for word in plain.split(' ').filter(|word| !word.is_empty()) {
        let glue = normal.ends_with(['/', '(']) || word.starts_with(['/', ')', '^']);
        if !normal.is_empty() && !glue {
            normal.push(' ');
        }
        normal.push_str(word);
    }
    // `Pa.s` and `J/(mol.K)`: a point between letters is a product.
    let letters: Vec<char> = normal.chars().collect();
    let is_letter = |at: usize| letters.get(at).is_some_and(char::is_ascii_alphabetic);
    let product =
        |at: usize| letters[at] == '.' && at > 0 && is_letter(at - 1) && is_letter(at + 1);
    (0..letters.len())
        .map(|at| if product(at) { ' ' } else { letters[at] })
        .collect()
}

/// The unit of the wanted dimension whose symbol is most like the text.
fn nearest_unit(text: &str, wanted: Dimension) -> Option<&'static str> {
    nearest(text, wanted.units().map(|unit| unit.symbol))
}

/// The name most like a mistyped one, if any is near enough to be meant.
///
/// Near enough: the restricted edit distance (insertion, deletion,
/// substitution, swap of neighbors; case differences count a tenth) is at most
/// a third of the longer name, and at least one edit is always forgiven for
/// names of two letters or more. The first of equally near names is taken.
pub fn nearest<'a>(text: &str, names: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    // A name is short; a text far longer than that is not a slip of the finger.
    if text.len() > 120 {
        return None;
    }
    let mut best: Option<(u32, &'a str)> = None;
    for name in names {
        let distance = edit_distance(text, name);
        let longer = text.chars().count().max(name.chars().count()) as u32;
        let forgiven = if longer < 2 {
            5
        } else {
            (longer * 10 / 3).max(10)
        };
        if distance <= forgiven && best.is_none_or(|(least, _)| distance < least) {
            best = Some((distance, name));
        }
    }
    best.map(|(_, name)| name)
}

/// Tenths of an edit between two texts (optimal string alignment).
fn edit_distance(left: &str, right: &str) -> u32 {
    let left: Vec<char> = left.chars().collect();
    let right: Vec<char> = right.chars().collect();
    let width = right.len() + 1;
    let mut before_last: Vec<u32> = vec![0; width];
    let mut last: Vec<u32> = (0..width as u32).map(|edits| edits * 10).collect();
    let mut row = vec![0; width];
    for (i, &a) in left.iter().enumerate() {
        row[0] = (i as u32 + 1) * 10;
        for (j, &b) in right.iter().enumerate() {
            let change = if a == b {
                0
            } else if a.eq_ignore_ascii_case(&b) {
                1
            } else {
                10
            };
            let mut least = (last[j] + change).min(last[j + 1] + 10).min(row[j] + 10);
            if i > 0 && j > 0 && a == right[j - 1] && left[i - 1] == b {
                least = least.min(before_last[j - 1] + 10);
            }
            row[j + 1] = least;
        }
        std::mem::swap(&mut before_last, &mut last);
        std::mem::swap(&mut last, &mut row);
    }
    last[width - 1]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantities_become_si() {
        use Dimension as D;
        for (text, dimension, value_si) in [
            ("115 degC", D::Temperature, 388.15),
            ("345 K", D::Temperature, 345.0),
            ("345K", D::Temperature, 345.0),
            ("239 degF", D::Temperature, (239.0 + 459.67) * 5.0 / 9.0),
            ("25 °C", D::Temperature, 298.15),
            ("\u{2212}20 deg C", D::Temperature, 253.149_999_999_999_98),
            ("1.01325 bar", D::Pressure, 101_325.0),
            ("760 Torr", D::Pressure, 101_325.0),
            ("101.325 kPa", D::Pressure, 101_325.0),
            ("1e-3 MPa", D::Pressure, 1_000.0),
            ("850 kg/m3", D::Density, 850.0),
            ("0.85 g/mL", D::Density, 850.0),
            ("850 kg / m^3", D::Density, 850.0),
            ("850 kg/m³", D::Density, 850.0),
            ("18.015 g/mol", D::MolarMass, 0.018_015),
            ("98.5 cm³/mol", D::MolarVolume, 98.5e-6),
            ("35 kJ/mol", D::MolarEnergy, 35_000.0),
            ("10 kcal/mol", D::MolarEnergy, 41_840.0),
            ("120 J/(mol K)", D::MolarHeatCapacity, 120.0),
            ("120 J/(mol·K)", D::MolarHeatCapacity, 120.0),
            ("120 J/(mol.K)", D::MolarHeatCapacity, 120.0),
            ("120 J/mol/K", D::MolarHeatCapacity, 120.0),
            ("1.5 mPa s", D::Viscosity, 0.001_5),
            ("1.5 mPa.s", D::Viscosity, 0.001_5),
            ("1.5 mPa*s", D::Viscosity, 0.001_5),
            ("1.5 cP", D::Viscosity, 0.001_5),
            ("500 µPa s", D::Viscosity, 0.000_5),
            ("25 mN/m", D::SurfaceTension, 0.025),
            ("25 dyn/cm", D::SurfaceTension, 0.025),
            ("17.4 MPa^0.5", D::SolubilityParameter, 17_400.0),
            ("17.4 MPa^(1/2)", D::SolubilityParameter, 17_400.0),
            (
                "2 (cal/cm3)^0.5",
                D::SolubilityParameter,
                2.0 * 4.184e6_f64.sqrt(),
            ),
            ("1.5", D::Number, 1.5),
            (" +2e3 ", D::Number, 2_000.0),
        ] {
            assert_eq!(parse(text, dimension), Ok(value_si), "{text}");
        }
    }

    #[test]
    fn a_width_in_degrees_is_not_shifted() {
        assert_eq!(parse_difference("5 degC", Dimension::Temperature), Ok(5.0));
        assert_eq!(parse_difference("9 degF", Dimension::Temperature), Ok(5.0));
        assert!(parse_difference("-1 K", Dimension::Temperature).is_err());
        assert!(parse_difference("5", Dimension::Temperature).is_err());
    }

    #[test]
    fn what_is_no_such_quantity_is_refused_with_its_reason() {
        let message = |text, wanted| parse(text, wanted).unwrap_err().to_string();
        use Dimension as D;
        assert_eq!(
            message("120 g/mol", D::Temperature),
            "is given in `g/mol`, which is not a temperature"
        );
        assert_eq!(
            message("120", D::Temperature),
            "is `120` without a unit, but a temperature needs one"
        );
        assert_eq!(
            message("101 kpa", D::Pressure),
            "is given in `kpa`, which is not a known unit; nearest is `kPa`"
        );
        assert_eq!(
            message("3 furlongs", D::Pressure),
            "is given in `furlongs`, which is not a known unit"
        );
        assert_eq!(
            message("-300 degC", D::Temperature),
            "is `-300 degC`, which is -26.85 K, below absolute zero"
        );
        assert_eq!(
            message("-1 bar", D::Pressure),
            "is `-1 bar`, but a pressure is never negative"
        );
        assert_eq!(
            message("1,5 bar", D::Pressure),
            "has a comma in its number (found `1,5 bar`); decimals take a point"
        );
        for text in ["inf K", "-Infinity K", "nan K", "1e999 K"] {
            assert!(
                matches!(
                    parse(text, D::Temperature),
                    Err(UnitError::NotFinite { .. })
                ),
                "{text}"
            );
        }
        assert_eq!(
            parse("1e308 MPa", D::Pressure),
            Err(UnitError::NotFinite {
                text: "1e308 MPa".into(),
                wanted: D::Pressure
            })
        );
        for text in ["", "  ", "K", "-", ".", "e5 K", "hot"] {
            assert!(
                matches!(
                    parse(text, D::Temperature),
                    Err(UnitError::NotANumber { .. })
                ),
                "{text}"
            );
        }
        assert_eq!(
            parse("1 K", D::Number),
            Err(UnitError::OtherDimension {
                unit: "K".into(),
                found: D::Temperature,
                wanted: D::Number
            })
        );
    }

    #[test]
    fn every_symbol_and_alias_stands_for_one_unit() {
        let mut spellings: Vec<&str> = UNITS
            .iter()
            .flat_map(|unit| unit.aliases.iter().copied().chain([unit.symbol]))
            .collect();
        for spelling in &spellings {
            assert_eq!(&normalized(spelling), spelling);
        }
        spellings.sort_unstable();
        let all = spellings.len();
        spellings.dedup();
        assert_eq!(spellings.len(), all);
    }

    #[test]
    fn every_dimension_has_units_to_read_and_to_show() {
        for dimension in Dimension::ALL {
            parse(dimension.example(), dimension).unwrap();
            if dimension == Dimension::Number {
                assert_eq!(table_unit(dimension), None);
                continue;
            }
            let table = table_unit(dimension).unwrap();
            assert_eq!(table.symbol, si_symbol(dimension));
            assert_eq!(table.from_si(4_000.0), to_table(4_000.0, dimension));
            let reading = reading_unit(dimension).unwrap();
            assert_eq!(reading.dimension, dimension);
            assert!(!column_suffix(dimension).is_empty());
        }
    }

    #[test]
    fn conversion_and_its_inverse_agree() {
        for unit in &UNITS {
            for value in [0.25, 1.0, 17.4, 345.678] {
                let back = unit.from_si(unit.to_si(value));
                assert!(
                    (back - value).abs() <= 1e-12 * value.abs().max(500.0),
                    "{unit}"
                );
            }
        }
    }

    #[test]
    fn the_nearest_name_is_near() {
        let names = ["boiling_point", "melting_point", "molar_mass"];
        assert_eq!(nearest("boilingpoint", names), Some("boiling_point"));
        assert_eq!(nearest("meltign_point", names), Some("melting_point"));
        assert_eq!(nearest("colour", names), None);
        assert_eq!(nearest("", names), None);
    }
}
