//! The molecules of the fit, as far as likeness to them goes.
//!
//! Every molecule of the fit is near enough to any other to count, so that all of
//! them are gone through for each candidate. They are kept in tiles, in an order
//! in which the molecules of one quantity stand together: a quantity asks for
//! its own tiles, which are worked out once a candidate, many molecules at a time.

use super::described::Described;
use super::model::{Model, NEAR, similarity_f32};
use super::quantity::Quantity;
use super::table::EnvironmentTable;

/// Molecules that are worked on side by side.
const BLOCK: usize = 32;

/// Blocks that are worked out together once one of them is asked for.
const BLOCKS_IN_TILE: usize = 16;

const TILE: usize = BLOCK * BLOCKS_IN_TILE;

/// Sums that a correction is added up in.
const LANES: usize = 16;

/// The share of the molecules from which on an environment is kept for every one
/// of them, which is faster to go through than a list.
const DENSE_SHARE: f64 = 0.1;

/// The molecules of a fit.
#[derive(Clone, Debug, Default)]
pub struct Support {
    /// Numbers of the molecules, by place.
    numbers: Vec<u32>,
    /// Where the coordinates of an environment are, by position.
    coordinates: Vec<Coordinate>,
    tiles: Vec<Tile>,
    /// The parts of molecules in the corrections, by quantity.
    parts: [Vec<PartBlock>; Quantity::COUNT],
}

/// Among which an environment is kept, and at which place there.
#[derive(Clone, Copy, Debug)]
enum Coordinate {
    Dense(u32),
    Sparse(u32),
}

/// Coordinates of some molecules.
#[derive(Clone, Debug)]
struct Tile {
    /// Squared lengths; infinite where there is no molecule.
    squares: [f32; TILE],
    /// By block and dense environment.
    dense: Vec<[f32; BLOCK]>,
    /// Where the entries of a sparse environment begin; one more for the end.
    starts: Vec<u32>,
    /// Place in the tile and coordinate, by sparse environment.
    entries: Vec<(u16, f32)>,
}

/// The parts of a block's molecules in a correction, 0 for those that have none.
#[derive(Clone, Debug)]
struct PartBlock {
    block: u32,
    parts: [f32; BLOCK],
}

/// How like one molecule is to those of the fit, as far as it was asked.
#[derive(Clone, Debug, Default)]
pub(super) struct Likeness {
    /// Similarities, by place; of use where the tile is done.
    similarities: Vec<[f32; BLOCK]>,
    /// Whether a tile is done.
    done: Vec<bool>,
    /// Molecules near enough to count as relatives, by place, with squared distances.
    near: Vec<(u32, f32)>,
    /// The molecule's own coordinates, times −2, and the sum of their squares.
    dense: Vec<(u32, f32)>,
    sparse: Vec<(u32, f32)>,
    square: f32,
    is_begun: bool,
}

impl Likeness {
    /// Forgets the molecule.
    pub(super) fn clear(&mut self) {
        self.is_begun = false;
    }
}

impl Support {
    /// Collects the coordinates of molecules; `molecules` are in the order of their numbers.
    pub fn new(table: &EnvironmentTable, molecules: &[Described]) -> Self {
        Self::in_order(table, molecules, (0..molecules.len() as u32).collect())
    }

    /// The same with what the molecules contribute to each quantity; `models` are in
    /// the order of [`Quantity::ALL`].
    pub(super) fn of_models(
        table: &EnvironmentTable,
        molecules: &[Described],
        models: [&Model; Quantity::COUNT],
    ) -> Self {
        let mut support = Self::in_order(table, molecules, together(molecules.len(), models));
        let mut places = vec![0; molecules.len()];
        for (place, &number) in support.numbers.iter().enumerate() {
            places[number as usize] = place;
        }
        support.parts = models.map(|model| {
            let mut parts: Vec<(usize, f32)> = model
                .support
                .iter()
                .map(|other| (places[other.molecule as usize], other.part))
                .collect();
            parts.sort_unstable_by_key(|part| part.0);
            let mut blocks: Vec<PartBlock> = Vec::new();
            for (place, part) in parts {
                let block = (place / BLOCK) as u32;
                if blocks.last().is_none_or(|last| last.block != block) {
                    blocks.push(PartBlock {
                        block,
                        parts: [0.0; BLOCK],
                    });
                }
                let last = blocks.last_mut().expect("one was pushed");
                // 0 says that the molecule is not in the fit
                last.parts[place % BLOCK] = if part == 0.0 { f32::MIN_POSITIVE } else { part };
            }
            blocks
        });
        support
    }

    fn in_order(table: &EnvironmentTable, molecules: &[Described], numbers: Vec<u32>) -> Self {
        let mut occurrences = vec![0_usize; table.entries().len()];
        for molecule in molecules {
            for &(position, _) in molecule.found() {
                let counts = table.entries()[position as usize].distance_weight > 0.0;
                occurrences[position as usize] += usize::from(counts);
            }
        }
        let dense_from = (DENSE_SHARE * molecules.len() as f64) as usize;
        let (mut dense, mut sparse) = (0, 0);
        let coordinates: Vec<Coordinate> = occurrences
            .into_iter()
            .map(|molecules| {
                let next = if molecules > dense_from {
                    &mut dense
                } else {
                    &mut sparse
                };
                let at = *next;
                *next += 1;
                match molecules > dense_from {
                    true => Coordinate::Dense(at),
                    false => Coordinate::Sparse(at),
                }
            })
            .collect();
        let tiles = numbers
            .chunks(TILE)
            .map(|of_tile| {
                let mut tile = Tile {
                    squares: [f32::INFINITY; TILE],
                    dense: vec![[0.0; BLOCK]; BLOCKS_IN_TILE * dense as usize],
                    starts: vec![0; sparse as usize + 1],
                    entries: Vec::new(),
                };
                let mut lists: Vec<(u32, u16, f32)> = Vec::new();
                for (place, &number) in of_tile.iter().enumerate() {
                    let mut square = 0.0;
                    let molecule = &molecules[number as usize];
                    molecule.each_coordinate(table, |position, coordinate| {
                        square += coordinate * coordinate;
                        match coordinates[position as usize] {
                            Coordinate::Dense(at) => {
                                let row = place / BLOCK * dense as usize + at as usize;
                                tile.dense[row][place % BLOCK] = coordinate;
                            }
                            Coordinate::Sparse(at) => {
                                lists.push((at, place as u16, coordinate));
                                tile.starts[at as usize + 1] += 1;
                            }
                        }
                    });
                    tile.squares[place] = square;
                }
                for at in 1..tile.starts.len() {
                    tile.starts[at] += tile.starts[at - 1];
                }
                tile.entries = vec![(0, 0.0); lists.len()];
                let mut next = tile.starts.clone();
                for (at, place, coordinate) in lists {
                    tile.entries[next[at as usize] as usize] = (place, coordinate);
                    next[at as usize] += 1;
                }
                tile
            })
            .collect();
        Self {
            numbers,
            coordinates,
            tiles,
            parts: Default::default(),
        }
    }

    /// Squared distance of a molecule to every one of the fit, by number.
    pub fn squared_distances_into(
        &self,
        table: &EnvironmentTable,
        described: &Described,
        squared: &mut Vec<f32>,
    ) {
        squared.clear();
        squared.resize(self.numbers.len(), 0.0);
        let mut likeness = Likeness::default();
        self.begin(table, described, &mut likeness);
        for (tile, numbers) in self.tiles.iter().zip(self.numbers.chunks(TILE)) {
            tile.squared_distances(&likeness, |block, distances| {
                let numbers = numbers.iter().skip(block * BLOCK);
                for (&number, &distance) in numbers.zip(distances) {
                    squared[number as usize] = distance;
                }
            });
        }
    }

    /// The correction of a quantity's sum, and the similarity to the most similar
    /// molecule of its fit.
    ///
    /// The molecules are summed up in [`LANES`] sums by the rest of their place, blocks in
    /// double precision since large parts cancel: the result does not depend on what else
    /// was asked before.
    pub(super) fn correction(
        &self,
        table: &EnvironmentTable,
        described: &Described,
        quantity: Quantity,
        likeness: &mut Likeness,
    ) -> (f64, f64) {
        if !likeness.is_begun {
            self.begin(table, described, likeness);
        }
        let parts = &self.parts[quantity as usize];
        let near = likeness.near.len();
        for of_block in parts {
            let tile = of_block.block as usize / BLOCKS_IN_TILE;
            if !likeness.done[tile] {
                self.work_out(tile, likeness);
            }
        }
        if likeness.near.len() > near {
            likeness.near.sort_unstable_by_key(|one| one.0);
        }
        let (sums, most) = add_parts(parts, &likeness.similarities);
        let sum = sums.iter().sum();
        let most = most.iter().fold(0.0, |most: f32, &one| most.max(one));
        (sum, f64::from(most))
    }

    /// Molecules near enough to count as relatives, by number, with squared
    /// distances; complete for quantities whose correction was asked for.
    pub(super) fn near<'a>(
        &'a self,
        likeness: &'a Likeness,
    ) -> impl Iterator<Item = (u32, f32)> + 'a {
        let near = likeness.near.iter();
        near.map(|&(place, squared)| (self.numbers[place as usize], squared))
    }

    /// Notes the coordinates of a molecule.
    fn begin(&self, table: &EnvironmentTable, described: &Described, likeness: &mut Likeness) {
        likeness.is_begun = true;
        likeness
            .similarities
            .resize(self.tiles.len() * BLOCKS_IN_TILE, [0.0; BLOCK]);
        likeness.done.clear();
        likeness.done.resize(self.tiles.len(), false);
        likeness.near.clear();
        likeness.dense.clear();
        likeness.sparse.clear();
        likeness.square = 0.0;
        described.each_coordinate(table, |position, coordinate| {
            likeness.square += coordinate * coordinate;
            let twice = -2.0 * coordinate;
            match self.coordinates[position as usize] {
                Coordinate::Dense(at) => likeness.dense.push((at, twice)),
                Coordinate::Sparse(at) => likeness.sparse.push((at, twice)),
            }
        });
    }

    fn work_out(&self, at: usize, likeness: &mut Likeness) {
        let first = at * BLOCKS_IN_TILE;
        let mut similarities = std::mem::take(&mut likeness.similarities);
        let mut near = std::mem::take(&mut likeness.near);
        self.tiles[at].squared_distances(likeness, |block, squared| {
            if least(squared) < NEAR {
                let place = ((first + block) * BLOCK) as u32;
                let these = (place..).zip(squared.iter().copied());
                near.extend(these.filter(|&(_, squared)| squared < NEAR));
            }
            put_similarities(squared, &mut similarities[first + block]);
        });
        likeness.similarities = similarities;
        likeness.near = near;
        likeness.done[at] = true;
    }
}

impl Tile {
    /// Squared distances of a molecule to those of each block.
    fn squared_distances(&self, likeness: &Likeness, mut each: impl FnMut(usize, &[f32; BLOCK])) {
        let mut sums = self.squares;
        for &(at, twice) in &likeness.sparse {
            let entries = self.starts[at as usize] as usize..self.starts[at as usize + 1] as usize;
            for &(place, theirs) in &self.entries[entries] {
                sums[usize::from(place)] += twice * theirs;
            }
        }
        let rows = self.dense.len() / BLOCKS_IN_TILE;
        let (blocks, _) = sums.as_chunks::<BLOCK>();
        for (block, sums) in blocks.iter().enumerate() {
            let rows = &self.dense[block * rows..(block + 1) * rows];
            let squared = squared_distances(sums, rows, &likeness.dense, likeness.square);
            each(block, &squared);
        }
    }
}

/// The squared distances of a block that follow from its sums so far and the dense
/// coordinates; a function of its own, so that the sums stay in registers.
#[inline(never)]
fn squared_distances(
    sums: &[f32; BLOCK],
    rows: &[[f32; BLOCK]],
    own: &[(u32, f32)],
    own_square: f32,
) -> [f32; BLOCK] {
    let mut squared = *sums;
    for &(at, twice) in own {
        for (squared, theirs) in squared.iter_mut().zip(&rows[at as usize]) {
            *squared += twice * theirs;
        }
    }
    for squared in &mut squared {
        *squared = (*squared + own_square).max(0.0);
    }
    squared
}

/// The similarities that belong to squared distances.
#[inline(never)]
fn put_similarities(squared: &[f32; BLOCK], similarities: &mut [f32; BLOCK]) {
    for (similarity, &squared) in similarities.iter_mut().zip(squared) {
        *similarity = similarity_f32(squared);
    }
}

/// The least number of a block.
#[inline(never)]
fn least(of: &[f32; BLOCK]) -> f32 {
    let mut least = [f32::INFINITY; 8];
    for chunk in of.as_chunks::<8>().0 {
        for (least, &one) in least.iter_mut().zip(chunk) {
            *least = if one < *least { one } else { *least };
        }
    }
    least.into_iter().fold(f32::INFINITY, f32::min)
}

/// The lanes of a correction, and those of the greatest similarity.
#[inline(never)]
fn add_parts(parts: &[PartBlock], similarities: &[[f32; BLOCK]]) -> ([f64; LANES], [f32; LANES]) {
    let mut sums = [0.0_f64; LANES];
    let mut most = [0.0_f32; LANES];
    for PartBlock { block, parts } in parts {
        let (parts, _) = parts.as_chunks::<LANES>();
        let (similarities, _) = similarities[*block as usize].as_chunks::<LANES>();
        let mut of_block = [0.0_f32; LANES];
        for (parts, similarities) in parts.iter().zip(similarities) {
            let pairs = parts.iter().zip(similarities);
            for ((sum, most), (&part, &similarity)) in of_block.iter_mut().zip(&mut most).zip(pairs)
            {
                *sum += part * similarity;
                let here = if part != 0.0 { similarity } else { 0.0 };
                *most = if here > *most { here } else { *most };
            }
        }
        for (sum, of_block) in sums.iter_mut().zip(of_block) {
            *sum += f64::from(of_block);
        }
    }
    (sums, most)
}

/// Numbers of molecules in an order in which those of one fit stand together: split
/// by the quantity with the most molecules that is asked first, then by the rarest.
fn together(molecules: usize, models: [&Model; Quantity::COUNT]) -> Vec<u32> {
    let mut fits: Vec<&Model> = models.to_vec();
    fits.sort_by_key(|model| model.support.len());
    // what most others rest on comes first, so that it can be had alone
    let first = |model: &&Model| model.quantity != Quantity::BoilingPoint;
    fits.sort_by_key(first);
    let mut absent = vec![u32::MAX; molecules];
    for (bit, model) in fits.iter().rev().enumerate() {
        for other in &model.support {
            absent[other.molecule as usize] &= !(1 << bit);
        }
    }
    let mut numbers: Vec<u32> = (0..molecules as u32).collect();
    numbers.sort_by_key(|&number| absent[number as usize]);
    numbers
}
