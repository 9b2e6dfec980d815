//! The account of a search: what became of every assembly of the space.

use serde::{Deserialize, Serialize};

/// Counts of assemblies; every assembly of the space is in exactly one.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Account {
    /// Figures and score were computed from counts, and every must may be met.
    pub scored: u128,
    /// Figures were computed and a must is missed, by target.
    pub missed: Vec<u128>,
    /// Cut by a bound on linear sums, by the first target in brief order that cuts.
    pub cut_by_bound: Vec<u128>,
    /// Cut by the molar mass, or by a rule on counts, in the order of the rules.
    pub cut_by_rule: Vec<u128>,
    /// A group or an interaction that a target needs is not published.
    pub not_assessable: u128,
    /// No structure can be drawn: kinds of ends do not go together.
    pub without_structure: u128,
}

/// The account does not add up, or a number is too large to count.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("more than 10^38 assemblies: the account cannot hold them")]
pub struct TooManyToCount;

impl Account {
    /// Nothing counted, for so many targets and rules.
    pub(super) fn new(targets: usize, rules: usize) -> Self {
        Self {
            missed: vec![0; targets],
            cut_by_bound: vec![0; targets],
            cut_by_rule: vec![0; rules],
            ..Self::default()
        }
    }

    /// All that is accounted for.
    ///
    /// # Errors
    ///
    /// The sum is too large.
    pub fn total(&self) -> Result<u128, TooManyToCount> {
        let parts = [self.scored, self.not_assessable, self.without_structure];
        let lists = [&self.missed, &self.cut_by_bound, &self.cut_by_rule];
        parts
            .iter()
            .chain(lists.into_iter().flatten())
            .try_fold(0_u128, |sum, &part| sum.checked_add(part))
            .ok_or(TooManyToCount)
    }

    /// Adds another account of the same search; the order does not matter.
    ///
    /// # Errors
    ///
    /// A sum is too large.
    ///
    /// # Panics
    ///
    /// If it is the account of another search.
    pub fn add(&mut self, other: &Self) -> Result<(), TooManyToCount> {
        fn one(mine: &mut u128, theirs: u128) -> Result<(), TooManyToCount> {
            *mine = mine.checked_add(theirs).ok_or(TooManyToCount)?;
            Ok(())
        }
        one(&mut self.scored, other.scored)?;
        one(&mut self.not_assessable, other.not_assessable)?;
        one(&mut self.without_structure, other.without_structure)?;
        for (mine, theirs) in [
            (&mut self.missed, &other.missed),
            (&mut self.cut_by_bound, &other.cut_by_bound),
            (&mut self.cut_by_rule, &other.cut_by_rule),
        ] {
            assert_eq!(mine.len(), theirs.len(), "accounts of one search");
            for (mine, &theirs) in mine.iter_mut().zip(theirs) {
                one(mine, theirs)?;
            }
        }
        Ok(())
    }
}
