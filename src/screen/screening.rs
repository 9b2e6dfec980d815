//! A pool streamed through a plan: from lines to the files of the run.

use std::collections::BinaryHeap;
use std::io;
use std::path::Path;
use std::time::Instant;

use rayon::ThreadPool;
use rayon::prelude::*;
use thiserror::Error;

use super::identity::{Identities, Kinship, Relation, RelationLog, Relations, WrittenRelations};
use super::ledger::{Entry, Finding, Ledger, Shown, WrittenLedger};
use super::pool::{Batch, Pool, PoolError, PoolLine};
use super::resolved::Resolved;
use crate::evaluate::{Plan, Scratch, Verdict, interval_that_counts};
use crate::ranking::{
    Fallen, NextMeasurement, Ranked, Standing, merits, next_measurement, number_bands,
    ranking_record,
};
use crate::report::{CsvRow, FigureColumn, NotRankedRow, RankedTable};
use crate::run::{
    Counts, Event, FileError, Fingerprint, InputRecord, Listener, NewFile, Outcome, RunRecord,
    StopFlag, remove_stale,
};

/// Lines that are evaluated between two looks at the stop flag.
const BATCH_LINES: usize = 4096;
/// Lines that one task evaluates.
const TASK_LINES: usize = 128;
/// Stack of a worker: the longest SMILES is read by recursion along its chain.
const WORKER_STACK: usize = 16 << 20;

/// The files a screening leaves, the marker of a complete run last.
pub const FILES: [&str; 3] = ["ranked.csv", "not_ranked.csv", RunRecord::FILE_NAME];

/// Why a screening did not come to its end.
#[derive(Debug, Error)]
pub enum ScreenError {
    /// The pool.
    #[error(transparent)]
    Pool(#[from] PoolError),
    /// A file of the results.
    #[error(transparent)]
    File(#[from] FileError),
    /// The worker threads could not be started.
    #[error("the worker threads could not be started: {0}")]
    Threads(String),
}

/// Where and how a screening runs.
pub struct Screening<'a> {
    /// The plan.
    pub plan: &'a Plan,
    /// Folder of the results; has to exist.
    pub folder: &'a Path,
    /// Worker threads; 0 for one each core.
    pub threads: usize,
    /// Raised by whoever wants the run to end early.
    pub stop: &'a StopFlag,
    /// Hears how it goes.
    pub listener: &'a dyn Listener,
}

/// How a screening came out.
#[derive(Clone, Debug)]
pub struct Screened {
    /// The ranking, best first.
    pub ranking: Vec<Ranked>,
    /// How the lines came out.
    pub counts: Counts,
    /// Whether it was stopped before the end of the pool.
    pub stopped: bool,
    /// Form of the ranking.
    pub table: RankedTable,
    /// The measurement that is worth most for telling who leads.
    pub next: Option<NextMeasurement>,
}

/// What a task hands back for its lines, in their order.
struct Done {
    records: Vec<u8>,
    identities: Vec<(u64, u128, u128)>,
    qualified: u64,
}

impl Screening<'_> {
    /// Reads the pool to its end and writes the files of the run; `record` says
    /// what is run and is completed and put into place last.
    ///
    /// # Errors
    ///
    /// The pool cannot be read on, or a file cannot be written: then none of
    /// the files is put into place.
    pub fn run(&self, mut pool: Pool, mut record: RunRecord) -> Result<Screened, ScreenError> {
        let begun = Instant::now();
        let threads = rayon::ThreadPoolBuilder::new()
            .num_threads(self.threads)
            .stack_size(WORKER_STACK)
            .build()
            .map_err(|error| ScreenError::Threads(error.to_string()))?;
        self.listener.hear(Event::Started {
            unit: "lines",
            input_bytes: pool.input_bytes(),
            threads: threads.current_num_threads(),
        });
        let carried = pool.carried().to_vec();
        let temporary = |error: io::Error| FileError::new(self.folder, error);
        let mut ledger = Ledger::new(self.folder);
        let mut identities = Identities::new(self.folder);
        let mut input = Fingerprint::new();
        let (mut lines, mut qualified) = (0, 0);

        let mut batch = Batch::default();
        let mut next = Batch::default();
        let mut stopped = self.was_left(pool.read_batch(&mut batch, BATCH_LINES))?;
        while !stopped && !batch.is_empty() {
            if self.stop.is_raised() {
                stopped = true;
                break;
            }
            // The next lines are read while these are evaluated.
            let (done, read) = threads.install(|| {
                rayon::join(
                    || self.evaluate(&batch),
                    || pool.read_batch(&mut next, BATCH_LINES),
                )
            });
            stopped = self.was_left(read)?;
            for done in done {
                ledger.add(&done.records).map_err(temporary)?;
                for (line, constitution, full) in done.identities {
                    identities
                        .push(line, constitution, full)
                        .map_err(temporary)?;
                }
                qualified += done.qualified;
            }
            input = input.with(batch.text().as_bytes());
            lines += batch.len() as u64;
            self.listener.hear(Event::Progress {
                done: lines,
                input_bytes: pool.input_bytes_read(),
                qualified,
                best: None,
            });
            std::mem::swap(&mut batch, &mut next);
        }

        let mut ledger = ledger.finish().map_err(temporary)?;
        let mut relations = identities.relations().map_err(temporary)?;
        let kept = self.keep(&mut ledger, &mut relations).map_err(temporary)?;
        let figures = self.plan.figures.iter().map(|figure| FigureColumn {
            name: figure.name.clone(),
            dimension: figure.dimension,
        });
        let carried: Vec<&str> = carried.iter().map(String::as_str).collect();
        let table = RankedTable::new(figures.collect(), &carried);
        let Written {
            ranking,
            counts,
            table,
            files,
        } = self.write(&mut ledger, kept, table, &threads)?;
        // Until here the results of an earlier run stay as they are.
        self.all_or_none(self.put_in_place(files))?;

        record.input = self.plan.brief.pool.as_ref().map(|pool| InputRecord {
            file: pool.file.value.clone(),
            fingerprint: input,
        });
        record.counts = counts.clone();
        let next = next_measurement(self.plan, &ranking);
        record.ranking = Some(ranking_record(self.plan, &ranking, next.as_ref()));
        record.end(stopped);
        let elapsed_s = begun.elapsed().as_secs_f64();
        record.timing.elapsed_s = elapsed_s;
        record.timing.threads = threads.current_num_threads();
        record.timing.lines_per_s = if elapsed_s > 0.0 {
            lines as f64 / elapsed_s
        } else {
            0.0
        };
        self.all_or_none(record.put_in_place(self.folder))?;
        self.listener.hear(Event::Finished {
            ending: record.ended,
            counts: &counts,
        });
        Ok(Screened {
            ranking,
            counts,
            stopped,
            table,
            next,
        })
    }

    /// Puts the tables into place; the record of an earlier run, which vouches
    /// for other ones, goes first.
    fn put_in_place(&self, files: [NewFile; 2]) -> Result<(), FileError> {
        remove_stale(self.folder, &[RunRecord::FILE_NAME])?;
        files.into_iter().try_for_each(NewFile::put_in_place)
    }

    /// Takes back the files that are in place when one of them failed.
    fn all_or_none<T>(&self, written: Result<T, FileError>) -> Result<T, FileError> {
        if written.is_err() {
            // The error is what matters; without `run.json` no run is vouched for.
            let _ = remove_stale(self.folder, &FILES);
        }
        written
    }

    /// Whether reading ended because the run was asked to stop.
    fn was_left(&self, read: Result<(), PoolError>) -> Result<bool, PoolError> {
        match read {
            Ok(()) => Ok(false),
            Err(PoolError::Read { .. }) if self.stop.is_raised() => Ok(true),
            Err(error) => Err(error),
        }
    }

    fn evaluate(&self, batch: &Batch) -> Vec<Done> {
        (0..batch.len().div_ceil(TASK_LINES))
            .into_par_iter()
            .map_init(Scratch::new, |scratch, task| {
                let lines = task * TASK_LINES..batch.len().min((task + 1) * TASK_LINES);
                let mut done = Done {
                    records: Vec::new(),
                    identities: Vec::new(),
                    qualified: 0,
                };
                for index in lines {
                    let line = batch.line(index);
                    let entry = self.entry(scratch, line, &mut done);
                    entry.write(&mut done.records);
                }
                done
            })
            .collect()
    }

    fn entry(&self, scratch: &mut Scratch, line: PoolLine<'_>, done: &mut Done) -> Entry {
        let fell = |outcome, label: &str, reason: String| Finding::Fell {
            outcome,
            label: label.to_owned(),
            value: None,
            wanted: String::new(),
            reason,
        };
        let (name, smiles, finding) = match line.resolved(&self.plan.library) {
            Err(fault) => {
                let finding = fell(Outcome::Refused, fault.reason(), fault.to_string());
                (line.name, line.text, finding)
            }
            Ok(Resolved { smiles, name }) => {
                let own: Vec<_> = line.measured().collect();
                // Figures that only a row of the ranking shows wait until it is one; own
                // values are not at hand any more then.
                let verdict = match own.is_empty() {
                    true => self.plan.judge(scratch, smiles, &own),
                    false => self.plan.evaluate_with(scratch, smiles, &own),
                };
                let finding = match verdict {
                    Err(error) => fell(Outcome::Refused, error.reason(), error.to_string()),
                    Ok(verdict) => {
                        let keys = &scratch.profile.keys;
                        done.identities.push((
                            line.line,
                            hash(&keys.constitution),
                            hash(&keys.full),
                        ));
                        let finding = self.finding(scratch, verdict, !own.is_empty());
                        done.qualified += u64::from(matches!(finding, Finding::Qualified { .. }));
                        finding
                    }
                };
                (name, smiles, finding)
            }
        };
        Entry {
            line: line.line,
            name: name.to_owned(),
            smiles: smiles.to_owned(),
            finding,
            carried: line.carried().map(str::to_owned).collect(),
        }
    }

    /// What came of a candidate; `is_complete` says whether all its figures were found out.
    fn finding(&self, scratch: &mut Scratch, verdict: Verdict, is_complete: bool) -> Finding {
        if let Some(fallen) = Fallen::of(self.plan, scratch, &verdict) {
            return Finding::Fell {
                outcome: fallen.outcome,
                label: fallen.label,
                value: fallen.value,
                wanted: fallen.wanted,
                reason: fallen.reason,
            };
        }
        let Verdict::Qualified {
            score,
            known,
            variance,
            probability,
        } = verdict
        else {
            unreachable!("what did not qualify fell at something");
        };
        let shown = match is_complete {
            true => self.shown(scratch),
            false => Shown::default(),
        };
        Finding::Qualified {
            score,
            known,
            variance,
            probability,
            key: scratch.profile.keys.full.clone(),
            shown,
        }
    }

    /// What a row of the ranking shows of the last candidate.
    fn shown(&self, scratch: &mut Scratch) -> Shown {
        let figures = &scratch.figures;
        Shown {
            figures: figures
                .iter()
                .map(|figure| figure.as_ref().ok().map(|found| found.value))
                .collect(),
            intervals: (0..)
                .zip(figures)
                .filter_map(|(at, figure)| Some((at, interval_that_counts(figure.as_ref().ok()?)?)))
                .collect(),
            notes: joined(
                &self.plan.remarks(scratch),
                self.as_component(scratch).as_deref(),
            ),
        }
    }

    /// Finds out what rows of the ranking show where it is not known yet.
    fn complete(&self, rows: &mut [Ranked]) {
        rows.par_iter_mut()
            .filter(|row| row.figures.is_empty())
            .for_each_init(Scratch::new, |scratch, row| {
                self.plan
                    .evaluate(scratch, &row.smiles)
                    .expect("the line was judged before");
                show(row, self.shown(scratch));
            });
    }

    /// That a candidate is in the mixture already: it ranks like any other, but
    /// adding it is not adding a solvent.
    fn as_component(&self, scratch: &Scratch) -> Option<String> {
        let key = &scratch.profile.keys.full;
        let mut components = self.plan.components.iter();
        let at = components.position(|component| component.profile.keys.full == *key)?;
        Some(format!("is component {} of the mixture", at + 1))
    }

    /// The lines that stay in the ranking, best first.
    fn keep(&self, ledger: &mut WrittenLedger, relations: &mut Relations) -> io::Result<Kept> {
        let most = self.plan.brief.keep_best;
        let mut heap: BinaryHeap<Standing> = BinaryHeap::new();
        let mut related = RelationLog::new(self.folder);
        ledger.for_each(|entry| {
            let relation = relations.of(entry.line)?;
            if let Some(relation) = &relation {
                related.add(relation)?;
            }
            let duplicate = relation.is_some_and(|relation| relation.kinship == Kinship::Duplicate);
            if let Finding::Qualified {
                score,
                known,
                variance,
                probability,
                key,
                ..
            } = entry.finding
                && !duplicate
            {
                let merits = merits(self.plan.brief.ranking.by, score, variance, probability);
                heap.push(Standing {
                    known,
                    merits,
                    key,
                    line: entry.line,
                });
                if heap.len() > most {
                    heap.pop();
                }
            }
            Ok(())
        })?;
        Ok(Kept {
            standings: heap.into_sorted_vec(),
            related: related.finish()?,
        })
    }

    fn write(
        &self,
        ledger: &mut WrittenLedger,
        kept: Kept,
        table: RankedTable,
        threads: &ThreadPool,
    ) -> Result<Written, FileError> {
        let [ranked_name, not_ranked_name, _] = FILES;
        let mut not_ranked = NewFile::begin(&self.folder.join(not_ranked_name))?;
        let mut ranked = NewFile::begin(&self.folder.join(ranked_name))?;
        let mut ranks: Vec<(u64, usize)> = kept
            .standings
            .iter()
            .enumerate()
            .map(|(rank, standing)| (standing.line, rank))
            .collect();
        ranks.sort_unstable();
        let mut ranking: Vec<Option<(Ranked, Vec<String>)>> = vec![None; ranks.len()];
        let mut counts = Counts::default();
        let mut related = kept.related;
        let mut out = Vec::new();
        out.extend_from_slice(NotRankedRow::HEAD.as_bytes());
        out.push(b'\n');
        let mut failure = None;
        let walked = ledger.for_each(|entry| {
            let relation = related.of(entry.line)?;
            let rank = ranks.binary_search_by_key(&entry.line, |rank| rank.0).ok();
            let rank = rank.map(|at| ranks[at].1);
            if let Some(place) = self.settle(entry, relation, rank, &mut counts, &mut out) {
                let (rank, row) = place;
                ranking[rank] = Some(row);
            }
            if out.len() > 1 << 16 {
                if let Err(error) = not_ranked.add(&out) {
                    failure = Some(error);
                    return Err(io::Error::other("the file of lines that are not ranked"));
                }
                out.clear();
            }
            Ok(())
        });
        if let Some(error) = failure {
            return Err(error);
        }
        walked.map_err(|error| FileError::new(self.folder, error))?;
        not_ranked.add(&out)?;

        out.clear();
        let (mut rows, carried): (Vec<Ranked>, Vec<Vec<String>>) = ranking
            .into_iter()
            .map(|row| row.expect("every kept line is in the ledger"))
            .unzip();
        threads.install(|| self.complete(&mut rows));
        if self.plan.brief.ranking.uses_intervals() {
            number_bands(&mut rows);
        }
        let table = table.with_intervals(|at| rows.iter().any(|row| row.intervals[at].is_some()));
        table.write_head(&mut out);
        for (rank, (row, carried)) in rows.iter().zip(&carried).enumerate() {
            let carried: Vec<&str> = carried.iter().map(String::as_str).collect();
            table.write_row(&row.as_row(rank, &carried), &mut out);
        }
        ranked.add(&out)?;
        Ok(Written {
            ranking: rows,
            counts,
            table,
            files: [not_ranked, ranked],
        })
    }

    /// Counts an entry; a kept one comes back with its rank, any other is
    /// appended to `out`.
    fn settle(
        &self,
        entry: Entry,
        relation: Option<Relation>,
        rank: Option<usize>,
        counts: &mut Counts,
        out: &mut Vec<u8>,
    ) -> Option<(usize, (Ranked, Vec<String>))> {
        let not_ranked =
            |outcome, figure: &str, value, wanted: &str, reason: &str, out: &mut Vec<u8>| {
                NotRankedRow {
                    line: entry.line,
                    name: &entry.name,
                    smiles: &entry.smiles,
                    outcome,
                    figure,
                    value,
                    wanted,
                    reason,
                }
                .write_csv(out);
            };
        let mut stereoisomer = None;
        match relation {
            Some(Relation {
                kinship: Kinship::Duplicate,
                earlier,
                ..
            }) => {
                counts.add(Outcome::Duplicate, "");
                let reason = format!("the same substance as line {earlier}");
                not_ranked(Outcome::Duplicate, "", None, "", &reason, out);
                return None;
            }
            Some(Relation {
                kinship: Kinship::Stereoisomer,
                earlier,
                ..
            }) => {
                stereoisomer = Some(format!("stereoisomer or isotopologue of line {earlier}"));
            }
            None => {}
        }
        match entry.finding {
            Finding::Fell {
                outcome,
                ref label,
                value,
                ref wanted,
                ref reason,
            } => {
                counts.add(outcome, label);
                let figure = if outcome == Outcome::Refused {
                    ""
                } else {
                    label
                };
                let reason = joined(reason, stereoisomer.as_deref());
                not_ranked(outcome, figure, value, wanted, &reason, out);
                None
            }
            Finding::Qualified { .. } if rank.is_none() => {
                counts.add(Outcome::BelowKept, "");
                let reason = format!(
                    "qualified, but ranks below the {} kept",
                    self.plan.brief.keep_best
                );
                let reason = joined(&reason, stereoisomer.as_deref());
                not_ranked(Outcome::BelowKept, "", None, "", &reason, out);
                None
            }
            Finding::Qualified {
                score,
                known,
                variance,
                probability,
                shown,
                ..
            } => {
                counts.add(Outcome::Ranked, "");
                counts.ranked_incomplete += u64::from(known < 1.0);
                let mut row = Ranked {
                    line: entry.line,
                    name: entry.name,
                    smiles: entry.smiles,
                    score,
                    known,
                    variance,
                    probability,
                    uses_intervals: self.plan.brief.ranking.uses_intervals(),
                    band: None,
                    figures: Vec::new(),
                    intervals: Vec::new(),
                    notes: stereoisomer.unwrap_or_default(),
                    shares_rank: false,
                };
                if !shown.figures.is_empty() {
                    show(&mut row, shown);
                }
                rank.map(|rank| (rank, (row, entry.carried)))
            }
        }
    }
}

/// Takes over what is shown of a ranked candidate; notes that it has come last.
fn show(ranked: &mut Ranked, shown: Shown) {
    ranked.intervals = vec![None; shown.figures.len()];
    for (at, interval) in shown.intervals {
        ranked.intervals[at as usize] = Some(interval);
    }
    ranked.figures = shown.figures;
    let own = (!ranked.notes.is_empty()).then_some(ranked.notes.as_str());
    ranked.notes = joined(&shown.notes, own);
}

/// The tables of a run, whole but not in place yet.
struct Written {
    ranking: Vec<Ranked>,
    counts: Counts,
    table: RankedTable,
    files: [NewFile; 2],
}

/// The ranking before its rows are read again, and the lines that are related
/// to earlier ones.
struct Kept {
    standings: Vec<Standing>,
    related: WrittenRelations,
}

fn joined(text: &str, more: Option<&str>) -> String {
    match more {
        Some(more) if text.is_empty() => more.to_owned(),
        Some(more) => format!("{text}; {more}"),
        None => text.to_owned(),
    }
}

/// 128 bits of a key: two different keys of one pool practically never share them.
fn hash(key: &str) -> u128 {
    Fingerprint::of(key.as_bytes()).value()
}
