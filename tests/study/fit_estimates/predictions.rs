//! Predictions of the cross-validation, value by value, for comparisons with other methods.
//!
//! All values are in SI units; a molecule is named by its constitution. None rests on the
//! part of the data that the molecule is in.
//!
//! | file | holds |
//! |---|---|
//! | `LEVEL-QUANTITY.csv` | the measured values of a quantity with their estimates and 90 % intervals; molar volumes are those at 298.15 K, carried there from where they are fitted; enthalpies of vaporization at the boiling point beside the slopes that they follow from |
//! | `constants.csv` | boiling point, molar volume at 298.15 K, enthalpy of vaporization at the boiling point and all that is fitted on boiling point and molar volume, for every molecule, with and without its measured boiling point |
//! | `LEVEL-derived.csv` | measured vapor pressures, densities and enthalpies of vaporization with what is derived for them |

use std::error::Error;
use std::fmt::Write as _;
use std::path::Path;

use groupsmith::pure::PureMethods;
use groupsmith::pure::fitted::{Family, Level, Quantity};
use groupsmith::quantity::{Property, REFERENCE_TEMPERATURE_K};
use rayon::prelude::*;

use super::Fit;
use super::derived::{self, Derived, Figure, Point};
use super::report::{Outcome, Report};

/// Writes every file of the folder.
pub(crate) fn write(folder: &Path, fit: &Fit, report: &Report) -> Result<(), Box<dyn Error>> {
    std::fs::create_dir_all(folder)?;
    for outcome in &report.outcomes {
        // volumes are compared at 298.15 K, below
        if outcome.quantity == Quantity::MolarVolume {
            continue;
        }
        let file = format!("{}-{}.csv", short(outcome.level), outcome.quantity.id());
        std::fs::write(folder.join(file), quantity(fit, outcome)?)?;
    }
    std::fs::write(folder.join("constants.csv"), constants(fit)?)?;
    for level in Level::ALL {
        let points = derived::points(fit, level);
        let level = short(level);
        let file = |name: &str| folder.join(format!("{level}-{name}.csv"));
        std::fs::write(file("derived"), derived(fit, &points)?)?;
        std::fs::write(file("molar_volume"), volumes(fit, &points)?)?;
        std::fs::write(file("enthalpy_of_vaporization"), enthalpies(fit, &points)?)?;
    }
    Ok(())
}

const fn short(level: Level) -> &'static str {
    match level {
        Level::Count => "count",
        Level::Structure => "structure",
    }
}

/// A cell; blank where there is no value.
fn cell(value: Option<f64>) -> String {
    value
        .filter(|value| value.is_finite())
        .map_or_else(String::new, |value| format!("{value:.7e}"))
}

/// Values of one quantity: of which molecule, measured, estimated, the ends of the interval,
/// whether all atoms are in the fit, whether the program would give a value.
type Row = (usize, f64, Option<f64>, [Option<f64>; 2], bool, bool);

fn table(fit: &Fit, rows: impl Iterator<Item = Row>) -> Result<String, Box<dyn Error>> {
    let mut text = String::from(
        "constitution,name,family,heavy_atoms,part,value,estimate,low,high,inside,given\n",
    );
    for (molecule, value, estimate, [low, high], inside, given) in rows {
        let described = &fit.molecules[molecule];
        let molecule = &fit.reference.molecules[molecule];
        writeln!(
            text,
            "{},\"{}\",{},{},{},{},{},{},{},{inside},{given}",
            molecule.constitution,
            molecule.name.replace('"', "\"\""),
            Family::of(described).id(),
            described.heavy_atoms(),
            molecule.fold,
            cell(Some(value)),
            cell(estimate),
            cell(low),
            cell(high),
        )?;
    }
    Ok(text)
}

fn quantity(fit: &Fit, outcome: &Outcome) -> Result<String, Box<dyn Error>> {
    let rows = outcome.points.iter().map(|point| {
        let estimate = Some(point.estimate);
        let (value, interval) = (point.value, point.interval);
        (
            point.molecule,
            value,
            estimate,
            interval,
            point.inside,
            point.given,
        )
    });
    table(fit, rows)
}

/// What follows from the structure alone, of one figure.
fn rows_of(points: &[Point], figure: Figure) -> impl Iterator<Item = Row> {
    let of_figure = move |point: &&Point| point.figure == figure && !point.measured;
    points.iter().filter(of_figure).map(|point| {
        let (low, high) = point.interval.unzip();
        let given = point.estimate.is_some();
        (
            point.molecule,
            point.value,
            point.estimate,
            [low, high],
            point.inside,
            given,
        )
    })
}

fn enthalpies(fit: &Fit, points: &[Point]) -> Result<String, Box<dyn Error>> {
    table(fit, rows_of(points, Figure::EnthalpyOfVaporization))
}

/// Molar volumes at 298.15 K, m³/mol.
fn volumes(fit: &Fit, points: &[Point]) -> Result<String, Box<dyn Error>> {
    let rows = rows_of(points, Figure::DensityAt298).map(
        |(molecule, value, estimate, [low, high], inside, given)| {
            let mass = fit.reference.molecules[molecule].molar_mass_kg_per_mol;
            let volume = |density: Option<f64>| density.map(|density| mass / density);
            let interval = [volume(high), volume(low)];
            (
                molecule,
                mass / value,
                volume(estimate),
                interval,
                inside,
                given,
            )
        },
    );
    table(fit, rows)
}

fn constants(fit: &Fit) -> Result<String, Box<dyn Error>> {
    let fitted =
        || derived::constants().filter(|quantity| !matches!(quantity, Quantity::MolarVolume));
    let mut text =
        String::from("constitution,level,from,molar_mass_kg_per_mol,family,heavy_atoms,part");
    for quantity in fitted() {
        write!(text, ",{}", quantity.id())?;
    }
    text.push_str(",molar_volume,enthalpy_of_vaporization\n");
    let measured = fit.reference.measured_boiling_points();
    let methods = PureMethods::built_in();
    for level in Level::ALL {
        let lines: Vec<String> = (0..fit.molecules.len())
            .into_par_iter()
            .map(|number| {
                let (molecule, described) =
                    (&fit.reference.molecules[number], &fit.molecules[number]);
                let line = |from: &str, boiling_point: Option<f64>| {
                    let mut line = format!(
                        "{},{},{from},{},{},{},{}",
                        molecule.constitution,
                        short(level),
                        molecule.molar_mass_kg_per_mol,
                        Family::of(described).id(),
                        described.heavy_atoms(),
                        molecule.fold
                    );
                    let fitted = fitted().map(|quantity| {
                        derived::constant(fit, level, quantity, number, boiling_point)
                    });
                    let whole = Derived::of(fit, level, number, boiling_point);
                    let of = |property: Property| {
                        let found =
                            whole
                                .as_ref()?
                                .estimate(&methods, property, REFERENCE_TEMPERATURE_K);
                        found.map(|estimate| estimate.value)
                    };
                    let volume = of(Property::LiquidDensity)
                        .map(|density| molecule.molar_mass_kg_per_mol / density);
                    let derived = [volume, of(Property::EnthalpyOfVaporization)];
                    for value in fitted.chain(derived) {
                        line.push(',');
                        line.push_str(&cell(value));
                    }
                    line.push('\n');
                    line
                };
                let known = measured.get(&number).copied();
                let with_measured = known.map(|known| line("measured T_b", Some(known)));
                line("structure", None) + with_measured.as_deref().unwrap_or_default()
            })
            .collect();
        text.extend(lines);
    }
    Ok(text)
}

fn derived(fit: &Fit, points: &[Point]) -> Result<String, Box<dyn Error>> {
    let mut text = String::from(
        "constitution,figure,from,temperature_k,value,estimate,low,high,inside,given\n",
    );
    for point in points {
        let (low, high) = point.interval.unzip();
        writeln!(
            text,
            "{},{},{},{},{},{},{},{},{},{}",
            fit.reference.molecules[point.molecule].constitution,
            point.figure.id(),
            point.from(),
            cell(Some(point.temperature_k)),
            cell(Some(point.value)),
            cell(point.estimate),
            cell(low),
            cell(high),
            point.inside,
            point.estimate.is_some()
        )?;
    }
    Ok(text)
}
