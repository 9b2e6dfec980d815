//! `groupsmith check`.

use std::io::Write;
use std::time::Duration;

use super::args;
use super::assemble::{Bound, allowed, in_threes};
use super::error::CliError;
use super::exit::Exit;
use super::output;
use super::own_data;
use super::screen::{bind, open_pool};
use super::user_tables::Sources;
use crate::assemble::{Limits, Pieces};
use crate::brief::{Brief, Job, RankBy, Ranking};
use crate::chem::{Molecule, Reader};
use crate::evaluate::{CATALOG, Library, Plan, Quick, QuickFigure};
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
    let searches = brief.assembly.is_some();
    let (plan, search) = match searches {
        false => (bind(brief, library, true)?, None),
        true => {
            if brief.pool.is_some() {
                open_pool(&brief, None)?;
            }
            let bound = Bound::new(brief, library)?;
            (bound.plan, Some((bound.pieces, bound.limits)))
        }
    };
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
    if let Some((pieces, limits)) = &search {
        search_text(&mut out, &plan, pieces, limits)?;
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

/// How long a search is tried to tell how long it would take.
const TRIAL: Duration = Duration::from_millis(800);

/// The pieces and limits of a search, the size of its space, and how long it would take.
fn search_text(
    out: &mut impl Write,
    plan: &Plan,
    pieces: &Pieces,
    limits: &Limits,
) -> Result<(), CliError> {
    let names = |on: bool| {
        let used = pieces
            .all
            .iter()
            .zip(&limits.pieces)
            .filter(|one| *one.1 == on);
        used.map(|one| one.0).collect::<Vec<_>>()
    };
    let used: Vec<&str> = names(true)
        .iter()
        .map(|piece| piece.name.as_str())
        .collect();
    writeln!(out, "  pieces: {}", used.join(" "))?;
    for piece in names(false) {
        if let Some(why) = &piece.off {
            writeln!(out, "  piece off: {} ({why})", piece.name)?;
        }
    }
    let range = |(least, most): (u32, u32)| format!("{least} to {most}");
    writeln!(
        out,
        "  limits: {} pieces, {} heavy atoms, molar mass up to {:.0} g/mol",
        range(limits.count),
        range(limits.heavy_atoms),
        limits.molar_mass_kg_per_mol * 1e3
    )?;
    let told = limits.told(pieces);
    let told: Vec<String> = told
        .iter()
        .map(|(name, most)| format!("{name} {most}"))
        .collect();
    writeln!(out, "  at most: {}", told.join(", "))?;
    let quick = Quick::new(plan);
    let dear = quick
        .targets
        .iter()
        .filter(|one| matches!(one.figure, QuickFigure::Dear));
    for target in dear {
        writeln!(
            out,
            "  {} is computed for the structures of the best {} assemblies only",
            target.name, plan.brief.keep_best
        )?;
    }
    let job = crate::assemble::Job::new(
        pieces,
        limits,
        quick,
        plan.library.fitted(),
        &allowed(&plan.brief),
    )
    .expect("built-in tables of rules are sound (tested)");
    let space = job.space().size();
    writeln!(out, "  space: {} assemblies", in_threes(space))?;
    if space == 0 {
        writeln!(
            out,
            "  nothing fits the limits: more pieces, atoms or functional groups make room"
        )?;
        return Ok(());
    }
    let trial = job
        .trial(TRIAL)
        .map_err(crate::assemble::SearchError::from)?;
    let scale = space as f64 / trial.assemblies.max(1) as f64;
    writeln!(
        out,
        "  trial: {} assemblies, {} of them scored; about {} in all on one core, some {} scored",
        in_threes(trial.assemblies),
        in_threes(trial.scored),
        duration(trial.seconds * scale),
        in_threes((trial.scored as f64 * scale) as u128)
    )?;
    if trial.seconds * scale > LONG_S {
        writeln!(
            out,
            "  a long search: --part K/N shares it out over machines, --resume goes on after a stop"
        )?;
    }
    Ok(())
}

/// A search longer than this is worth sharing out.
const LONG_S: f64 = 4.0 * 3600.0;

/// Seconds in the unit that people would use.
fn duration(seconds: f64) -> String {
    match seconds {
        ..1.0 => "a second".into(),
        ..120.0 => format!("{seconds:.0} s"),
        ..7200.0 => format!("{:.0} min", seconds / 60.0),
        ..172_800.0 => format!("{:.0} h", seconds / 3600.0),
        _ => format!("{:.0} days", seconds / 86_400.0),
    }
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
