//! `groupsmith check`.

use std::io::Write;

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::output;
use super::own_data;
use super::screen::{bind, open_pool};
use super::user_tables::Sources;
use crate::brief::{Brief, Job, RankBy, Ranking};
use crate::chem::{Molecule, Reader};
use crate::evaluate::{CATALOG, Library};
use crate::report::probability_in_words;
use crate::screen::{Batch, Pool};

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
    if !plan.targets.is_empty() {
        writeln!(out, "  ranking: {}", ranking_in_words(&plan.brief.ranking))?;
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
        let pool = open_pool(&plan.brief, None)?;
        for note in pool.notes() {
            writeln!(out, "  note: {note}")?;
        }
        pool_lines(&mut out, &plan.library, pool)?;
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

/// Refused lines that are told with their reason.
const REFUSALS_SHOWN: usize = 5;

/// Reads the whole pool and tells which lines a run would refuse.
fn pool_lines(out: &mut impl Write, library: &Library, mut pool: Pool) -> Result<(), CliError> {
    let mut batch = Batch::default();
    let mut reader = Reader::new();
    let mut molecule = Molecule::default();
    let (mut lines, mut refused) = (0_u64, 0_u64);
    let mut reasons = Vec::new();
    loop {
        pool.read_batch(&mut batch, 4096)?;
        if batch.is_empty() {
            break;
        }
        lines += batch.len() as u64;
        for line in (0..batch.len()).map(|at| batch.line(at)) {
            let fault = match line.resolved(library) {
                Err(fault) => fault.to_string(),
                Ok(found) => match reader.read_into(found.smiles, &mut molecule) {
                    Ok(()) => continue,
                    Err(fault) => fault.to_string(),
                },
            };
            refused += 1;
            if reasons.len() < REFUSALS_SHOWN {
                reasons.push(format!("line {}: {fault}", line.line));
            }
        }
    }
    writeln!(
        out,
        "  pool: {lines} lines in {}, {refused} of them would be refused",
        pool.name()
    )?;
    for reason in &reasons {
        writeln!(out, "    {reason}")?;
    }
    if refused > reasons.len() as u64 {
        writeln!(out, "    … and {} more", refused - reasons.len() as u64)?;
    }
    Ok(())
}

/// The rule of the ranking and the confidence of its musts.
fn ranking_in_words(ranking: &Ranking) -> String {
    if !ranking.uses_intervals() {
        return "by score, by the bare numbers (confidence 0)".into();
    }
    let by = match ranking.by {
        RankBy::ExpectedScore => "expected score",
        RankBy::Probability => "probability of meeting every must, then expected score",
        RankBy::Cautious => "lower end of the interval of the score, then expected score",
    };
    format!(
        "by {by}; a must disqualifies where the probability of meeting it is below {}",
        probability_in_words(ranking.confidence)
    )
}
