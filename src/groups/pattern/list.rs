//! Many patterns looked for in one pass over a molecule.

use super::error::PatternFault;
use super::filing::Filing;
use super::program::{Environments, Program, Search};
use crate::chem::Molecule;
use crate::groups::features::{self, FeatureWord};

/// Patterns that are looked for together.
///
/// Each is tried only at atoms whose element, aromaticity and hydrogens its
/// first step allows; equal `$(…)` are looked at once for all patterns.
#[derive(Clone, Debug)]
pub struct PatternList {
    programs: Vec<Program>,
    environments: Environments,
    filing: Filing,
}

/// Which patterns of a list are in a molecule; holds the scratch memory, one per thread.
#[derive(Clone, Debug, Default)]
pub struct PatternFinder {
    words: Vec<FeatureWord>,
    seen: Vec<u8>,
    found: Vec<bool>,
}

impl PatternList {
    /// Compiles patterns, which keep their positions.
    ///
    /// # Errors
    ///
    /// The position of the first pattern that does not compile, with its faults.
    pub fn compile<'t>(
        texts: impl IntoIterator<Item = &'t str>,
    ) -> Result<Self, (usize, Vec<PatternFault>)> {
        let mut environments = Environments::default();
        let mut programs = Vec::new();
        for (at, text) in texts.into_iter().enumerate() {
            let program =
                Program::compile(text, &mut environments).map_err(|faults| (at, faults))?;
            programs.push(program);
        }
        let filing = Filing::of(programs.iter());
        Ok(Self {
            programs,
            environments,
            filing,
        })
    }

    /// Looks for every pattern; the answer, by position, whether it is anywhere
    /// in the molecule.
    pub fn find<'f>(&self, finder: &'f mut PatternFinder, molecule: &Molecule) -> &'f [bool] {
        let PatternFinder { words, seen, found } = finder;
        features::words_into(molecule, words);
        found.clear();
        found.resize(self.programs.len(), false);
        let mut search = Search::new(molecule, words, &self.environments, seen);
        for (atom, here) in (0..).zip(molecule.atoms()) {
            for &at in self.filing.under(features::key(here)) {
                let at = usize::from(at);
                if !found[at] {
                    found[at] = self.programs[at].is_at(&mut search, atom);
                }
            }
        }
        found
    }

    /// In how many places (different sets of covered atoms) the pattern at a
    /// position is in the molecule; counting stops at `limit`.
    pub fn count_places(
        &self,
        at: usize,
        finder: &mut PatternFinder,
        molecule: &Molecule,
        limit: usize,
    ) -> usize {
        let PatternFinder { words, seen, .. } = finder;
        features::words_into(molecule, words);
        let mut search = Search::new(molecule, words, &self.environments, seen);
        self.programs[at].count_places(&mut search, limit)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::groups::Pattern;

    #[test]
    fn together_is_as_one_by_one() {
        let texts = [
            "[OX2;H1]-[CX4]",
            "[N+](=O){[O-]}",
            "c:c",
            "[CX4;$(C-[OH])]-C=O",
        ];
        let list = PatternList::compile(texts).unwrap();
        let mut finder = PatternFinder::default();
        for smiles in [
            "CCO",
            "C[N+](=O)[O-]",
            "OCC=O",
            "c1ccccc1O",
            "O",
            "O=N(=O)CC(O)C(=O)C",
        ] {
            let molecule = Molecule::from_smiles(smiles).unwrap();
            let alone = texts.map(|text| Pattern::compile(text).unwrap().is_in(&molecule));
            assert_eq!(list.find(&mut finder, &molecule), alone, "{smiles}");
        }
    }

    #[test]
    fn places_are_counted_to_the_limit() {
        let list = PatternList::compile(["[N+](=O){[O-]}"]).unwrap();
        let molecule = Molecule::from_smiles("O=[N+]([O-])CC[N+](=O)[O-]").unwrap();
        let mut finder = PatternFinder::default();
        assert_eq!(list.count_places(0, &mut finder, &molecule, 9), 2);
        assert_eq!(list.count_places(0, &mut finder, &molecule, 1), 1);
    }

    #[test]
    fn the_faulty_pattern_is_named() {
        let (at, faults) = PatternList::compile(["C", "[C"]).unwrap_err();
        assert_eq!((at, faults.len()), (1, 1));
    }
}
