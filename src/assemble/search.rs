//! The search itself: every assembly of the space, counted, cut or scored.
//!
//! An assembly is a *prefix* (the members of its ring and its functional pieces)
//! and a *tail* of plain carbons CH3, CH2, CH, C. Prefixes are walked depth
//! first; for each, the numbers of C and CH fix that of CH3, and CH2 runs. Linear
//! sums are whole numbers, so no order of additions matters, and a bound is a
//! comparison of whole numbers whose limit was rounded outward.

use std::rc::Rc;

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use super::account::Account;
use super::best::{Best, Scored, score_key};
use super::model::{Form, Job};
use super::piece::Role;
use super::realize::Realizer;
use super::space::{
    AROMATIC, BRANCHES, COUNTERS, Counters, HEAVY, PIECES, QUATERNARY, SATURATED, Skeleton,
};
use crate::pure::fitted::ClassCounts;
use crate::run::StopFlag;

/// One part of the search: pure, and independent of all others.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unit {
    /// What holds its molecules together.
    pub(super) skeleton: Skeleton,
    /// Members of the ring, or the first functional pieces; places in the space.
    pub(super) first: SmallVec<[u16; 6]>,
    /// Whether more functional pieces may follow.
    pub(super) goes_on: bool,
}

/// What a unit found.
#[derive(Clone, Debug, PartialEq)]
pub struct Found {
    /// What became of its assemblies.
    pub account: Account,
    /// The best of them.
    pub best: Best,
}

/// The search of a thread: what it remembers from one unit to the next.
pub(super) struct Searcher<'j> {
    job: &'j Job<'j>,
    realizer: Realizer<'j>,
    limits: FxHashMap<(ClassCounts, u8), Rc<Vec<SizeLimits>>>,
    /// Nodes visited, for the rate.
    pub(super) nodes: u64,
    stop: StopFlag,
}

/// Lowest and highest n·sum of a form, by heavy atoms.
#[derive(Clone, Debug, Default)]
struct SizeLimits {
    low: Vec<i64>,
    high: Vec<i64>,
}

/// Limits that are remembered before all are forgotten.
const MOST_LIMITS: usize = 20_000;

/// Functional pieces that a unit of an open chain begins with.
const FIRST_PIECES: usize = 2;

/// Where a walk stands: a prefix.
#[derive(Clone, Debug)]
struct Prefix {
    counters: Counters,
    balance: i32,
    mass: i64,
    forms: SmallVec<[[i64; 2]; 6]>,
    rarity: f64,
    classes: ClassCounts,
    /// Places in the space with their counts, in the order they were added.
    members: SmallVec<[(u16, u8); 10]>,
    gap: bool,
}

impl Job<'_> {
    /// The units of the search, in order: the same for any number of threads.
    pub fn units(&self) -> Vec<Unit> {
        let mut units = Vec::new();
        let whole = self.space.of_role(Role::Whole);
        let first: Vec<u16> = whole.map(|at| at as u16).collect();
        for &one in &first {
            units.push(Unit {
                skeleton: Skeleton::Whole,
                first: SmallVec::from_slice(&[one]),
                goes_on: false,
            });
        }
        let mut first = SmallVec::new();
        self.add_chains(0, &mut first, &mut units);
        if self.space.rings {
            for (skeleton, role) in [
                (Skeleton::Aromatic, Role::Aromatic),
                (Skeleton::Saturated, Role::Ring),
            ] {
                let members: Vec<usize> = self.space.of_role(role).collect();
                let mut counters = [0; COUNTERS];
                let mut ring = SmallVec::new();
                self.add_rings(skeleton, &members, &mut counters, &mut ring, &mut units);
            }
        }
        units
    }

    /// The whole search on one thread: nodes visited, and what was found.
    pub fn search_all(&self, keep: usize) -> (u64, Found) {
        let mut searcher = Searcher::new(self, &StopFlag::new());
        let mut all = Found {
            account: self.account(),
            best: Best::new(keep),
        };
        for unit in self.units() {
            let found = searcher.search(&unit, keep).expect("nobody asks to stop");
            all.account
                .add(&found.account)
                .expect("a space that is searched can be counted");
            all.best.merge(found.best);
        }
        (searcher.nodes, all)
    }

    fn add_chains(&self, from: usize, first: &mut SmallVec<[u16; 6]>, units: &mut Vec<Unit>) {
        let full = first.len() == FIRST_PIECES;
        units.push(Unit {
            skeleton: Skeleton::Chain,
            first: first.clone(),
            goes_on: full,
        });
        if full {
            return;
        }
        for (at, &member) in self.functional.iter().enumerate().skip(from) {
            first.push(member as u16);
            let mut counters = [0; COUNTERS];
            for &one in first.iter() {
                add(&mut counters, &self.space.members[usize::from(one)].adds);
            }
            if self.space.fits(&counters) {
                self.add_chains(at, first, units);
            }
            first.pop();
        }
    }

    fn add_rings(
        &self,
        skeleton: Skeleton,
        members: &[usize],
        counters: &mut Counters,
        ring: &mut SmallVec<[u16; 6]>,
        units: &mut Vec<Unit>,
    ) {
        let atoms = match skeleton {
            Skeleton::Aromatic => counters[AROMATIC],
            _ => counters[SATURATED],
        };
        let complete = match skeleton {
            Skeleton::Aromatic => atoms == 6,
            _ => atoms == 5 || atoms == 6,
        };
        if complete {
            units.push(Unit {
                skeleton,
                first: ring.clone(),
                goes_on: true,
            });
        }
        for (at, &member) in members.iter().enumerate() {
            let before = *counters;
            add(counters, &self.space.members[member].adds);
            ring.push(member as u16);
            if self.space.fits(counters) {
                self.add_rings(skeleton, &members[at..], counters, ring, units);
            }
            ring.pop();
            *counters = before;
        }
    }
}

fn add(counters: &mut Counters, adds: &Counters) {
    for (counter, add) in counters.iter_mut().zip(adds) {
        *counter += add;
    }
}

impl<'j> Searcher<'j> {
    pub(super) fn new(job: &'j Job<'j>, stop: &StopFlag) -> Self {
        Self {
            job,
            stop: stop.clone(),
            realizer: Realizer::new(job.pieces),
            limits: FxHashMap::default(),
            nodes: 0,
        }
    }

    /// Searches a unit; `None` if the run was asked to stop before its end.
    pub(super) fn search(&mut self, unit: &Unit, keep: usize) -> Option<Found> {
        let found = self.found(unit, keep);
        (!self.stop.is_raised()).then_some(found)
    }

    fn found(&mut self, unit: &Unit, keep: usize) -> Found {
        let job = self.job;
        let mut found = Found {
            account: job.account(),
            best: Best::new(keep),
        };
        let mut prefix = Prefix {
            counters: [0; COUNTERS],
            balance: if unit.skeleton == Skeleton::Chain {
                2
            } else {
                0
            },
            mass: 0,
            forms: job.forms.iter().map(|_| [0, 0]).collect(),
            rarity: 0.0,
            classes: ClassCounts::default(),
            members: SmallVec::new(),
            gap: false,
        };
        for &member in &unit.first {
            self.push(&mut prefix, usize::from(member), 1);
        }
        if unit.skeleton == Skeleton::Whole {
            if job.space.takes_whole(usize::from(unit.first[0])) {
                self.whole(&prefix, &mut found);
            }
            return found;
        }
        if unit.first.iter().any(|&one| {
            let count = unit.first.iter().filter(|&&other| other == one).count();
            count > usize::from(job.space.members[usize::from(one)].most)
        }) {
            return found;
        }
        if unit.goes_on {
            let from = match unit.skeleton {
                Skeleton::Chain => {
                    let last = usize::from(*unit.first.last().expect("has first pieces"));
                    job.functional
                        .iter()
                        .position(|&one| one == last)
                        .expect("is functional")
                }
                _ => 0,
            };
            self.walk(&mut prefix, from, &mut found);
        } else {
            self.tails(&prefix, &mut found);
        }
        found
    }

    /// The prefix and all that follow when functional pieces are added to it.
    fn walk(&mut self, prefix: &mut Prefix, from: usize, found: &mut Found) {
        if self.stop.is_raised() {
            return;
        }
        self.tails(prefix, found);
        for at in from..self.job.functional.len() {
            let member = self.job.functional[at];
            let own = &self.job.space.members[member];
            let count = prefix
                .members
                .iter()
                .find(|one| usize::from(one.0) == member);
            if count.is_some_and(|one| one.1 >= own.most) {
                continue;
            }
            let mut counters = prefix.counters;
            add(&mut counters, &own.adds);
            if !self.job.space.fits(&counters) {
                continue;
            }
            self.push(prefix, member, 1);
            self.walk(prefix, at, found);
            self.push(prefix, member, -1);
        }
    }

    fn push(&self, prefix: &mut Prefix, member: usize, sign: i8) {
        let job = self.job;
        let own = &job.space.members[member];
        let measures = &job.measures[member];
        for (counter, add) in prefix.counters.iter_mut().zip(&own.adds) {
            *counter = counter.wrapping_add_signed(*add as i8 * sign);
        }
        let times = i64::from(sign);
        prefix.balance += i32::from(own.balance) * i32::from(sign);
        prefix.mass += measures.mass * times;
        for (sum, add) in prefix.forms.iter_mut().zip(&measures.forms) {
            sum[0] += add[0] * times;
            sum[1] += add[1] * times;
        }
        match prefix
            .members
            .iter()
            .position(|one| usize::from(one.0) == member)
        {
            Some(at) => {
                prefix.members[at].1 = prefix.members[at].1.wrapping_add_signed(sign);
                if prefix.members[at].1 == 0 {
                    prefix.members.remove(at);
                }
            }
            None => prefix.members.push((member as u16, 1)),
        }
        let all = prefix
            .members
            .iter()
            .map(|one| &job.measures[usize::from(one.0)]);
        prefix.rarity = all.clone().map(|one| one.rarity).sum();
        prefix.gap = all.clone().any(|one| one.gap);
    }

    /// A molecule that is one piece.
    fn whole(&mut self, prefix: &Prefix, found: &mut Found) {
        let n = usize::from(prefix.counters[HEAVY]);
        let limits = self.limits_of(prefix);
        self.nodes += 1;
        if prefix.mass > self.job.most_mass {
            found.account.cut_by_rule[0] += 1;
        } else if let Some(rule) = self.job.rule_that_cuts(&prefix.counters) {
            found.account.cut_by_rule[rule] += 1;
        } else if prefix.gap || self.job.has_gap(&prefix.members, &[0; 4]) {
            found.account.not_assessable += 1;
        } else if let Some(target) = self.cut(&limits, n, |at| prefix.forms[at]) {
            found.account.cut_by_bound[target] += 1;
        } else {
            self.score(prefix, [0; 4], found);
        }
    }

    /// The first target, in the order of the brief, whose bound cuts.
    fn cut(
        &self,
        limits: &[SizeLimits],
        n: usize,
        sums: impl Fn(usize) -> [i64; 2],
    ) -> Option<usize> {
        let forms = self.job.forms.iter().zip(limits).enumerate();
        forms
            .filter(|(at, (_, limits))| {
                let [by_count, by_share] = sums(*at);
                let sum = by_count * n as i64 + by_share;
                sum < limits.low[n] || sum > limits.high[n]
            })
            .map(|(_, (form, _))| form.target)
            .min()
    }

    /// Every tail of a prefix.
    fn tails(&mut self, prefix: &Prefix, found: &mut Found) {
        let job = self.job;
        let space = &job.space;
        let [ch3, ch2, ch, c] = job.tail;
        let most = |member: Option<usize>| member.map_or(0, |at| i32::from(space.members[at].most));
        let left = i32::from(space.most[PIECES]) - i32::from(prefix.counters[PIECES]);
        let left_heavy = i32::from(space.most[HEAVY]) - i32::from(prefix.counters[HEAVY]);
        let room = left.min(left_heavy);
        let least = (i32::from(space.least_pieces) - i32::from(prefix.counters[PIECES]))
            .max(i32::from(space.least_heavy) - i32::from(prefix.counters[HEAVY]));
        let left_branches = i32::from(space.most[BRANCHES]) - i32::from(prefix.counters[BRANCHES]);
        let left_quaternary =
            i32::from(space.most[QUATERNARY]) - i32::from(prefix.counters[QUATERNARY]);
        let rule = job.rule_that_cuts(&prefix.counters);
        let gaps = [
            prefix.gap || job.has_gap(&prefix.members, &[0; 4]),
            prefix.gap || job.has_gap(&prefix.members, &[1, 1, 1, 1]),
        ];
        let mut limits = None;
        for quaternary in 0..=most(c).min(left_quaternary).min(left_branches / 2) {
            for branched in 0..=most(ch).min(left_branches - 2 * quaternary) {
                let ends = prefix.balance + branched + 2 * quaternary;
                if ends < 0 || ends > most(ch3) {
                    continue;
                }
                let fixed = ends + branched + quaternary;
                let low = (least - fixed).max(0);
                let high = most(ch2).min(room - fixed);
                if high < low {
                    continue;
                }
                let count = (high - low + 1) as u128;
                if let Some(rule) = rule {
                    found.account.cut_by_rule[rule] += count;
                    continue;
                }
                let plain = [ends as u8, 0, branched as u8, quaternary as u8];
                let mut high = high;
                // with any plain carbon the groups of alkanes are in it
                if gaps[1] {
                    if fixed > 0 || low > 0 || gaps[0] {
                        found.account.not_assessable += count;
                        continue;
                    }
                    found.account.not_assessable += count - 1;
                    high = 0;
                }
                let limits = limits.get_or_insert_with(|| self.limits_of(prefix)).clone();
                self.run(prefix, &limits, plain, low..=high, found);
            }
        }
    }

    /// CH2 runs.
    fn run(
        &mut self,
        prefix: &Prefix,
        limits: &[SizeLimits],
        plain: [u8; 4],
        run: std::ops::RangeInclusive<i32>,
        found: &mut Found,
    ) {
        let job = self.job;
        let (from, to) = (*run.start(), *run.end());
        if from > to {
            return;
        }
        let mut base: SmallVec<[[i64; 2]; 6]> = prefix.forms.clone();
        let mut mass = prefix.mass;
        let mut step: SmallVec<[[i64; 2]; 6]> = SmallVec::from_elem([0, 0], base.len());
        let mut step_mass = 0;
        for (which, member) in job.tail.iter().enumerate() {
            let Some(member) = *member else { continue };
            let own = &job.measures[member];
            if which == 1 {
                step.clone_from(&own.forms);
                step_mass = own.mass;
                continue;
            }
            let times = i64::from(plain[which]);
            mass += own.mass * times;
            for (sum, add) in base.iter_mut().zip(&own.forms) {
                sum[0] += add[0] * times;
                sum[1] += add[1] * times;
            }
        }
        let fixed = plain[0] + plain[2] + plain[3];
        let n0 = usize::from(prefix.counters[HEAVY]) + usize::from(fixed);
        self.nodes += (to - from + 1) as u64;
        let mut realizable = false;
        for ch2 in from..=to {
            let n = n0 + ch2 as usize;
            let times = i64::from(ch2);
            if mass + step_mass * times > job.most_mass {
                // the mass grows from here on
                found.account.cut_by_rule[0] += (to - ch2 + 1) as u128;
                return;
            }
            let cut = self.cut(limits, n, |at| {
                [
                    base[at][0] + step[at][0] * times,
                    base[at][1] + step[at][1] * times,
                ]
            });
            if let Some(target) = cut {
                found.account.cut_by_bound[target] += 1;
                continue;
            }
            let counts = [plain[0], ch2 as u8, plain[2], plain[3]];
            // a CH2 can always be put between a CH3 and what it is joined to
            realizable = realizable && plain[0] > 0
                || self
                    .realizer
                    .is_realizable(&job.assembly(&prefix.members, counts));
            if realizable {
                self.score(prefix, counts, found);
            } else {
                found.account.without_structure += 1;
            }
        }
    }

    /// Figures and score of an assembly.
    fn score(&mut self, prefix: &Prefix, tail: [u8; 4], found: &mut Found) {
        match self.job.judge(&prefix.members, tail) {
            Judged::Scored(score) => {
                found.account.scored += 1;
                let key = score_key(score);
                if found.best.takes(key) {
                    found.best.offer(Scored {
                        key,
                        pieces: self.job.assembly(&prefix.members, tail),
                    });
                }
            }
            Judged::Missed { target, by_bound } => match by_bound {
                true => found.account.cut_by_bound[target] += 1,
                false => found.account.missed[target] += 1,
            },
            Judged::NotAssessable => found.account.not_assessable += 1,
        }
    }

    /// Limits of the forms for the classes of a prefix, by size.
    fn limits_of(&mut self, prefix: &Prefix) -> Rc<Vec<SizeLimits>> {
        let bucket = rarity_bucket(prefix.rarity + self.job.tail_rarity);
        let key = (prefix.classes, bucket);
        if let Some(known) = self.limits.get(&key) {
            return Rc::clone(known);
        }
        if self.limits.len() > MOST_LIMITS {
            self.limits.clear();
        }
        let sizes = usize::from(self.job.largest) + 1;
        let of = |form: &Form<'_>| {
            let mut limits = SizeLimits {
                low: vec![i64::MIN; sizes],
                high: vec![i64::MAX; sizes],
            };
            for n in 1..sizes {
                (limits.low[n], limits.high[n]) =
                    form.limits(n as f64, &prefix.classes, rarity_of(bucket));
            }
            limits
        };
        let limits = Rc::new(self.job.forms.iter().map(of).collect::<Vec<_>>());
        self.limits.insert(key, Rc::clone(&limits));
        limits
    }
}

/// Steps of the rarity, rounded up: 5 % of one more than it.
pub(super) fn rarity_bucket(rarity: f64) -> u8 {
    ((1.0 + rarity).ln() / 1.05_f64.ln() - 1e-9)
        .ceil()
        .clamp(0.0, 255.0) as u8
}

/// The rarity that stands for a step.
pub(super) fn rarity_of(bucket: u8) -> f64 {
    1.05_f64.powi(i32::from(bucket)) - 1.0
}

/// What is made of an assembly that no bound has cut.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Judged {
    /// Its score.
    Scored(f64),
    /// A must is missed, its error considered.
    Missed {
        /// Which target.
        target: usize,
        /// Whether a linear bound would have cut it, but for rounding.
        by_bound: bool,
    },
    /// A figure that has to be met cannot be had.
    NotAssessable,
}
