//! `groupsmith properties`.

use std::io::Write;
use std::sync::Arc;

use super::args::{self, Format};
use super::error::CliError;
use super::exit::Exit;
use super::molecules::for_each;
use super::output;
use crate::evaluate::{Library, Profiler, properties};
use crate::quantity::unit;
use crate::quantity::{Dimension, Property};
use crate::report::{PropertyRow, property_text, write_csv_rows, write_json_rows};

/// Properties of one molecule, or why there are none.
struct Found {
    line: u64,
    name: Arc<str>,
    smiles: Arc<str>,
    outcomes: Vec<crate::quantity::Outcome>,
}

pub(super) fn run(command: &args::Properties, library: &Library) -> Result<Exit, CliError> {
    let temperature_k =
        unit::parse(&command.temperature, Dimension::Temperature).map_err(|fault| {
            CliError::Quantity {
                argument: "--temperature",
                fault,
            }
        })?;
    let mut profiler = Profiler::new();
    let mut all: Vec<Found> = Vec::new();
    for_each(
        &command.molecules,
        library,
        &mut profiler,
        |profiler, asked| {
            let outcomes = match &asked.profile {
                Err(reason) => {
                    let reason: Arc<str> = reason.as_str().into();
                    let absent = crate::quantity::Absent::Because(reason);
                    vec![Err(absent); Property::COUNT]
                }
                Ok(profile) => {
                    let known = library
                        .known(&profile.keys)
                        .filter(|_| !command.estimates_only);
                    let explained = |outcome: crate::quantity::Outcome| {
                        outcome.map_err(|absent| profiler.explained(library, profile, &absent))
                    };
                    properties(library, profile, known, temperature_k)
                        .into_iter()
                        .map(explained)
                        .collect()
                }
            };
            let (line, name, smiles) = (asked.line, asked.name, asked.smiles);
            all.push(Found {
                line,
                name,
                smiles,
                outcomes,
            });
            Ok(())
        },
    )?;
    let answered = all
        .iter()
        .any(|found| found.outcomes.iter().any(Result::is_ok));
    let mut out = output::stdout();
    match command.format {
        Format::Csv => write_csv_rows(
            &mut out,
            all.iter().flat_map(|found| rows(found, temperature_k)),
        )?,
        Format::Json => write_json_rows(
            &mut out,
            all.iter().flat_map(|found| rows(found, temperature_k)),
        )?,
        Format::Text => {
            for found in &all {
                let name = if found.name.is_empty() {
                    &found.smiles
                } else {
                    &found.name
                };
                writeln!(out, "{name}  {}", found.smiles)?;
                let rows = rows(found, temperature_k);
                out.write_all(property_text(&rows, output::width()).as_bytes())?;
                writeln!(out)?;
            }
        }
    }
    out.flush()?;
    Ok(if answered { Exit::Done } else { Exit::Nothing })
}

fn rows(found: &Found, temperature_k: f64) -> Vec<PropertyRow<'_>> {
    let row = |(property, outcome)| {
        let Found {
            line, name, smiles, ..
        } = found;
        PropertyRow::new(*line, name, smiles, property, temperature_k, outcome)
    };
    Property::ALL
        .into_iter()
        .zip(&found.outcomes)
        .map(row)
        .collect()
}
