//! A search from its units to its files.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc;
use std::thread;
use std::time::{Duration, Instant};

use rayon::prelude::*;
use rustc_hash::{FxHashMap, FxHashSet};
use thiserror::Error;

use super::account::{Account, TooManyToCount};
use super::best::{Scored, score_of_key};
use super::model::Job;
use super::piece::Pieces;
use super::search::Searcher;
use super::state::{Part, State, StateError};
use super::structures::Drawer;
use crate::evaluate::{Plan, Scratch, Verdict, interval_that_counts};
use crate::groups::{GroupCounts, SetId};
use crate::ranking::{
    Fallen, NextMeasurement, Ranked, Standing, merits, next_measurement, number_bands,
    ranking_record, ranks,
};
use crate::report::{CsvRow, FigureColumn, NotRankedRow, RankedTable};
use crate::run::{
    AssemblyRecord, Counts, Event, FileError, Fingerprint, Listener, NewFile, Outcome, RunRecord,
    StopFlag, remove_stale,
};
use crate::stability::{self, Rules, Verdict as Ruling};

/// Time between two states on disk unless it is asked for otherwise: what a crash can cost.
pub const STATE_INTERVAL: Duration = Duration::from_secs(20);

/// Time between two reports of progress.
const PROGRESS_INTERVAL: Duration = Duration::from_millis(200);

/// Parts of the space in which progress is told.
const SHARES: u64 = 1_000_000;

/// Structures of one assembly that are drawn unless the brief says otherwise.
pub const DEFAULT_STRUCTURES: usize = 20;

/// Columns of the ranking beside those of a screened candidate.
const COLUMNS: [&str; 3] = ["assembly", "structures_drawn", "structures_found"];

/// The files of a search, the marker of a complete run last.
pub const FILES: [&str; 3] = ["ranked.csv", "not_ranked.csv", RunRecord::FILE_NAME];

/// Why a search did not come to its end.
#[derive(Debug, Error)]
pub enum SearchError {
    /// Its state on disk.
    #[error(transparent)]
    State(#[from] StateError),
    /// A file of the results.
    #[error(transparent)]
    File(#[from] FileError),
    /// Too many assemblies.
    #[error(transparent)]
    TooMany(#[from] TooManyToCount),
    /// The worker threads could not be started.
    #[error("the worker threads could not be started: {0}")]
    Threads(String),
    /// The account is not that of the space: a fault of the program.
    #[error(
        "the account does not close: {accounted} of {space} assemblies; please report this brief"
    )]
    Open {
        /// What was accounted for.
        accounted: u128,
        /// What the space holds.
        space: u128,
    },
}

/// Where and how a search runs.
pub struct Assembling<'a> {
    /// The plan, for the structures.
    pub plan: &'a Plan,
    /// The search.
    pub job: &'a Job<'a>,
    /// Structures of one assembly that are drawn at most.
    pub structures: usize,
    /// What the search is: brief, tables, folders and version.
    pub search: Fingerprint,
    /// Names of the user's own list by canonical SMILES, beside the known substances.
    pub names: &'a FxHashMap<String, String>,
    /// Rules on structures: what one of them blocks is left out.
    pub rules: &'a Rules,
    /// Where the brief stands.
    pub brief: &'a Path,
    /// Folder of the results; has to exist.
    pub folder: &'a Path,
    /// Worker threads; 0 for one each core.
    pub threads: usize,
    /// Time between two states on disk.
    pub state_interval: Duration,
    /// Raised by whoever wants the run to end early.
    pub stop: &'a StopFlag,
    /// Hears how it goes.
    pub listener: &'a dyn Listener,
}

/// What became of the structures of the kept assemblies.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct StructureAccount {
    /// Structures that exist, as far as they were looked for.
    pub found: u64,
    /// Assemblies whose structures were not all looked for.
    pub incomplete: u64,
    /// Drawn.
    pub drawn: u64,
    /// Drawn again under another assembly or cut.
    pub double: u64,
    /// Broken down otherwise than their assembly, and left out.
    pub other_groups: u64,
    /// Blocked by a rule on structures, by its name, and left out.
    pub blocked: BTreeMap<String, u64>,
}

/// How a search came out.
#[derive(Clone, Debug)]
pub struct Assembled {
    /// The state of the search.
    pub state: State,
    /// The ranking of structures, best first.
    pub ranking: Vec<Ranked>,
    /// How the structures came out.
    pub counts: Counts,
    /// Their account.
    pub structures: StructureAccount,
    /// Whether it was stopped.
    pub stopped: bool,
    /// How many assemblies the space holds.
    pub space: u128,
    /// The measurement worth most.
    pub next: Option<NextMeasurement>,
    /// Nodes a second.
    pub nodes_per_s: f64,
}

/// Why a structure is left out.
enum LeftOut {
    /// Its breakdown is not that of its assembly.
    OtherGroups,
    /// A rule blocks it.
    Blocked(String),
}

/// A structure that was evaluated.
struct Evaluated {
    smiles: String,
    key: String,
    assembly: usize,
    finding: Finding,
}

enum Finding {
    Qualified { row: Ranked, merits: [f64; 2] },
    Fell(Fallen),
}

impl Assembling<'_> {
    /// A search that has not begun.
    pub fn fresh(&self, part: Part) -> State {
        let units = self.job.units().len();
        let keep = self.plan.brief.keep_best;
        State::new(
            self.search,
            self.brief,
            part,
            units,
            keep,
            self.job.account(),
        )
    }

    /// The state to go on from, checked against this search.
    ///
    /// # Errors
    ///
    /// There is none that can be read, or it is of another search.
    pub fn resumed(&self, part: Part) -> Result<(State, PathBuf), StateError> {
        let (state, path) = State::read(self.folder)?;
        state.belongs(&path, &self.fresh(part))?;
        Ok((state, path))
    }

    /// Searches what of `state` is not done yet; the state goes to disk now and then
    /// and at the end.
    ///
    /// # Errors
    ///
    /// The state cannot be written at the end, or an account overflows.
    pub fn search(&self, state: &mut State) -> Result<(bool, f64), SearchError> {
        let units = self.job.units();
        let waiting: Vec<usize> = (0..units.len())
            .filter(|&unit| state.part.takes(unit) && !state.done[unit])
            .collect();
        let threads = match self.threads {
            0 => thread::available_parallelism().map_or(1, usize::from),
            some => some,
        };
        self.listener.hear(Event::Started {
            unit: "assemblies",
            input_bytes: Some(SHARES),
            threads,
        });
        let begun = Instant::now();
        let space = self.job.space().size();
        let next = AtomicUsize::new(0);
        let (send, receive) = mpsc::channel();
        let mut nodes = 0;
        let mut trouble: Option<SearchError> = None;
        let mut disk_trouble = false;
        thread::scope(|scope| {
            for _ in 0..threads.min(waiting.len()) {
                let send = send.clone();
                let (next, waiting, units) = (&next, &waiting, &units);
                let keep = state.keep;
                scope.spawn(move || {
                    let mut searcher = Searcher::new(self.job, self.stop);
                    while let Some(&unit) = waiting.get(next.fetch_add(1, Ordering::Relaxed)) {
                        let before = searcher.nodes;
                        let Some(found) = searcher.search(&units[unit], keep) else {
                            break;
                        };
                        if send.send((unit, found, searcher.nodes - before)).is_err() {
                            break;
                        }
                    }
                });
            }
            drop(send);
            let (mut written, mut told) = (Instant::now(), Instant::now());
            for (unit, found, visited) in receive {
                if let Err(error) = state.account.add(&found.account) {
                    trouble.get_or_insert(error.into());
                    self.stop.raise();
                }
                state.best.merge(found.best);
                state.done[unit] = true;
                nodes += visited;
                if written.elapsed() >= self.state_interval {
                    written = Instant::now();
                    match state.write(self.folder) {
                        Ok(()) => disk_trouble = false,
                        // it goes on in memory; the end tells whether that was enough
                        Err(error) if !disk_trouble => {
                            disk_trouble = true;
                            self.listener.hear(Event::Warning {
                                text: &format!("{error}; the search goes on in memory"),
                            });
                        }
                        Err(_) => {}
                    }
                }
                if told.elapsed() > PROGRESS_INTERVAL {
                    told = Instant::now();
                    self.listener.hear(Event::Progress {
                        done: nodes,
                        input_bytes: share(&state.account, space / u128::from(state.part.of)),
                        qualified: u64::try_from(state.account.scored).unwrap_or(u64::MAX),
                        best: state.best.best().map(score_of_key),
                    });
                }
            }
        });
        if let Some(trouble) = trouble {
            return Err(trouble);
        }
        let seconds = begun.elapsed().as_secs_f64().max(1e-9);
        state.write(self.folder)?;
        Ok((!state.is_complete(), nodes as f64 / seconds))
    }

    /// The structures, ranking and files of a searched state.
    ///
    /// # Errors
    ///
    /// The account does not close, or a file cannot be written.
    pub fn finish(
        &self,
        state: State,
        mut record: RunRecord,
        stopped: bool,
        nodes_per_s: f64,
        begun: Instant,
    ) -> Result<Assembled, SearchError> {
        let space = self.job.space().size();
        let accounted = state.account.total()?;
        if !stopped && state.part == Part::WHOLE && accounted != space {
            return Err(SearchError::Open { accounted, space });
        }
        let kept = state.best.sorted();
        let (evaluated, structures) = self.structures(&kept)?;
        let (rows, counts, files) = self.write(&kept, evaluated)?;
        self.all_or_none(self.put_in_place(files))?;
        record.counts = counts.clone();
        let next = next_measurement(self.plan, &rows);
        record.ranking = Some(ranking_record(self.plan, &rows, next.as_ref()));
        record.assembly = Some(self.record(&state, &structures, space));
        record.end(stopped);
        record.timing.elapsed_s = begun.elapsed().as_secs_f64();
        record.timing.threads = self.threads;
        record.timing.lines_per_s = nodes_per_s;
        self.all_or_none(record.put_in_place(self.folder))?;
        self.listener.hear(Event::Finished {
            ending: record.ended,
            counts: &counts,
        });
        Ok(Assembled {
            state,
            ranking: rows,
            counts,
            structures,
            stopped,
            space,
            next,
            nodes_per_s,
        })
    }

    fn record(&self, state: &State, structures: &StructureAccount, space: u128) -> AssemblyRecord {
        let names = self
            .job
            .quick()
            .targets
            .iter()
            .map(|target| target.name.clone());
        let named = |counts: &[u128], names: Vec<String>| {
            let mut all: Vec<(String, String)> = Vec::new();
            for (name, count) in names.into_iter().zip(counts) {
                // two targets on one figure are told together
                match all.iter_mut().find(|(known, _)| *known == name) {
                    Some((_, sum)) => {
                        let before: u128 = sum.parse().unwrap_or(0);
                        *sum = (before + count).to_string();
                    }
                    None => all.push((name, count.to_string())),
                }
            }
            all.into_iter().filter(|one| one.1 != "0").collect()
        };
        let targets: Vec<String> = names.collect();
        let rules = self.job.rule_names().map(str::to_owned).collect();
        let account = &state.account;
        let dear = self
            .job
            .quick()
            .targets
            .iter()
            .filter(|target| matches!(target.figure, crate::evaluate::QuickFigure::Dear));
        AssemblyRecord {
            part: state.part.to_string(),
            space: space.to_string(),
            accounted: account
                .total()
                .map_or_else(|error| error.to_string(), |sum| sum.to_string()),
            scored: account.scored.to_string(),
            missed_by_target: named(&account.missed, targets.clone()),
            cut_by_bound_of_target: named(&account.cut_by_bound, targets),
            cut_by_rule: named(&account.cut_by_rule, rules),
            not_assessable: account.not_assessable.to_string(),
            without_structure: account.without_structure.to_string(),
            kept: state.keep as u64,
            left_to_structures: dear.map(|target| target.name.clone()).collect(),
            structures_found: structures.found,
            structures_incomplete: structures.incomplete,
            structures_drawn: structures.drawn,
            structures_double: structures.double,
            structures_of_other_groups: structures.other_groups,
            structures_blocked: structures.blocked.clone(),
        }
    }

    /// Draws and evaluates the structures of the kept assemblies, in their order.
    fn structures(
        &self,
        kept: &[Scored],
    ) -> Result<(Vec<Evaluated>, StructureAccount), SearchError> {
        let threads = rayon::ThreadPoolBuilder::new()
            .num_threads(self.threads)
            .stack_size(16 << 20)
            .build()
            .map_err(|error| SearchError::Threads(error.to_string()))?;
        let mut account = StructureAccount::default();
        let mut drawn: Vec<(usize, String)> = Vec::new();
        let mut drawer = Drawer::new(self.job.pieces);
        for (at, scored) in kept.iter().enumerate() {
            let structures = drawer.structures(&scored.pieces, self.structures);
            account.found += structures.found;
            account.incomplete += u64::from(!structures.complete);
            drawn.extend(structures.drawn.into_iter().map(|smiles| (at, smiles)));
        }
        account.drawn = drawn.len() as u64;
        let evaluated: Vec<Result<Evaluated, LeftOut>> = threads.install(|| {
            let memory = || (Scratch::new(), stability::Scratch::new());
            drawn
                .par_iter()
                .map_init(memory, |(scratch, of_rules), (at, smiles)| {
                    self.evaluate(scratch, of_rules, &kept[*at], *at, smiles)
                })
                .collect()
        });
        let mut seen = FxHashSet::default();
        let mut all = Vec::with_capacity(evaluated.len());
        for one in evaluated {
            let one = match one {
                Ok(one) => one,
                Err(LeftOut::OtherGroups) => {
                    account.other_groups += 1;
                    continue;
                }
                Err(LeftOut::Blocked(rule)) => {
                    *account.blocked.entry(rule).or_insert(0) += 1;
                    continue;
                }
            };
            if seen.insert(one.key.clone()) {
                all.push(one);
            } else {
                account.double += 1;
            }
        }
        Ok((all, account))
    }

    /// The groups that the pieces of an assembly add up to, `None` where a set has none.
    fn groups_of(&self, scored: &Scored, set: SetId) -> Option<GroupCounts> {
        let mut counts = GroupCounts::new();
        for &(piece, count) in &scored.pieces {
            let own = self.job.pieces.all[usize::from(piece)].groups[set as usize].as_ref()?;
            for (number, groups) in own.iter() {
                counts.add(number, groups * u16::from(count));
            }
        }
        Some(counts)
    }

    fn evaluate(
        &self,
        scratch: &mut Scratch,
        of_rules: &mut stability::Scratch,
        scored: &Scored,
        assembly: usize,
        smiles: &str,
    ) -> Result<Evaluated, LeftOut> {
        let verdict = self.plan.evaluate(scratch, smiles).unwrap_or_else(|error| {
            panic!("`{smiles}` was drawn from pieces and cannot be read: {error}")
        });
        for set in SetId::ALL {
            let settled = self.groups_of(scored, set);
            if settled.is_some_and(|counts| counts != scratch.profile.counts[set as usize]) {
                return Err(LeftOut::OtherGroups);
            }
        }
        let broken = self.rules.broken(of_rules, &scratch.profile.molecule);
        if let Some(rule) = broken.iter().find(|rule| rule.verdict == Ruling::Blocked) {
            return Err(LeftOut::Blocked(rule.name.clone()));
        }
        let key = scratch.profile.keys.full.clone();
        let fallen = Fallen::of(self.plan, scratch, &verdict);
        let finding = match (verdict, fallen) {
            (
                Verdict::Qualified {
                    score,
                    known,
                    variance,
                    probability,
                },
                _,
            ) => Finding::Qualified {
                merits: merits(self.plan.brief.ranking.by, score, variance, probability),
                row: Ranked {
                    line: 0,
                    name: self.known_as(scratch),
                    smiles: key.clone(),
                    score,
                    known,
                    variance,
                    probability,
                    uses_intervals: self.plan.brief.ranking.uses_intervals(),
                    band: None,
                    figures: scratch
                        .figures
                        .iter()
                        .map(|figure| figure.as_ref().ok().map(|found| found.value))
                        .collect(),
                    intervals: scratch
                        .figures
                        .iter()
                        .map(|figure| interval_that_counts(figure.as_ref().ok()?))
                        .collect(),
                    notes: self.plan.remarks(scratch),
                    shares_rank: false,
                },
            },
            (_, fallen) => Finding::Fell(fallen.expect("what did not qualify fell at something")),
        };
        Ok(Evaluated {
            smiles: smiles.to_owned(),
            key,
            assembly,
            finding,
        })
    }

    /// The name of a substance that is known, built in or of the user; empty for a new one.
    fn known_as(&self, scratch: &Scratch) -> String {
        let keys = &scratch.profile.keys;
        let known = self.plan.library.known(keys);
        let known = known.filter(|known| known.same_identity);
        match known {
            Some(known) => known.substance.name().to_string(),
            None => self.names.get(&keys.full).cloned().unwrap_or_default(),
        }
    }

    fn write(
        &self,
        kept: &[Scored],
        evaluated: Vec<Evaluated>,
    ) -> Result<(Vec<Ranked>, Counts, [NewFile; 2]), SearchError> {
        let [ranked_name, not_ranked_name, _] = FILES;
        let mut not_ranked = NewFile::begin(&self.folder.join(not_ranked_name))?;
        let mut ranked = NewFile::begin(&self.folder.join(ranked_name))?;
        let mut counts = Counts::default();
        let mut out = Vec::new();
        out.extend_from_slice(NotRankedRow::HEAD.as_bytes());
        out.push(b'\n');
        let mut drawn_of: FxHashMap<usize, u64> = FxHashMap::default();
        for one in &evaluated {
            *drawn_of.entry(one.assembly).or_insert(0) += 1;
        }
        let mut standings: Vec<(Standing, Ranked, usize)> = Vec::new();
        for (number, one) in (1..).zip(evaluated) {
            match one.finding {
                Finding::Qualified { mut row, merits } => {
                    row.line = number;
                    let standing = Standing {
                        known: row.known,
                        merits,
                        key: one.key,
                        line: number,
                    };
                    standings.push((standing, row, one.assembly));
                }
                Finding::Fell(Fallen {
                    outcome,
                    label,
                    value,
                    wanted,
                    reason,
                }) => {
                    counts.add(outcome, &label);
                    NotRankedRow {
                        line: number,
                        name: "",
                        smiles: &one.smiles,
                        outcome,
                        figure: &label,
                        value,
                        wanted: &wanted,
                        reason: &reason,
                    }
                    .write_csv(&mut out);
                }
            }
        }
        standings.sort_by(|one, other| one.0.cmp(&other.0));
        let most = self.plan.brief.keep_best;
        for (_, row, _) in standings.drain(most.min(standings.len())..) {
            counts.add(Outcome::BelowKept, "");
            NotRankedRow {
                line: row.line,
                name: &row.name,
                smiles: &row.smiles,
                outcome: Outcome::BelowKept,
                figure: "",
                value: None,
                wanted: "",
                reason: &format!("qualified, but ranks below the {most} kept"),
            }
            .write_csv(&mut out);
        }
        not_ranked.add(&out)?;

        let mut rows = Vec::with_capacity(standings.len());
        let mut of_assembly = Vec::with_capacity(standings.len());
        let mut before: Option<(f64, [f64; 2], usize)> = None;
        for (standing, mut row, assembly) in standings {
            counts.add(Outcome::Ranked, "");
            counts.ranked_incomplete += u64::from(row.known < 1.0);
            // isomers that no target tells apart
            let own = (standing.known, standing.merits, assembly);
            row.shares_rank = before == Some(own);
            before = Some(own);
            rows.push(row);
            of_assembly.push(assembly);
        }
        if self.plan.brief.ranking.uses_intervals() {
            number_bands(&mut rows);
        }
        let figures = self.plan.figures.iter().map(|figure| FigureColumn {
            name: figure.name.clone(),
            dimension: figure.dimension,
        });
        let table = RankedTable::new(figures.collect(), &COLUMNS)
            .with_intervals(|at| rows.iter().any(|row| row.intervals[at].is_some()));
        out.clear();
        table.write_head(&mut out);
        let mut drawer = Drawer::new(self.job.pieces);
        let mut found_of: FxHashMap<usize, String> = FxHashMap::default();
        for (rank, (row, &assembly)) in ranks(&rows).into_iter().zip(rows.iter().zip(&of_assembly))
        {
            let found = found_of.entry(assembly).or_insert_with(|| {
                let structures = drawer.structures(&kept[assembly].pieces, 0);
                match structures.complete {
                    true => structures.found.to_string(),
                    false => format!("at least {}", structures.found),
                }
            });
            let words = in_words(self.job.pieces, &kept[assembly].pieces);
            let drawn = drawn_of[&assembly].to_string();
            let carried = [words.as_str(), drawn.as_str(), found.as_str()];
            table.write_row(&row.as_row(rank, &carried), &mut out);
        }
        ranked.add(&out)?;
        Ok((rows, counts, [not_ranked, ranked]))
    }

    fn put_in_place(&self, files: [NewFile; 2]) -> Result<(), FileError> {
        remove_stale(self.folder, &[RunRecord::FILE_NAME])?;
        files.into_iter().try_for_each(NewFile::put_in_place)
    }

    fn all_or_none<T>(&self, written: Result<T, FileError>) -> Result<T, FileError> {
        if written.is_err() {
            // The error is what matters; without `run.json` no run is vouched for.
            let _ = remove_stale(self.folder, &FILES);
        }
        written
    }
}

/// An assembly in words: `2 CH3, CH2CO`.
pub fn in_words(pieces: &Pieces, assembly: &[(u16, u8)]) -> String {
    let parts = assembly.iter().map(|&(piece, count)| {
        let name = &pieces.all[usize::from(piece)].name;
        match count {
            1 => name.clone(),
            count => format!("{count} {name}"),
        }
    });
    parts.collect::<Vec<_>>().join(", ")
}

/// How much of the space is accounted for.
fn share(account: &Account, space: u128) -> u64 {
    let accounted = account.total().unwrap_or(0) as f64;
    (accounted / space.max(1) as f64 * SHARES as f64).min(SHARES as f64) as u64
}

/// Reads the states of parts, in the order given.
///
/// # Errors
///
/// A folder without a state that can be read.
pub fn read_parts(folders: &[PathBuf]) -> Result<Vec<(State, PathBuf)>, StateError> {
    folders.iter().map(|folder| State::read(folder)).collect()
}

/// What a short trial says of a search.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Trial {
    /// Assemblies of the units tried.
    pub assemblies: u128,
    /// Of these, scored.
    pub scored: u128,
    /// Seconds of one core.
    pub seconds: f64,
}

impl Job<'_> {
    /// Searches units spread over the whole for a while.
    pub fn trial(&self, at_most: Duration) -> Result<Trial, TooManyToCount> {
        let begun = Instant::now();
        let mut searcher = Searcher::new(self, &StopFlag::new());
        let units = self.units();
        let mut account = self.account();
        // steps of the golden section reach every region of the list early
        let step = (units.len() as f64 * 0.618) as usize | 1;
        for turn in 0..units.len() {
            let unit = &units[turn * step % units.len()];
            let found = searcher.search(unit, 1).expect("nobody asks to stop");
            account.add(&found.account)?;
            if begun.elapsed() > at_most {
                break;
            }
        }
        Ok(Trial {
            assemblies: account.total()?,
            scored: account.scored,
            seconds: begun.elapsed().as_secs_f64(),
        })
    }
}
