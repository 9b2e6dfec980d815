//! Ordered partitions of the atoms and their refinement.
//!
//! Cells hold atoms that look alike so far and lie one after the other; the
//! number of a cell is the position of its first atom. Refinement splits cells
//! by the bonds of their atoms into a cell taken from a work list, until all
//! atoms of a cell have equal bonds into every cell (the coarsest equitable
//! partition; Hopcroft's rule of leaving out the largest part gives O(m log n)).
//! Every decision depends on cell numbers and sizes alone, never on atom
//! numbers, so the order of the cells is the same for every numbering.

use crate::chem::Molecule;

/// An ordered partition.
#[derive(Clone, Debug, Default)]
pub(super) struct Partition {
    /// Atoms by position.
    pub(super) order: Vec<u32>,
    /// Position of each atom.
    place: Vec<u32>,
    /// Cell of each atom.
    pub(super) cell: Vec<u32>,
    /// Size of each cell, by its first position.
    size: Vec<u32>,
    cells: u32,
}

impl Partition {
    /// One cell for each value of `keys`, in ascending order.
    pub(super) fn start(&mut self, keys: &[u64]) {
        let atoms = keys.len() as u32;
        self.order.clear();
        self.order.extend(0..atoms);
        self.order.sort_unstable_by_key(|&atom| keys[atom as usize]);
        self.place.clear();
        self.place.resize(keys.len(), 0);
        self.cell.clear();
        self.cell.resize(keys.len(), 0);
        self.size.clear();
        self.size.resize(keys.len(), 0);
        self.cells = 0;
        let mut first = 0;
        for position in 0..keys.len() {
            let atom = self.order[position] as usize;
            if position > 0 && keys[atom] != keys[self.order[position - 1] as usize] {
                first = position;
            }
            if first == position {
                self.cells += 1;
            }
            self.place[atom] = position as u32;
            self.cell[atom] = first as u32;
            self.size[first] += 1;
        }
    }

    pub(super) fn copy_from(&mut self, other: &Self) {
        self.order.clone_from(&other.order);
        self.place.clone_from(&other.place);
        self.cell.clone_from(&other.cell);
        self.size.clone_from(&other.size);
        self.cells = other.cells;
    }

    pub(super) fn is_discrete(&self) -> bool {
        self.cells as usize == self.order.len()
    }

    pub(super) fn cell_count(&self) -> u32 {
        self.cells
    }

    pub(super) fn size_of(&self, cell: u32) -> u32 {
        self.size[cell as usize]
    }

    /// Atoms of a cell.
    pub(super) fn members(&self, cell: u32) -> &[u32] {
        let first = cell as usize;
        &self.order[first..first + self.size[first] as usize]
    }

    /// First cell of more than one atom at or behind a position that `suits`.
    pub(super) fn tied_cell(&self, from: u32, suits: impl Fn(u32) -> bool) -> Option<u32> {
        let mut cell = from as usize;
        while cell < self.order.len() {
            if self.size[cell] > 1 && suits(self.order[cell]) {
                return Some(cell as u32);
            }
            cell += self.size[cell] as usize;
        }
        None
    }

    /// Puts one atom of a cell in front of the others, into a cell of its own.
    pub(super) fn single_out(&mut self, atom: u32, refiner: &mut Refiner) {
        let cell = self.cell[atom as usize];
        let size = self.size[cell as usize];
        self.swap(cell, self.place[atom as usize]);
        self.size[cell as usize] = 1;
        self.size[cell as usize + 1] = size - 1;
        self.cells += 1;
        for position in cell + 1..cell + size {
            let other = self.order[position as usize];
            self.cell[other as usize] = cell + 1;
        }
        refiner.push(cell);
    }

    /// Splits cells by `keys`, ascending, and notes the parts for refinement;
    /// whether any cell was split.
    pub(super) fn split_by(&mut self, keys: &[u8], refiner: &mut Refiner) -> bool {
        let before = self.cells;
        let mut cell = 0;
        while cell < self.order.len() {
            let size = self.size[cell] as usize;
            if size > 1 {
                self.order[cell..cell + size].sort_unstable_by_key(|&atom| keys[atom as usize]);
                let mut first = cell;
                let mut parts = 1;
                self.size[cell] = 0;
                for position in cell..cell + size {
                    let atom = self.order[position] as usize;
                    if position > cell && keys[atom] != keys[self.order[position - 1] as usize] {
                        first = position;
                        parts += 1;
                        self.size[first] = 0;
                    }
                    self.place[atom] = position as u32;
                    self.cell[atom] = first as u32;
                    self.size[first] += 1;
                }
                self.cells += parts - 1;
                if parts > 1 {
                    let mut part = cell;
                    while part < cell + size {
                        refiner.push(part as u32);
                        part += self.size[part] as usize;
                    }
                }
            }
            cell += size;
        }
        self.cells > before
    }

    fn swap(&mut self, a: u32, b: u32) {
        self.order.swap(a as usize, b as usize);
        self.place[self.order[a as usize] as usize] = a;
        self.place[self.order[b as usize] as usize] = b;
    }
}

/// Work list and scratch of the refinement.
#[derive(Debug, Default)]
pub(super) struct Refiner {
    queue: Vec<u32>,
    queued: Vec<bool>,
    splitter: Vec<u32>,
    /// Bonds of each atom into the splitter: four bits for each bond order.
    weights: Vec<u16>,
    touched: Vec<u32>,
    touched_cells: Vec<u32>,
    /// Touched atoms of each cell.
    touched_counts: Vec<u32>,
    /// Bonds looked at so far.
    pub(super) work: u64,
}

impl Refiner {
    /// Makes room for a molecule and empties the work list.
    pub(super) fn prepare(&mut self, atoms: usize) {
        self.queue.clear();
        self.queued.clear();
        self.queued.resize(atoms, false);
        self.weights.clear();
        self.weights.resize(atoms, 0);
        self.touched_counts.clear();
        self.touched_counts.resize(atoms, 0);
    }

    fn push(&mut self, cell: u32) {
        if !self.queued[cell as usize] {
            self.queued[cell as usize] = true;
            self.queue.push(cell);
        }
    }

    /// Notes all cells for refinement.
    pub(super) fn push_all(&mut self, partition: &Partition) {
        let mut cell = 0;
        while (cell as usize) < partition.order.len() {
            self.push(cell);
            cell += partition.size_of(cell);
        }
    }

    /// Refines until the work list is empty; returns a number that is equal
    /// for equal courses of the refinement, whatever the atom numbers.
    pub(super) fn refine(&mut self, molecule: &Molecule, partition: &mut Partition) -> u64 {
        let mut trace = Trace::default();
        let mut next = 0;
        while next < self.queue.len() && !partition.is_discrete() {
            let cell = self.queue[next];
            next += 1;
            self.queued[cell as usize] = false;
            self.split_by_bonds_into(molecule, partition, cell, &mut trace);
        }
        for &cell in &self.queue[next..] {
            self.queued[cell as usize] = false;
        }
        self.queue.clear();
        trace.add(u64::from(partition.cell_count()));
        trace.0
    }

    fn split_by_bonds_into(
        &mut self,
        molecule: &Molecule,
        partition: &mut Partition,
        splitter: u32,
        trace: &mut Trace,
    ) {
        self.splitter.clear();
        self.splitter.extend_from_slice(partition.members(splitter));
        for &atom in &self.splitter {
            let neighbors = molecule.neighbors(atom);
            self.work += neighbors.len() as u64;
            for neighbor in neighbors {
                let cell = partition.cell[neighbor.atom as usize];
                if partition.size_of(cell) == 1 {
                    continue;
                }
                let weight = &mut self.weights[neighbor.atom as usize];
                if *weight == 0 {
                    self.touched.push(neighbor.atom);
                    let count = &mut self.touched_counts[cell as usize];
                    if *count == 0 {
                        self.touched_cells.push(cell);
                    }
                    // Touched atoms gather at the end of their cell.
                    let end = cell + partition.size_of(cell) - 1 - *count;
                    *count += 1;
                    partition.swap(partition.place[neighbor.atom as usize], end);
                }
                *weight += 1 << (4 * (neighbor.order as u16 - 1));
            }
        }
        if self.touched.is_empty() {
            return;
        }
        self.touched_cells.sort_unstable();
        let touched_cells = std::mem::take(&mut self.touched_cells);
        for &cell in &touched_cells {
            self.split_cell(partition, cell, splitter, trace);
        }
        self.touched_cells = touched_cells;
        self.touched_cells.clear();
        for &atom in &self.touched {
            self.weights[atom as usize] = 0;
        }
        self.touched.clear();
    }

    fn split_cell(
        &mut self,
        partition: &mut Partition,
        cell: u32,
        splitter: u32,
        trace: &mut Trace,
    ) {
        let first = cell as usize;
        let size = partition.size[first] as usize;
        let touched = std::mem::take(&mut self.touched_counts[first]) as usize;
        let begin = first + size - touched;
        let weights = &self.weights;
        let weight_of = |atom: u32| weights[atom as usize];
        partition.order[begin..first + size].sort_unstable_by_key(|&atom| weight_of(atom));
        let lightest = weight_of(partition.order[begin]);
        if begin == first && lightest == weight_of(partition.order[first + size - 1]) {
            for position in begin..first + size {
                partition.place[partition.order[position] as usize] = position as u32;
            }
            trace.add(u64::from(splitter) << 32 | u64::from(cell));
            trace.add(u64::from(lightest));
            return;
        }
        // Untouched atoms keep the number of the cell.
        let was_queued = self.queued[first];
        let mut part = begin;
        partition.size[first] = (begin - first) as u32;
        partition.size[begin] = 0;
        let mut parts = 1 + u32::from(begin > first);
        for position in begin..first + size {
            let atom = partition.order[position];
            if position > begin && weight_of(atom) != weight_of(partition.order[position - 1]) {
                part = position;
                partition.size[part] = 0;
                parts += 1;
            }
            partition.place[atom as usize] = position as u32;
            partition.cell[atom as usize] = part as u32;
            partition.size[part] += 1;
        }
        partition.cells += parts - 1;
        let mut largest = first;
        let mut part = first;
        while part < first + size {
            if partition.size[part] > partition.size[largest] {
                largest = part;
            }
            part += partition.size[part] as usize;
        }
        let mut part = first;
        while part < first + size {
            trace.add(u64::from(splitter) << 32 | part as u64);
            trace.add(u64::from(self.weights[partition.order[part] as usize]));
            if was_queued || part != largest {
                self.push(part as u32);
            }
            part += partition.size[part] as usize;
        }
    }
}

/// Running hash of a refinement.
#[derive(Default)]
struct Trace(u64);

impl Trace {
    fn add(&mut self, value: u64) {
        self.0 = (self.0.rotate_left(5) ^ value).wrapping_mul(0x517c_c1b7_2722_0a95);
    }
}
