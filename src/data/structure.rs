//! Finding substances by structure.

use rustc_hash::FxHashMap;

use super::Substance;
use crate::chem::{Canonicalizer, Keys, Molecule, Reader};

/// Positions of substances by canonical key.
#[derive(Clone, Debug, Default)]
pub(super) struct StructureIndex {
    by_full: FxHashMap<Box<str>, u32>,
    by_constitution: FxHashMap<Box<str>, u32>,
}

/// How well a substance answers to a structure.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Match {
    /// The same in stereochemistry and isotopes.
    Full(u32),
    /// The same constitution only.
    Constitution(u32),
}

impl StructureIndex {
    pub(super) fn of(substances: &[Substance]) -> Self {
        let mut index = Self::default();
        let mut reader = Reader::new();
        let mut canonicalizer = Canonicalizer::new();
        let mut molecule = Molecule::default();
        let mut keys = Keys::default();
        for (position, substance) in (0..).zip(substances) {
            reader
                .read_into(substance.smiles(), &mut molecule)
                .expect("the structure was read when its table was loaded");
            canonicalizer.keys_into(&molecule, &mut keys);
            index.insert(position, &keys);
        }
        index
    }

    /// Adds a structure; the first substance to have it keeps it.
    ///
    /// A constitution stands for the substance that states no stereochemistry,
    /// where there is one, else for the first of the table.
    pub(super) fn insert(&mut self, position: u32, keys: &Keys) {
        self.by_full
            .entry(keys.full.as_str().into())
            .or_insert(position);
        let plain = keys.full == keys.constitution;
        let slot = self
            .by_constitution
            .entry(keys.constitution.as_str().into())
            .or_insert(position);
        if plain {
            *slot = position;
        }
    }

    pub(super) fn find(&self, keys: &Keys) -> Option<Match> {
        let full = self.by_full.get(keys.full.as_str());
        full.map(|&position| Match::Full(position)).or_else(|| {
            self.by_constitution
                .get(keys.constitution.as_str())
                .map(|&position| Match::Constitution(position))
        })
    }
}
