//! A canonical order of the atoms.
//!
//! Refinement alone orders the atoms of a molecule with at most one ring: there
//! atoms of one cell can be exchanged (Weisfeiler–Lehman refinement decides
//! trees, and a ring unrolls to a periodic chain), so any of them may come
//! first. With more rings, ties among the atoms of the ring skeleton are broken
//! one after the other, in every way that may matter: the tree of all ways is
//! walked depth first, a branch is left when its refinement runs worse than
//! that of the best order so far, and of branches that an automorphism found on
//! the way turns into each other only one is walked. The order with the
//! smallest list of bonds is the canonical one. Ties in the branches hanging
//! off the skeleton are broken at the end, arbitrarily. A small tie is first
//! tested directly: if exchanging its atoms, with what refinement moves along,
//! leaves all bonds in place (a phenyl group turned over), one way is enough.
//!
//! Work limit: at most [`MAX_NODES`] branches. Cages (buckminsterfullerene) and
//! chains of 150 phenyl groups stay far below it. Past it the best order so far
//! is taken, which may depend on the numbering of the atoms: two spellings of
//! one such molecule may get two keys, two molecules never get one.

use super::partition::{Partition, Refiner};
use crate::chem::Molecule;

/// Most branches that are walked for one molecule.
pub(super) const MAX_NODES: u32 = 30_000;

/// Largest tie whose atoms are tested for exchange.
const MAX_TESTED_TIE: usize = 8;

/// Scratch and result of the search.
#[derive(Debug, Default)]
pub(super) struct Search {
    levels: Vec<Level>,
    current: Partition,
    /// Best order so far; the canonical order at the end.
    pub(super) order: Vec<u32>,
    certificate: Vec<u32>,
    best_path: Vec<u32>,
    best_traces: Vec<u64>,
    path: Vec<u32>,
    traces: Vec<u64>,
    candidate_certificate: Vec<u32>,
    automorphisms: Vec<Vec<(u32, u32)>>,
    orbit: Vec<u32>,
    places: Vec<u32>,
    row: Vec<u32>,
    image: Vec<u32>,
    tie: Vec<u32>,
    trials: [Partition; 2],
    in_skeleton: Vec<bool>,
    open_degree: Vec<u8>,
    stack: Vec<u32>,
}

/// A tie that is being broken.
#[derive(Debug, Default)]
struct Level {
    partition: Partition,
    members: Vec<u32>,
    next: usize,
    /// Whether the path down to here runs like the best one.
    as_best: bool,
}

impl Search {
    /// Marks the ring skeleton: rings and what joins them.
    pub(super) fn find_skeleton(&mut self, molecule: &Molecule) {
        let atoms = molecule.atoms().len();
        self.in_skeleton.clear();
        self.in_skeleton.resize(atoms, true);
        self.open_degree.clear();
        self.stack.clear();
        for atom in 0..atoms as u32 {
            let degree = molecule.degree(atom) as u8;
            self.open_degree.push(degree);
            if degree <= 1 {
                self.stack.push(atom);
            }
        }
        while let Some(atom) = self.stack.pop() {
            self.in_skeleton[atom as usize] = false;
            for neighbor in molecule.neighbors(atom) {
                let degree = &mut self.open_degree[neighbor.atom as usize];
                *degree = degree.saturating_sub(1);
                if *degree == 1 && self.in_skeleton[neighbor.atom as usize] {
                    self.stack.push(neighbor.atom);
                }
            }
        }
    }

    /// Whether an atom is part of the ring skeleton found last.
    pub(super) fn is_in_skeleton(&self, atom: u32) -> bool {
        self.in_skeleton[atom as usize]
    }

    /// Orders the atoms, starting from an equitable partition; true if the
    /// order is canonical, false if the work limit was hit.
    ///
    /// With two rings or more the skeleton has to be known, and its atoms and
    /// the others must not share cells.
    pub(super) fn run(
        &mut self,
        molecule: &Molecule,
        partition: &mut Partition,
        refiner: &mut Refiner,
    ) -> bool {
        let needs_search = molecule.ring_count() > 1 && {
            self.break_exchangeable(molecule, partition, refiner);
            partition
                .tied_cell(0, |atom| self.in_skeleton[atom as usize])
                .is_some()
        };
        if !needs_search {
            break_ties(molecule, partition, refiner);
            self.order.clone_from(&partition.order);
            return true;
        }
        self.walk(molecule, partition, refiner)
    }

    /// Bonds of the molecule in the order found last; equal for equal molecules
    /// if cells were equal. Only defined after a search over ties.
    pub(super) fn certify(&mut self, molecule: &Molecule) -> &[u32] {
        let order = std::mem::take(&mut self.order);
        let mut certificate = std::mem::take(&mut self.certificate);
        self.list_bonds(molecule, &order, &mut certificate);
        self.order = order;
        self.certificate = certificate;
        &self.certificate
    }

    fn walk(&mut self, molecule: &Molecule, partition: &Partition, refiner: &mut Refiner) -> bool {
        self.order.clear();
        self.certificate.clear();
        self.best_path.clear();
        self.best_traces.clear();
        self.path.clear();
        self.traces.clear();
        self.automorphisms.clear();
        let mut has_best = false;
        let mut nodes = 0;
        let mut depth = 0;
        self.current.copy_from(partition);
        self.open_level(depth, true);
        loop {
            let Some(atom) = self.next_branch(depth) else {
                if depth == 0 {
                    return true;
                }
                depth -= 1;
                continue;
            };
            nodes += 1;
            if nodes > MAX_NODES && has_best {
                return false;
            }
            let level = &self.levels[depth];
            let as_best = level.as_best;
            self.current.copy_from(&level.partition);
            self.current.single_out(atom, refiner);
            let trace = refiner.refine(molecule, &mut self.current);
            let mut current = std::mem::take(&mut self.current);
            let trace = trace ^ self.break_exchangeable(molecule, &mut current, refiner);
            self.current = current;
            self.path.truncate(depth);
            self.path.push(atom);
            self.traces.truncate(depth);
            self.traces.push(trace);
            let mut still_as_best = as_best && has_best;
            if still_as_best {
                match self.best_traces.get(depth).map(|best| trace.cmp(best)) {
                    Some(std::cmp::Ordering::Equal) => {}
                    Some(std::cmp::Ordering::Less) => still_as_best = false,
                    _ => continue,
                }
            }
            let in_skeleton = &self.in_skeleton;
            let is_leaf = self
                .current
                .tied_cell(0, |atom| in_skeleton[atom as usize])
                .is_none();
            if !is_leaf {
                depth += 1;
                self.open_level(depth, still_as_best || !has_best);
                continue;
            }
            break_ties(molecule, &mut self.current, refiner);
            let order = std::mem::take(&mut self.current.order);
            let mut certificate = std::mem::take(&mut self.candidate_certificate);
            self.list_bonds(molecule, &order, &mut certificate);
            let comparison = if still_as_best {
                certificate.cmp(&self.certificate)
            } else {
                std::cmp::Ordering::Less
            };
            match comparison {
                std::cmp::Ordering::Less => {
                    has_best = true;
                    self.order.clone_from(&order);
                    std::mem::swap(&mut self.certificate, &mut certificate);
                    self.best_path.clone_from(&self.path);
                    self.best_traces.clone_from(&self.traces);
                    for level in &mut self.levels[..=depth] {
                        level.as_best = true;
                    }
                }
                std::cmp::Ordering::Equal => {
                    let moved: Vec<(u32, u32)> = self
                        .order
                        .iter()
                        .zip(&order)
                        .filter(|(from, to)| from != to)
                        .map(|(&from, &to)| (from, to))
                        .collect();
                    self.automorphisms.push(moved);
                    // The branch where this path leaves the best one is a copy
                    // of a branch that was walked.
                    depth = self
                        .path
                        .iter()
                        .zip(&self.best_path)
                        .take_while(|(here, best)| here == best)
                        .count();
                }
                std::cmp::Ordering::Greater => {}
            }
            self.current.order = order;
            self.candidate_certificate = certificate;
        }
    }

    /// Breaks ties of the skeleton, first ones first, as long as all atoms of
    /// the tie can be exchanged; returns a number that depends on the course of
    /// it and not on the numbering.
    fn break_exchangeable(
        &mut self,
        molecule: &Molecule,
        partition: &mut Partition,
        refiner: &mut Refiner,
    ) -> u64 {
        let mut trace = 0_u64;
        let mut from = 0;
        loop {
            let in_skeleton = &self.in_skeleton;
            let Some(cell) = partition.tied_cell(from, |atom| in_skeleton[atom as usize]) else {
                return trace;
            };
            from = cell;
            let size = partition.size_of(cell) as usize;
            if size > MAX_TESTED_TIE {
                return trace;
            }
            self.tie.clear();
            self.tie.extend_from_slice(partition.members(cell));
            let [first, other] = &mut self.trials;
            first.copy_from(partition);
            first.single_out(self.tie[0], refiner);
            let course = refiner.refine(molecule, first);
            for &atom in &self.tie[1..] {
                other.copy_from(partition);
                other.single_out(atom, refiner);
                if refiner.refine(molecule, other) != course
                    || !is_exchange(molecule, first, other, &mut self.image)
                {
                    return trace;
                }
            }
            partition.copy_from(first);
            trace = trace.rotate_left(7) ^ course;
        }
    }

    fn open_level(&mut self, depth: usize, as_best: bool) {
        if self.levels.len() == depth {
            self.levels.push(Level::default());
        }
        let in_skeleton = &self.in_skeleton;
        let cell = self
            .current
            .tied_cell(0, |atom| in_skeleton[atom as usize])
            .expect("a level is opened for a tie");
        let level = &mut self.levels[depth];
        level.partition.copy_from(&self.current);
        level.members.clear();
        level.members.extend_from_slice(self.current.members(cell));
        level.next = 0;
        level.as_best = as_best;
    }

    /// The next atom of a tie that no known automorphism turns into one before it.
    fn next_branch(&mut self, depth: usize) -> Option<u32> {
        loop {
            let level = &self.levels[depth];
            let &atom = level.members.get(level.next)?;
            let tried = &level.members[..level.next];
            if tried.is_empty() || self.automorphisms.is_empty() {
                self.levels[depth].next += 1;
                return Some(atom);
            }
            // Orbits of the automorphisms that leave the path to here in place.
            self.orbit.clear();
            self.orbit.extend(0..self.in_skeleton.len() as u32);
            let fixed = &self.path[..depth];
            for moved in &self.automorphisms {
                if moved.iter().any(|(from, _)| fixed.contains(from)) {
                    continue;
                }
                for &(from, to) in moved {
                    let (a, b) = (root(&mut self.orbit, from), root(&mut self.orbit, to));
                    self.orbit[a.max(b) as usize] = a.min(b);
                }
            }
            let own = root(&mut self.orbit, atom);
            let level = &mut self.levels[depth];
            let is_new = level.members[..level.next]
                .iter()
                .all(|&other| root(&mut self.orbit, other) != own);
            level.next += 1;
            if is_new {
                return Some(atom);
            }
        }
    }

    /// Position and order of the bonds to earlier atoms, atom by atom.
    fn list_bonds(&mut self, molecule: &Molecule, order: &[u32], list: &mut Vec<u32>) {
        self.places.clear();
        self.places.resize(order.len(), 0);
        for (place, &atom) in order.iter().enumerate() {
            self.places[atom as usize] = place as u32;
        }
        list.clear();
        for (place, &atom) in order.iter().enumerate() {
            self.row.clear();
            for neighbor in molecule.neighbors(atom) {
                let other = self.places[neighbor.atom as usize];
                if other < place as u32 {
                    self.row.push(other << 3 | neighbor.order as u32);
                }
            }
            self.row.sort_unstable();
            list.push(self.row.len() as u32);
            list.extend_from_slice(&self.row);
        }
    }
}

/// Breaks all ties, in each the one that stands first.
fn break_ties(molecule: &Molecule, partition: &mut Partition, refiner: &mut Refiner) {
    let mut from = 0;
    while let Some(cell) = partition.tied_cell(from, |_| true) {
        let atom = partition.members(cell)[0];
        partition.single_out(atom, refiner);
        refiner.refine(molecule, partition);
        from = cell + 1;
    }
}

fn root(orbit: &mut [u32], atom: u32) -> u32 {
    let mut atom = atom;
    while orbit[atom as usize] != atom {
        orbit[atom as usize] = orbit[orbit[atom as usize] as usize];
        atom = orbit[atom as usize];
    }
    atom
}

/// Whether taking each single atom of one partition to that of the other, and
/// leaving the rest in place, keeps all bonds.
fn is_exchange(
    molecule: &Molecule,
    from: &Partition,
    to: &Partition,
    image: &mut Vec<u32>,
) -> bool {
    image.clear();
    image.resize(from.order.len(), 0);
    for (&before, &after) in from.order.iter().zip(&to.order) {
        let cell = from.cell[before as usize];
        if from.size_of(cell) == 1 {
            image[before as usize] = after;
        } else {
            if to.cell[before as usize] != cell {
                return false;
            }
            image[before as usize] = before;
        }
    }
    from.order.iter().all(|&atom| {
        let moved = image[atom as usize];
        moved == atom
            || molecule.neighbors(atom).iter().all(|bond| {
                let end = image[bond.atom as usize];
                molecule
                    .neighbors(moved)
                    .iter()
                    .any(|other| other.atom == end && other.order == bond.order)
            })
    })
}
