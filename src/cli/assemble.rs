//! `groupsmith assemble` and `groupsmith gather`.

use std::io::Write;
use std::path::Path;
use std::sync::Arc;
use std::time::{Duration, Instant};

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::output::{self, Notes};
use super::progress::Progress;
use super::screen::{
    default_folder, how_sure, musts, open_pool, ranking_text, record, stopped_by_signals,
};
use super::user_tables::Sources;
use rustc_hash::FxHashMap;

use crate::assemble::{
    Account, Assembled, Assembling, DEFAULT_STRUCTURES, FILES, Job, Limits, Part, Pieces,
    STATE_FILES, STATE_INTERVAL, SearchError, State, StateError, assembly_of, count_rules,
    in_words, read_parts, what_keeps_out,
};
use crate::brief::{Brief, Job as Purpose};
use crate::evaluate::{CATALOG, Library, Plan, Profile, Profiler, Quick};
use crate::groups::SetId;
use crate::report::{TargetLabel, TextColumn, TextTable, outcome_text};
use crate::run::{Fingerprint, StopFlag, make_folder};
use crate::screen::Batch;
use crate::stability::Rules;

/// A brief bound for a search.
pub(super) struct Bound {
    pub(super) plan: Plan,
    pub(super) pieces: Pieces,
    pub(super) limits: Limits,
    rules: Rules,
}

impl Bound {
    /// Binds a brief to tables, data and pieces.
    pub(super) fn new(brief: Brief, library: Library) -> Result<Self, CliError> {
        let file = brief.file.to_string();
        let pieces = Pieces::built_in(|set| library.set(set))
            .expect("built-in tables of pieces are sound (tested)");
        let asked = brief.assembly.as_ref().map(|assembly| &assembly.value);
        let limits = Limits::of(&pieces, asked).map_err(|faults| CliError::Assembly {
            file: file.clone(),
            faults,
        })?;
        let mut rules = library.rules().clone();
        let of_counts = count_rules(&pieces).expect("built-in tables of rules are sound (tested)");
        let allowed = asked
            .map(|assembly| assembly.allow.as_slice())
            .unwrap_or_default();
        for name in allowed {
            if of_counts.iter().any(|rule| rule.name == name.value) {
                continue;
            }
            rules.switch_off(&name.value).map_err(|error| {
                CliError::Usage(format!(
                    "{file}:{}: assembly.allow: {error}",
                    name.place.line
                ))
            })?;
        }
        let plan = Plan::new(Arc::new(library), brief, true).map_err(|faults| CliError::Plan {
            file,
            faults,
            pool: None,
        })?;
        Ok(Self {
            plan,
            pieces,
            limits,
            rules,
        })
    }

    /// The search.
    pub(super) fn job(&self) -> Job<'_> {
        Job::new(
            &self.pieces,
            &self.limits,
            Quick::new(&self.plan),
            self.plan.library.fitted(),
            &allowed(&self.plan.brief),
        )
        .expect("built-in tables of rules are sound (tested)")
    }

    fn structures(&self) -> usize {
        let assembly = self.plan.brief.assembly.as_ref();
        let asked = assembly.and_then(|assembly| assembly.value.structures);
        asked.map_or(DEFAULT_STRUCTURES, |most| most.value as usize)
    }

    /// What the search is: the same for the same brief, tables, data and version.
    fn search(&self) -> Fingerprint {
        let brief = &self.plan.brief;
        let mut all = Fingerprint::new()
            .with_section("program", env!("CARGO_PKG_VERSION").as_bytes())
            .with_section("brief", brief.text.as_bytes())
            .with_section(
                "slips",
                format!("{:?}", self.plan.library.slips()).as_bytes(),
            )
            .with_section("level", self.plan.library.level().id().as_bytes());
        for (name, text) in self.plan.library.texts().into_iter().chain(Pieces::texts()) {
            all = all.with_section(name, text.as_bytes());
        }
        all
    }
}

/// Rules that a brief switches off.
pub(super) fn allowed(brief: &Brief) -> Vec<&str> {
    let assembly = brief.assembly.as_ref();
    let allowed = assembly
        .into_iter()
        .flat_map(|assembly| &assembly.value.allow);
    allowed.map(|name| name.value.as_str()).collect()
}

pub(super) fn run(
    command: &args::Assemble,
    sources: &Sources<'_>,
    notes: Notes,
) -> Result<Exit, CliError> {
    let begun = Instant::now();
    if command.threads == Some(0) {
        return Err(CliError::Usage("--threads has to be at least 1".into()));
    }
    let part = match &command.part {
        None => Part::WHOLE,
        Some(text) => Part::from_text(text).ok_or_else(|| {
            CliError::Usage(format!(
                "--part {text} is no part\n  give its number and how many there are, such as 2/8"
            ))
        })?,
    };
    let brief = Brief::load(&command.brief, &CATALOG, Purpose::Assemble)?;
    let library = sources.library(Some(&brief))?;
    let bound = Bound::new(brief, library)?;
    let job = bound.job();
    for note in &bound.plan.notes {
        notes.say(&format!("note: {note}"));
    }
    tell_dear(&job, notes);
    if job.space().size() == 0 {
        return Err(CliError::Usage(format!(
            "{}: no assembly of these pieces fits the limits of [assembly]\n  `groupsmith check {}` shows every limit; more pieces, atoms or functional groups make room",
            bound.plan.brief.file,
            command.brief.display()
        )));
    }
    let wanted = match &command.explain {
        None => None,
        Some(name) => Some(named_molecule(&bound.plan, name.trim())?),
    };
    let stop = stopped_by_signals(notes);
    let folder = match &command.out {
        Some(folder) => folder.clone(),
        None => default_folder(&command.brief),
    };
    make_folder(&folder)?;
    let names = pool_names(&bound.plan)?;
    let place = std::fs::canonicalize(&command.brief).unwrap_or_else(|_| command.brief.clone());
    let progress = Progress::new(notes);
    let assembling = Assembling {
        plan: &bound.plan,
        job: &job,
        structures: bound.structures(),
        search: bound.search(),
        rules: &bound.rules,
        names: &names,
        brief: &place,
        folder: &folder,
        threads: command.threads.unwrap_or(0),
        state_interval: command
            .state_every
            .map_or(STATE_INTERVAL, Duration::from_secs),
        stop: &stop,
        listener: &progress,
    };
    let mut state = if command.resume {
        let (state, path) = assembling.resumed(part)?;
        let done = state.done.iter().filter(|done| **done).count();
        notes.say(&format!(
            "going on from {}: {done} of {} units done",
            path.display(),
            state.units
        ));
        state
    } else {
        assembling.fresh(part)
    };
    let (stopped, rate) = assembling.search(&mut state)?;
    let record = record(&bound.plan, "assemble", &[]);
    let assembled = assembling.finish(state, record, stopped, rate, begun)?;
    let mut out = output::stdout();
    show(&mut out, &bound, &job, &assembled, &folder, command.show)?;
    if let Some(profile) = &wanted {
        writeln!(out)?;
        explain(&mut out, &bound, &job, &assembled, profile)?;
    }
    out.flush()?;
    Ok(if assembled.stopped {
        Exit::Stopped
    } else if assembled.ranking.is_empty() {
        Exit::Nothing
    } else {
        Exit::Done
    })
}

pub(super) fn gather(
    command: &args::Gather,
    sources: &Sources<'_>,
    notes: Notes,
) -> Result<Exit, CliError> {
    let begun = Instant::now();
    let parts = read_parts(&command.parts).map_err(SearchError::State)?;
    let state = State::gathered(&parts).map_err(SearchError::State)?;
    let file = command.brief.clone().unwrap_or_else(|| state.brief.clone());
    let brief = Brief::load(&file, &CATALOG, Purpose::Assemble)?;
    let library = sources.library(Some(&brief))?;
    let bound = Bound::new(brief, library)?;
    let job = bound.job();
    for note in &bound.plan.notes {
        notes.say(&format!("note: {note}"));
    }
    let stop = StopFlag::new();
    make_folder(&command.out)?;
    let names = pool_names(&bound.plan)?;
    let progress = Progress::new(notes);
    let assembling = Assembling {
        plan: &bound.plan,
        job: &job,
        structures: bound.structures(),
        search: bound.search(),
        rules: &bound.rules,
        names: &names,
        brief: &file,
        folder: &command.out,
        threads: 0,
        state_interval: STATE_INTERVAL,
        stop: &stop,
        listener: &progress,
    };
    state
        .belongs(&file, &assembling.fresh(Part::WHOLE))
        .map_err(SearchError::State)?;
    state.write(&command.out)?;
    let record = record(&bound.plan, "assemble", &[]);
    let assembled = assembling.finish(state, record, false, 0.0, begun)?;
    let mut out = output::stdout();
    show(
        &mut out,
        &bound,
        &job,
        &assembled,
        &command.out,
        command.show,
    )?;
    out.flush()?;
    Ok(match assembled.ranking.is_empty() {
        true => Exit::Nothing,
        false => Exit::Done,
    })
}

/// Which targets wait for the structures.
fn tell_dear(job: &Job<'_>, notes: Notes) {
    let dear = job
        .quick()
        .targets
        .iter()
        .filter(|target| matches!(target.figure, crate::evaluate::QuickFigure::Dear));
    let names: Vec<&str> = dear.map(|target| target.name.as_str()).collect();
    if !names.is_empty() {
        notes.say(&format!(
            "note: {} cannot be told from counts: the structures of the best {} assemblies by the other targets are judged by it",
            names.join(", "),
            job.quick().plan().brief.keep_best
        ));
    }
}

fn show(
    out: &mut impl Write,
    bound: &Bound,
    job: &Job<'_>,
    assembled: &Assembled,
    folder: &Path,
    most: usize,
) -> Result<(), CliError> {
    let plan = &bound.plan;
    writeln!(out, "{}", plan.brief.heading())?;
    writeln!(out)?;
    if !assembled.ranking.is_empty() {
        let shown = &assembled.ranking[..most.min(assembled.ranking.len())];
        out.write_all(ranking_text(plan, shown).as_bytes())?;
        if assembled.ranking.len() > most {
            writeln!(
                out,
                "… and {} more in ranked.csv",
                assembled.ranking.len() - most
            )?;
        }
        writeln!(
            out,
            "A name says that the molecule is among the substances known here; the others may be new, or just not listed."
        )?;
        how_sure(out, plan, &assembled.ranking, assembled.next.as_ref())?;
        writeln!(out)?;
    }
    out.write_all(account_text(job, &assembled.state.account, assembled).as_bytes())?;
    writeln!(out)?;
    let musts = musts(plan);
    let labels: Vec<TargetLabel<'_>> = musts
        .iter()
        .map(|(name, wanted)| TargetLabel { name, wanted })
        .collect();
    writeln!(out, "Structures of the best assemblies, evaluated in full:")?;
    out.write_all(outcome_text(&assembled.counts, &labels).as_bytes())?;
    writeln!(out)?;
    if assembled.stopped {
        writeln!(
            out,
            "Stopped before the end of the search; the ranking is that of what was searched. Go on with --resume."
        )?;
    } else if assembled.state.part == Part::WHOLE {
        writeln!(
            out,
            "No realizable assembly in this space scores better by these estimates than the kept ones, to a thousandth."
        )?;
    } else {
        writeln!(
            out,
            "This is part {} of the search; `groupsmith gather` puts the parts together.",
            assembled.state.part
        )?;
    }
    let files = FILES.into_iter().chain(STATE_FILES.into_iter().take(1));
    let files: Vec<String> = files
        .map(|file| folder.join(file).display().to_string())
        .collect();
    writeln!(out, "Files: {}", files.join(", "))?;
    writeln!(
        out,
        "These molecules were put together by a program: many cannot be bought, some may not be made or not last.\n\
         Estimates are for choosing experiments. Before handling a candidate read its safety data sheet\n\
         (flammability, toxicity, peroxides) and follow local codes and licensed practice."
    )?;
    Ok(())
}

/// Names of the brief's own pool by canonical SMILES: what is on it can be bought.
fn pool_names(plan: &Plan) -> Result<FxHashMap<String, String>, CliError> {
    let mut names = FxHashMap::default();
    if plan.brief.pool_path().is_none() {
        return Ok(names);
    }
    let mut pool = open_pool(&plan.brief, None)?;
    let mut batch = Batch::default();
    let mut profiler = Profiler::new();
    loop {
        pool.read_batch(&mut batch, 4096)?;
        if batch.is_empty() {
            return Ok(names);
        }
        for line in (0..batch.len()).map(|at| batch.line(at)) {
            let Ok(found) = line.resolved(&plan.library) else {
                continue;
            };
            if let Ok(profile) = profiler.profile(&plan.library, found.smiles) {
                let name = match found.name {
                    "" => format!("line {} of the pool", line.line),
                    name => name.to_owned(),
                };
                names.entry(profile.keys.full).or_insert(name);
            }
        }
    }
}

/// A molecule by its name or SMILES.
fn named_molecule(plan: &Plan, name: &str) -> Result<(String, Profile), CliError> {
    let mut profiler = Profiler::new();
    let smiles = match plan.library.substances().find(name).ok() {
        Some(substance) => substance.smiles().to_owned(),
        None => name.to_owned(),
    };
    let profile = profiler.profile(&plan.library, &smiles).map_err(|error| {
        CliError::Usage(format!(
            "--explain {name} is neither the name of a known substance nor a molecule: {error}"
        ))
    })?;
    Ok((name.to_owned(), profile))
}

/// Where a molecule came out in the search, or what kept it out.
fn explain(
    out: &mut impl Write,
    bound: &Bound,
    job: &Job<'_>,
    assembled: &Assembled,
    (name, profile): &(String, Profile),
) -> Result<(), CliError> {
    let mut rows = assembled.ranking.iter();
    if let Some(rank) = rows.position(|row| row.smiles == profile.keys.full) {
        writeln!(out, "{name}: rank {}", rank + 1)?;
        return Ok(());
    }
    let library = &bound.plan.library;
    let mut profiler = Profiler::new();
    match assembly_of(&bound.pieces, &mut profiler, library, profile) {
        None => writeln!(
            out,
            "{name}: cannot be put together from the pieces; `groupsmith screen` takes it as it is"
        )?,
        Some(assembly) => {
            let words = in_words(&bound.pieces, &assembly);
            let reasons = what_keeps_out(job, &bound.limits, &assembly, &assembled.state);
            writeln!(out, "{name} is the assembly {words}")?;
            for reason in &reasons {
                writeln!(out, "  {reason}")?;
            }
            if reasons.is_empty() {
                writeln!(
                    out,
                    "  the assembly is among the kept; this structure of it did not qualify, or ranks below the kept ones (not_ranked.csv), or was not drawn"
                )?;
            }
        }
    }
    Ok(())
}

/// The account of the search as a table.
fn account_text(job: &Job<'_>, account: &Account, assembled: &Assembled) -> String {
    let mut rows: Vec<(String, u128)> = Vec::new();
    rows.push((
        "scored from counts, every must possible".into(),
        account.scored,
    ));
    for (target, &count) in job.quick().targets.iter().zip(&account.missed) {
        rows.push((format!("scored, {} missed", target.name), count));
    }
    for (target, &count) in job.quick().targets.iter().zip(&account.cut_by_bound) {
        rows.push((format!("cut by the bound of {}", target.name), count));
    }
    for (rule, &count) in job.rule_names().zip(&account.cut_by_rule) {
        rows.push((format!("cut by the rule {rule}"), count));
    }
    rows.push((
        "not assessable: groups or interactions not published".into(),
        account.not_assessable,
    ));
    rows.push((
        "without a structure: ends that do not go together".into(),
        account.without_structure,
    ));
    let accounted: u128 = rows.iter().map(|row| row.1).sum();
    rows.retain(|row| row.1 > 0);
    let mut table = TextTable::new(vec![
        TextColumn::text("assemblies"),
        TextColumn::number("number", ""),
    ]);
    for (what, count) in rows {
        table.add(vec![what, in_threes(count)]);
    }
    table.add(vec!["accounted for".into(), in_threes(accounted)]);
    table.add(vec![
        "in the space, counted by themselves".into(),
        in_threes(assembled.space),
    ]);
    let mut text = table.render(output::width());
    let structures = &assembled.structures;
    text.push_str(&format!(
        "structures of the kept: {} found{}, {} drawn, {} of them double, {} left out (other groups than their assembly){}\n",
        structures.found,
        match structures.incomplete {
            0 => String::new(),
            some => format!(" (at least; {some} assemblies have more than were looked for)"),
        },
        structures.drawn,
        structures.double,
        structures.other_groups,
        blocked_in_words(&structures.blocked)
    ));
    text
}

/// What rules block, for the end of a line.
fn blocked_in_words(blocked: &std::collections::BTreeMap<String, u64>) -> String {
    if blocked.is_empty() {
        return String::new();
    }
    let all: Vec<String> = blocked
        .iter()
        .map(|(rule, count)| format!("{rule} {count}"))
        .collect();
    format!(", blocked by rules: {}", all.join(", "))
}

/// A number with its digits in threes.
pub(super) fn in_threes(number: u128) -> String {
    let digits = number.to_string();
    let first = digits.len() % 3;
    let mut text = String::new();
    for (at, digit) in digits.chars().enumerate() {
        if at > 0 && at % 3 == first {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}

impl From<SearchError> for CliError {
    fn from(error: SearchError) -> Self {
        match error {
            SearchError::File(error) => Self::File(error),
            SearchError::Threads(reason) => Self::Threads(reason),
            other => Self::Search(other),
        }
    }
}

impl From<StateError> for CliError {
    fn from(error: StateError) -> Self {
        Self::Search(SearchError::State(error))
    }
}

/// The pieces with their ends, groups and classes, for `tables pieces`.
pub(super) fn pieces_text(library: &Library) -> String {
    let pieces = Pieces::built_in(|set| library.set(set))
        .expect("built-in tables of pieces are sound (tested)");
    let mut table = TextTable::new(vec![
        TextColumn::text("piece"),
        TextColumn::text("role"),
        TextColumn::text("ends"),
        TextColumn::text("classes"),
        TextColumn::text("unifac"),
        TextColumn::text("unifac-dortmund"),
        TextColumn::text("default"),
    ]);
    for piece in &pieces.all {
        let ends = piece
            .ends
            .iter()
            .map(|kind| pieces.kinds[usize::from(kind.0)].name.as_str());
        let ends: Vec<&str> = ends.collect();
        let classes = piece.classes.iter().map(|&(class, number)| {
            let name = &pieces.classes[usize::from(class)];
            if number == 1 {
                name.clone()
            } else {
                format!("{number} {name}")
            }
        });
        let classes: Vec<String> = classes.collect();
        let groups = |set: SetId| {
            let groups = piece.groups[set as usize].as_ref();
            groups.map_or_else(
                || "none".to_owned(),
                |counts| library.set(set).describe(counts),
            )
        };
        table.add(vec![
            piece.name.clone(),
            piece.role.id().into(),
            ends.join(" "),
            classes.join(" "),
            groups(SetId::Unifac),
            groups(SetId::UnifacDortmund),
            piece
                .off
                .as_ref()
                .map_or_else(|| "on".into(), |why| format!("off: {why}")),
        ]);
    }
    let mut text = table.render(output::width());
    text.push('\n');
    let mut kinds = TextTable::new(vec![
        TextColumn::text("end"),
        TextColumn::text("what it is"),
        TextColumn::text("may be joined to"),
    ]);
    for kind in &pieces.kinds {
        let joins = pieces.kinds.iter().enumerate();
        let joins: Vec<&str> = joins
            .filter(|(at, _)| kind.joins >> at & 1 == 1)
            .map(|(_, other)| other.name.as_str())
            .collect();
        kinds.add(vec![kind.name.clone(), kind.words.clone(), joins.join(" ")]);
    }
    text.push_str(&kinds.render(output::width()));
    text
}
