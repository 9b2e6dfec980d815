//! Kekulé form of lower-case atoms: which of them carry a ring double bond, and
//! where the double bonds go.
//!
//! Hydrogens and charge decide how many electrons an atom still needs; an atom
//! that lacks one bond pairs with a lower-case ring neighbor that lacks one too.
//! A pairing that leaves nobody out is found greedily from the ends inwards and,
//! where that fails, by a maximum matching.

use super::graph::pair_all;
use super::smiles::{Fault, NONE, Place};
use super::valence::{allowed, implicit};
use super::{BondOrder, Element, Molecule, SmilesFault};

/// Facts of the atoms that only the reader needs.
#[derive(Debug, Default)]
pub(super) struct Spelling {
    /// Atom of the line.
    pub(super) source: Vec<u32>,
    pub(super) lower_case: Vec<bool>,
    /// Written in brackets, or rewritten: hydrogens are as they stand.
    pub(super) fixed: Vec<bool>,
    /// Sum of bond orders to heavy atoms; aromatic bonds count 1 until paired.
    pub(super) sums: Vec<u8>,
}

impl Spelling {
    pub(super) fn clear(&mut self) {
        self.source.clear();
        self.lower_case.clear();
        self.fixed.clear();
        self.sums.clear();
    }

    pub(super) fn at(&self, atom: u32, fault: SmilesFault) -> Fault {
        (Place::Atom(self.source[atom as usize]), fault)
    }
}

/// Scratch of the pairing.
#[derive(Debug, Default)]
pub(super) struct Kekule {
    lacks_bond: Vec<bool>,
    free_neighbors: Vec<u8>,
    ends: Vec<u32>,
    /// Bonds made double by the last call.
    pub(super) doubled: Vec<u32>,
}

impl Kekule {
    /// Gives lower-case atoms their hydrogens and their double bonds.
    ///
    /// On entry bonds of order [`BondOrder::Aromatic`] are those that may become
    /// double; on return none is left and `kekule` holds the orders.
    pub(super) fn assign(
        &mut self,
        molecule: &mut Molecule,
        spelling: &mut Spelling,
    ) -> Result<(), Fault> {
        self.doubled.clear();
        self.lacks_bond.clear();
        self.lacks_bond.resize(molecule.atoms.len(), false);
        for atom in 0..molecule.atoms.len() {
            if spelling.lower_case[atom] {
                self.lacks_bond[atom] = lacks_bond(molecule, spelling, atom as u32)?;
            }
        }
        if !self.pair_greedily(molecule) {
            self.doubled.clear();
            let partners = pair_all(molecule, &self.lacks_bond, |_, bond| {
                bond.order == BondOrder::Aromatic
            })
            .map_err(|atom| {
                let first = first_of_system(molecule, atom);
                spelling.at(first, SmilesFault::NoKekuleForm)
            })?;
            for (atom, &(partner, bond)) in partners.iter().enumerate() {
                if partner != NONE && (atom as u32) < partner {
                    self.doubled.push(bond);
                }
            }
        }
        for bond in &mut molecule.bonds {
            if bond.order == BondOrder::Aromatic {
                bond.order = BondOrder::Single;
            }
        }
        for &bond in &self.doubled {
            let bond = &mut molecule.bonds[bond as usize];
            bond.kekule = 2;
            for atom in bond.atoms {
                spelling.sums[atom as usize] += 1;
            }
        }
        Ok(())
    }

    /// Pairs atoms with only one choice first; false if some atom stays alone,
    /// which does not yet mean that there is no pairing.
    fn pair_greedily(&mut self, molecule: &Molecule) -> bool {
        let free = &mut self.lacks_bond;
        self.free_neighbors.clear();
        self.free_neighbors.resize(free.len(), 0);
        self.ends.clear();
        for atom in 0..free.len() {
            if free[atom] {
                let choices = molecule
                    .neighbors(atom as u32)
                    .iter()
                    .filter(|n| n.order == BondOrder::Aromatic && free[n.atom as usize])
                    .count();
                self.free_neighbors[atom] = choices as u8;
                if choices == 1 {
                    self.ends.push(atom as u32);
                }
            }
        }
        let mut paired = true;
        let mut next = 0;
        loop {
            let atom = match self.ends.pop() {
                Some(atom) => atom,
                None => {
                    while next < free.len() && !free[next] {
                        next += 1;
                    }
                    if next == free.len() {
                        break;
                    }
                    next as u32
                }
            };
            if !free[atom as usize] {
                continue;
            }
            let partner = molecule
                .neighbors(atom)
                .iter()
                .find(|n| n.order == BondOrder::Aromatic && free[n.atom as usize]);
            let Some(partner) = partner else {
                paired = false;
                break;
            };
            self.doubled.push(partner.bond);
            for gone in [atom, partner.atom] {
                free[gone as usize] = false;
                for neighbor in molecule.neighbors(gone) {
                    let other = neighbor.atom as usize;
                    if neighbor.order == BondOrder::Aromatic && free[other] {
                        self.free_neighbors[other] -= 1;
                        if self.free_neighbors[other] == 1 {
                            self.ends.push(neighbor.atom);
                        }
                    }
                }
            }
        }
        if !paired {
            for &bond in &self.doubled {
                for atom in molecule.bonds[bond as usize].atoms {
                    free[atom as usize] = true;
                }
            }
        }
        paired
    }
}

/// Whether a lower-case atom needs a ring double bond; settles its hydrogens.
fn lacks_bond(molecule: &mut Molecule, spelling: &Spelling, index: u32) -> Result<bool, Fault> {
    let atom = molecule.atoms[index as usize];
    if !atom.in_ring {
        return Err(spelling.at(index, SmilesFault::AromaticOutsideRing));
    }
    let fixed = spelling.fixed[index as usize];
    let bonds = spelling.sums[index as usize] + atom.hydrogens;
    let has_multiple_bond = molecule
        .neighbors(index)
        .iter()
        .any(|neighbor| molecule.bonds[neighbor.bond as usize].kekule > 1);
    if !fixed && has_multiple_bond {
        // `c1(=O)…` or `c1=cc=…`: the double bond stands there already.
        return Ok(false);
    }
    if !fixed && atom.element == Element::C && bonds <= 3 {
        molecule.atoms[index as usize].hydrogens += 3 - bonds;
        return Ok(true);
    }
    let valences = if fixed {
        allowed(atom.element, atom.charge)
    } else {
        implicit(atom.element)
    };
    Ok(!valences.contains(&bonds) && valences.contains(&(bonds + 1)))
}

/// The atom that stands first in the line among those joined by aromatic bonds.
fn first_of_system(molecule: &Molecule, atom: u32) -> u32 {
    let mut seen = vec![false; molecule.atoms.len()];
    let mut open = vec![atom];
    let mut first = atom;
    while let Some(atom) = open.pop() {
        if std::mem::replace(&mut seen[atom as usize], true) {
            continue;
        }
        first = first.min(atom);
        let aromatic = |n: &&super::Neighbor| n.order == BondOrder::Aromatic;
        open.extend(
            molecule
                .neighbors(atom)
                .iter()
                .filter(aromatic)
                .map(|n| n.atom),
        );
    }
    first
}
