//! The molecules of a look-up: arguments, then the lines of a file.

use std::io;
use std::path::Path;
use std::sync::Arc;

use super::args::Molecules;
use super::error::CliError;
use super::output::Notes;
use crate::evaluate::{Library, Profile, Profiler};
use crate::quantity::{Estimate, Property};
use crate::screen::{Batch, Columns, Pool, Resolved};

/// One molecule asked for.
pub(super) struct Asked {
    /// Line of the file, or position among the arguments, from 1.
    pub(super) line: u64,
    /// Name: as given in a file, of the built-in substance otherwise; may be empty.
    pub(super) name: Arc<str>,
    /// SMILES as given, or of the built-in substance.
    pub(super) smiles: Arc<str>,
    /// Its profile, or why the line is no molecule.
    pub(super) profile: Result<Profile, String>,
    /// Measured values that stand beside it in the file.
    pub(super) measured: Vec<(Property, Estimate)>,
}

/// Lines of a file that are read at a time.
const BATCH_LINES: usize = 256;

/// Calls `each` with every molecule asked for, in order.
pub(super) fn for_each(
    asked: &Molecules,
    library: &Library,
    profiler: &mut Profiler,
    notes: Notes,
    mut each: impl FnMut(&mut Profiler, Asked) -> Result<(), CliError>,
) -> Result<(), CliError> {
    if asked.molecules.is_empty() && asked.from.is_none() {
        return Err(CliError::Usage(
            "no molecule is given\n  give SMILES or names, or a file of them with --from".into(),
        ));
    }
    for (position, text) in asked.molecules.iter().enumerate() {
        let line = position as u64 + 1;
        let found = match library.find(profiler, text) {
            Ok((name, profile)) => {
                let smiles: Arc<str> = match library.substances().find(text) {
                    Ok(substance) => substance.smiles().into(),
                    Err(_) => text.trim().into(),
                };
                Asked {
                    line,
                    name: name.unwrap_or_default(),
                    smiles,
                    profile: Ok(profile),
                    measured: Vec::new(),
                }
            }
            Err(error) => Asked {
                line,
                name: Arc::default(),
                smiles: text.trim().into(),
                profile: Err(error.to_string()),
                measured: Vec::new(),
            },
        };
        each(profiler, found)?;
    }
    if let Some(file) = &asked.from {
        let mut pool = open(file)?;
        for note in pool.notes() {
            notes.say(&format!("note: {note}"));
        }
        let mut batch = Batch::default();
        loop {
            pool.read_batch(&mut batch, BATCH_LINES)?;
            if batch.is_empty() {
                break;
            }
            for index in 0..batch.len() {
                let line = batch.line(index);
                let found = match line.resolved(library) {
                    Ok(Resolved { smiles, name }) => Asked {
                        line: line.line,
                        name: name.into(),
                        smiles: smiles.into(),
                        profile: profiler.profile(library, smiles).map_err(|e| e.to_string()),
                        measured: line.measured().collect(),
                    },
                    Err(fault) => Asked {
                        line: line.line,
                        name: line.name.into(),
                        smiles: line.text.into(),
                        profile: Err(fault.to_string()),
                        measured: Vec::new(),
                    },
                };
                each(profiler, found)?;
            }
        }
    }
    Ok(())
}

/// Opens a file of molecules; `-` is standard input.
pub(super) fn open(file: &Path) -> Result<Pool, CliError> {
    let columns = Columns::default();
    let pool = if file.as_os_str() == "-" {
        Pool::from_reader(Box::new(io::stdin()), "standard input", None, columns)
    } else {
        Pool::open(file, columns)
    };
    Ok(pool?)
}
