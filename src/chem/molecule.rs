//! The molecule in its flat form.

use super::{Composition, Element};

/// An atom that is not folded into a neighbor: every heavy atom, and hydrogen
/// only in H2.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Atom {
    /// Element.
    pub element: Element,
    /// Formal charge after the spellings of one group were brought to one form.
    pub charge: i8,
    /// Hydrogens bound to it, explicit, implicit and isotopic ones together.
    pub hydrogens: u8,
    /// How many of the hydrogens are deuterium.
    pub deuterium: u8,
    /// How many of the hydrogens are tritium.
    pub tritium: u8,
    /// Mass number where the line states one.
    pub isotope: Option<u16>,
    /// Member of an aromatic ring.
    pub aromatic: bool,
    /// Member of any ring.
    pub in_ring: bool,
    /// Sizes of the smallest rings through it: bit n set for an n-ring, 3 ≤ n ≤ 15.
    pub ring_sizes: u16,
}

/// Order of a bond; aromatic bonds keep no single/double distinction here.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum BondOrder {
    /// Single.
    Single = 1,
    /// Double.
    Double = 2,
    /// Triple.
    Triple = 3,
    /// Part of an aromatic ring.
    Aromatic = 4,
}

/// A bond between two atoms of the molecule.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Bond {
    /// The two atoms, lower index first.
    pub atoms: [u32; 2],
    /// Order.
    pub order: BondOrder,
    /// Order in one Kekulé form: 1, 2 or 3.
    pub kekule: u8,
    /// Member of any ring.
    pub in_ring: bool,
}

/// One end of a bond as seen from the other.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Neighbor {
    /// The atom at the far end.
    pub atom: u32,
    /// Index of the bond.
    pub bond: u32,
    /// Order of the bond.
    pub order: BondOrder,
    /// Whether the bond is a ring bond.
    pub in_ring: bool,
}

/// A neutral one-component molecule, atoms in the order of the line.
#[derive(Clone, Debug, Default)]
pub struct Molecule {
    pub(super) atoms: Vec<Atom>,
    pub(super) bonds: Vec<Bond>,
    pub(super) neighbor_starts: Vec<u32>,
    pub(super) neighbors: Vec<Neighbor>,
}

impl Molecule {
    /// The atoms.
    pub fn atoms(&self) -> &[Atom] {
        &self.atoms
    }

    /// The bonds.
    pub fn bonds(&self) -> &[Bond] {
        &self.bonds
    }

    /// The neighbors of an atom.
    pub fn neighbors(&self, atom: u32) -> &[Neighbor] {
        let start = self.neighbor_starts[atom as usize] as usize;
        let end = self.neighbor_starts[atom as usize + 1] as usize;
        &self.neighbors[start..end]
    }

    /// Number of independent rings (bonds − atoms + 1).
    pub fn ring_count(&self) -> usize {
        (self.bonds.len() + 1).saturating_sub(self.atoms.len())
    }

    /// Element counts, hydrogens included.
    pub fn composition(&self) -> Composition {
        let mut composition = Composition::default();
        for atom in &self.atoms {
            composition.add(atom.element, 1);
            composition.add(Element::H, u16::from(atom.hydrogens));
        }
        composition
    }
}
