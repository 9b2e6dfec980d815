//! Exact cover: choosing found places so that every atom is covered once.
//!
//! The best remainder does not depend on how the atoms before it were covered,
//! because the order of covers is a sum. So solved remainders are remembered,
//! and chains of ambiguous groups (polyethers) stay linear.

use rustc_hash::FxHashMap;

/// A set of atoms of one molecule: `W` words of 64 atoms.
pub(super) type AtomSet<const W: usize> = [u64; W];

/// Remainders solved before a molecule is refused as too ambiguous.
pub(super) const REMAINDER_LIMIT: usize = 50_000;

/// A found place of a pattern.
#[derive(Clone, Copy, Debug)]
pub(super) struct Candidate<const W: usize> {
    pub(super) atoms: AtomSet<W>,
    /// Index of the pattern in its set.
    pub(super) pattern: u16,
    pub(super) groups: u16,
    pub(super) rank: u16,
}

/// Cost of a cover, compared first by uncovered atoms, then groups, then rank.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
struct Cost(u64);

impl Cost {
    const UNCOVERED_ATOM: Self = Self(1 << 48);

    fn of<const W: usize>(candidate: &Candidate<W>) -> Self {
        Self(u64::from(candidate.groups) << 24 | u64::from(candidate.rank))
    }

    fn and(self, other: Self) -> Self {
        Self(self.0 + other.0)
    }
}

/// What was done with the first atom of a remainder.
#[derive(Clone, Copy, Debug)]
enum Choice {
    Take(u32),
    LeaveUncovered(u32),
}

/// Why there is no cover.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum NoCover {
    /// More than [`REMAINDER_LIMIT`] remainders.
    TooAmbiguous,
}

/// Scratch memory and solver for molecules of up to 64·W atoms.
#[derive(Debug)]
pub(super) struct Cover<const W: usize> {
    pub(super) candidates: Vec<Candidate<W>>,
    /// Candidate indices by atom: `by_atom[starts[a]..starts[a + 1]]`.
    by_atom: Vec<u32>,
    starts: Vec<u32>,
    alive: Vec<bool>,
    options: Vec<u32>,
    queue: Vec<u32>,
    part_order: Vec<u32>,
    solved: FxHashMap<AtomSet<W>, (Cost, Choice)>,
    /// Indices of the candidates of the best cover.
    pub(super) chosen: Vec<u32>,
    /// Atoms the best cover leaves out, ascending.
    pub(super) uncovered: Vec<u32>,
}

impl<const W: usize> Default for Cover<W> {
    fn default() -> Self {
        Self {
            candidates: Vec::new(),
            by_atom: Vec::new(),
            starts: Vec::new(),
            alive: Vec::new(),
            options: Vec::new(),
            queue: Vec::new(),
            part_order: Vec::new(),
            solved: FxHashMap::default(),
            chosen: Vec::new(),
            uncovered: Vec::new(),
        }
    }
}

pub(super) fn contains<const W: usize>(set: &AtomSet<W>, atom: u32) -> bool {
    set[atom as usize / 64] >> (atom % 64) & 1 == 1
}

pub(super) fn insert<const W: usize>(set: &mut AtomSet<W>, atom: u32) {
    set[atom as usize / 64] |= 1 << (atom % 64);
}

pub(super) fn members<const W: usize>(set: &AtomSet<W>) -> impl Iterator<Item = u32> {
    set.iter().enumerate().flat_map(|(position, &word)| {
        std::iter::successors((word != 0).then_some(word), |rest| {
            let rest = rest & (rest - 1);
            (rest != 0).then_some(rest)
        })
        .map(move |rest| position as u32 * 64 + rest.trailing_zeros())
    })
}

fn is_within<const W: usize>(inner: &AtomSet<W>, outer: &AtomSet<W>) -> bool {
    inner
        .iter()
        .zip(outer)
        .all(|(inner, outer)| inner & !outer == 0)
}

fn without<const W: usize>(set: &AtomSet<W>, other: &AtomSet<W>) -> AtomSet<W> {
    std::array::from_fn(|word| set[word] & !other[word])
}

impl<const W: usize> Cover<W> {
    /// Forgets the last molecule.
    pub(super) fn clear(&mut self) {
        self.candidates.clear();
        self.chosen.clear();
        self.uncovered.clear();
    }

    /// Finds the best cover of atoms `0..atoms` by the candidates collected
    /// since [`clear`](Self::clear). `order` is the order in which the search
    /// takes up atoms (a walk along bonds keeps the number of remainders
    /// small); `compare` decides between covers of equal cost.
    ///
    /// # Errors
    ///
    /// [`NoCover::TooAmbiguous`] past the work limit.
    pub(super) fn solve(
        &mut self,
        atoms: u32,
        order: &[u32],
        compare: &impl Fn(&[u16], &[u16]) -> std::cmp::Ordering,
    ) -> Result<(), NoCover> {
        self.file_by_atom(atoms);
        let mut remaining = [0; W];
        for atom in 0..atoms {
            insert(&mut remaining, atom);
        }
        self.solved.clear();
        if let Some(remaining) = self.take_forced(atoms, remaining)
            && self.solve_parts(remaining, order, false, compare)?
        {
            return Ok(());
        }
        // No complete cover: some atoms stay out, and nothing is forced any more.
        self.chosen.clear();
        self.solved.clear();
        self.alive.fill(true);
        self.solve_parts(remaining, order, true, compare)?;
        self.uncovered.sort_unstable();
        Ok(())
    }

    /// Solves the parts of a remainder that share no candidate one by one;
    /// their costs add up, so the best of the parts is the best of the whole.
    /// False if some part has no cover.
    fn solve_parts(
        &mut self,
        mut remaining: AtomSet<W>,
        order: &[u32],
        may_leave: bool,
        compare: &impl Fn(&[u16], &[u16]) -> std::cmp::Ordering,
    ) -> Result<bool, NoCover> {
        let mut part_order = std::mem::take(&mut self.part_order);
        let mut covered = true;
        while let Some(first) = order.iter().position(|&atom| contains(&remaining, atom)) {
            let part = self.part_around(order[first], &remaining);
            part_order.clear();
            part_order.extend(order.iter().filter(|&&atom| contains(&part, atom)));
            if self.best(part, &part_order, may_leave, compare)?.is_none() {
                covered = false;
                break;
            }
            self.collect(part);
            remaining = without(&remaining, &part);
        }
        self.part_order = part_order;
        Ok(covered)
    }

    /// The atoms that chains of shared candidates connect with `atom`.
    fn part_around(&mut self, atom: u32, remaining: &AtomSet<W>) -> AtomSet<W> {
        let mut part = [0; W];
        insert(&mut part, atom);
        self.queue.clear();
        self.queue.push(atom);
        while let Some(atom) = self.queue.pop() {
            for at in self.of_atom(atom) {
                let index = self.by_atom[at] as usize;
                if !self.alive[index] || !is_within(&self.candidates[index].atoms, remaining) {
                    continue;
                }
                let new = without(&self.candidates[index].atoms, &part);
                self.queue.extend(members(&new));
                part = std::array::from_fn(|word| part[word] | new[word]);
            }
        }
        part
    }

    fn file_by_atom(&mut self, atoms: u32) {
        self.starts.clear();
        self.starts.resize(atoms as usize + 1, 0);
        for candidate in &self.candidates {
            for atom in members(&candidate.atoms) {
                self.starts[atom as usize + 1] += 1;
            }
        }
        self.options.clear();
        self.options.extend_from_slice(&self.starts[1..]);
        for atom in 0..atoms as usize {
            self.starts[atom + 1] += self.starts[atom];
        }
        self.by_atom.clear();
        self.by_atom.resize(self.starts[atoms as usize] as usize, 0);
        self.queue.clear();
        self.queue.extend_from_slice(&self.starts[..atoms as usize]);
        for (index, candidate) in self.candidates.iter().enumerate() {
            for atom in members(&candidate.atoms) {
                let next = &mut self.queue[atom as usize];
                self.by_atom[*next as usize] = index as u32;
                *next += 1;
            }
        }
        self.alive.clear();
        self.alive.resize(self.candidates.len(), true);
    }

    fn of_atom(&self, atom: u32) -> std::ops::Range<usize> {
        self.starts[atom as usize] as usize..self.starts[atom as usize + 1] as usize
    }

    /// Takes every candidate that is the only one left for some atom, again and
    /// again; what remains, or `None` when some atom has no candidate left.
    fn take_forced(&mut self, atoms: u32, mut remaining: AtomSet<W>) -> Option<AtomSet<W>> {
        if self.options.contains(&0) {
            return None;
        }
        self.queue.clear();
        self.queue
            .extend((0..atoms).filter(|&atom| self.options[atom as usize] == 1));
        while let Some(atom) = self.queue.pop() {
            if !contains(&remaining, atom) {
                continue;
            }
            let index = self
                .of_atom(atom)
                .map(|at| self.by_atom[at])
                .find(|&index| self.alive[index as usize])?;
            self.chosen.push(index);
            let taken = self.candidates[index as usize].atoms;
            remaining = without(&remaining, &taken);
            for covered in members(&taken) {
                for at in self.of_atom(covered) {
                    let rival = self.by_atom[at];
                    if !std::mem::replace(&mut self.alive[rival as usize], false) {
                        continue;
                    }
                    for other in members(&self.candidates[rival as usize].atoms) {
                        let options = &mut self.options[other as usize];
                        *options -= 1;
                        if contains(&remaining, other) {
                            match *options {
                                0 => return None,
                                1 => self.queue.push(other),
                                _ => {}
                            }
                        }
                    }
                }
            }
        }
        Some(remaining)
    }

    /// Cost of the best cover of a remainder, remembered with its first choice;
    /// `None` if there is none.
    fn best(
        &mut self,
        remaining: AtomSet<W>,
        order: &[u32],
        may_leave: bool,
        compare: &impl Fn(&[u16], &[u16]) -> std::cmp::Ordering,
    ) -> Result<Option<Cost>, NoCover> {
        const IMPOSSIBLE: Cost = Cost(u64::MAX);
        let Some(first) = order.iter().position(|&atom| contains(&remaining, atom)) else {
            return Ok(Some(Cost::default()));
        };
        if let Some(&(cost, _)) = self.solved.get(&remaining) {
            return Ok((cost != IMPOSSIBLE).then_some(cost));
        }
        if self.solved.len() == REMAINDER_LIMIT {
            return Err(NoCover::TooAmbiguous);
        }
        let atom = order[first];
        let rest = &order[first + 1..];
        let mut winner = (IMPOSSIBLE, Choice::LeaveUncovered(atom));
        // An atom that is a group by itself never stays out: taking it costs less.
        let mut may_leave_this = may_leave;
        for at in self.of_atom(atom) {
            let index = self.by_atom[at];
            let candidate = self.candidates[index as usize];
            if !self.alive[index as usize] || !is_within(&candidate.atoms, &remaining) {
                continue;
            }
            let after = without(&remaining, &candidate.atoms);
            may_leave_this &= members(&candidate.atoms).nth(1).is_some();
            let Some(cost) = self.best(after, rest, may_leave, compare)? else {
                continue;
            };
            let option = (cost.and(Cost::of(&candidate)), Choice::Take(index));
            if option.0 < winner.0
                || option.0 == winner.0 && self.precedes(remaining, option.1, winner.1, compare)
            {
                winner = option;
            }
        }
        if may_leave_this {
            let mut after = remaining;
            after[atom as usize / 64] &= !(1 << (atom % 64));
            if let Some(cost) = self.best(after, rest, may_leave, compare)? {
                let option = (cost.and(Cost::UNCOVERED_ATOM), Choice::LeaveUncovered(atom));
                if option.0 < winner.0
                    || option.0 == winner.0 && self.precedes(remaining, option.1, winner.1, compare)
                {
                    winner = option;
                }
            }
        }
        self.solved.insert(remaining, winner);
        Ok((winner.0 != IMPOSSIBLE).then_some(winner.0))
    }

    /// Whether one choice wins over another of the same cost.
    fn precedes(
        &self,
        remaining: AtomSet<W>,
        choice: Choice,
        over: Choice,
        compare: &impl Fn(&[u16], &[u16]) -> std::cmp::Ordering,
    ) -> bool {
        let patterns = |first: Choice| {
            let mut patterns = Vec::new();
            self.follow(remaining, Some(first), |choice| {
                if let Choice::Take(index) = choice {
                    patterns.push(self.candidates[index as usize].pattern);
                }
            });
            patterns
        };
        compare(&patterns(choice), &patterns(over)).is_lt()
    }

    /// Walks the remembered choices from a remainder on.
    fn follow(
        &self,
        mut remaining: AtomSet<W>,
        mut first: Option<Choice>,
        mut seen: impl FnMut(Choice),
    ) {
        while remaining != [0; W] {
            let choice = first.take().unwrap_or_else(|| {
                self.solved
                    .get(&remaining)
                    .expect("every remainder of a cover was solved")
                    .1
            });
            seen(choice);
            match choice {
                Choice::Take(index) => {
                    remaining = without(&remaining, &self.candidates[index as usize].atoms);
                }
                Choice::LeaveUncovered(atom) => {
                    remaining[atom as usize / 64] &= !(1 << (atom % 64));
                }
            }
        }
    }

    fn collect(&mut self, remaining: AtomSet<W>) {
        let mut chosen = std::mem::take(&mut self.chosen);
        let mut uncovered = std::mem::take(&mut self.uncovered);
        self.follow(remaining, None, |choice| match choice {
            Choice::Take(index) => chosen.push(index),
            Choice::LeaveUncovered(atom) => uncovered.push(atom),
        });
        self.chosen = chosen;
        self.uncovered = uncovered;
    }
}

#[cfg(test)]
mod tests {
    use std::cmp::Ordering;

    use proptest::prelude::*;

    use super::*;

    /// Uncovered atoms, groups, rank sum and patterns (sorted) of a cover.
    type Found = (u32, u32, u32, Vec<u16>);

    /// Every cover by trying all, in an order of its own: the plain way.
    fn by_trying_all(
        atoms: u32,
        candidates: &[Candidate<1>],
        remaining: u64,
        sofar: &Found,
        best: &mut Option<Found>,
    ) {
        let Some(atom) = (0..atoms).find(|&atom| remaining >> atom & 1 == 1) else {
            let mut found = sofar.clone();
            found.3.sort_unstable();
            if best.as_ref().is_none_or(|best| found < *best) {
                *best = Some(found);
            }
            return;
        };
        for candidate in candidates {
            let set = candidate.atoms[0];
            if set >> atom & 1 == 1 && set & !remaining == 0 {
                let mut next = sofar.clone();
                next.1 += u32::from(candidate.groups);
                next.2 += u32::from(candidate.rank);
                next.3.push(candidate.pattern);
                by_trying_all(atoms, candidates, remaining & !set, &next, best);
            }
        }
        let mut next = sofar.clone();
        next.0 += 1;
        by_trying_all(atoms, candidates, remaining & !(1 << atom), &next, best);
    }

    /// Sorted patterns compared one by one: like the order of counts, a total
    /// order that adding the same patterns to both sides does not change.
    fn compare(one: &[u16], other: &[u16]) -> Ordering {
        let sorted = |patterns: &[u16]| {
            let mut patterns = patterns.to_vec();
            patterns.sort_unstable();
            patterns
        };
        sorted(one).cmp(&sorted(other))
    }

    proptest! {
        #[test]
        fn the_best_cover_is_found(
            atoms in 1_u32..10,
            sets in prop::collection::vec((1_u64..1024, 1_u16..3, 0_u16..3), 0..14),
            turn in 0_usize..10,
        ) {
            let candidates: Vec<Candidate<1>> = sets
                .iter()
                .map(|&(set, groups, rank)| (set & ((1 << atoms) - 1), groups, rank))
                .filter(|&(set, ..)| set != 0)
                .enumerate()
                .map(|(at, (set, groups, rank))| Candidate {
                    atoms: [set],
                    pattern: at as u16,
                    // One group at least for what covers one atom, as everywhere.
                    groups,
                    rank,
                })
                .collect();
            let mut cover = Cover::<1> { candidates: candidates.clone(), ..Cover::default() };
            let mut order: Vec<u32> = (0..atoms).collect();
            order.rotate_left(turn % atoms as usize);
            cover.solve(atoms, &order, &compare).expect("far below the work limit");

            let mut wanted = None;
            let nothing = (0, 0, 0, Vec::new());
            by_trying_all(atoms, &candidates, (1 << atoms) - 1, &nothing, &mut wanted);
            let chosen = || cover.chosen.iter().map(|&at| &cover.candidates[at as usize]);
            let mut patterns: Vec<u16> = chosen().map(|candidate| candidate.pattern).collect();
            patterns.sort_unstable();
            let ours = (
                cover.uncovered.len() as u32,
                chosen().map(|candidate| u32::from(candidate.groups)).sum::<u32>(),
                chosen().map(|candidate| u32::from(candidate.rank)).sum::<u32>(),
                patterns,
            );
            prop_assert_eq!(Some(ours), wanted);
        }
    }
}
