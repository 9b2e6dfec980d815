//! A ranked candidate and its place.

use super::next_measurement::NextMeasurement;
use crate::brief::RankBy;
use crate::evaluate::{Plan, score_interval};
use crate::report::{RankedRow, Uncertainty};
use crate::run::{MeasurementRecord, RankingRecord};

/// A candidate of the ranking.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Ranked {
    /// Line of the pool.
    pub line: u64,
    /// Name as given.
    pub name: String,
    /// SMILES as given.
    pub smiles: String,
    /// Score; without meaning where nothing that counts is known.
    pub score: f64,
    /// Share of the weights whose figures have a value.
    pub known: f64,
    /// Variance of the score.
    pub variance: f64,
    /// Probability that every must is met.
    pub probability: f64,
    /// Whether intervals count; else the bare numbers rank it.
    pub uses_intervals: bool,
    /// Number of its band, from 1; `None` where it has no score, or intervals
    /// are left out.
    pub band: Option<u64>,
    /// Figures in SI, in the order of the plan.
    pub figures: Vec<Option<f64>>,
    /// Their 90 % intervals; those of exact figures are left out.
    pub intervals: Vec<Option<(f64, f64)>>,
    /// Remarks.
    pub notes: String,
    /// Whether no target tells it apart from the one before: both share a rank.
    pub shares_rank: bool,
}

/// The rank of each row, from 0: rows that share one have that of the first of them.
pub fn ranks(rows: &[Ranked]) -> Vec<usize> {
    let mut last = 0;
    let rows = rows.iter().enumerate();
    rows.map(|(at, row)| {
        if !row.shares_rank {
            last = at;
        }
        last
    })
    .collect()
}

/// Place in the ranking, the best first; the order is total.
#[derive(Clone, Debug)]
pub struct Standing {
    /// Share of the weights whose figures have a value.
    pub known: f64,
    /// What the brief ranks by, then what decides between equals; see [`merits`].
    pub merits: [f64; 2],
    /// Canonical SMILES.
    pub key: String,
    /// Line or number.
    pub line: u64,
}

impl Ord for Standing {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        other
            .known
            .total_cmp(&self.known)
            .then_with(|| other.merits[0].total_cmp(&self.merits[0]))
            .then_with(|| other.merits[1].total_cmp(&self.merits[1]))
            .then_with(|| self.key.cmp(&other.key))
            .then_with(|| self.line.cmp(&other.line))
    }
}

impl PartialOrd for Standing {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}

impl PartialEq for Standing {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other).is_eq()
    }
}

impl Eq for Standing {}

/// What a brief ranks by, then what decides between equals; larger is better.
pub fn merits(by: RankBy, score: f64, variance: f64, probability: f64) -> [f64; 2] {
    match by {
        RankBy::ExpectedScore => [score, score],
        RankBy::Probability => [probability, score],
        RankBy::Cautious => [score_interval(score, variance).0, score],
    }
}

impl Ranked {
    /// Its name, or its SMILES where it has none.
    pub fn called(&self) -> &str {
        match self.name.as_str() {
            "" => &self.smiles,
            name => name,
        }
    }

    /// The row of the ranking at a rank from 0.
    pub fn as_row<'a>(&'a self, rank: usize, carried: &'a [&'a str]) -> RankedRow<'a> {
        let has_score = self.known > 0.0;
        RankedRow {
            rank: rank as u64 + 1,
            name: &self.name,
            smiles: &self.smiles,
            score: has_score.then_some(self.score),
            uncertainty: self.uses_intervals.then(|| Uncertainty {
                probability: self.probability,
                score: has_score.then(|| score_interval(self.score, self.variance)),
                band: self.band,
            }),
            figures: &self.figures,
            intervals: &self.intervals,
            line: self.line,
            notes: &self.notes,
            carried,
        }
    }
}

/// How a ranking came about, for the record.
pub fn ranking_record(
    plan: &Plan,
    ranking: &[Ranked],
    next: Option<&NextMeasurement>,
) -> RankingRecord {
    let rule = &plan.brief.ranking;
    // The last digits of a library's logarithm are nobody's business.
    let rounded = |number: f64| (number * 1e4).round() / 1e4;
    RankingRecord {
        by: rule.by.id().to_owned(),
        confidence: rule.confidence,
        in_first_band: ranking.iter().filter(|row| row.band == Some(1)).count() as u64,
        measure_next: next.map(|next| {
            let row = &ranking[next.place];
            MeasurementRecord {
                rank: next.place as u64 + 1,
                name: row.name.clone(),
                smiles: row.smiles.clone(),
                what: next.what.clone(),
                expected_gain: rounded(next.gain),
                chance: rounded(next.chance),
                share_of_variance: rounded(next.share),
                reason: next.reason.clone(),
            }
        }),
    }
}
