//! How many assemblies of the space begin with a prefix, without walking them.

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::model::Job;
use super::search::Prefix;
use super::space::{BRANCHES, COUNTERS, Counters, HEAVY, PIECES, QUATERNARY, kinds_of};

/// Numbers of CH3, CH and C that close a prefix, and the numbers of CH2 beside them.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct TailRange {
    /// CH3, 0, CH, C.
    pub(super) plain: [u8; 4],
    /// Fewest CH2.
    pub(super) low: i32,
    /// Most CH2, not below `low`.
    pub(super) high: i32,
}

impl Job<'_> {
    /// The tails that close a prefix within the limits, by CH3, CH and C.
    pub(super) fn tail_ranges(
        &self,
        counters: &Counters,
        balance: i32,
    ) -> SmallVec<[TailRange; 8]> {
        let space = &self.space;
        let [ch3, ch2, ch, c] = self.tail;
        let most = |member: Option<usize>| member.map_or(0, |at| i32::from(space.members[at].most));
        let left = |counter: usize| i32::from(space.most[counter]) - i32::from(counters[counter]);
        let room = left(PIECES).min(left(HEAVY));
        let least = (i32::from(space.least_pieces) - i32::from(counters[PIECES]))
            .max(i32::from(space.least_heavy) - i32::from(counters[HEAVY]));
        let branches = left(BRANCHES);
        let mut ranges = SmallVec::new();
        for quaternary in 0..=most(c).min(left(QUATERNARY)).min(branches / 2) {
            for branched in 0..=most(ch).min(branches - 2 * quaternary) {
                let ends = balance + branched + 2 * quaternary;
                let fixed = ends + branched + quaternary;
                if fixed > room {
                    // more branches need more ends
                    break;
                }
                if ends < 0 || ends > most(ch3) {
                    continue;
                }
                let low = (least - fixed).max(0);
                let high = most(ch2).min(room - fixed);
                if low <= high {
                    ranges.push(TailRange {
                        plain: [ends as u8, 0, branched as u8, quaternary as u8],
                        low,
                        high,
                    });
                }
            }
        }
        ranges
    }
}

/// Counts completions; remembers, so one per thread.
#[derive(Debug, Default)]
pub(super) struct Completions {
    known: FxHashMap<(u16, [u8; COUNTERS], i32), u128>,
}

/// How many numbers are remembered before all are forgotten.
const MOST_REMEMBERED: usize = 400_000;

impl Completions {
    /// How many assemblies begin with a prefix and go on with functional pieces from
    /// `from` and plain carbons; `None` where a limit on a single piece would have to
    /// be followed up.
    pub(super) fn of(&mut self, job: &Job<'_>, prefix: &Prefix, from: usize) -> Option<u128> {
        let limited = |at: &usize| job.space.members[*at].most < job.space.most[PIECES];
        if job.functional[from..].iter().any(limited) {
            return None;
        }
        Some(self.count(job, from, prefix.counters, prefix.balance))
    }

    fn count(&mut self, job: &Job<'_>, from: usize, counters: Counters, balance: i32) -> u128 {
        let left = i32::from(job.space.most[PIECES]) - i32::from(counters[PIECES]);
        if balance > left {
            return 0;
        }
        if from == job.functional.len() {
            let ranges = job.tail_ranges(&counters, balance);
            return ranges
                .iter()
                .map(|range| (range.high - range.low + 1) as u128)
                .sum();
        }
        let key = (from as u16, job.seen(counters), balance);
        if let Some(&known) = self.known.get(&key) {
            return known;
        }
        let member = &job.space.members[job.functional[from]];
        let (mut now, mut now_balance) = (counters, balance);
        let mut all = 0;
        loop {
            all += self.count(job, from + 1, now, now_balance);
            for (counter, add) in now.iter_mut().zip(&member.adds) {
                *counter += add;
            }
            now_balance += i32::from(member.balance);
            if !job.space.fits(&now) {
                break;
            }
        }
        if self.known.len() > MOST_REMEMBERED {
            self.known.clear();
        }
        self.known.insert(key, all);
        all
    }
}

impl Job<'_> {
    /// Counters as far as a limit may still stop at them; where kinds are limited, the
    /// classes that occur too.
    fn seen(&self, counters: Counters) -> Counters {
        let mut seen = counters;
        let kinds_matter = self.kinds_matter;
        for (counter, value) in seen.iter_mut().enumerate() {
            if !self.limited[counter] {
                *value = if kinds_matter && counter >= super::space::CLASSES {
                    (*value).min(1)
                } else {
                    0
                };
            }
        }
        debug_assert!(!kinds_matter || kinds_of(&seen) == kinds_of(&counters));
        seen
    }
}
