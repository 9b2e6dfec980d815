//! `groupsmith properties --family`: how well the methods do for relatives.

use std::io::Write;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::molecules::{Asked, for_each};
use super::output::{self, Notes};
use crate::data::Substance;
use crate::evaluate::{EstimateLevel, Families, Family, Library, Profiler, properties};
use crate::quantity::Property;
use crate::quantity::unit::{si_symbol, to_table};
use crate::report::{FamilyRow, RowStream, family_text, with_summary};

/// What relatives are compared in: what has a method and is measured widely.
const COMPARED: [Property; 5] = [
    Property::BoilingPoint,
    Property::LiquidDensity,
    Property::EnthalpyOfVaporization,
    Property::MeltingPoint,
    Property::FlashPoint,
];

pub(super) fn run(
    command: &args::Properties,
    library: &Library,
    notes: Notes,
    temperature_k: f64,
) -> Result<Exit, CliError> {
    let mut profiler = Profiler::new();
    let families = Families::new(library, &mut profiler);
    let mut answered = false;
    let mut stream = match command.format.rows() {
        Some(form) => Some(RowStream::begin::<FamilyRow<'_>>(output::stdout(), form)?),
        None => None,
    };
    for_each(
        &command.molecules,
        library,
        &mut profiler,
        notes,
        |profiler, asked| {
            let family = match &asked.profile {
                Ok(profile) => families.of(profile),
                Err(reason) => Err(reason.clone()),
            };
            answered |= family.is_ok();
            let by_property = match &family {
                Ok(family) => COMPARED
                    .map(|property| {
                        compared(library, profiler, &asked, family, property, temperature_k)
                    })
                    .to_vec(),
                Err(reason) => vec![vec![absent(&asked, reason)]],
            };
            match &mut stream {
                Some(stream) => by_property
                    .iter()
                    .flatten()
                    .try_for_each(|row| stream.add(row))?,
                None => show(&asked, &family, &by_property, library.level())?,
            }
            Ok(())
        },
    )?;
    if let Some(stream) = stream {
        stream.end()?;
    }
    Ok(if answered { Exit::Done } else { Exit::Nothing })
}

/// One property of every relative, and of the family.
fn compared<'a>(
    library: &Library,
    profiler: &mut Profiler,
    asked: &'a Asked,
    family: &'a Family<'_>,
    property: Property,
    temperature_k: f64,
) -> Vec<FamilyRow<'a>> {
    let rows = family.relatives.iter().map(|relative| {
        row(
            library,
            profiler,
            asked,
            family,
            (relative, property),
            temperature_k,
        )
    });
    with_summary(rows.collect())
}

fn row<'a>(
    library: &Library,
    profiler: &mut Profiler,
    asked: &'a Asked,
    family: &'a Family<'_>,
    (relative, property): (&'a Substance, Property),
    temperature_k: f64,
) -> FamilyRow<'a> {
    let dimension = property.dimension();
    let profile = profiler
        .profile(library, relative.smiles())
        .expect("structures of substances were read when they were loaded");
    let estimate = properties(library, &profile, None, temperature_k)[property as usize].clone();
    let measured = relative.measured(property, temperature_k);
    let mut detail = family.how.clone();
    let measured = match measured {
        Some(Ok(value)) => Some(to_table(value.value, dimension)),
        Some(Err(reason)) => {
            detail = reason.to_string();
            None
        }
        None => {
            detail = "not measured".into();
            None
        }
    };
    let (estimated, method) = match estimate {
        Ok(value) => (Some(to_table(value.value, dimension)), value.method),
        Err(reason) => {
            detail = profiler.explained(library, &profile, &reason).to_string();
            (None, "")
        }
    };
    FamilyRow {
        line: asked.line,
        name: &asked.name,
        smiles: &asked.smiles,
        family: &family.name,
        kind: "relative",
        property: Some(property),
        temperature_k: property.depends_on_temperature().then_some(temperature_k),
        relative: relative.name(),
        relative_smiles: relative.smiles(),
        measured,
        estimated,
        difference: measured
            .zip(estimated)
            .map(|(measured, estimated)| estimated - measured),
        unit: si_symbol(dimension),
        method,
        detail,
    }
}

fn absent<'a>(asked: &'a Asked, reason: &str) -> FamilyRow<'a> {
    FamilyRow {
        line: asked.line,
        name: &asked.name,
        smiles: &asked.smiles,
        family: "",
        kind: "absent",
        property: None,
        temperature_k: None,
        relative: "",
        relative_smiles: "",
        measured: None,
        estimated: None,
        difference: None,
        unit: "",
        method: "",
        detail: reason.to_owned(),
    }
}

/// One molecule for people.
fn show(
    asked: &Asked,
    family: &Result<Family<'_>, String>,
    by_property: &[Vec<FamilyRow<'_>>],
    level: EstimateLevel,
) -> Result<(), CliError> {
    let mut out = output::stdout();
    let name = match &*asked.name {
        "" => &asked.smiles,
        _ => &asked.name,
    };
    match family {
        Err(reason) => writeln!(out, "{name}  {}\n  {reason}", asked.smiles)?,
        Ok(family) => {
            writeln!(out, "{name}  {}", asked.smiles)?;
            writeln!(
                out,
                "family: {} ({}); {} relatives",
                family.name,
                family.how,
                family.relatives.len()
            )?;
            for (property, rows) in COMPARED.into_iter().zip(by_property) {
                writeln!(out)?;
                out.write_all(family_text(property, rows, output::width()).as_bytes())?;
            }
            if level != EstimateLevel::Joback {
                writeln!(
                    out,
                    "\nMany of these values are among those that the estimates were fitted to: on new molecules expect\n\
                     the errors of `groupsmith tables methods PROPERTY`, or compare with --estimates joback-reid."
                )?;
            }
        }
    }
    writeln!(out)?;
    Ok(out.flush()?)
}
