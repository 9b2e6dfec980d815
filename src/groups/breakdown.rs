//! A molecule broken down into the groups of a set.

use std::cmp::Ordering;

use super::cover::{Candidate, Cover, NoCover, contains, insert, members};
use super::features::{self, FeatureWord};
use super::pattern::Search;
use super::{GroupCounts, GroupSet, describe};
use crate::chem::Molecule;

/// How far a set covers a molecule.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Coverage {
    /// Every atom is in exactly one group.
    Complete,
    /// Some atoms are in no group; the counts are of what is covered.
    Partial,
    /// So many groups compete that the work limit was reached; no counts.
    TooAmbiguous,
    /// The groups' formulas do not add up to the molecule's: a fault of the
    /// set's own files, never to be used.
    Unbalanced,
}

/// A group (or groups found together) at its place in the molecule.
#[derive(Clone, Debug, PartialEq)]
pub struct Piece {
    /// What it counts as.
    pub gives: GroupCounts,
    /// The atoms it covers, ascending.
    pub atoms: Vec<u32>,
}

/// A molecule broken down, with places.
#[derive(Clone, Debug, PartialEq)]
pub struct Breakdown {
    /// Counts of the covered part.
    pub counts: GroupCounts,
    /// How far the set covers the molecule.
    pub coverage: Coverage,
    /// The groups with their atoms, by lowest atom.
    pub pieces: Vec<Piece>,
    /// Atoms in no group, ascending.
    pub uncovered: Vec<u32>,
}

impl Breakdown {
    /// What is not covered, in a chemist's words; empty if nothing is.
    pub fn gaps(&self, molecule: &Molecule, set: &GroupSet) -> String {
        describe::gaps(molecule, self, set)
    }
}

/// Breaks molecules down; holds the scratch memory, one per thread.
#[derive(Debug, Default)]
pub struct Breaker {
    words: Vec<FeatureWord>,
    keys: Vec<u8>,
    walk: Vec<u32>,
    visited: Vec<bool>,
    seen: Vec<u8>,
    small: Cover<1>,
    medium: Cover<4>,
    large: Cover<16>,
}

/// The largest molecule, in atoms, that a [`Breaker`] takes.
pub const ATOM_LIMIT: usize = 1024;

impl Breaker {
    /// An empty scratch.
    pub fn new() -> Self {
        Self::default()
    }

    /// Looks at a molecule; the next [`counts`](Self::counts) and
    /// [`breakdown`](Self::breakdown) have to be of the same molecule.
    pub fn load(&mut self, molecule: &Molecule) {
        features::words_into(molecule, &mut self.words);
        self.keys.clear();
        self.keys.extend(molecule.atoms().iter().map(features::key));
        self.walk_along_bonds(molecule);
    }

    /// Depth-first order of the atoms: neighbors in the molecule are close in it.
    fn walk_along_bonds(&mut self, molecule: &Molecule) {
        let atoms = molecule.atoms().len();
        self.walk.clear();
        self.visited.clear();
        self.visited.resize(atoms, false);
        let start = (0..atoms as u32).min_by_key(|&atom| molecule.neighbors(atom).len());
        let mut stack: Vec<u32> = start.into_iter().collect();
        while let Some(atom) = stack.pop() {
            if std::mem::replace(&mut self.visited[atom as usize], true) {
                continue;
            }
            self.walk.push(atom);
            // Ends of the molecule come next, so that what is decided about an
            // atom and its halogens is settled before the walk goes on.
            let is_end = |atom: u32| molecule.neighbors(atom).len() == 1;
            let neighbors = || molecule.neighbors(atom).iter().map(|bond| bond.atom);
            stack.extend(neighbors().filter(|&atom| !is_end(atom)));
            stack.extend(neighbors().filter(|&atom| is_end(atom)));
        }
    }

    /// Writes the counts of the loaded molecule in a set to `counts`.
    ///
    /// # Complexity
    ///
    /// Patterns are tried only at atoms of matching element, aromaticity and
    /// hydrogens; atoms with one candidate are settled first.
    pub fn counts(
        &mut self,
        molecule: &Molecule,
        set: &GroupSet,
        counts: &mut GroupCounts,
    ) -> Coverage {
        let seen = &mut self.seen;
        let mut search = Search::new(molecule, &self.words, &set.environments, seen);
        let (keys, walk) = (&self.keys, &self.walk);
        match molecule.atoms().len() {
            0..=64 => cover(&mut self.small, &mut search, keys, walk, set, counts),
            65..=256 => cover(&mut self.medium, &mut search, keys, walk, set, counts),
            257..=ATOM_LIMIT => cover(&mut self.large, &mut search, keys, walk, set, counts),
            _ => {
                counts.clear();
                Coverage::TooAmbiguous
            }
        }
    }

    /// The breakdown of the loaded molecule with the place of every group.
    pub fn breakdown(&mut self, molecule: &Molecule, set: &GroupSet) -> Breakdown {
        let mut counts = GroupCounts::new();
        let coverage = self.counts(molecule, set, &mut counts);
        let (pieces, uncovered) = match (coverage, molecule.atoms().len()) {
            (Coverage::TooAmbiguous, _) => (Vec::new(), Vec::new()),
            (_, 0..=64) => places(&self.small, set),
            (_, 65..=256) => places(&self.medium, set),
            _ => places(&self.large, set),
        };
        Breakdown {
            counts,
            coverage,
            pieces,
            uncovered,
        }
    }
}

fn cover<const W: usize>(
    cover: &mut Cover<W>,
    search: &mut Search<'_>,
    keys: &[u8],
    walk: &[u32],
    set: &GroupSet,
    counts: &mut GroupCounts,
) -> Coverage {
    counts.clear();
    cover.clear();
    for (atom, &key) in keys.iter().enumerate() {
        for &index in set.filed_under(key) {
            let pattern = &set.patterns[usize::from(index)];
            pattern.program.find_at(search, atom as u32, &mut |place| {
                let mut atoms = [0; W];
                for &atom in place {
                    insert(&mut atoms, atom);
                }
                // Symmetric places, and patterns that say the same of the same atoms.
                let known = cover
                    .candidates
                    .iter()
                    .any(|other| other.pattern == pattern.like && other.atoms == atoms);
                if !known {
                    cover.candidates.push(Candidate {
                        atoms,
                        pattern: pattern.like,
                        groups: pattern.groups,
                        rank: pattern.rank,
                    });
                }
                true
            });
        }
    }
    let counts_of = |patterns: &[u16]| {
        let mut counts = GroupCounts::new();
        for &index in patterns {
            add(&mut counts, &set.patterns[usize::from(index)].gives);
        }
        counts
    };
    let compare = |one: &[u16], other: &[u16]| order_of_counts(&counts_of(one), &counts_of(other));
    match cover.solve(keys.len() as u32, walk, &compare) {
        Err(NoCover::TooAmbiguous) => return Coverage::TooAmbiguous,
        Ok(()) => {}
    }
    for &index in &cover.chosen {
        let pattern = cover.candidates[index as usize].pattern;
        add(counts, &set.patterns[usize::from(pattern)].gives);
    }
    if !cover.uncovered.is_empty() {
        Coverage::Partial
    } else if set.conserves(counts, &search.molecule.composition()) {
        Coverage::Complete
    } else {
        Coverage::Unbalanced
    }
}

fn add(counts: &mut GroupCounts, more: &GroupCounts) {
    for (number, count) in more.iter() {
        counts.add(number, count);
    }
}

/// The last rule of the order of covers: at the first group number in which
/// they differ, the cover with more of it comes first.
fn order_of_counts(one: &GroupCounts, other: &GroupCounts) -> Ordering {
    let (mut one, mut other) = (one.iter().peekable(), other.iter().peekable());
    loop {
        let number = match (one.peek(), other.peek()) {
            (None, None) => return Ordering::Equal,
            (Some(entry), None) | (None, Some(entry)) => entry.0,
            (Some(one), Some(other)) => one.0.min(other.0),
        };
        let count = |entries: &mut dyn Iterator<Item = (u16, u16)>| {
            entries.next().map_or(0, |entry| entry.1)
        };
        let mine = if one.peek().is_some_and(|entry| entry.0 == number) {
            count(&mut one)
        } else {
            0
        };
        let theirs = if other.peek().is_some_and(|entry| entry.0 == number) {
            count(&mut other)
        } else {
            0
        };
        if mine != theirs {
            return theirs.cmp(&mine);
        }
    }
}

fn places<const W: usize>(cover: &Cover<W>, set: &GroupSet) -> (Vec<Piece>, Vec<u32>) {
    let mut pieces: Vec<_> = cover
        .chosen
        .iter()
        .map(|&index| {
            let candidate = &cover.candidates[index as usize];
            Piece {
                gives: set.patterns[usize::from(candidate.pattern)].gives.clone(),
                atoms: members(&candidate.atoms).collect(),
            }
        })
        .collect();
    pieces.sort_unstable_by(|one, other| one.atoms.cmp(&other.atoms));
    debug_assert!(
        pieces.iter().all(|piece| !piece.atoms.is_empty())
            && cover.uncovered.iter().all(|&atom| {
                cover
                    .chosen
                    .iter()
                    .all(|&index| !contains(&cover.candidates[index as usize].atoms, atom))
            }),
        "groups cover atoms, uncovered atoms are in none"
    );
    (pieces, cover.uncovered.clone())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn more_of_the_lowest_number_comes_first() {
        let counts = |text| GroupCounts::from_text(text).unwrap();
        let order = |one, other| order_of_counts(&counts(one), &counts(other));
        assert_eq!(order("1:2;2:1", "1:1;2:2"), Ordering::Less);
        assert_eq!(order("1:1;18:1", "1:1;2:1"), Ordering::Greater);
        assert_eq!(order("1:1", "1:1"), Ordering::Equal);
        assert_eq!(order("1:1;3:1", "1:1"), Ordering::Less);
    }
}
