//! What a pattern can ask of an atom, packed into one word.

use crate::chem::{Atom, Element, Molecule};

/// One atom's answers: one bit set in each field, ring sizes apart, where every
/// size of a smallest ring through the atom has its bit.
pub(super) type FeatureWord = u64;

/// A range of bits of the word that answers one question.
#[derive(Clone, Copy)]
pub(super) struct Field {
    shift: u32,
    width: u32,
}

impl Field {
    pub(super) const fn bit(self, value: usize) -> FeatureWord {
        1 << (self.shift + value as u32)
    }

    pub(super) const fn mask(self) -> FeatureWord {
        ((1 << self.width) - 1) << self.shift
    }

    pub(super) const fn contains(self, value: usize) -> bool {
        value < self.width as usize
    }
}

const fn after(field: Field, width: u32) -> Field {
    Field {
        shift: field.shift + field.width,
        width,
    }
}

pub(super) const ELEMENT: Field = Field {
    shift: 0,
    width: Element::COUNT as u32,
};
/// 0 not aromatic, 1 aromatic.
pub(super) const AROMATIC: Field = after(ELEMENT, 2);
/// 0 to 3, and 4 for four or more.
pub(super) const HYDROGENS: Field = after(AROMATIC, 5);
/// 0 to 4 neighbors, and 5 for five or more.
pub(super) const DEGREE: Field = after(HYDROGENS, 6);
/// 0 to 6, and 7 for seven or more.
pub(super) const CONNECTIONS: Field = after(DEGREE, 8);
/// 0 in no ring, 1 in a ring.
pub(super) const RING: Field = after(CONNECTIONS, 2);
/// 0 negative, 1 neutral, 2 positive.
pub(super) const CHARGE: Field = after(RING, 3);
/// Ring size n at n − 3, for 3 to 8; several bits may be set.
pub(super) const RING_SIZE: Field = after(CHARGE, 6);

/// Fields in which exactly one bit is set.
pub(super) const ONE_HOT: [Field; 7] = [
    ELEMENT,
    AROMATIC,
    HYDROGENS,
    DEGREE,
    CONNECTIONS,
    RING,
    CHARGE,
];

/// Every bit of every field.
pub(super) const ALL: FeatureWord = (1 << (RING_SIZE.shift + RING_SIZE.width)) - 1;

/// How many values [`key`] has.
pub(super) const KEYS: usize = Element::COUNT * 2 * 5;

/// A small number from element, aromaticity and hydrogens: patterns are filed
/// under the keys their first atom may have.
pub(super) fn key(atom: &Atom) -> u8 {
    let hydrogens = atom.hydrogens.min(4);
    ((atom.element as u8) * 2 + u8::from(atom.aromatic)) * 5 + hydrogens
}

/// The part of a feature word that a key fixes.
pub(super) const fn key_word(key: usize) -> FeatureWord {
    ELEMENT.bit(key / 10) | AROMATIC.bit(key / 5 % 2) | HYDROGENS.bit(key % 5)
}

/// The fields that [`key_word`] answers.
pub(super) const KEY_FIELDS: FeatureWord = ELEMENT.mask() | AROMATIC.mask() | HYDROGENS.mask();

/// The feature word of atom `index`.
pub(super) fn word(molecule: &Molecule, index: u32) -> FeatureWord {
    let atom = &molecule.atoms()[index as usize];
    let degree = molecule.neighbors(index).len();
    let hydrogens = usize::from(atom.hydrogens);
    let sizes = u64::from(atom.ring_sizes >> 3) & ((1 << RING_SIZE.width) - 1);
    ELEMENT.bit(atom.element as usize)
        | AROMATIC.bit(usize::from(atom.aromatic))
        | HYDROGENS.bit(hydrogens.min(4))
        | DEGREE.bit(degree.min(5))
        | CONNECTIONS.bit((degree + hydrogens).min(7))
        | RING.bit(usize::from(atom.in_ring))
        | CHARGE.bit((1 + atom.charge.signum()) as usize)
        | (sizes << RING_SIZE.shift)
}

/// The feature words of all atoms, into memory that is used again.
pub(super) fn words_into(molecule: &Molecule, words: &mut Vec<FeatureWord>) {
    words.clear();
    words.extend((0..molecule.atoms().len() as u32).map(|atom| word(molecule, atom)));
}
