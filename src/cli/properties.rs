//! `groupsmith properties`.

use std::io::Write;
use std::sync::Arc;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::molecules::{Asked, for_each};
use super::output;
use crate::evaluate::{Library, Profiler, properties};
use crate::quantity::{Absent, Dimension, Outcome, Property, unit};
use crate::report::{PropertyRow, RowStream, property_text};

pub(super) fn run(command: &args::Properties, library: &Library) -> Result<Exit, CliError> {
    let temperature_k =
        unit::parse(&command.temperature, Dimension::Temperature).map_err(|fault| {
            CliError::Quantity {
                argument: "--temperature",
                fault,
            }
        })?;
    let mut profiler = Profiler::new();
    let mut answered = false;
    let mut stream = match command.format.rows() {
        Some(form) => Some(RowStream::begin::<PropertyRow<'_>>(output::stdout(), form)?),
        None => None,
    };
    for_each(
        &command.molecules,
        library,
        &mut profiler,
        |profiler, asked| {
            let outcomes = outcomes(
                library,
                profiler,
                &asked,
                command.estimates_only,
                temperature_k,
            );
            answered |= outcomes.iter().any(Result::is_ok);
            let rows: Vec<_> = rows(&asked, &outcomes, temperature_k).collect();
            match &mut stream {
                Some(stream) => rows.iter().try_for_each(|row| stream.add(row))?,
                None => show(&asked, &rows)?,
            }
            Ok(())
        },
    )?;
    if let Some(stream) = stream {
        stream.end()?;
    }
    Ok(if answered { Exit::Done } else { Exit::Nothing })
}

fn outcomes(
    library: &Library,
    profiler: &mut Profiler,
    asked: &Asked,
    estimates_only: bool,
    temperature_k: f64,
) -> Vec<Outcome> {
    match &asked.profile {
        Err(reason) => {
            let reason: Arc<str> = reason.as_str().into();
            vec![Err(Absent::Because(reason)); Property::COUNT]
        }
        Ok(profile) => {
            let known = library.known(&profile.keys).filter(|_| !estimates_only);
            properties(library, profile, known, temperature_k)
                .into_iter()
                .map(|outcome| {
                    outcome.map_err(|absent| profiler.explained(library, profile, &absent))
                })
                .collect()
        }
    }
}

fn rows<'a>(
    asked: &'a Asked,
    outcomes: &'a [Outcome],
    temperature_k: f64,
) -> impl Iterator<Item = PropertyRow<'a>> {
    Property::ALL
        .into_iter()
        .zip(outcomes)
        .map(move |(property, outcome)| {
            PropertyRow::new(
                asked.line,
                &asked.name,
                &asked.smiles,
                property,
                temperature_k,
                outcome,
            )
        })
}

/// One molecule for people.
fn show(asked: &Asked, rows: &[PropertyRow<'_>]) -> Result<(), CliError> {
    let mut out = output::stdout();
    let name = if asked.name.is_empty() {
        &asked.smiles
    } else {
        &asked.name
    };
    writeln!(out, "{name}  {}", asked.smiles)?;
    out.write_all(property_text(rows, output::width()).as_bytes())?;
    writeln!(out)?;
    Ok(out.flush()?)
}
