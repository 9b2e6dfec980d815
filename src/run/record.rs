//! The record a run leaves: `run.json`.

use std::collections::BTreeMap;
use std::path::Path;

use serde::{Deserialize, Serialize};

use super::error::FileError;
use super::file::write_whole;
use super::fingerprint::Fingerprint;

/// Version of the form of `run.json`; raised when a reader would have to change.
pub const RECORD_FORMAT: u32 = 1;

/// What became of one line of a pool.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
#[repr(u8)]
pub enum Outcome {
    /// In the ranking.
    Ranked,
    /// Qualified, but worse than all that are kept.
    BelowKept,
    /// Missed a must.
    NotQualified,
    /// A must could not be assessed.
    NotAssessable,
    /// The same substance as an earlier line.
    Duplicate,
    /// Not readable as a candidate.
    Refused,
}

impl Outcome {
    /// Every outcome, in the order they are told in.
    pub const ALL: [Self; 6] = [
        Self::Ranked,
        Self::BelowKept,
        Self::NotQualified,
        Self::NotAssessable,
        Self::Duplicate,
        Self::Refused,
    ];

    /// The word used in files.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Ranked => "ranked",
            Self::BelowKept => "below-kept",
            Self::NotQualified => "not-qualified",
            Self::NotAssessable => "not-assessable",
            Self::Duplicate => "duplicate",
            Self::Refused => "refused",
        }
    }
}

/// How the lines came out: lines = ranked + below-kept + not-qualified +
/// not-assessable + duplicate + refused.
///
/// The maps split an outcome by its reason. A line counts once, under the
/// first reason met, so that each map adds up to its outcome.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub struct Counts {
    /// Lines read.
    pub lines: u64,
    /// In the ranking.
    pub ranked: u64,
    /// Of the ranked, those with a gap in a figure that counts in the score.
    pub ranked_incomplete: u64,
    /// Qualified, but not kept.
    pub below_kept: u64,
    /// Missed a must.
    pub not_qualified: u64,
    /// A must could not be assessed.
    pub not_assessable: u64,
    /// Seen on an earlier line.
    pub duplicate: u64,
    /// Not readable.
    pub refused: u64,
    /// `not_qualified` by the target or structural limit that was missed.
    pub not_qualified_by_target: BTreeMap<String, u64>,
    /// `not_assessable` by the target that could not be judged.
    pub not_assessable_by_target: BTreeMap<String, u64>,
    /// `refused` by the kind of fault.
    pub refused_by_reason: BTreeMap<String, u64>,
}

impl Counts {
    /// Counts one line; `reason` says under what it is split up, for the
    /// outcomes that are.
    pub fn add(&mut self, outcome: Outcome, reason: &str) {
        self.lines += 1;
        *self.of_mut(outcome) += 1;
        let by = match outcome {
            Outcome::NotQualified => &mut self.not_qualified_by_target,
            Outcome::NotAssessable => &mut self.not_assessable_by_target,
            Outcome::Refused => &mut self.refused_by_reason,
            Outcome::Ranked | Outcome::BelowKept | Outcome::Duplicate => return,
        };
        match by.get_mut(reason) {
            Some(count) => *count += 1,
            None => {
                by.insert(reason.to_owned(), 1);
            }
        }
    }

    /// How many came out this way.
    pub const fn of(&self, outcome: Outcome) -> u64 {
        match outcome {
            Outcome::Ranked => self.ranked,
            Outcome::BelowKept => self.below_kept,
            Outcome::NotQualified => self.not_qualified,
            Outcome::NotAssessable => self.not_assessable,
            Outcome::Duplicate => self.duplicate,
            Outcome::Refused => self.refused,
        }
    }

    const fn of_mut(&mut self, outcome: Outcome) -> &mut u64 {
        match outcome {
            Outcome::Ranked => &mut self.ranked,
            Outcome::BelowKept => &mut self.below_kept,
            Outcome::NotQualified => &mut self.not_qualified,
            Outcome::NotAssessable => &mut self.not_assessable,
            Outcome::Duplicate => &mut self.duplicate,
            Outcome::Refused => &mut self.refused,
        }
    }

    /// Adds the counts of another part of the run.
    pub fn add_all(&mut self, other: &Self) {
        self.lines += other.lines;
        self.ranked_incomplete += other.ranked_incomplete;
        for outcome in Outcome::ALL {
            *self.of_mut(outcome) += other.of(outcome);
        }
        for (mine, theirs) in [
            (
                &mut self.not_qualified_by_target,
                &other.not_qualified_by_target,
            ),
            (
                &mut self.not_assessable_by_target,
                &other.not_assessable_by_target,
            ),
            (&mut self.refused_by_reason, &other.refused_by_reason),
        ] {
            for (reason, count) in theirs {
                *mine.entry(reason.clone()).or_default() += count;
            }
        }
    }

    /// Whether the outcomes, and the reasons of each that is split up, add up.
    pub fn add_up(&self) -> bool {
        let split = |by: &BTreeMap<String, u64>| by.values().sum::<u64>();
        let all: u64 = Outcome::ALL.into_iter().map(|o| self.of(o)).sum();
        all == self.lines
            && self.ranked_incomplete <= self.ranked
            && split(&self.not_qualified_by_target) == self.not_qualified
            && split(&self.not_assessable_by_target) == self.not_assessable
            && split(&self.refused_by_reason) == self.refused
    }
}

/// Why a run ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Ending {
    /// All input was worked through.
    Complete,
    /// Somebody asked it to stop.
    Stopped,
    /// Something went wrong.
    Failed,
}

/// The brief of a run.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct BriefRecord {
    /// Its file name.
    pub file: String,
    /// Its text as it stood.
    pub text: String,
    /// Fingerprint of the text.
    pub fingerprint: Fingerprint,
}

impl BriefRecord {
    /// The record of a brief.
    pub fn new(file: &str, text: &str) -> Self {
        Self {
            file: file.to_owned(),
            text: text.to_owned(),
            fingerprint: Fingerprint::of(text.as_bytes()),
        }
    }
}

/// The tables a run computed with.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct TablesRecord {
    /// Fingerprint over all of them.
    pub fingerprint: Fingerprint,
    /// Files of a user's folder that added or replaced something; empty: only
    /// what is built in.
    pub of_user: Vec<String>,
    /// Switches that chose between values, such as table values as circulated.
    pub choices: Vec<String>,
}

/// The input of a run.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct InputRecord {
    /// The pool as the brief names it.
    pub file: String,
    /// Fingerprint of its lines.
    pub fingerprint: Fingerprint,
}

/// How candidates were ranked, and what would change it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct RankingRecord {
    /// `expected-score`, `probability` or `cautious`.
    pub by: String,
    /// Probability of meeting a must below which it disqualifies; 0: the bare
    /// numbers decided.
    pub confidence: f64,
    /// Candidates that cannot be told apart from the first, itself included.
    pub in_first_band: u64,
    /// The measurement worth most for telling who leads.
    pub measure_next: Option<MeasurementRecord>,
}

/// A measurement that is worth making.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct MeasurementRecord {
    /// Rank of the candidate, from 1.
    pub rank: u64,
    /// Its name.
    pub name: String,
    /// Its SMILES.
    pub smiles: String,
    /// What to measure, in words.
    pub what: String,
    /// How much better the best expected score is likely to be with it.
    pub expected_gain: f64,
    /// Probability that it changes which candidate leads.
    pub chance: f64,
    /// Share of the variance of the candidate's score that it settles.
    pub share_of_variance: f64,
    /// Why, in one sentence.
    pub reason: String,
}

/// What became of every assembly of a search. Numbers that may be larger than
/// readers of JSON take are written as text.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct AssemblyRecord {
    /// Which part of the search: `1/1` for all of it.
    pub part: String,
    /// Assemblies of the space, counted by themselves.
    pub space: String,
    /// Assemblies accounted for: the sum of those that follow.
    pub accounted: String,
    /// Scored from counts, no must missed.
    pub scored: String,
    /// Scored, and a must missed, by target.
    pub missed_by_target: Vec<(String, String)>,
    /// Cut by a bound on linear sums, by the first target that cuts.
    pub cut_by_bound_of_target: Vec<(String, String)>,
    /// Cut by the molar mass or a rule on counts.
    pub cut_by_rule: Vec<(String, String)>,
    /// A group or interaction is not published.
    pub not_assessable: String,
    /// No structure can be drawn.
    pub without_structure: String,
    /// Assemblies that are kept at most, and whose structures are evaluated in full.
    pub kept: u64,
    /// Targets that only the structures of the kept were judged by.
    pub left_to_structures: Vec<String>,
    /// Structures of the kept assemblies, those beyond the drawn ones included.
    pub structures_found: u64,
    /// Assemblies whose structures were not all looked for.
    pub structures_incomplete: u64,
    /// Structures drawn.
    pub structures_drawn: u64,
    /// Of these, the same molecule as an earlier one.
    pub structures_double: u64,
    /// Of these, broken down otherwise than their assembly, and left out.
    pub structures_of_other_groups: u64,
    /// Of these, blocked by a rule on structures, and left out, by rule.
    pub structures_blocked: BTreeMap<String, u64>,
}

/// What depends on the machine and the hour; left out when runs are compared.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Timing {
    /// Start, in seconds since 1970-01-01 00:00 UTC.
    pub started_unix_s: u64,
    /// Wall-clock seconds.
    pub elapsed_s: f64,
    /// Threads at work.
    pub threads: usize,
    /// Lines a second over the whole run.
    pub lines_per_s: f64,
}

/// Everything `run.json` holds.
///
/// Two runs of the same program on the same brief, tables and pool have the
/// same record but for `timing`, which comes last.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct RunRecord {
    /// [`RECORD_FORMAT`] of the writer.
    pub format: u32,
    /// Name and version of the program.
    pub program: String,
    /// `screen` or `assemble`.
    pub command: String,
    /// Why it ended.
    pub ended: Ending,
    /// What went wrong, in one sentence, where it failed.
    pub failure: Option<String>,
    /// Whether the files are those of the whole job.
    pub finished: bool,
    /// The brief.
    pub brief: BriefRecord,
    /// The tables.
    pub tables: TablesRecord,
    /// The pool, where there is one.
    pub input: Option<InputRecord>,
    /// The activity models used, the first for the targets.
    pub models: Vec<String>,
    /// How the lines came out.
    pub counts: Counts,
    /// How candidates were ranked, once they are.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ranking: Option<RankingRecord>,
    /// The account of an assembly search.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub assembly: Option<AssemblyRecord>,
    /// What a reader should know, in the order it was met.
    pub warnings: Vec<String>,
    /// What depends on the machine and the hour.
    pub timing: Timing,
}

impl RunRecord {
    /// The name of the record in the folder of a run.
    pub const FILE_NAME: &'static str = "run.json";

    /// A record that says what is run; counts, warnings and timing come later.
    pub fn new(command: &str, brief: BriefRecord, tables: TablesRecord) -> Self {
        Self {
            format: RECORD_FORMAT,
            program: format!("groupsmith {}", env!("CARGO_PKG_VERSION")),
            command: command.to_owned(),
            ended: Ending::Failed,
            failure: Some("the run did not get to its end".into()),
            finished: false,
            brief,
            tables,
            input: None,
            models: Vec::new(),
            counts: Counts::default(),
            ranking: None,
            assembly: None,
            warnings: Vec::new(),
            timing: Timing::default(),
        }
    }

    /// Says that the run got to its end, or was asked to stop before.
    pub fn end(&mut self, stopped: bool) {
        self.finished = !stopped;
        self.ended = match stopped {
            true => Ending::Stopped,
            false => Ending::Complete,
        };
        self.failure = None;
    }

    /// Says what went wrong.
    pub fn fail(&mut self, reason: impl Into<String>) {
        self.finished = false;
        self.ended = Ending::Failed;
        self.failure = Some(reason.into());
    }

    /// The record as text, ending in a line feed.
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string_pretty(self)
            .expect("the record holds only texts, counts and finite numbers");
        text.push('\n');
        text
    }

    /// Puts `run.json` into place in the folder of the run. To be called after
    /// every other file is in place: it marks that they are.
    ///
    /// # Errors
    ///
    /// See [`FileError`].
    pub fn put_in_place(&self, folder: &Path) -> Result<(), FileError> {
        write_whole(&folder.join(Self::FILE_NAME), self.to_json().as_bytes())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_add_up_however_they_are_taken_together() {
        let mut one = Counts::default();
        one.add(Outcome::Ranked, "");
        one.add(Outcome::NotQualified, "boiling_point");
        one.add(Outcome::NotQualified, "boiling_point");
        one.add(Outcome::Refused, "syntax");
        let mut two = Counts::default();
        two.add(Outcome::NotAssessable, "flash_point");
        two.add(Outcome::Refused, "syntax");
        two.add(Outcome::Duplicate, "");
        let mut both = one.clone();
        both.add_all(&two);
        assert!(one.add_up() && two.add_up() && both.add_up());
        assert_eq!(both.lines, 7);
        assert_eq!(both.refused_by_reason["syntax"], 2);
        both.ranked += 1;
        assert!(!both.add_up());
    }

    #[test]
    fn a_record_is_read_back_as_it_was_written() {
        let brief = BriefRecord::new("brief.toml", "title = \"µ\"\n");
        let tables = TablesRecord {
            fingerprint: Fingerprint::of(b"tables"),
            of_user: vec!["own.csv".into()],
            choices: Vec::new(),
        };
        let mut record = RunRecord::new("screen", brief, tables);
        assert!(!record.finished);
        record.counts.add(Outcome::Refused, "syntax");
        record.end(true);
        assert!(!record.finished && record.ended == Ending::Stopped);
        let text = record.to_json();
        assert_eq!(serde_json::from_str::<RunRecord>(&text).unwrap(), record);
        assert!(text.find("\"timing\"").unwrap() > text.find("\"counts\"").unwrap());
    }
}
