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
use super::best::{Best, Scored, advance_key, score_key};
use super::completions::Completions;
use super::completions::TailRange;
use super::model::{ActivityScratch, Form, Job, Window};
use super::piece::Role;
use super::realize::Realizer;
use super::space::{AROMATIC, COUNTERS, Counters, HEAVY, PIECES, SATURATED, Skeleton};
use crate::mixture::SharedGroups;
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
    limits: FxHashMap<(ClassCounts, u8), Rc<Vec<Windows>>>,
    /// Activity by main groups; `None` where an interaction is not published.
    shared: FxHashMap<u64, Option<Rc<SharedGroups>>>,
    activity: ActivityScratch,
    completions: Completions,
    /// Tails of the prefix at work that no bound has cut, and whether their sums are sure.
    waiting: Vec<([u8; 4], bool)>,
    tails: Vec<[u8; 4]>,
    /// Nodes visited, for the rate.
    pub(super) nodes: u64,
    stop: StopFlag,
}

/// The window of a form, by heavy atoms.
type Windows = Vec<Window>;

/// How the sums of an assembly lie in their windows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Lies {
    /// A target, by its place, is missed.
    Outside(usize),
    /// None is missed for sure.
    Inside {
        /// Whether all may surely be met.
        sure: bool,
    },
}

/// Limits that are remembered before all are forgotten.
const MOST_LIMITS: usize = 20_000;

/// Functional pieces that a unit of an open chain begins with.
const FIRST_PIECES: usize = 2;

/// Where a walk stands: a prefix.
#[derive(Clone, Debug)]
pub(super) struct Prefix {
    pub(super) counters: Counters,
    pub(super) balance: i32,
    mass: i64,
    forms: SmallVec<[[i64; 2]; 6]>,
    rarity: f64,
    classes: ClassCounts,
    /// Places in the space with their counts, in the order they were added.
    pub(super) members: SmallVec<[(u16, u8); 10]>,
    mains: u64,
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
            shared: FxHashMap::default(),
            activity: ActivityScratch::default(),
            completions: Completions::default(),
            waiting: Vec::new(),
            tails: Vec::new(),
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
            mains: 0,
            gap: false,
        };
        if matches!(unit.skeleton, Skeleton::Aromatic | Skeleton::Saturated) {
            prefix.classes = prefix.classes.with_ring();
        }
        for &member in &unit.first {
            prefix = self.with(&prefix, usize::from(member));
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
            self.walk(&prefix, from, &mut found);
        } else {
            self.tails(&prefix, &mut found);
        }
        found
    }

    /// The prefix and all that follow when functional pieces are added to it.
    fn walk(&mut self, prefix: &Prefix, from: usize, found: &mut Found) {
        let job = self.job;
        // a piece takes at most one open end away: with more of them than pieces left,
        // neither this prefix nor any that follows can be closed
        let left = i32::from(job.space.most[PIECES]) - i32::from(prefix.counters[PIECES]);
        if prefix.balance > left || self.stop.is_raised() {
            return;
        }
        // a broken rule and a missing interaction stay so, whatever is added
        let rule = job.rule_that_cuts(&prefix.counters);
        if (rule.is_some() || prefix.gap || self.has_gap(prefix.mains))
            && let Some(all) = self.completions.of(job, prefix, from)
        {
            match rule {
                Some(rule) => found.account.cut_by_rule[rule] += all,
                None => found.account.not_assessable += all,
            }
            return;
        }
        self.tails(prefix, found);
        for (at, &member) in job.functional.iter().enumerate().skip(from) {
            let own = &job.space.members[member];
            let count = match prefix.members.last() {
                Some(last) if usize::from(last.0) == member => last.1,
                _ => 0,
            };
            if count >= own.most {
                continue;
            }
            let mut counters = prefix.counters;
            add(&mut counters, &own.adds);
            if job.space.fits(&counters) {
                let next = self.with(prefix, member);
                self.walk(&next, at, found);
            }
        }
    }

    /// The prefix with one member more, which is not before its last.
    fn with(&self, prefix: &Prefix, member: usize) -> Prefix {
        let own = &self.job.space.members[member];
        let measures = &self.job.measures[member];
        let mut next = prefix.clone();
        add(&mut next.counters, &own.adds);
        next.balance += i32::from(own.balance);
        next.mass += measures.mass;
        for (sum, add) in next.forms.iter_mut().zip(&measures.forms) {
            sum[0] += add[0];
            sum[1] += add[1];
        }
        next.classes.add(&measures.classes, 1);
        match next.members.last_mut() {
            Some(last) if usize::from(last.0) == member => last.1 += 1,
            _ => {
                next.members.push((member as u16, 1));
                next.rarity += measures.rarity;
                next.mains |= measures.mains;
                next.gap |= measures.gap;
            }
        }
        next
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
        } else if prefix.gap || self.has_gap(prefix.mains) {
            found.account.not_assessable += 1;
        } else {
            match self.lies(&limits, n, |at| prefix.forms[at]) {
                Lies::Outside(target) => found.account.cut_by_bound[target] += 1,
                Lies::Inside { sure } => {
                    self.waiting.push(([0; 4], sure));
                    self.score_waiting(prefix, found);
                }
            }
        }
    }

    /// How the sums of an assembly lie; of several missed targets the first in the
    /// order of the brief counts.
    #[inline]
    fn lies(&self, limits: &[Windows], n: usize, sums: impl Fn(usize) -> [i64; 2]) -> Lies {
        let mut missed = usize::MAX;
        let mut sure = true;
        for (at, (form, windows)) in self.job.forms.iter().zip(limits).enumerate() {
            let [by_count, by_share] = sums(at);
            let sum = by_count * n as i64 + by_share;
            let window = &windows[n];
            if sum < window.low || sum > window.high {
                missed = missed.min(form.target);
            }
            sure &= sum >= window.sure_low && sum <= window.sure_high;
        }
        match missed {
            usize::MAX => Lies::Inside { sure },
            target => Lies::Outside(target),
        }
    }

    /// The activity of main groups, looked up once.
    fn shared(&mut self, mains: u64) -> Option<Rc<SharedGroups>> {
        let job = self.job;
        let known = self.shared.entry(mains);
        known
            .or_insert_with(|| job.shared_groups(mains).map(Rc::new))
            .clone()
    }

    /// Whether an interaction that the activity needs is not published.
    fn has_gap(&mut self, mains: u64) -> bool {
        self.job.asks_activity() && mains != 0 && self.shared(mains).is_none()
    }

    /// Every tail of a prefix.
    fn tails(&mut self, prefix: &Prefix, found: &mut Found) {
        let job = self.job;
        let ranges = job.tail_ranges(&prefix.counters, prefix.balance);
        let rule = job.rule_that_cuts(&prefix.counters);
        let gaps = [
            prefix.gap || self.has_gap(prefix.mains),
            prefix.gap || self.has_gap(prefix.mains | job.tail_mains),
        ];
        let mut limits = None;
        for TailRange {
            plain,
            low,
            mut high,
        } in ranges
        {
            let fixed = i32::from(plain[0]) + i32::from(plain[2]) + i32::from(plain[3]);
            let count = (high - low + 1) as u128;
            if let Some(rule) = rule {
                found.account.cut_by_rule[rule] += count;
                continue;
            }
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
        self.score_waiting(prefix, found);
    }

    /// CH2 runs.
    fn run(
        &mut self,
        prefix: &Prefix,
        limits: &[Windows],
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
            let lies = self.lies(limits, n, |at| {
                [
                    base[at][0] + step[at][0] * times,
                    base[at][1] + step[at][1] * times,
                ]
            });
            let sure = match lies {
                Lies::Outside(target) => {
                    found.account.cut_by_bound[target] += 1;
                    continue;
                }
                Lies::Inside { sure } => sure,
            };
            let counts = [plain[0], ch2 as u8, plain[2], plain[3]];
            // a CH2 can always be put between a CH3 and what it is joined to
            realizable = realizable && plain[0] > 0
                || self
                    .realizer
                    .is_realizable(&job.assembly(&prefix.members, counts));
            if realizable {
                self.waiting.push((counts, sure));
            } else {
                found.account.without_structure += 1;
            }
        }
    }

    /// Figures and scores of the assemblies that wait, all of one prefix.
    fn score_waiting(&mut self, prefix: &Prefix, found: &mut Found) {
        let job = self.job;
        let mut waiting = std::mem::take(&mut self.waiting);
        // those without plain carbons may have other main groups
        for bare in [true, false] {
            let of_kind = |one: &([u8; 4], bool)| (one.0 == [0; 4]) == bare;
            self.tails.clear();
            self.tails
                .extend(waiting.iter().filter(|one| of_kind(one)).map(|one| one.0));
            if self.tails.is_empty() {
                continue;
            }
            let mains = prefix.mains | if bare { 0 } else { job.tail_mains };
            let shared = if job.asks_activity() {
                self.shared(mains)
            } else {
                None
            };
            if let Some(shared) = &shared {
                job.ln_gamma_inf(
                    shared,
                    mains,
                    &prefix.members,
                    &self.tails,
                    &mut self.activity,
                );
            }
            let sure = waiting.iter().filter(|one| of_kind(one)).map(|one| one.1);
            for (at, (&tail, sure)) in self.tails.iter().zip(sure).enumerate() {
                let ln_gamma = shared.as_ref().map(|_| self.activity.of(at));
                match job.judge(&prefix.members, tail, ln_gamma, sure) {
                    Judged::Scored { score, advance } => {
                        found.account.scored += 1;
                        let key = score_key(score);
                        if found.best.takes(key) {
                            found.best.offer(Scored {
                                key,
                                advance: advance_key(advance),
                                pieces: job.assembly(&prefix.members, tail),
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
        }
        waiting.clear();
        self.waiting = waiting;
    }

    /// Limits of the forms for the classes of a prefix, by size.
    fn limits_of(&mut self, prefix: &Prefix) -> Rc<Vec<Windows>> {
        let bucket = rarity_bucket(prefix.rarity + self.job.tail_rarity);
        let key = (prefix.classes, bucket);
        if let Some(known) = self.limits.get(&key) {
            return Rc::clone(known);
        }
        if self.limits.len() > MOST_LIMITS {
            self.limits.clear();
        }
        let sizes = u32::from(self.job.largest);
        // no molecule has no atoms: its window is never looked at
        let of = |form: &Form<'_>| -> Windows {
            (0..=sizes)
                .map(|n| form.window(f64::from(n.max(1)), &prefix.classes, rarity_of(bucket)))
                .collect()
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
    /// Its score, and how far its preferences have come.
    Scored {
        /// From 0 to 1: desirability, times the probability of each must by its interval.
        score: f64,
        /// The weighted mean of [`Want::advance`](crate::brief::Want::advance).
        advance: f64,
    },
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
