//! `groupsmith check`.

use std::io::Write;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::output;
use super::own_data;
use super::screen::{bind, open_pool};
use super::user_tables::Sources;
use crate::brief::{Brief, Job};
use crate::evaluate::CATALOG;
use crate::screen::Batch;

pub(super) fn run(command: &args::Check, sources: &Sources<'_>) -> Result<Exit, CliError> {
    let mut out = output::stdout();
    let Some(file) = &command.brief else {
        if !sources.name_data() {
            return Err(CliError::Usage(
                "nothing to check is given\n  give a brief, or a folder of measured data with --data"
                    .into(),
            ));
        }
        own_data::tell(&mut out, &sources.library(None)?)?;
        out.flush()?;
        return Ok(Exit::Done);
    };
    let brief = Brief::load(file, &CATALOG, Job::Check)?;
    let library = sources.library(Some(&brief))?;
    let plan = bind(brief, library, true)?;
    writeln!(out, "{}: sound", plan.brief.heading())?;
    for (position, component) in plan.components.iter().enumerate() {
        let vapor = if component.vapor.is_measured() {
            "measured"
        } else {
            "estimated or absent"
        };
        writeln!(
            out,
            "  component {}: {} {} (vapor pressure {vapor})",
            position + 1,
            component.name,
            component.profile.keys.full
        )?;
    }
    if let Some(temperature_k) = plan.temperature_k {
        writeln!(out, "  mixture at {temperature_k:.2} K")?;
    }
    let models: Vec<_> = plan.models().map(|model| model.id()).collect();
    if plan.brief.mixture.is_some() {
        writeln!(
            out,
            "  models: {} (targets by the first)",
            models.join(", ")
        )?;
    }
    for (name, wanted) in plan.musts() {
        writeln!(out, "  must: {name} {wanted}")?;
    }
    for planned in plan.targets.iter().filter(|planned| planned.target.counts) {
        let name = &plan.figures[planned.figure].name;
        let weight = planned.target.weight;
        writeln!(out, "  score: {name} {}, weight {weight}", planned.wanted)?;
    }
    for note in &plan.notes {
        writeln!(out, "  note: {note}")?;
    }
    if plan.brief.assembly.is_some() {
        writeln!(
            out,
            "  [assembly] is read, but the search is not built in yet"
        )?;
    }
    if plan.brief.pool.is_some() {
        let mut pool = open_pool(&plan.brief, None)?;
        for note in pool.notes() {
            writeln!(out, "  note: {note}")?;
        }
        let mut batch = Batch::default();
        let (mut lines, mut unusable) = (0_u64, 0_u64);
        loop {
            pool.read_batch(&mut batch, 4096)?;
            if batch.is_empty() {
                break;
            }
            lines += batch.len() as u64;
            unusable += (0..batch.len())
                .filter(|&at| batch.line(at).resolved(&plan.library).is_err())
                .count() as u64;
        }
        writeln!(
            out,
            "  pool: {lines} lines in {}, {unusable} of them unusable",
            pool.name()
        )?;
        writeln!(
            out,
            "  kept in the ranking: at most {}",
            plan.brief.keep_best
        )?;
    }
    if !plan.library.user_tables().is_empty() {
        writeln!(out)?;
        own_data::tell(&mut out, &plan.library)?;
    }
    out.flush()?;
    Ok(Exit::Done)
}
