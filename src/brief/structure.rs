//! Limits on the structure of a candidate.

use super::place::{Located, Place};
use crate::chem::Element;

/// How many there may be, ends included.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct CountRange {
    /// Fewest allowed; `None`: no limit.
    pub at_least: Option<u32>,
    /// Most allowed; `None`: no limit.
    pub at_most: Option<u32>,
}

impl CountRange {
    /// Whether a count lies within.
    pub fn contains(&self, count: u32) -> bool {
        self.at_least.is_none_or(|least| count >= least)
            && self.at_most.is_none_or(|most| count <= most)
    }
}

/// A limit on how often a group occurs in the breakdown into a set.
#[derive(Clone, Debug, PartialEq)]
pub struct GroupLimit {
    /// The group set, as written; whether it exists is not judged here.
    pub set: Located<String>,
    /// Published number of the group.
    pub number: Located<u16>,
    /// How often it may occur.
    pub count: CountRange,
    /// Where the limit begins.
    pub place: Place,
}

/// A limit on how often a pattern is found.
#[derive(Clone, Debug, PartialEq)]
pub struct PatternLimit {
    /// What to call it in reasons; the pattern itself where it has no name.
    pub name: Option<String>,
    /// The pattern, as written; whether it is sound is not judged here.
    pub pattern: Located<String>,
    /// How often it may be found.
    pub count: CountRange,
    /// Where the limit begins.
    pub place: Place,
}

/// The `[structure]` table: every limit in it is a must.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Structure {
    /// The elements a candidate may hold; `None`: all. Hydrogen is always allowed
    /// unless forbidden by name.
    pub allowed: Option<Located<Vec<Element>>>,
    /// The elements a candidate may not hold.
    pub forbidden: Vec<Located<Element>>,
    /// Atoms that are not hydrogen.
    pub heavy_atoms: Option<Located<CountRange>>,
    /// Independent rings.
    pub rings: Option<Located<CountRange>>,
    /// Lowest and highest molar mass in kg/mol.
    pub molar_mass_kg_per_mol: Option<Located<(Option<f64>, Option<f64>)>>,
    /// Atoms of single elements.
    pub atoms: Vec<(Located<Element>, CountRange)>,
    /// Groups.
    pub groups: Vec<GroupLimit>,
    /// Patterns.
    pub patterns: Vec<PatternLimit>,
}

impl Structure {
    /// Whether nothing is limited.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_include_their_ends() {
        let range = CountRange {
            at_least: Some(2),
            at_most: Some(4),
        };
        assert!(!range.contains(1) && range.contains(2));
        assert!(range.contains(4) && !range.contains(5));
        assert!(CountRange::default().contains(0));
    }
}
