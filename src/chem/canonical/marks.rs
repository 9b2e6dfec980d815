//! Which stereo marks distinguish something, and the order of atoms they imply.
//!
//! 1. Cells come from refinement with isotopes, without marks.
//! 2. A mark whose ligands all lie in different cells is decided: its sense
//!    relative to the order of the cells becomes a property of its atoms, and
//!    refinement goes on. Repeated until nothing changes.
//! 3. An undecided mark is kept for step 4 if the ligands that tie are bonded to
//!    it by ring bonds, and dropped otherwise.
//! 4. For marks that depend on each other the ties at them are broken in every
//!    way; of the marked molecules that result, the smallest certificate counts.
//!    A mark that can be turned over without changing that certificate is
//!    dropped. With more than [`MAX_WAYS`] ways, or [`MAX_FORMS`] ways times marks,
//!    all marks of this step are dropped.

use super::partition::{Partition, Refiner};
use super::search::Search;
use crate::chem::Molecule;
use crate::chem::molecule::{Center, Geometry};
use crate::chem::smiles::NONE;

/// Most ways to break the ties at dependent marks.
const MAX_WAYS: usize = 512;

/// Most forms that are compared to find marks without meaning.
const MAX_FORMS: usize = 4096;

/// What has become of a mark.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum State {
    Undecided,
    Dropped,
    /// Decided, with its sense: 1 or 2.
    Decided(u8),
}

/// The marks that stay.
#[derive(Clone, Debug, Default)]
pub(super) struct Kept {
    pub(super) centers: Vec<Center>,
    pub(super) geometries: Vec<Geometry>,
}

/// Scratch and result of the decision.
#[derive(Debug, Default)]
pub(super) struct Marks {
    marks: Vec<Mark>,
    states: Vec<State>,
    senses: Vec<u8>,
    kept: Kept,
}

#[derive(Clone, Copy, Debug)]
enum Mark {
    Center(Center),
    Geometry(Geometry),
}

/// The smallest certificate over all ways to break ties, and its order.
#[derive(Debug)]
struct Form {
    certificate: Vec<u32>,
    order: Vec<u32>,
    canonical: bool,
    /// Ways that were compared.
    ways: usize,
}

impl Marks {
    /// The marks that stay, after [`Marks::decide`].
    pub(super) fn kept(&self) -> &Kept {
        &self.kept
    }

    /// Decides all marks, leaving the canonical order in `search`; true if it
    /// is canonical.
    pub(super) fn decide(
        &mut self,
        molecule: &Molecule,
        partition: &mut Partition,
        refiner: &mut Refiner,
        search: &mut Search,
    ) -> bool {
        self.marks.clear();
        let centers = molecule.centers.iter().copied().map(Mark::Center);
        self.marks.extend(centers);
        let geometries = molecule.geometries.iter().copied().map(Mark::Geometry);
        self.marks.extend(geometries);
        self.states.clear();
        self.states.resize(self.marks.len(), State::Undecided);
        settle(
            molecule,
            &self.marks,
            &mut self.states,
            &mut self.senses,
            partition,
            refiner,
        );
        for (mark, state) in self.marks.iter().zip(&mut self.states) {
            if *state == State::Undecided && !ties_in_ring(molecule, partition, mark) {
                *state = State::Dropped;
            }
        }
        let mut canonical = None;
        while self.states.contains(&State::Undecided) {
            let Some(form) = self.smallest_form(molecule, partition, refiner, search) else {
                break;
            };
            let open = self.states.iter().filter(|s| **s == State::Undecided);
            if form.ways * (open.count() + 1) > MAX_FORMS {
                break;
            }
            let mut meaningless = Vec::new();
            for index in 0..self.marks.len() {
                if self.states[index] == State::Undecided {
                    let mark = self.marks[index];
                    self.marks[index] = turned_over(mark);
                    let other = self.smallest_form(molecule, partition, refiner, search);
                    self.marks[index] = mark;
                    if other.is_none_or(|other| other.certificate == form.certificate) {
                        meaningless.push(index);
                    }
                }
            }
            if meaningless.is_empty() {
                search.order.clone_from(&form.order);
                canonical = Some(form.canonical);
                break;
            }
            for index in meaningless {
                self.states[index] = State::Dropped;
            }
        }
        let keeps_dependent = canonical.is_some();
        self.kept.centers.clear();
        self.kept.geometries.clear();
        for (mark, state) in self.marks.iter().zip(&self.states) {
            match (state, mark) {
                (State::Dropped, _) => {}
                (State::Undecided, _) if !keeps_dependent => {}
                (_, Mark::Center(center)) => self.kept.centers.push(*center),
                (_, Mark::Geometry(geometry)) => self.kept.geometries.push(*geometry),
            }
        }
        canonical.unwrap_or_else(|| search.run(molecule, partition, refiner))
    }

    /// Breaks the ties at undecided marks in every way; none if there are too many.
    fn smallest_form(
        &self,
        molecule: &Molecule,
        partition: &Partition,
        refiner: &mut Refiner,
        search: &mut Search,
    ) -> Option<Form> {
        let mut best: Option<Form> = None;
        let mut ways = 0;
        let mut nodes = 0;
        let mut senses = Vec::new();
        let mut open = vec![(partition.clone(), self.states.clone())];
        while let Some((mut partition, mut states)) = open.pop() {
            settle(
                molecule,
                &self.marks,
                &mut states,
                &mut senses,
                &mut partition,
                refiner,
            );
            let tie = self
                .marks
                .iter()
                .zip(&states)
                .filter(|(_, state)| **state == State::Undecided)
                .flat_map(|(mark, _)| ligands(molecule, mark))
                .filter(|&atom| {
                    atom != NONE && partition.size_of(partition.cell[atom as usize]) > 1
                })
                .map(|atom| partition.cell[atom as usize])
                .min();
            if let Some(cell) = tie {
                nodes += partition.members(cell).len();
                if nodes > MAX_WAYS {
                    return None;
                }
                for &atom in partition.members(cell) {
                    let mut next = partition.clone();
                    next.single_out(atom, refiner);
                    refiner.refine(molecule, &mut next);
                    open.push((next, states.clone()));
                }
                continue;
            }
            ways += 1;
            let form = self.form(molecule, partition, &states, refiner, search);
            if best
                .as_ref()
                .is_none_or(|best| form.certificate < best.certificate)
            {
                best = Some(form);
            }
        }
        if let Some(best) = &mut best {
            best.ways = ways;
        }
        best
    }

    fn form(
        &self,
        molecule: &Molecule,
        mut partition: Partition,
        states: &[State],
        refiner: &mut Refiner,
        search: &mut Search,
    ) -> Form {
        let canonical = search.run(molecule, &mut partition, refiner);
        let mut places = vec![0; search.order.len()];
        for (place, &atom) in search.order.iter().enumerate() {
            places[atom as usize] = place as u32;
        }
        let mut certificate = search.certify(molecule).to_vec();
        let mut senses: Vec<[u32; 2]> = self
            .marks
            .iter()
            .zip(states)
            .flat_map(|(mark, state)| match (state, mark) {
                (State::Decided(_), Mark::Center(center)) => {
                    let sense = sense_of_center(center, |atom| places[atom as usize]);
                    vec![[places[center.atom as usize], u32::from(sense.unwrap_or(0))]]
                }
                (State::Decided(_), Mark::Geometry(geometry)) => {
                    let sense = sense_of_geometry(molecule, geometry, |atom| places[atom as usize]);
                    let sense = u32::from(sense.unwrap_or(0));
                    let ends = geometry.ends.map(|end| places[end as usize]);
                    vec![[ends[0], sense], [ends[1], sense]]
                }
                _ => Vec::new(),
            })
            .collect();
        senses.sort_unstable();
        certificate.extend(senses.iter().flatten());
        Form {
            certificate,
            order: search.order.clone(),
            canonical,
            ways: 1,
        }
    }
}

/// Step 2: decides what the cells decide, refines, and starts over.
fn settle(
    molecule: &Molecule,
    marks: &[Mark],
    states: &mut [State],
    senses: &mut Vec<u8>,
    partition: &mut Partition,
    refiner: &mut Refiner,
) {
    loop {
        senses.clear();
        senses.resize(molecule.atoms().len(), 0);
        let mut changed = false;
        for (mark, state) in marks.iter().zip(states.iter_mut()) {
            if *state != State::Undecided {
                continue;
            }
            let cell = |atom: u32| partition.cell[atom as usize];
            let sense = match mark {
                Mark::Center(center) => sense_of_center(center, cell),
                Mark::Geometry(geometry) => sense_of_geometry(molecule, geometry, cell),
            };
            if let Some(sense) = sense {
                *state = State::Decided(sense);
                changed = true;
                match mark {
                    Mark::Center(center) => senses[center.atom as usize] += sense,
                    Mark::Geometry(geometry) => {
                        for end in geometry.ends {
                            senses[end as usize] += 4 * sense;
                        }
                    }
                }
            }
        }
        if !changed {
            return;
        }
        if partition.split_by(senses, refiner) {
            refiner.refine(molecule, partition);
        }
    }
}

/// Whether the ligands run in the order of their ranks: 1 yes, 2 no, none with ties.
fn sense_of_center(center: &Center, rank: impl Fn(u32) -> u32) -> Option<u8> {
    let ranks = center
        .ligands
        .map(|atom| if atom == NONE { NONE } else { rank(atom) });
    let mut inversions = 0;
    for i in 0..4 {
        for j in i + 1..4 {
            if ranks[i] == ranks[j] {
                return None;
            }
            inversions += u8::from(ranks[i] > ranks[j]);
        }
    }
    Some(1 + inversions % 2)
}

/// Whether the higher ligands of both ends lie on one side: 1 yes, 2 no.
fn sense_of_geometry(
    molecule: &Molecule,
    geometry: &Geometry,
    rank: impl Fn(u32) -> u32,
) -> Option<u8> {
    let mut same_side = geometry.same_side;
    for end in 0..2 {
        let [first, second] = sides(molecule, geometry, end);
        let highest = match (first, second) {
            (NONE, other) | (other, NONE) => other,
            (a, b) if rank(a) > rank(b) => a,
            (a, b) if rank(a) < rank(b) => b,
            _ => return None,
        };
        if highest != geometry.ligands[end] {
            same_side = !same_side;
        }
    }
    Some(if same_side { 1 } else { 2 })
}

/// The neighbors of one end of a double bond but for the other end.
fn sides(molecule: &Molecule, geometry: &Geometry, end: usize) -> [u32; 2] {
    let mut others = molecule
        .neighbors(geometry.ends[end])
        .iter()
        .map(|neighbor| neighbor.atom)
        .filter(|&atom| atom != geometry.ends[1 - end]);
    [others.next().unwrap_or(NONE), others.next().unwrap_or(NONE)]
}

fn ligands(molecule: &Molecule, mark: &Mark) -> [u32; 4] {
    match mark {
        Mark::Center(center) => center.ligands,
        Mark::Geometry(geometry) => {
            let [a, b] = sides(molecule, geometry, 0);
            let [c, d] = sides(molecule, geometry, 1);
            [a, b, c, d]
        }
    }
}

/// Whether all ligands that tie with another are bonded by ring bonds.
fn ties_in_ring(molecule: &Molecule, partition: &Partition, mark: &Mark) -> bool {
    let pairs_in_ring = |atom: u32, ligands: &[u32]| {
        ligands.iter().enumerate().all(|(i, &a)| {
            let ties = ligands.iter().enumerate().any(|(j, &b)| {
                i != j
                    && a != NONE
                    && b != NONE
                    && partition.cell[a as usize] == partition.cell[b as usize]
            });
            !ties
                || molecule
                    .neighbors(atom)
                    .iter()
                    .any(|neighbor| neighbor.atom == a && neighbor.in_ring)
        })
    };
    match mark {
        Mark::Center(center) => pairs_in_ring(center.atom, &center.ligands),
        Mark::Geometry(geometry) => {
            (0..2).all(|end| pairs_in_ring(geometry.ends[end], &sides(molecule, geometry, end)))
        }
    }
}

fn turned_over(mark: Mark) -> Mark {
    match mark {
        Mark::Center(mut center) => {
            center.ligands.swap(2, 3);
            Mark::Center(center)
        }
        Mark::Geometry(mut geometry) => {
            geometry.same_side = !geometry.same_side;
            Mark::Geometry(geometry)
        }
    }
}
