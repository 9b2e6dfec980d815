//! Predictions of the cross-validation, value by value, for comparisons with other methods.
//!
//! All values are in SI units; a molecule is named by its constitution. None rests on the
//! part of the data that the molecule is in.
//!
//! | file | holds |
//! |---|---|
//! | `LEVEL-QUANTITY.csv` | the measured values of a quantity with their estimates and 90 % intervals |
//! | `constants.csv` | boiling point, molar volume and all that rests on them for every molecule, with and without its measured boiling point |
//! | `LEVEL-derived.csv` | measured vapor pressures, densities and enthalpies of vaporization with what is derived for them |

use std::error::Error;
use std::fmt::Write as _;
use std::path::Path;

use groupsmith::pure::fitted::{Level, Quantity};

use super::Fit;
use super::derived;
use super::report::{Outcome, Report};

/// Writes every file of the folder.
pub(crate) fn write(folder: &Path, fit: &Fit, report: &Report) -> Result<(), Box<dyn Error>> {
    std::fs::create_dir_all(folder)?;
    for outcome in &report.outcomes {
        let file = format!("{}-{}.csv", short(outcome.level), outcome.quantity.id());
        std::fs::write(folder.join(file), quantity(fit, outcome)?)?;
    }
    std::fs::write(folder.join("constants.csv"), constants(fit)?)?;
    for level in Level::ALL {
        let file = format!("{}-derived.csv", short(level));
        std::fs::write(folder.join(file), derived(fit, level)?)?;
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

fn quantity(fit: &Fit, outcome: &Outcome) -> Result<String, Box<dyn Error>> {
    let mut text = String::from(
        "constitution,name,family,heavy_atoms,part,value,estimate,low,high,inside,given\n",
    );
    for point in &outcome.points {
        let molecule = &fit.reference.molecules[point.molecule];
        writeln!(
            text,
            "{},\"{}\",{},{},{},{},{},{},{},{},{}",
            molecule.constitution,
            molecule.name.replace('"', "\"\""),
            molecule.family,
            molecule.heavy_atoms,
            molecule.fold,
            cell(Some(point.value)),
            cell(Some(point.estimate)),
            cell(point.interval[0]),
            cell(point.interval[1]),
            point.inside,
            point.given
        )?;
    }
    Ok(text)
}

fn constants(fit: &Fit) -> Result<String, Box<dyn Error>> {
    let mut text =
        String::from("constitution,level,from,molar_mass_kg_per_mol,family,heavy_atoms,part");
    for quantity in derived::constants() {
        write!(text, ",{}", quantity.id())?;
    }
    text.push('\n');
    let measured: std::collections::BTreeMap<usize, f64> = fit.reference.values
        [Quantity::BoilingPoint as usize]
        .iter()
        .copied()
        .collect();
    for level in Level::ALL {
        for (number, molecule) in fit.reference.molecules.iter().enumerate() {
            let known = measured.get(&number).copied();
            let from = [("structure", None), ("measured T_b", known)];
            for (from, boiling_point) in from.into_iter().take(1 + usize::from(known.is_some())) {
                write!(
                    text,
                    "{},{},{from},{},{},{},{}",
                    molecule.constitution,
                    short(level),
                    molecule.molar_mass_kg_per_mol,
                    molecule.family,
                    molecule.heavy_atoms,
                    molecule.fold
                )?;
                for quantity in derived::constants() {
                    let value = derived::constant(fit, level, quantity, number, boiling_point);
                    write!(text, ",{}", cell(value))?;
                }
                text.push('\n');
            }
        }
    }
    Ok(text)
}

fn derived(fit: &Fit, level: Level) -> Result<String, Box<dyn Error>> {
    let mut text = String::from("constitution,figure,method,from,temperature_k,value,estimate\n");
    for point in derived::points(fit, level) {
        writeln!(
            text,
            "{},{},{},{},{}",
            fit.reference.molecules[point.molecule].constitution,
            point.what.join(","),
            cell(Some(point.temperature_k)),
            cell(Some(point.value)),
            cell(point.estimate)
        )?;
    }
    Ok(text)
}
