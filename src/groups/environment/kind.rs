//! The kinds of environments, their keys and their words.

use std::fmt;

use smallvec::SmallVec;

use super::atom::{AtomType, NeighborType};

/// A stable number for an environment: the same on every machine and in every
/// version, so that parameter files can name environments by it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct EnvironmentKey(pub u64);

/// What has to be known of a molecule to count an environment.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Order {
    /// What its atoms are.
    Atom,
    /// What its hetero atoms are bound to; pieces settle that too.
    First,
    /// The neighbors of its carbons.
    Second,
    /// Its shape as a whole: size, rings, distances.
    Shape,
    /// Pairs of atoms: bonds, hetero atoms at a distance, substituents of a ring.
    Pair,
}

/// A number that describes the whole molecule.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ShapeFact {
    /// Heavy atoms.
    Atoms,
    /// Bonds between the two atoms furthest apart.
    Length,
    /// One less the mean distance over that of a chain of the same size.
    Compactness,
    /// Independent rings.
    Rings,
    /// Rings of one size, 9 standing for all larger ones.
    RingsOfSize(u8),
    /// Single bonds about which the molecule can turn.
    RotatableBonds,
    /// Ring bonds shared by two rings.
    SharedRingBonds,
    /// ln of atoms over distinguishable atoms.
    Symmetry,
    /// Pairs of atoms so many bonds apart, 9 standing for all further ones.
    PairsApart(u8),
}

/// One environment.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Environment {
    /// An atom by itself.
    Atom(AtomType),
    /// An atom with its neighbors.
    Around(AtomType, SmallVec<[NeighborType; 6]>),
    /// A bond by its two atoms.
    Bond(AtomType, AtomType),
    /// Two hetero atoms so many bonds apart.
    Apart(NeighborType, NeighborType, u8),
    /// Two substituted atoms of a ring so many bonds apart.
    Substituted {
        /// Whether the ring atoms are aromatic.
        aromatic: bool,
        /// Bonds between them.
        apart: u8,
    },
    /// The same with the atoms that the ring carries there.
    Substituents(NeighborType, NeighborType, u8),
    /// The whole.
    Shape(ShapeFact),
}

impl Environment {
    /// Which order it is of.
    pub fn order(&self) -> Order {
        match self {
            Self::Atom(_) => Order::Atom,
            Self::Around(atom, _) if !atom.is_carbon() => Order::First,
            Self::Around(..) => Order::Second,
            Self::Shape(_) => Order::Shape,
            Self::Bond(..)
            | Self::Apart(..)
            | Self::Substituted { .. }
            | Self::Substituents(..) => Order::Pair,
        }
    }

    /// Its number.
    pub fn key(&self) -> EnvironmentKey {
        match self {
            Self::Atom(atom) => mixed(0, &[atom.0]),
            Self::Around(atom, around) => around
                .iter()
                .fold(mixed(1, &[atom.0]), |key, seen| key.with(seen.0)),
            Self::Bond(one, other) => mixed(2, &[one.0, other.0]),
            Self::Apart(one, other, bonds) => mixed(3, &[one.0, other.0, u32::from(*bonds)]),
            Self::Substituted { aromatic, apart } => {
                mixed(4, &[u32::from(*aromatic), u32::from(*apart)])
            }
            Self::Substituents(one, other, bonds) => mixed(5, &[one.0, other.0, u32::from(*bonds)]),
            Self::Shape(fact) => {
                let [what, size] = match *fact {
                    ShapeFact::Atoms => [0, 0],
                    ShapeFact::Length => [1, 0],
                    ShapeFact::Compactness => [2, 0],
                    ShapeFact::Rings => [3, 0],
                    ShapeFact::RingsOfSize(size) => [4, u32::from(size)],
                    ShapeFact::RotatableBonds => [5, 0],
                    ShapeFact::SharedRingBonds => [6, 0],
                    ShapeFact::Symmetry => [7, 0],
                    ShapeFact::PairsApart(bonds) => [8, u32::from(bonds)],
                };
                mixed(6, &[what, size])
            }
        }
    }
}

impl EnvironmentKey {
    /// The key of the atoms of a molecule, on which sizes rest.
    pub const ATOMS: Self = mixed(6, &[0, 0]);

    /// The key with one more word mixed in (a step of splitmix64).
    ///
    /// # Source
    ///
    /// G. L. Steele, D. Lea, C. H. Flood, OOPSLA 2014, 453–472; constants of the
    /// finaliser, from memory.
    const fn with(self, word: u32) -> Self {
        let mut z = (self.0 ^ word as u64).wrapping_add(0x9e37_79b9_7f4a_7c15);
        z = (z ^ z >> 30).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ z >> 27).wrapping_mul(0x94d0_49bb_1331_11eb);
        Self(z ^ z >> 31)
    }
}

const fn mixed(kind: u32, words: &[u32]) -> EnvironmentKey {
    let mut key = EnvironmentKey(0).with(kind);
    let mut at = 0;
    while at < words.len() {
        key = key.with(words[at]);
        at += 1;
    }
    key
}

impl fmt::Display for Environment {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Atom(atom) => atom.fmt(f),
            Self::Around(atom, around) => {
                write!(f, "{atom} bound to ")?;
                for (at, seen) in around.iter().enumerate() {
                    if at > 0 {
                        f.write_str(" ")?;
                    }
                    seen.fmt(f)?;
                }
                Ok(())
            }
            Self::Bond(one, other) => write!(f, "bond of {one} and {other}"),
            Self::Apart(one, other, bonds) => write!(f, "{one} and {other} {bonds} bonds apart"),
            Self::Substituted { aromatic, apart } => {
                let ring = if *aromatic { "aromatic" } else { "other" };
                write!(f, "two substituents {apart} bonds apart on an {ring} ring")
            }
            Self::Substituents(one, other, bonds) => {
                write!(f, "{one} and {other} on ring atoms {bonds} bonds apart")
            }
            Self::Shape(fact) => match fact {
                ShapeFact::Atoms => f.write_str("heavy atoms"),
                ShapeFact::Length => f.write_str("length"),
                ShapeFact::Compactness => f.write_str("compactness"),
                ShapeFact::Rings => f.write_str("rings"),
                ShapeFact::RingsOfSize(9) => f.write_str("rings of 9 and more"),
                ShapeFact::RingsOfSize(size) => write!(f, "rings of {size}"),
                ShapeFact::RotatableBonds => f.write_str("rotatable bonds"),
                ShapeFact::SharedRingBonds => f.write_str("ring bonds shared by two rings"),
                ShapeFact::Symmetry => f.write_str("symmetry"),
                ShapeFact::PairsApart(9) => f.write_str("pairs 9 and more bonds apart"),
                ShapeFact::PairsApart(bonds) => write!(f, "pairs {bonds} bonds apart"),
            },
        }
    }
}
