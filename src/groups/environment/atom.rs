//! What an atom is, packed into one word.

use std::fmt;

use crate::chem::{BondOrder, Element, Molecule};

/// Bits of the fields, lowest first: element 4, charge 2, aromatic 1, two
/// multiple bonds of 6 each (order 2, element 4), hydrogens 3, neighbors 3, ring 2.
const CHARGE: u32 = 4;
const AROMATIC: u32 = 6;
const MULTIPLE: [u32; 2] = [7, 13];
const HYDROGENS: u32 = 19;
const DEGREE: u32 = 22;
const RING: u32 = 25;

/// Element, charge, aromaticity and multiple bonds.
const KIND: u32 = (1 << HYDROGENS) - 1;

/// What an atom is: element, charge, multiple bonds and their partners,
/// hydrogens, number of neighbors, and the kind of ring.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct AtomType(pub(super) u32);

/// What an atom is as seen from a neighbor: element, charge, multiple bonds,
/// and for O, N and S whether it carries hydrogen.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct NeighborType(pub(super) u32);

impl AtomType {
    /// The type of an atom.
    pub(super) fn of(molecule: &Molecule, index: u32) -> Self {
        let atom = &molecule.atoms()[index as usize];
        let neighbors = molecule.neighbors(index);
        let charge = match atom.charge {
            0 => 0,
            charge if charge > 0 => 1,
            _ => 2,
        };
        let mut word = atom.element as u32 | charge << CHARGE;
        if atom.aromatic {
            word |= 1 << AROMATIC;
        } else {
            let mut multiple: [u32; 2] = [0; 2];
            for bond in neighbors {
                let order = match bond.order {
                    BondOrder::Single => continue,
                    BondOrder::Double => 1,
                    BondOrder::Triple => 2,
                    BondOrder::Aromatic => 3,
                };
                let partner = molecule.atoms()[bond.atom as usize].element as u32;
                let code = order | partner << 2;
                // the two largest, in order: more do not occur on a neutral atom but S and P
                if code > multiple[0] {
                    multiple = [code, multiple[0]];
                } else if code > multiple[1] {
                    multiple[1] = code;
                }
            }
            word |= multiple[0] << MULTIPLE[0] | multiple[1] << MULTIPLE[1];
        }
        let ring = match atom.ring_sizes {
            _ if !atom.in_ring => 0,
            sizes if sizes & 1 << 3 != 0 => 1,
            sizes if sizes & 1 << 4 != 0 => 2,
            _ => 3,
        };
        let hydrogens = u32::from(atom.hydrogens.min(4));
        let degree = neighbors.len().min(6) as u32;
        Self(word | hydrogens << HYDROGENS | degree << DEGREE | ring << RING)
    }

    /// The atom as its neighbors see it.
    pub(super) fn seen(self) -> NeighborType {
        let active =
            matches!(self.element(), Element::O | Element::N | Element::S) && self.hydrogens() > 0;
        NeighborType(self.0 & KIND | u32::from(active) << HYDROGENS)
    }

    /// Its element.
    pub fn element(self) -> Element {
        Element::ALL[(self.0 & 0xf) as usize]
    }

    /// Whether it is a member of an aromatic ring.
    pub fn is_aromatic(self) -> bool {
        self.0 >> AROMATIC & 1 == 1
    }

    /// Whether it has a multiple bond.
    pub fn has_multiple_bond(self) -> bool {
        self.0 >> MULTIPLE[0] & 0x3f != 0
    }

    /// Hydrogens bound to it, 4 standing for more.
    pub fn hydrogens(self) -> u32 {
        self.0 >> HYDROGENS & 7
    }

    pub(super) fn is_carbon(self) -> bool {
        self.0 & 0xf == Element::C as u32
    }
}

impl NeighborType {
    /// Whether it is a carbon doubly bound to oxygen.
    pub fn is_carbonyl_carbon(self) -> bool {
        let double_to_oxygen = 1 | (Element::O as u32) << 2;
        self.0 & 0xf == Element::C as u32 && self.0 >> MULTIPLE[0] & 0x3f == double_to_oxygen
    }
}

fn write_kind(f: &mut fmt::Formatter<'_>, word: u32) -> fmt::Result {
    f.write_str(Element::ALL[(word & 0xf) as usize].symbol())?;
    match word >> CHARGE & 3 {
        0 => {}
        1 => f.write_str("+")?,
        _ => f.write_str("-")?,
    }
    if word >> AROMATIC & 1 == 1 {
        f.write_str("ar")?;
    }
    for shift in MULTIPLE {
        let code = word >> shift & 0x3f;
        let mark = match code & 3 {
            0 => continue,
            1 => "=",
            2 => "#",
            _ => ":",
        };
        write!(f, "{mark}{}", Element::ALL[(code >> 2) as usize].symbol())?;
    }
    Ok(())
}

impl fmt::Display for AtomType {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write_kind(f, self.0)?;
        let ring = ["", " in a 3-ring", " in a 4-ring", " in a ring"];
        let neighbors = self.0 >> DEGREE & 7;
        let plural = if neighbors == 1 { "" } else { "s" };
        write!(
            f,
            " with {} H and {neighbors} neighbor{plural}{}",
            self.hydrogens(),
            ring[(self.0 >> RING & 3) as usize]
        )
    }
}

impl fmt::Display for NeighborType {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write_kind(f, self.0)?;
        if self.0 >> HYDROGENS & 1 == 1 {
            f.write_str("H")?;
        }
        Ok(())
    }
}
