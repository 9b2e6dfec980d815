//! The molecule in its flat form.

use super::{Composition, Element, Reader, SmilesError};

/// An atom that is not folded into a neighbor: every heavy atom, and hydrogen
/// only in H2, which is one hydrogen atom with one hydrogen bound to it.
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
    ///
    /// One ring size for each ring bond of the atom: that of the shortest ring
    /// through the bond.
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

/// A tetrahedral mark.
///
/// Seen from the first ligand, the other three run counterclockwise.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Center {
    pub(super) atom: u32,
    /// Neighbors; the hydrogen or lone pair is [`super::smiles::NONE`].
    pub(super) ligands: [u32; 4],
}

/// A double bond with known geometry.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Geometry {
    pub(super) bond: u32,
    /// The two ends, lower index first.
    pub(super) ends: [u32; 2],
    /// One neighbor of each end; the hydrogen is [`super::smiles::NONE`].
    pub(super) ligands: [u32; 2],
    /// Whether the two ligands lie on the same side.
    pub(super) same_side: bool,
}

/// A neutral one-component molecule, atoms in the order of the line.
#[derive(Clone, Debug, Default)]
pub struct Molecule {
    pub(super) atoms: Vec<Atom>,
    pub(super) bonds: Vec<Bond>,
    pub(super) neighbor_starts: Vec<u32>,
    pub(super) neighbors: Vec<Neighbor>,
    pub(super) centers: Vec<Center>,
    pub(super) geometries: Vec<Geometry>,
}

impl Molecule {
    /// Reads one line of SMILES; use a [`Reader`] for many.
    ///
    /// # Errors
    ///
    /// Those of [`Reader::read_into`].
    ///
    /// # Example
    ///
    /// ```
    /// use groupsmith::chem::Molecule;
    ///
    /// let toluene = Molecule::from_smiles("Cc1ccccc1").unwrap();
    /// assert_eq!(toluene.composition().to_string(), "C7H8");
    /// ```
    pub fn from_smiles(text: &str) -> Result<Self, SmilesError> {
        Reader::new().read(text)
    }

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

    /// Number of atoms that are not hydrogen.
    pub fn heavy_atoms(&self) -> usize {
        match self.atoms.first() {
            Some(atom) if atom.element == Element::H => 0,
            _ => self.atoms.len(),
        }
    }

    /// Whether isotopes are stated anywhere.
    pub fn is_isotopic(&self) -> bool {
        self.atoms
            .iter()
            .any(|atom| atom.isotope.is_some() || atom.deuterium > 0 || atom.tritium > 0)
    }

    /// Whether it has a carboxyl group, COOH: the vapor of such a substance associates.
    pub fn has_carboxyl(&self) -> bool {
        (0..self.atoms().len() as u32).any(|carbon| {
            let oxygen = |order: BondOrder, with_hydrogen: bool| {
                self.neighbors(carbon).iter().any(|bond| {
                    let atom = &self.atoms()[bond.atom as usize];
                    bond.order == order
                        && atom.element == Element::O
                        && (atom.hydrogens > 0) == with_hydrogen
                })
            };
            self.atoms()[carbon as usize].element == Element::C
                && oxygen(BondOrder::Double, false)
                && oxygen(BondOrder::Single, true)
        })
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

    pub(super) fn clear(&mut self) {
        self.atoms.clear();
        self.bonds.clear();
        self.neighbor_starts.clear();
        self.neighbors.clear();
        self.centers.clear();
        self.geometries.clear();
    }

    pub(super) fn degree(&self, atom: u32) -> usize {
        (self.neighbor_starts[atom as usize + 1] - self.neighbor_starts[atom as usize]) as usize
    }

    /// Builds the neighbor lists from the bonds; `cursor` is scratch.
    pub(super) fn link(&mut self, cursor: &mut Vec<u32>) {
        let atoms = self.atoms.len();
        self.neighbor_starts.clear();
        self.neighbor_starts.resize(atoms + 1, 0);
        for bond in &self.bonds {
            self.neighbor_starts[bond.atoms[0] as usize + 1] += 1;
            self.neighbor_starts[bond.atoms[1] as usize + 1] += 1;
        }
        for atom in 0..atoms {
            self.neighbor_starts[atom + 1] += self.neighbor_starts[atom];
        }
        cursor.clear();
        cursor.extend_from_slice(&self.neighbor_starts[..atoms]);
        self.neighbors.clear();
        self.neighbors.resize(
            2 * self.bonds.len(),
            Neighbor {
                atom: 0,
                bond: 0,
                order: BondOrder::Single,
                in_ring: false,
            },
        );
        for (index, bond) in self.bonds.iter().enumerate() {
            for (here, there) in [(0, 1), (1, 0)] {
                let slot = &mut cursor[bond.atoms[here] as usize];
                self.neighbors[*slot as usize] = Neighbor {
                    atom: bond.atoms[there],
                    bond: index as u32,
                    order: bond.order,
                    in_ring: bond.in_ring,
                };
                *slot += 1;
            }
        }
    }

    /// Copies order and ring membership of the bonds into the neighbor lists.
    pub(super) fn refresh_neighbors(&mut self) {
        for neighbor in &mut self.neighbors {
            let bond = &self.bonds[neighbor.bond as usize];
            neighbor.order = bond.order;
            neighbor.in_ring = bond.in_ring;
        }
    }
}
