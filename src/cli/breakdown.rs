//! `groupsmith breakdown`.

use std::io::Write;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::molecules::{Asked, for_each};
use super::output::{self, Notes};
use super::tables::set_named;
use crate::evaluate::{Library, Profiler};
use crate::groups::{Coverage, SetId};
use crate::report::{BreakdownRow, BreakdownStatus, RowStream, breakdown_text};

/// A row with its texts.
struct Row {
    line: u64,
    name: String,
    smiles: String,
    set: SetId,
    status: BreakdownStatus,
    groups: String,
    detail: String,
    readable: String,
}

impl Row {
    fn shown(&self) -> BreakdownRow<'_> {
        BreakdownRow {
            line: self.line,
            name: &self.name,
            smiles: &self.smiles,
            set: self.set.id(),
            status: self.status,
            groups: &self.groups,
            detail: &self.detail,
        }
    }
}

pub(super) fn run(
    command: &args::Breakdown,
    library: &Library,
    notes: Notes,
) -> Result<Exit, CliError> {
    let sets = sets(&command.sets)?;
    let mut profiler = Profiler::new();
    let mut answered = false;
    // Rows go out as they come, but for text, whose columns need them all.
    let mut rows = Vec::new();
    let mut stream = match command.format.rows() {
        Some(form) => Some(RowStream::begin::<BreakdownRow<'_>>(
            output::stdout(),
            form,
        )?),
        None => None,
    };
    for_each(
        &command.molecules,
        library,
        &mut profiler,
        notes,
        |profiler, asked| {
            for &set in &sets {
                let row = row(library, profiler, &asked, set);
                answered |= row.status == BreakdownStatus::Complete;
                match &mut stream {
                    Some(stream) => stream.add(&row.shown())?,
                    None => rows.push(row),
                }
            }
            Ok(())
        },
    )?;
    match stream {
        Some(stream) => stream.end()?,
        None => {
            let mut out = output::stdout();
            let readable = rows.iter().map(|row| (row.shown(), row.readable.as_str()));
            out.write_all(breakdown_text(readable, output::width()).as_bytes())?;
            out.flush()?;
        }
    }
    Ok(if answered { Exit::Done } else { Exit::Nothing })
}

fn sets(names: &[String]) -> Result<Vec<SetId>, CliError> {
    if names.is_empty() {
        return Ok(SetId::ALL.to_vec());
    }
    names.iter().map(|name| set_named(name)).collect()
}

fn row(library: &Library, profiler: &mut Profiler, asked: &Asked, set: SetId) -> Row {
    let mut row = Row {
        line: asked.line,
        name: asked.name.to_string(),
        smiles: asked.smiles.to_string(),
        set,
        status: BreakdownStatus::Unreadable,
        groups: String::new(),
        detail: String::new(),
        readable: String::new(),
    };
    match &asked.profile {
        Err(reason) => row.detail.clone_from(reason),
        Ok(profile) => {
            let counts = &profile.counts[set as usize];
            row.status = match profile.coverage.of(set) {
                Coverage::Complete => BreakdownStatus::Complete,
                _ => BreakdownStatus::Partial,
            };
            row.groups = counts.to_string();
            row.readable = library.set(set).describe(counts);
            if row.status == BreakdownStatus::Partial {
                row.detail = profiler.gaps(library, profile, set);
            }
        }
    }
    row
}
