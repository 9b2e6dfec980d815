//! Counts the environments of a molecule.

use smallvec::SmallVec;

use super::atom::AtomType;
use super::kind::{Environment, EnvironmentKey, Order, ShapeFact};
use crate::chem::{BondOrder, Molecule};

/// The most heavy atoms of which environments are counted: far more than any
/// molecule of the fit has, and few enough to compare all pairs.
pub const ENVIRONMENT_ATOM_LIMIT: usize = 120;

/// How far apart hetero atoms may be to count as a pair, in bonds.
const FARTHEST_PAIR: u8 = 6;

/// How far apart substituents of a ring may be to count as a pair, in bonds.
const FARTHEST_SUBSTITUENTS: u8 = 3;

/// No path: atoms of one molecule always have one.
const UNREACHED: u8 = u8::MAX;

/// The environments of one molecule with their counts, by key.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct EnvironmentCounts {
    entries: Vec<(EnvironmentKey, Order, f32)>,
}

impl EnvironmentCounts {
    /// Key, order and count, ascending by key; counts of shapes need not be whole.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = (EnvironmentKey, Order, f32)> {
        self.entries.iter().copied()
    }

    /// Whether nothing was counted.
    pub fn is_empty(&self) -> bool {
        self.entries.is_empty()
    }

    /// What pieces of a molecule settle of it: atoms, what hetero atoms are bound
    /// to, heavy atoms and rings.
    pub fn of_pieces(&self) -> Self {
        let rings = Environment::Shape(ShapeFact::Rings).key();
        let kept = self.entries.iter().filter(|(key, order, _)| {
            *order <= Order::First || *key == EnvironmentKey::ATOMS || *key == rings
        });
        Self {
            entries: kept.copied().collect(),
        }
    }

    /// The same with a number of rings.
    pub fn with_rings(mut self, rings: u32) -> Self {
        let key = Environment::Shape(ShapeFact::Rings).key();
        self.entries.retain(|entry| entry.0 != key);
        if rings > 0 {
            self.entries.push((key, Order::Shape, rings as f32));
            self.settle();
        }
        self
    }

    /// Every count times a factor; counts of atoms are whole and stay so.
    pub fn times(mut self, factor: f32) -> Self {
        for entry in &mut self.entries {
            entry.2 = (entry.2 * factor).round();
        }
        self
    }

    /// Adds the counts of another molecule or piece; what comes to nothing is left out.
    pub fn add_times(&mut self, other: &Self, times: f32) {
        let added = other.entries.iter().map(|&(k, o, n)| (k, o, n * times));
        self.entries.extend(added);
        self.settle();
        self.entries.retain(|entry| entry.2 != 0.0);
    }

    /// Takes all out.
    pub fn clear(&mut self) {
        self.entries.clear();
    }

    fn settle(&mut self) {
        self.entries.sort_unstable_by_key(|entry| entry.0);
        self.entries.dedup_by(|next, first| {
            let same = next.0 == first.0;
            if same {
                first.2 += next.2;
            }
            same
        });
    }
}

/// Counts environments; holds scratch memory, one per thread.
#[derive(Debug, Default)]
pub struct EnvironmentReader {
    types: Vec<AtomType>,
    distances: Vec<u8>,
    queue: Vec<u32>,
    signatures: Vec<u64>,
}

impl EnvironmentReader {
    /// A reader with empty scratch memory.
    pub fn new() -> Self {
        Self::default()
    }

    /// Counts the environments of a molecule; none of one that has more than
    /// [`ENVIRONMENT_ATOM_LIMIT`] heavy atoms.
    ///
    /// # Complexity
    ///
    /// Quadratic in the number of atoms.
    pub fn counts_into(&mut self, molecule: &Molecule, counts: &mut EnvironmentCounts) {
        self.counts_up_to_into(Order::Pair, molecule, counts);
    }

    /// The same up to an order; below [`Order::Shape`] only numbers of atoms and rings
    /// are told of the shape, which takes no look at all pairs of atoms.
    pub fn counts_up_to_into(
        &mut self,
        order: Order,
        molecule: &Molecule,
        counts: &mut EnvironmentCounts,
    ) {
        counts.entries.clear();
        let mut add = |environment: &Environment, count| {
            let key = environment.key();
            counts.entries.push((key, environment.order(), count));
        };
        if order >= Order::Shape {
            self.each(molecule, add);
        } else if self.each_around(molecule, &mut add) {
            let shape = [
                (ShapeFact::Atoms, molecule.atoms().len() as f32),
                (ShapeFact::Rings, molecule.ring_count() as f32),
            ];
            for (fact, count) in shape.into_iter().filter(|(_, count)| *count != 0.0) {
                add(&Environment::Shape(fact), count);
            }
        }
        counts.settle();
    }

    /// Every environment with its count; one that occurs at several places
    /// may come several times.
    pub fn each_of(&mut self, molecule: &Molecule, one: impl FnMut(&Environment, f32)) {
        self.each(molecule, one);
    }

    fn each(&mut self, molecule: &Molecule, mut add: impl FnMut(&Environment, f32)) {
        if !self.each_around(molecule, &mut add) {
            return;
        }
        self.measure_distances(molecule);
        for bond in molecule.bonds() {
            let [one, other] = bond.atoms.map(|atom| self.types[atom as usize]);
            add(&Environment::Bond(one.min(other), one.max(other)), 1.0);
        }
        self.pairs(molecule, &mut add);
        self.shape(molecule, &mut add);
    }

    /// Every atom by itself and with its neighbors; `false`, and nothing of it, where
    /// the molecule is too large.
    fn each_around(
        &mut self,
        molecule: &Molecule,
        add: &mut impl FnMut(&Environment, f32),
    ) -> bool {
        let atoms = molecule.atoms().len();
        if atoms > ENVIRONMENT_ATOM_LIMIT {
            return false;
        }
        self.types.clear();
        self.types
            .extend((0..atoms as u32).map(|atom| AtomType::of(molecule, atom)));
        for (index, &atom) in self.types.iter().enumerate() {
            add(&Environment::Atom(atom), 1.0);
            let mut around: SmallVec<[_; 6]> = molecule
                .neighbors(index as u32)
                .iter()
                .map(|bond| self.types[bond.atom as usize].seen())
                .collect();
            around.sort_unstable();
            add(&Environment::Around(atom, around), 1.0);
        }
        true
    }

    /// Bonds between every two atoms.
    fn measure_distances(&mut self, molecule: &Molecule) {
        let atoms = molecule.atoms().len();
        self.distances.clear();
        self.distances.resize(atoms * atoms, UNREACHED);
        for start in 0..atoms {
            let row = &mut self.distances[start * atoms..(start + 1) * atoms];
            row[start] = 0;
            self.queue.clear();
            self.queue.push(start as u32);
            let mut at = 0;
            while at < self.queue.len() {
                let here = self.queue[at];
                at += 1;
                let next = row[here as usize] + 1;
                for bond in molecule.neighbors(here) {
                    let there = &mut row[bond.atom as usize];
                    if *there == UNREACHED {
                        *there = next;
                        self.queue.push(bond.atom);
                    }
                }
            }
        }
    }

    fn pairs(&self, molecule: &Molecule, add: &mut impl FnMut(&Environment, f32)) {
        let atoms = molecule.atoms().len();
        let substituent = |atom: usize| {
            let own = &molecule.atoms()[atom];
            let bonds = molecule.neighbors(atom as u32);
            // the first bond out of the ring, in the order of types so that numbering does not matter
            let outside = bonds.iter().filter(|bond| !bond.in_ring);
            (own.in_ring && own.hydrogens == 0)
                .then(|| {
                    outside
                        .map(|bond| self.types[bond.atom as usize].seen())
                        .min()
                })
                .flatten()
        };
        for i in 0..atoms {
            let hetero = !self.types[i].is_carbon();
            let carried = substituent(i);
            for j in 0..i {
                let apart = self.distances[i * atoms + j];
                if hetero && apart <= FARTHEST_PAIR && !self.types[j].is_carbon() {
                    let (one, other) = ordered(self.types[i].seen(), self.types[j].seen());
                    add(&Environment::Apart(one, other, apart), 1.0);
                }
                if apart <= FARTHEST_SUBSTITUENTS
                    && let (Some(mine), Some(theirs)) = (carried, substituent(j))
                {
                    let both = [i, j].map(|atom| molecule.atoms()[atom].aromatic);
                    let aromatic = both == [true, true];
                    add(&Environment::Substituted { aromatic, apart }, 1.0);
                    let (one, other) = ordered(mine, theirs);
                    add(&Environment::Substituents(one, other, apart), 1.0);
                }
            }
        }
    }

    fn shape(&mut self, molecule: &Molecule, add: &mut impl FnMut(&Environment, f32)) {
        let atoms = molecule.atoms().len();
        let mut add = |fact, value: f32| {
            if value != 0.0 {
                add(&Environment::Shape(fact), value);
            }
        };
        let mut apart = [0_u32; 10];
        let (mut sum, mut length) = (0_u32, 0);
        for i in 0..atoms {
            for &distance in &self.distances[i * atoms..i * atoms + i] {
                apart[usize::from(distance.min(9))] += 1;
                sum += u32::from(distance);
                length = length.max(distance);
            }
        }
        add(ShapeFact::Atoms, atoms as f32);
        add(ShapeFact::Length, f32::from(length));
        for (bonds, &pairs) in apart.iter().enumerate() {
            add(ShapeFact::PairsApart(bonds as u8), pairs as f32);
        }
        if atoms > 1 {
            let chain = (atoms.pow(3) - atoms) as f32 / 6.0;
            add(ShapeFact::Compactness, 1.0 - sum as f32 / chain);
        }
        add(ShapeFact::Rings, molecule.ring_count() as f32);
        let (mut turning, mut shared) = (0, 0);
        for bond in molecule.bonds() {
            let ends = bond.atoms.map(|atom| molecule.neighbors(atom));
            if bond.order == BondOrder::Single && !bond.in_ring {
                turning += u32::from(ends.iter().all(|around| around.len() > 1));
            }
            let in_two = |around: &&[crate::chem::Neighbor]| {
                around.iter().filter(|neighbor| neighbor.in_ring).count() > 2
            };
            shared += u32::from(bond.in_ring && ends.iter().all(in_two));
        }
        add(ShapeFact::RotatableBonds, turning as f32);
        add(ShapeFact::SharedRingBonds, shared as f32);
        let mut rings = [0.0_f32; 10];
        for atom in molecule.atoms() {
            for size in 3..16_usize {
                if atom.ring_sizes >> size & 1 == 1 {
                    rings[size.min(9)] += 1.0 / size as f32;
                }
            }
        }
        for (size, &count) in rings.iter().enumerate() {
            add(ShapeFact::RingsOfSize(size as u8), count);
        }
        add(ShapeFact::Symmetry, self.symmetry(atoms));
    }

    /// ln of atoms over atoms that differ in what lies how far from them.
    fn symmetry(&mut self, atoms: usize) -> f32 {
        self.signatures.clear();
        for i in 0..atoms {
            let row = &self.distances[i * atoms..(i + 1) * atoms];
            let signature = row.iter().zip(&self.types).fold(0_u64, |sum, (&d, atom)| {
                // a sum of mixed words does not depend on the numbering
                let word = u64::from(atom.0) << 8 | u64::from(d);
                let mixed = word.wrapping_mul(0x9e37_79b9_7f4a_7c15);
                sum.wrapping_add((mixed ^ mixed >> 29).wrapping_mul(0xbf58_476d_1ce4_e5b9))
            });
            self.signatures.push(signature);
        }
        self.signatures.sort_unstable();
        self.signatures.dedup();
        (atoms as f32 / self.signatures.len().max(1) as f32).ln()
    }
}

fn ordered<T: Ord>(one: T, other: T) -> (T, T) {
    if one <= other {
        (one, other)
    } else {
        (other, one)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn counts(smiles: &str) -> EnvironmentCounts {
        let molecule = Molecule::from_smiles(smiles).unwrap();
        let mut counts = EnvironmentCounts::default();
        EnvironmentReader::new().counts_into(&molecule, &mut counts);
        counts
    }

    #[test]
    fn numbering_does_not_matter() {
        for (one, other) in [
            ("CC(=O)OCCO", "OCCOC(C)=O"),
            ("Cc1ccc(Cl)cc1O", "Oc1cc(Cl)ccc1C"),
            ("C1CC2CCC1C2", "C1C2CCC1CC2"),
        ] {
            assert_eq!(counts(one), counts(other), "{one}");
        }
    }

    #[test]
    fn isomers_differ_in_second_order_only() {
        let first = |smiles: &str| -> Vec<_> {
            let all = counts(smiles);
            all.iter().filter(|entry| entry.1 <= Order::First).collect()
        };
        assert_eq!(first("CCC(C)CCO"), first("CC(C)CCCO"));
        assert_ne!(counts("CCC(C)CCO"), counts("CC(C)CCCO"));
        // ortho, meta, para
        assert_ne!(counts("Cc1ccccc1C"), counts("Cc1cccc(C)c1"));
        assert_ne!(counts("Cc1ccc(C)cc1"), counts("Cc1cccc(C)c1"));
    }

    #[test]
    fn heavy_atoms_are_counted_under_their_key() {
        let count = counts("CCO")
            .iter()
            .find(|entry| entry.0 == EnvironmentKey::ATOMS)
            .map(|entry| entry.2);
        assert_eq!(count, Some(3.0));
        assert_eq!(
            Environment::Shape(ShapeFact::Atoms).key(),
            EnvironmentKey::ATOMS
        );
    }

    #[test]
    fn a_molecule_too_large_has_none() {
        assert!(counts(&"C".repeat(121)).is_empty());
        assert!(!counts(&"C".repeat(120)).is_empty());
    }
}
