//! Which rings are aromatic.
//!
//! The model, applied to a Kekulé form whatever the spelling of the line:
//!
//! 1. A ring atom takes part if it is bonded to at most three atoms, hydrogens
//!    included, has the lowest valence of its element and charge (no S=O, P=O),
//!    and not more than one multiple bond.
//! 2. It gives to the ring: one electron with a double bond to a ring atom or,
//!    outside, to an atom that is not more electronegative; none with a double
//!    bond outside to a more electronegative atom (C=O, C=N, C=S) or as a
//!    three-bonded cation C⁺; two with a lone pair and single bonds only (O, S,
//!    NH, NR, C⁻, N⁻). An atom with a triple bond takes no part, nor does
//!    silicon, which SMILES cannot write in lower case.
//! 3. A ring of the ring set (see [`super::rings`]) whose atoms all take part is
//!    aromatic with 4n+2 electrons, 2 included. A ring of nine or more atoms with
//!    a two-bonded O or S takes no part: macrocyclic esters are not aromatic.
//! 4. Where bonds of such rings are left, connected groups of two to six rings
//!    that share one bond each with the next are tried, smaller ones first; an atom that lies in three
//!    or more rings of the group is not counted. All rings of a group with 4n+2
//!    electrons are aromatic, the bonds they share included. For a ring system
//!    of more than 64 rings only pairs are tried, and the search ends before a
//!    size with more than [`MAX_GROUPS`] groups.
//!
//! This is meant to call the same atoms aromatic as the default model of RDKit;
//! on the 2,000 reference molecules it does so without exception (exceptions
//! would stand in `tests/data/chem/aromatic_exceptions.csv`, each with its
//! reason). Differences that are wanted or known:
//!
//! - The bond shared by the rings of azulene is aromatic here and single there.
//! - Double bonds are kept inside an aromatic system where a choice exists, so all
//!   Kekulé spellings of biphenylene and benzocyclobutadiene give one molecule.
//!   There the bonds between the rings follow the spelling.
//! - Rings above 24 atoms, and rings with a triple bond (benzyne) or silicon,
//!   are never aromatic here.
//! - Lower-case rings that turn out not to be aromatic and leave a choice of
//!   double bonds are refused; there one of the choices is taken.
//! - The ring set holds every shortest ring of a bridged or symmetrical system,
//!   theirs a selection, so groups of rings in point 4 may differ.

use super::graph::pair_all;
use super::kekule::{Kekule, Spelling};
use super::rings::Rings;
use super::smiles::{Fault, NONE};
use super::valence::allowed;
use super::{Atom, BondOrder, Element, Molecule, SmilesFault};

/// Most rings of a group that is tried as a whole.
const MAX_GROUP_RINGS: usize = 6;

/// Most groups of one size.
const MAX_GROUPS: usize = 4096;

/// An atom that takes no part.
const APART: i8 = -1;

/// Largest ring in which O and S take part.
const MAX_CHALCOGEN_RING: usize = 8;

/// Scratch of the perception.
#[derive(Debug, Default)]
pub(super) struct Aromaticity {
    electrons: Vec<i8>,
    candidates: Vec<u32>,
}

impl Aromaticity {
    /// Marks aromatic atoms and bonds of a molecule in a Kekulé form.
    pub(super) fn perceive(&mut self, molecule: &mut Molecule, rings: &Rings, spelling: &Spelling) {
        self.electrons.clear();
        for atom in 0..molecule.atoms.len() {
            let electrons = if molecule.atoms[atom].in_ring {
                electrons_of(molecule, atom as u32, spelling.sums[atom])
            } else {
                APART
            };
            self.electrons.push(electrons);
        }
        self.candidates.clear();
        let mut all_done = true;
        for ring in 0..rings.len() {
            let mut sum = 0;
            let mut suits = true;
            let is_large = rings.ring_atoms(ring).len() > MAX_CHALCOGEN_RING;
            for &atom in rings.ring_atoms(ring) {
                let here = &molecule.atoms[atom as usize];
                if is_large && here.charge == 0 {
                    suits &= !matches!(here.element, Element::O | Element::S);
                }
                let electrons = self.electrons[atom as usize];
                suits &= electrons != APART;
                sum += i32::from(electrons);
            }
            if !suits {
                continue;
            }
            self.candidates.push(ring as u32);
            if is_aromatic_count(sum) {
                mark(molecule, rings, ring);
            } else {
                all_done = false;
            }
        }
        if !all_done && self.candidates.len() > 1 {
            self.try_groups(molecule, rings);
        }
    }

    /// Groups of rings that share bonds, ring system by ring system.
    fn try_groups(&mut self, molecule: &mut Molecule, rings: &Rings) {
        let count = self.candidates.len();
        let mut system = vec![NONE; count];
        let mut rings_of_bond = vec![Vec::new(); molecule.bonds.len()];
        for (index, &ring) in self.candidates.iter().enumerate() {
            for &bond in rings.ring_bonds(ring as usize) {
                rings_of_bond[bond as usize].push(index);
            }
        }
        // Rings that share exactly one bond with a ring.
        let neighbors: Vec<Vec<usize>> = (0..count)
            .map(|index| {
                let mut others: Vec<usize> = rings
                    .ring_bonds(self.candidates[index] as usize)
                    .iter()
                    .flat_map(|&bond| rings_of_bond[bond as usize].iter().copied())
                    .filter(|&other| other != index)
                    .collect();
                others.sort_unstable();
                others
                    .chunk_by(|a, b| a == b)
                    .filter(|shared| shared.len() == 1)
                    .map(|shared| shared[0])
                    .collect()
            })
            .collect();
        let mut systems: Vec<Vec<usize>> = Vec::new();
        for first in 0..count {
            if system[first] != NONE {
                continue;
            }
            let mut members = vec![first];
            system[first] = systems.len() as u32;
            let mut next = 0;
            while next < members.len() {
                for &other in &neighbors[members[next]] {
                    if system[other] == NONE {
                        system[other] = systems.len() as u32;
                        members.push(other);
                    }
                }
                next += 1;
            }
            members.sort_unstable();
            systems.push(members);
        }
        for members in systems.iter().filter(|members| members.len() > 1) {
            self.try_system(molecule, rings, members, &neighbors);
        }
    }

    fn try_system(
        &mut self,
        molecule: &mut Molecule,
        rings: &Rings,
        members: &[usize],
        neighbors: &[Vec<usize>],
    ) {
        let is_done = |molecule: &Molecule, candidates: &[u32]| {
            members.iter().all(|&member| {
                rings
                    .ring_bonds(candidates[member] as usize)
                    .iter()
                    .all(|&bond| molecule.bonds[bond as usize].order == BondOrder::Aromatic)
            })
        };
        let mut groups: Vec<Vec<usize>> = members.iter().map(|&member| vec![member]).collect();
        let largest = if members.len() > 64 {
            2
        } else {
            MAX_GROUP_RINGS.min(members.len())
        };
        for _ in 2..=largest {
            if is_done(molecule, &self.candidates) {
                return;
            }
            let mut larger: Vec<Vec<usize>> = Vec::new();
            for group in &groups {
                for &other in group.iter().flat_map(|&member| &neighbors[member]) {
                    if let Err(place) = group.binary_search(&other) {
                        let mut next = group.clone();
                        next.insert(place, other);
                        larger.push(next);
                    }
                }
            }
            larger.sort_unstable();
            larger.dedup();
            if larger.len() > MAX_GROUPS {
                return;
            }
            groups = larger;
            let aromatic: Vec<&Vec<usize>> = groups
                .iter()
                .filter(|group| is_aromatic_count(self.electrons_of_group(rings, group)))
                .collect();
            for group in aromatic {
                for &member in group {
                    mark(molecule, rings, self.candidates[member] as usize);
                }
            }
        }
    }

    fn electrons_of_group(&self, rings: &Rings, group: &[usize]) -> i32 {
        let atoms = || {
            group
                .iter()
                .flat_map(|&member| rings.ring_atoms(self.candidates[member] as usize))
                .copied()
        };
        let mut seen: Vec<u32> = atoms().collect();
        seen.sort_unstable();
        seen.chunk_by(|a, b| a == b)
            .filter(|same| same.len() <= 2)
            .map(|same| i32::from(self.electrons[same[0] as usize]))
            .sum()
    }

    /// Keeps double bonds inside aromatic systems where a choice exists.
    ///
    /// A Kekulé form of biphenylene has double bonds between its benzene rings;
    /// another one has none, and that one is taken.
    pub(super) fn prefer_inside(&mut self, molecule: &mut Molecule) {
        let strays: Vec<usize> = (0..molecule.bonds.len())
            .filter(|&index| {
                let bond = &molecule.bonds[index];
                bond.kekule == 2
                    && bond.in_ring
                    && bond.order != BondOrder::Aromatic
                    && bond
                        .atoms
                        .iter()
                        .any(|&atom| molecule.atoms[atom as usize].aromatic)
            })
            .collect();
        if strays.is_empty() {
            return;
        }
        let mut members = vec![false; molecule.atoms.len()];
        let mut freed = Vec::new();
        for (index, bond) in molecule.bonds.iter().enumerate() {
            let is_inside = bond.kekule == 2 && bond.order == BondOrder::Aromatic;
            if is_inside || strays.contains(&index) {
                freed.push(index);
                for atom in bond.atoms {
                    members[atom as usize] = true;
                }
            }
        }
        let atoms = &molecule.atoms;
        let pairs = pair_all(molecule, &members, |_, bond| {
            bond.order == BondOrder::Aromatic
                || (bond.in_ring
                    && bond.kekule == 1
                    && bond
                        .atoms
                        .iter()
                        .all(|&atom| !atoms[atom as usize].aromatic))
        });
        if let Ok(pairs) = pairs {
            for index in freed {
                molecule.bonds[index].kekule = 1;
            }
            for &(partner, bond) in &pairs {
                if partner != NONE {
                    molecule.bonds[bond as usize].kekule = 2;
                }
            }
        }
    }
}

/// Refuses lower-case atoms outside aromatic rings whose double bonds have a choice.
///
/// Such a line (`c1ccccccc1`, eight carbon atoms) does not say which of two
/// molecules is meant.
pub(super) fn check_unambiguous(
    molecule: &Molecule,
    kekule: &Kekule,
    spelling: &Spelling,
) -> Result<(), Fault> {
    let is_open = |bond: u32| molecule.bonds[bond as usize].order != BondOrder::Aromatic;
    if !kekule.doubled.iter().any(|&bond| is_open(bond)) {
        return Ok(());
    }
    let mut members = vec![false; molecule.atoms.len()];
    for (index, bond) in molecule.bonds.iter().enumerate() {
        let [a, b] = bond.atoms.map(|atom| atom as usize);
        if bond.kekule == 2
            && is_open(index as u32)
            && bond.in_ring
            && spelling.lower_case[a]
            && spelling.lower_case[b]
        {
            members[a] = true;
            members[b] = true;
        }
    }
    for index in 0..molecule.bonds.len() {
        let bond = &molecule.bonds[index];
        let [a, b] = bond.atoms.map(|atom| atom as usize);
        let is_placed = bond.kekule == 2 && is_open(index as u32) && members[a] && members[b];
        if is_placed
            && pair_all(molecule, &members, |other, bond| {
                other != index && bond.in_ring && is_open(other as u32)
            })
            .is_ok()
        {
            return Err(spelling.at(bond.atoms[0], SmilesFault::AmbiguousKekuleForm));
        }
    }
    Ok(())
}

const fn is_aromatic_count(electrons: i32) -> bool {
    electrons >= 2 && (electrons - 2) % 4 == 0
}

fn mark(molecule: &mut Molecule, rings: &Rings, ring: usize) {
    for &atom in rings.ring_atoms(ring) {
        molecule.atoms[atom as usize].aromatic = true;
    }
    for &bond in rings.ring_bonds(ring) {
        molecule.bonds[bond as usize].order = BondOrder::Aromatic;
    }
}

const fn outer_electrons(element: Element) -> i8 {
    match element {
        Element::H => 1,
        Element::B => 3,
        Element::C | Element::Si => 4,
        Element::N | Element::P => 5,
        Element::O | Element::S => 6,
        Element::F | Element::Cl | Element::Br | Element::I => 7,
    }
}

fn is_more_electronegative(element: Element, than: Element) -> bool {
    let (here, there) = (outer_electrons(element), outer_electrons(than));
    here > there || (here == there && element < than)
}

/// Electrons that a ring atom gives, [`APART`] if it takes no part.
fn electrons_of(molecule: &Molecule, index: u32, sum: u8) -> i8 {
    let atom: &Atom = &molecule.atoms[index as usize];
    let lowest = match atom.element {
        Element::B | Element::N | Element::P => 3,
        Element::C => 4,
        Element::O | Element::S => 2,
        _ => return APART,
    };
    let degree = molecule.degree(index) as i8 + atom.hydrogens as i8;
    let valences = allowed(atom.element, atom.charge);
    if degree > 3 || valences.first() != Some(&(sum + atom.hydrogens)) {
        return APART;
    }
    let mut multiple_bonds = 0;
    let mut outside = None;
    for neighbor in molecule.neighbors(index) {
        let bond = &molecule.bonds[neighbor.bond as usize];
        if bond.kekule > 2 {
            return APART;
        }
        if bond.kekule > 1 {
            multiple_bonds += 1;
            if !bond.in_ring {
                outside = Some(molecule.atoms[neighbor.atom as usize].element);
            }
        }
    }
    if multiple_bonds > 1 {
        return APART;
    }
    let lone_pair = (outer_electrons(atom.element) - lowest - atom.charge).max(0);
    let electrons = lowest - degree + lone_pair;
    let is_drawn_out =
        outside.is_some_and(|element| is_more_electronegative(element, atom.element));
    match electrons {
        ..0 => APART,
        0 => match (outside, multiple_bonds) {
            (Some(_), _) => 0,
            (None, 1) => 1,
            _ => APART,
        },
        1 => match (is_drawn_out, multiple_bonds, atom.charge) {
            (true, _, _) => 0,
            (false, 1, _) => 1,
            (false, _, 1) => 0,
            _ => APART,
        },
        more => {
            let left = more - i8::from(is_drawn_out);
            if left % 2 == 1 { 1 } else { 2 }
        }
    }
}
