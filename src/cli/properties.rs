//! `groupsmith properties`.

use std::io::Write;
use std::sync::Arc;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::family;
use super::molecules::{Asked, for_each};
use super::output::{self, Notes};
use crate::evaluate::{Library, Profiler, properties, properties_with};
use crate::pure::Estimates;
use crate::quantity::{Absent, Dimension, Outcome, Property, unit};
use crate::report::{PropertyRow, RowStream, property_text};

pub(super) fn run(
    command: &args::Properties,
    library: &Library,
    notes: Notes,
) -> Result<Exit, CliError> {
    let temperature_k =
        unit::parse(&command.temperature, Dimension::Temperature).map_err(|fault| {
            CliError::Quantity {
                argument: "--temperature",
                fault,
            }
        })?;
    if command.family {
        return family::run(command, library, notes, temperature_k);
    }
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
        notes,
        |profiler, asked| {
            let found = outcomes(
                library,
                profiler,
                &asked,
                command.estimates_only,
                temperature_k,
            );
            answered |= found.shown.iter().any(Result::is_ok);
            let rows: Vec<_> = rows(&asked, &found, temperature_k).collect();
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

/// The properties of a molecule, in the order of [`Property::ALL`].
struct Found {
    /// Measured where known, else estimated.
    shown: Vec<Outcome>,
    /// By the methods alone; `None` where nothing is measured.
    estimates: Option<Estimates>,
}

fn outcomes(
    library: &Library,
    profiler: &mut Profiler,
    asked: &Asked,
    estimates_only: bool,
    temperature_k: f64,
) -> Found {
    let profile = match &asked.profile {
        Ok(profile) => profile,
        Err(reason) => {
            let reason: Arc<str> = reason.as_str().into();
            return Found {
                shown: vec![Err(Absent::Because(reason)); Property::COUNT],
                estimates: None,
            };
        }
    };
    let known = library.known(&profile.keys).filter(|_| !estimates_only);
    let own = match estimates_only {
        true => &[],
        false => &asked.measured[..],
    };
    let is_measured = known.is_some() || !own.is_empty();
    Found {
        shown: properties_with(library, profile, known, own, temperature_k)
            .into_iter()
            .map(|outcome| outcome.map_err(|absent| profiler.explained(library, profile, &absent)))
            .collect(),
        estimates: is_measured.then(|| properties(library, profile, None, temperature_k)),
    }
}

fn rows<'a>(
    asked: &'a Asked,
    found: &'a Found,
    temperature_k: f64,
) -> impl Iterator<Item = PropertyRow<'a>> {
    Property::ALL
        .into_iter()
        .zip(&found.shown)
        .map(move |(property, outcome)| {
            let row = PropertyRow::new(
                asked.line,
                &asked.name,
                &asked.smiles,
                property,
                temperature_k,
                outcome,
            );
            match &found.estimates {
                Some(estimates) => row.beside(&estimates[property as usize]),
                None => row,
            }
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
