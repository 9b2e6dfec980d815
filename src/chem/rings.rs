//! Ring bonds and smallest rings.
//!
//! A bond is a ring bond if it lies on a cycle. For each ring bond the length
//! of the shortest cycle through it is found by breadth-first search; the ring
//! set is every such shortest cycle of every ring bond. Unlike a smallest set
//! of smallest rings it does not depend on the numbering of the atoms: cubane
//! has its six faces here. Polynomial: searches stop at [`MAX_RING`] atoms, and
//! where more than [`MAX_RINGS_PER_BOND`] shortest cycles share a bond, that bond
//! contributes none (cyclic chains of para-phenylenes have 2ⁿ of them).

use super::Molecule;
use super::smiles::NONE;

/// Largest ring that is looked for.
pub(super) const MAX_RING: usize = 24;

/// Most shortest cycles through one bond.
const MAX_RINGS_PER_BOND: usize = 24;

/// Rings of a molecule, with scratch.
#[derive(Debug, Default)]
pub(super) struct Rings {
    /// Atoms of all rings, one ring after the other, in cyclic order.
    atoms: Vec<u32>,
    /// Bonds of all rings; `bonds[i]` joins `atoms[i]` with the next one.
    bonds: Vec<u32>,
    starts: Vec<u32>,
    /// Length of the shortest ring through each bond, 0 without or above [`MAX_RING`].
    shortest: Vec<u8>,
    /// Whether the bond has contributed its shortest rings.
    listed: Vec<bool>,
    /// Number of ring bonds at each atom.
    ring_degree: Vec<u8>,
    seen: Vec<bool>,
    queue: Vec<u32>,
    distance: Vec<u32>,
    path: Vec<(u32, u32)>,
    cursors: Vec<u32>,
    found: Vec<u32>,
}

impl Rings {
    /// Marks ring bonds and ring atoms.
    ///
    /// `parents` holds the spanning tree of the line: parent atom and bond of
    /// each atom, parents before children. A cycle of the molecule is a sum of
    /// the cycles that the ring closures close in the tree.
    pub(super) fn mark(molecule: &mut Molecule, parents: &[(u32, u32)]) {
        for bond in 0..molecule.bonds.len() {
            let [mut low, mut high] = molecule.bonds[bond].atoms;
            if parents[high as usize].1 == bond as u32 {
                continue;
            }
            molecule.bonds[bond].in_ring = true;
            molecule.atoms[low as usize].in_ring = true;
            molecule.atoms[high as usize].in_ring = true;
            while low != high {
                if low > high {
                    std::mem::swap(&mut low, &mut high);
                }
                let (parent, tree_bond) = parents[high as usize];
                molecule.bonds[tree_bond as usize].in_ring = true;
                molecule.atoms[high as usize].in_ring = true;
                molecule.atoms[parent as usize].in_ring = true;
                high = parent;
            }
        }
    }

    /// Number of rings.
    pub(super) fn len(&self) -> usize {
        self.starts.len().saturating_sub(1)
    }

    pub(super) fn ring_atoms(&self, ring: usize) -> &[u32] {
        &self.atoms[self.starts[ring] as usize..self.starts[ring + 1] as usize]
    }

    pub(super) fn ring_bonds(&self, ring: usize) -> &[u32] {
        &self.bonds[self.starts[ring] as usize..self.starts[ring + 1] as usize]
    }

    /// Length of the shortest ring through a bond, 0 if there is none of at
    /// most [`MAX_RING`] atoms.
    pub(super) fn shortest_through(&self, bond: u32) -> u8 {
        self.shortest.get(bond as usize).copied().unwrap_or(0)
    }

    /// Forgets all rings.
    pub(super) fn clear(&mut self) {
        self.atoms.clear();
        self.bonds.clear();
        self.starts.clear();
        self.shortest.clear();
    }

    /// Finds the ring set of a molecule whose ring bonds are marked and whose
    /// neighbor lists know it, and notes ring sizes at the atoms.
    pub(super) fn find(&mut self, molecule: &mut Molecule) {
        self.clear();
        self.starts.push(0);
        let atom_count = molecule.atoms.len();
        self.shortest.resize(molecule.bonds.len(), 0);
        self.ring_degree.clear();
        self.ring_degree.resize(atom_count, 0);
        for bond in molecule.bonds.iter().filter(|bond| bond.in_ring) {
            self.ring_degree[bond.atoms[0] as usize] += 1;
            self.ring_degree[bond.atoms[1] as usize] += 1;
        }
        self.seen.clear();
        self.seen.resize(atom_count, false);
        self.distance.clear();
        self.distance.resize(atom_count, NONE);

        let mut has_fused = false;
        for atom in 0..atom_count as u32 {
            if self.seen[atom as usize] || !molecule.atoms[atom as usize].in_ring {
                continue;
            }
            has_fused |= !self.simple_ring(molecule, atom);
        }
        if has_fused {
            self.fused_rings(molecule);
        }

        for (bond, &length) in molecule.bonds.iter().zip(&self.shortest) {
            if (3..=15).contains(&length) {
                molecule.atoms[bond.atoms[0] as usize].ring_sizes |= 1 << length;
                molecule.atoms[bond.atoms[1] as usize].ring_sizes |= 1 << length;
            }
        }
    }

    /// Walks over the ring system of `atom`; if it is a single ring, lists it.
    fn simple_ring(&mut self, molecule: &Molecule, atom: u32) -> bool {
        self.queue.clear();
        self.queue.push(atom);
        self.seen[atom as usize] = true;
        let mut simple = true;
        let mut next = 0;
        while next < self.queue.len() {
            let here = self.queue[next];
            next += 1;
            simple &= self.ring_degree[here as usize] == 2;
            for neighbor in molecule.neighbors(here) {
                if neighbor.in_ring && !self.seen[neighbor.atom as usize] {
                    self.seen[neighbor.atom as usize] = true;
                    self.queue.push(neighbor.atom);
                }
            }
        }
        if !simple {
            return false;
        }
        let length = self.queue.len();
        if length > MAX_RING {
            return true;
        }
        let (mut here, mut by) = (atom, NONE);
        loop {
            let neighbor = molecule
                .neighbors(here)
                .iter()
                .find(|neighbor| neighbor.in_ring && neighbor.bond != by)
                .expect("a ring atom has two ring bonds");
            self.atoms.push(here);
            self.bonds.push(neighbor.bond);
            self.shortest[neighbor.bond as usize] = length as u8;
            (here, by) = (neighbor.atom, neighbor.bond);
            if here == atom {
                break;
            }
        }
        self.starts.push(self.atoms.len() as u32);
        true
    }

    fn fused_rings(&mut self, molecule: &Molecule) {
        self.listed.clear();
        self.listed.resize(molecule.bonds.len(), false);
        for bond in 0..molecule.bonds.len() as u32 {
            let in_fused =
                molecule.bonds[bond as usize].in_ring && self.shortest[bond as usize] == 0;
            if in_fused {
                self.search(molecule, bond);
            }
        }
    }

    /// Breadth-first search from one end of a bond to the other.
    fn search(&mut self, molecule: &Molecule, bond: u32) {
        let [start, goal] = molecule.bonds[bond as usize].atoms;
        self.queue.clear();
        self.queue.push(start);
        self.distance[start as usize] = 0;
        let mut next = 0;
        let mut length = 0;
        'search: while next < self.queue.len() {
            let here = self.queue[next];
            next += 1;
            let there = self.distance[here as usize] + 1;
            if there as usize >= MAX_RING {
                break;
            }
            for neighbor in molecule.neighbors(here) {
                if !neighbor.in_ring
                    || neighbor.bond == bond
                    || self.distance[neighbor.atom as usize] != NONE
                {
                    continue;
                }
                self.distance[neighbor.atom as usize] = there;
                self.queue.push(neighbor.atom);
                if neighbor.atom == goal {
                    length = there as usize + 1;
                    break 'search;
                }
            }
        }
        if length > 0 {
            self.shortest[bond as usize] = length as u8;
            self.list_paths(molecule, bond, length);
        }
        for &atom in &self.queue {
            self.distance[atom as usize] = NONE;
        }
    }

    /// Lists all shortest cycles through `bond`, walking back from its goal.
    fn list_paths(&mut self, molecule: &Molecule, bond: u32, length: usize) {
        let [start, goal] = molecule.bonds[bond as usize].atoms;
        self.found.clear();
        self.path.clear();
        self.cursors.clear();
        self.path.push((goal, bond));
        self.cursors.push(0);
        let mut count = 0;
        // Every step lies on a shortest path back to the start, so no walk is
        // in vain and the work is bounded by the number of cycles.
        while let Some(&(here, by)) = self.path.last() {
            if here == start {
                count += 1;
                if count > MAX_RINGS_PER_BOND {
                    return;
                }
                self.found
                    .extend(self.path.iter().flat_map(|&(atom, bond)| [atom, bond]));
                self.path.pop();
                self.cursors.pop();
                continue;
            }
            let cursor = self.cursors.last_mut().expect("as long as the path");
            let step = molecule.neighbors(here)[*cursor as usize..]
                .iter()
                .enumerate()
                .find(|(_, neighbor)| {
                    neighbor.in_ring
                        && neighbor.bond != bond
                        && neighbor.bond != by
                        && self.distance[neighbor.atom as usize] != NONE
                        && self.distance[neighbor.atom as usize] + 1 == self.distance[here as usize]
                });
            match step {
                Some((offset, neighbor)) => {
                    *cursor += offset as u32 + 1;
                    self.path.push((neighbor.atom, neighbor.bond));
                    self.cursors.push(0);
                }
                None => {
                    self.path.pop();
                    self.cursors.pop();
                }
            }
        }
        self.listed[bond as usize] = true;
        for ring in 0..count {
            let cycle = &self.found[ring * 2 * length..(ring + 1) * 2 * length];
            // A ring is listed by the first of its bonds that lists shortest rings.
            let known = cycle.chunks_exact(2).any(|step| {
                let other = step[1];
                other != bond
                    && self.listed[other as usize]
                    && usize::from(self.shortest[other as usize]) == length
            });
            if known {
                continue;
            }
            // The path runs goal … start; the bond of a step leads to its atom
            // from the one before, the bond of the first step closes the ring.
            for step in cycle.chunks_exact(2) {
                self.atoms.push(step[0]);
            }
            for step in cycle[2..].chunks_exact(2) {
                self.bonds.push(step[1]);
            }
            self.bonds.push(bond);
            self.starts.push(self.atoms.len() as u32);
        }
    }
}
