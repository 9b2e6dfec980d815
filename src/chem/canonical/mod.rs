//! Canonical SMILES: one text for a molecule, however its line was written.

mod marks;
mod partition;
mod search;
mod write;

use super::{Atom, Element, Molecule};
use marks::Marks;
use partition::{Partition, Refiner};
use search::Search;
use write::Writer;

/// The two canonical SMILES of a molecule.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash)]
pub struct Keys {
    /// Constitution: no isotopes, no stereo marks.
    pub constitution: String,
    /// Full identity: with isotopes, double bond geometry and tetrahedral marks.
    /// Equal to the constitution if the molecule has none of these.
    pub full: String,
    /// Whether the keys are canonical; false if the search for the order of
    /// the atoms hit its work limit, so that another spelling of the molecule
    /// may get other keys.
    pub canonical: bool,
}

/// Makes canonical SMILES; holds the scratch memory, so keep one per thread.
///
/// # Identity
///
/// Atoms are told apart by element, charge, hydrogens, bonds and rings; ties
/// that refinement leaves are searched through (`canonical/search.rs`), so atoms
/// that merely look alike are told apart as well. Tautomers, and valence isomers
/// of rings that are not aromatic, are different molecules.
///
/// A stereo mark stays in the full key if it distinguishes something: marks
/// between ligands that differ in constitution, isotopes or marks decided
/// before, and marks of ring atoms that depend on each other (cis- and
/// trans-1,4-dimethylcyclohexane). Not decided, and dropped: allenes, atropisomers,
/// square-planar and higher classes, double bonds that end at an aromatic atom,
/// nitrogen with three bonds, centers with two
/// hydrogens one of which is deuterium, centers whose two ligands differ only
/// by ring marks that depend on each other, and the dependent ring marks of a
/// molecule in which they can be arranged in more than a few hundred ways.
#[derive(Debug, Default)]
pub struct Canonicalizer {
    partition: Partition,
    refiner: Refiner,
    search: Search,
    marks: Marks,
    writer: Writer,
    keys: Vec<u64>,
}

impl Canonicalizer {
    /// A canonicalizer with empty scratch.
    pub fn new() -> Self {
        Self::default()
    }

    /// Both keys of a molecule.
    ///
    /// # Complexity
    ///
    /// O(m log n) for molecules with at most one ring; otherwise that times the
    /// number of branches of the search, which is polynomial for all cages and
    /// polymers known to us and limited in any case.
    pub fn keys(&mut self, molecule: &Molecule) -> Keys {
        let mut keys = Keys::default();
        self.keys_into(molecule, &mut keys);
        keys
    }

    /// As [`Canonicalizer::keys`], into strings whose memory is used again.
    pub fn keys_into(&mut self, molecule: &Molecule, keys: &mut Keys) {
        keys.constitution.clear();
        keys.full.clear();
        keys.canonical = true;
        if molecule.atoms().is_empty() {
            return;
        }
        if molecule.ring_count() > 1 {
            self.search.find_skeleton(molecule);
        }
        self.start(molecule, false);
        keys.canonical = self
            .search
            .run(molecule, &mut self.partition, &mut self.refiner);
        self.writer
            .write(molecule, &self.search.order, None, &mut keys.constitution);
        if molecule.centers.is_empty() && molecule.geometries.is_empty() && !molecule.is_isotopic()
        {
            keys.full.push_str(&keys.constitution);
            return;
        }
        self.start(molecule, true);
        let canonical = self.marks.decide(
            molecule,
            &mut self.partition,
            &mut self.refiner,
            &mut self.search,
        );
        keys.canonical &= canonical;
        self.writer.write(
            molecule,
            &self.search.order,
            Some(self.marks.kept()),
            &mut keys.full,
        );
    }

    /// The equitable partition of the atoms without stereo marks.
    fn start(&mut self, molecule: &Molecule, with_isotopes: bool) {
        let has_skeleton = molecule.ring_count() > 1;
        self.keys.clear();
        for (index, atom) in molecule.atoms().iter().enumerate() {
            let in_skeleton = has_skeleton && self.search.is_in_skeleton(index as u32);
            let degree = molecule.degree(index as u32);
            self.keys
                .push(invariant(atom, degree, in_skeleton, with_isotopes));
        }
        self.partition.start(&self.keys);
        self.refiner.prepare(molecule.atoms().len());
        self.refiner.push_all(&self.partition);
        self.refiner.refine(molecule, &mut self.partition);
    }
}

impl Molecule {
    /// Both canonical SMILES; use a [`Canonicalizer`] for many molecules.
    ///
    /// # Example
    ///
    /// ```
    /// use groupsmith::chem::Molecule;
    ///
    /// let cis = Molecule::from_smiles("Cl/C=C\\Cl").unwrap().keys();
    /// let trans = Molecule::from_smiles("Cl/C=C/Cl").unwrap().keys();
    /// assert_eq!(cis.constitution, trans.constitution);
    /// assert_ne!(cis.full, trans.full);
    /// ```
    pub fn keys(&self) -> Keys {
        Canonicalizer::new().keys(self)
    }
}

/// What an atom is by itself; the smallest one becomes the first of the text,
/// so ends of chains come before the rest and carbon before other elements.
fn invariant(atom: &Atom, degree: usize, in_skeleton: bool, with_isotopes: bool) -> u64 {
    let element = match atom.element {
        Element::C => 0,
        element => element as u64 + 1,
    };
    let mut key = degree.min(15) as u64;
    let mut add = |value: u64, bits: u32| key = key << bits | value;
    add(u64::from(in_skeleton), 1);
    add(element, 4);
    add(u64::from(atom.in_ring), 1);
    add(u64::from(atom.aromatic), 1);
    add((i64::from(atom.charge) + 8) as u64 & 15, 4);
    add(u64::from(atom.hydrogens) & 15, 4);
    add(u64::from(atom.ring_sizes), 16);
    if with_isotopes {
        add(u64::from(atom.isotope.unwrap_or(0)) & 1023, 10);
        add(u64::from(atom.deuterium) & 15, 4);
        add(u64::from(atom.tritium) & 15, 4);
    }
    key
}
