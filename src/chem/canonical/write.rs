//! Writes the SMILES of a molecule whose atoms have an order.
//!
//! The text begins at the first atom. Multiple bonds are followed before single
//! ones, so ring bonds are single where possible; short branches come before
//! long ones; ring numbers are used again. Aromatic atoms are lower case,
//! brackets stand only where a reader would otherwise see another atom.

use std::fmt::Write as _;

use super::marks::Kept;
use crate::chem::molecule::Geometry;
use crate::chem::smiles::NONE;
use crate::chem::valence::{allowed, implicit};
use crate::chem::{Atom, BondOrder, Element, Molecule};

/// Scratch of the writer.
#[derive(Debug, Default)]
pub(super) struct Writer {
    /// Neighbor and bond, by atom, in the order in which they are followed.
    followed: Vec<(u32, u32)>,
    cursor: Vec<u32>,
    /// Parent atom and bond in the tree of the text.
    parents: Vec<(u32, u32)>,
    /// Place of each atom in the first walk, later in the text; [`NONE`] before.
    times: Vec<u32>,
    walked: Vec<u32>,
    stack: Vec<u32>,
    /// Atoms in the branch that begins with an atom.
    sizes: Vec<u32>,
    children: Vec<(u32, bool, u32, u32)>,
    items: Vec<Item>,
    /// Ring number of each bond while it is open.
    numbers: Vec<u32>,
    used: Vec<bool>,
    released: Vec<u32>,
    /// Direction of each bond, `/` 1 or `\` −1, as it is printed.
    directions: Vec<i8>,
    /// Direction of the hydrogen to be printed at an atom, 0 without.
    hydrogen_directions: Vec<i8>,
    ligands: Vec<u32>,
}

#[derive(Clone, Copy, Debug)]
enum Item {
    Atom(u32),
    Hydrogen(HydrogenText),
    Open,
    Close,
}

/// A hydrogen that is written as an atom.
#[derive(Clone, Copy, Debug)]
struct HydrogenText {
    mass_number: u8,
    direction: i8,
}

impl Writer {
    /// Appends the SMILES to `text`: with isotopes and marks if `kept` is
    /// given, the constitution alone otherwise.
    pub(super) fn write(
        &mut self,
        molecule: &Molecule,
        order: &[u32],
        kept: Option<&Kept>,
        text: &mut String,
    ) {
        let with_identity = kept.is_some();
        if let [hydrogen] = molecule.atoms()
            && hydrogen.element == Element::H
        {
            write_h2(hydrogen, with_identity, text);
            return;
        }
        self.follow(molecule, order);
        self.walk(molecule, order[0]);
        self.directions.clear();
        self.hydrogen_directions.clear();
        if let Some(kept) = kept
            && !kept.geometries.is_empty()
        {
            self.lay_out(molecule, order[0]);
            self.direct(molecule, kept);
        }
        self.write_text(molecule, order[0], kept, text);
    }

    /// Sorts neighbors: multiple bonds first, then by the order of the atoms.
    fn follow(&mut self, molecule: &Molecule, order: &[u32]) {
        self.followed.clear();
        self.followed.resize(molecule.neighbors.len(), (0, 0));
        self.cursor.clear();
        self.cursor
            .extend_from_slice(&molecule.neighbor_starts[..order.len()]);
        let has_multiple_bonds = molecule
            .bonds()
            .iter()
            .any(|bond| matches!(bond.order, BondOrder::Double | BondOrder::Triple));
        for multiple in [true, false] {
            if multiple && !has_multiple_bonds {
                continue;
            }
            for &atom in order {
                for neighbor in molecule.neighbors(atom) {
                    if multiple == matches!(neighbor.order, BondOrder::Double | BondOrder::Triple) {
                        let slot = &mut self.cursor[neighbor.atom as usize];
                        self.followed[*slot as usize] = (atom, neighbor.bond);
                        *slot += 1;
                    }
                }
            }
        }
    }

    /// Depth-first walk: tree of the text, sizes of its branches.
    fn walk(&mut self, molecule: &Molecule, root: u32) {
        let atoms = molecule.atoms().len();
        self.cursor.clear();
        self.cursor
            .extend_from_slice(&molecule.neighbor_starts[..atoms]);
        self.parents.clear();
        self.parents.resize(atoms, (NONE, NONE));
        self.times.clear();
        self.times.resize(atoms, NONE);
        self.walked.clear();
        self.stack.clear();
        self.stack.push(root);
        self.times[root as usize] = 0;
        self.walked.push(root);
        while let Some(&atom) = self.stack.last() {
            let cursor = &mut self.cursor[atom as usize];
            if *cursor == molecule.neighbor_starts[atom as usize + 1] {
                self.stack.pop();
                continue;
            }
            let (next, bond) = self.followed[*cursor as usize];
            *cursor += 1;
            if self.times[next as usize] == NONE {
                self.times[next as usize] = self.walked.len() as u32;
                self.parents[next as usize] = (atom, bond);
                self.walked.push(next);
                self.stack.push(next);
            }
        }
        self.sizes.clear();
        self.sizes.resize(atoms, 1);
        for &atom in self.walked[1..].iter().rev() {
            let (parent, _) = self.parents[atom as usize];
            self.sizes[parent as usize] += self.sizes[atom as usize];
        }
    }

    fn is_tree_bond(&self, from: u32, to: u32, bond: u32) -> bool {
        self.parents[to as usize] == (from, bond) || self.parents[from as usize] == (to, bond)
    }

    /// Puts the branches of an atom on the stack of items, last one first, and
    /// lists its ligands in the order of the text behind those in `ligands`.
    fn branch(&mut self, molecule: &Molecule, atom: u32, order_of_ligands: bool, isotopes: bool) {
        self.children.clear();
        let start = molecule.neighbor_starts[atom as usize] as usize;
        let end = molecule.neighbor_starts[atom as usize + 1] as usize;
        for place in start..end {
            let (next, bond) = self.followed[place];
            if self.parents[next as usize] == (atom, bond) {
                let multiple = matches!(
                    molecule.bonds()[bond as usize].order,
                    BondOrder::Double | BondOrder::Triple
                );
                self.children
                    .push((self.sizes[next as usize], !multiple, place as u32, next));
            }
        }
        self.children.sort_unstable();
        let here = &molecule.atoms()[atom as usize];
        let direction = self
            .hydrogen_directions
            .get(atom as usize)
            .copied()
            .unwrap_or(0);
        let (mut deuterium, tritium) = if isotopes {
            (here.deuterium, here.tritium)
        } else {
            (0, 0)
        };
        let mut mass_number = 1;
        if direction != 0 {
            // The only hydrogen of the atom.
            mass_number = 1 + here.deuterium + 2 * here.tritium;
            deuterium = 0;
        }
        let hydrogens = if direction != 0 {
            1
        } else {
            deuterium + tritium
        };
        let is_last_hydrogen = |hydrogen: u8| hydrogen + 1 == hydrogens;
        for (index, &(_, _, _, next)) in self.children.iter().enumerate().rev() {
            let is_last = index + 1 == self.children.len();
            if !is_last {
                self.items.push(Item::Close);
            }
            self.items.push(Item::Atom(next));
            if !is_last {
                self.items.push(Item::Open);
            }
        }
        for hydrogen in (0..hydrogens).rev() {
            let is_last = self.children.is_empty() && is_last_hydrogen(hydrogen);
            if !is_last {
                self.items.push(Item::Close);
            }
            let mass_number = match direction {
                0 if hydrogen < deuterium => 2,
                0 => 3,
                _ => mass_number,
            };
            self.items.push(Item::Hydrogen(HydrogenText {
                mass_number,
                direction,
            }));
            if !is_last {
                self.items.push(Item::Open);
            }
        }
        if order_of_ligands {
            self.ligands.extend((0..hydrogens).map(|_| NONE));
            self.ligands
                .extend(self.children.iter().map(|child| child.3));
        }
    }

    /// Walks over the text without writing: `times` become places in the text.
    fn lay_out(&mut self, molecule: &Molecule, root: u32) {
        self.items.clear();
        self.items.push(Item::Atom(root));
        let mut time = 0;
        while let Some(item) = self.items.pop() {
            if let Item::Atom(atom) = item {
                self.times[atom as usize] = time;
                time += 1;
                self.branch(molecule, atom, false, true);
            }
        }
    }

    fn write_text(
        &mut self,
        molecule: &Molecule,
        root: u32,
        kept: Option<&Kept>,
        text: &mut String,
    ) {
        let isotopes = kept.is_some();
        self.numbers.clear();
        self.numbers.resize(molecule.bonds().len(), NONE);
        self.used.clear();
        self.items.clear();
        self.items.push(Item::Atom(root));
        while let Some(item) = self.items.pop() {
            match item {
                Item::Open => text.push('('),
                Item::Close => text.push(')'),
                Item::Hydrogen(hydrogen) => {
                    push_direction(hydrogen.direction, text);
                    text.push_str(match hydrogen.mass_number {
                        1 => "[H]",
                        2 => "[2H]",
                        _ => "[3H]",
                    });
                }
                Item::Atom(atom) => self.write_atom(molecule, atom, kept, isotopes, text),
            }
        }
    }

    fn write_atom(
        &mut self,
        molecule: &Molecule,
        atom: u32,
        kept: Option<&Kept>,
        isotopes: bool,
        text: &mut String,
    ) {
        let (parent, parent_bond) = self.parents[atom as usize];
        if parent != NONE {
            self.write_bond(molecule, parent_bond, text);
        }
        let center = kept.and_then(|kept| kept.centers.iter().find(|c| c.atom == atom));
        self.ligands.clear();
        if parent != NONE {
            self.ligands.push(parent);
        }
        let here = &molecule.atoms()[atom as usize];
        let hydrogen_is_written = isotopes && here.deuterium + here.tritium > 0 && center.is_some();
        if center.is_some_and(|center| center.ligands.contains(&NONE))
            && here.hydrogens > 0
            && !hydrogen_is_written
        {
            self.ligands.push(NONE);
        }
        // Ring numbers follow the symbol, which needs the order of the ligands.
        let start = molecule.neighbor_starts[atom as usize] as usize;
        let end = molecule.neighbor_starts[atom as usize + 1] as usize;
        let has_ring_numbers = here.in_ring;
        if has_ring_numbers && center.is_some() {
            for place in start..end {
                let (other, bond) = self.followed[place];
                if !self.is_tree_bond(atom, other, bond) {
                    self.ligands.push(other);
                }
            }
        }
        self.branch(molecule, atom, center.is_some(), isotopes);
        let has_lone_pair = here.hydrogens == 0;
        let sense = center.map(|center| {
            if center.ligands.contains(&NONE) && has_lone_pair {
                // A lone pair stands behind the first neighbor.
                self.ligands.insert(1, NONE);
            }
            is_even(&center.ligands, &self.ligands)
        });
        let hydrogens_apart = if self
            .hydrogen_directions
            .get(atom as usize)
            .is_some_and(|&d| d != 0)
        {
            1
        } else if isotopes {
            here.deuterium + here.tritium
        } else {
            0
        };
        write_symbol(molecule, atom, isotopes, hydrogens_apart, sense, text);
        if !has_ring_numbers {
            return;
        }
        self.released.clear();
        for place in start..end {
            let (other, bond) = self.followed[place];
            if self.is_tree_bond(atom, other, bond) {
                continue;
            }
            let number = self.numbers[bond as usize];
            if number == NONE {
                let free = self.used.iter().position(|used| !used);
                let number = free.unwrap_or(self.used.len());
                if number == self.used.len() {
                    self.used.push(false);
                }
                self.used[number] = true;
                self.numbers[bond as usize] = number as u32;
                self.write_bond(molecule, bond, text);
                write_number(number as u32 + 1, text);
            } else {
                write_number(number + 1, text);
                self.released.push(number);
            }
        }
        for &number in &self.released {
            self.used[number as usize] = false;
        }
    }

    fn write_bond(&self, molecule: &Molecule, index: u32, text: &mut String) {
        let bond = &molecule.bonds()[index as usize];
        match bond.order {
            BondOrder::Aromatic => {}
            BondOrder::Double => text.push('='),
            BondOrder::Triple => text.push('#'),
            BondOrder::Single => match self.directions.get(index as usize).copied() {
                None | Some(0) => {
                    if bond
                        .atoms
                        .iter()
                        .all(|&atom| molecule.atoms()[atom as usize].aromatic)
                    {
                        text.push('-');
                    }
                }
                Some(direction) => push_direction(direction, text),
            },
        }
    }

    /// Gives directions to bonds beside double bonds with known geometry.
    ///
    /// `times` are places in the text.
    fn direct(&mut self, molecule: &Molecule, kept: &Kept) {
        self.directions.resize(molecule.bonds().len(), 0);
        self.hydrogen_directions.resize(molecule.atoms().len(), 0);
        let mut open: Vec<Geometry> = kept.geometries.clone();
        for geometry in &mut open {
            if self.times[geometry.ends[0] as usize] > self.times[geometry.ends[1] as usize] {
                geometry.ends.swap(0, 1);
                geometry.ligands.swap(0, 1);
            }
        }
        open.sort_by_key(|geometry| std::cmp::Reverse(self.times[geometry.ends[0] as usize]));
        let carriers: Vec<[u32; 2]> = open
            .iter()
            .map(|geometry| [0, 1].map(|end| self.carrier(molecule, &open, geometry, end)))
            .collect();
        let mut is_carrier = vec![false; molecule.bonds().len()];
        for (geometry, carriers) in open.iter().zip(&carriers) {
            for (end, &ligand) in carriers.iter().enumerate() {
                if let Some(bond) = bond_between(molecule, geometry.ends[end], ligand) {
                    is_carrier[bond as usize] = true;
                }
            }
        }
        let mut left: Vec<usize> = (0..open.len()).collect();
        while !left.is_empty() {
            // Double bonds that share a bond with a settled one go first.
            let at = left
                .iter()
                .rposition(|&index| {
                    (0..2).any(|end| {
                        self.side(molecule, &open[index], end, carriers[index][end]) != 0
                    })
                })
                .unwrap_or(left.len() - 1);
            let index = left.remove(at);
            let geometry = &open[index];
            let same_side = (0..2).fold(geometry.same_side, |same_side, end| {
                same_side == (carriers[index][end] == geometry.ligands[end])
            });
            let relation = if same_side { 1 } else { -1 };
            let [first, second] = carriers[index];
            let sides = match (
                self.side(molecule, geometry, 0, first),
                self.side(molecule, geometry, 1, second),
            ) {
                (0, 0) => {
                    // The one that is printed first gets `/`.
                    let is_before = first != NONE
                        && self.times[first as usize] < self.times[geometry.ends[0] as usize];
                    let side = if is_before { -1 } else { 1 };
                    [side, relation * side]
                }
                (side, 0) => [side, relation * side],
                (0, side) => [relation * side, side],
                // Both settled by neighbors: they agree, since the marks were
                // read from a line that states all of them at once.
                (first, second) => [first, second],
            };
            for end in 0..2 {
                let carrier = carriers[index][end];
                self.set_side(molecule, geometry.ends[end], carrier, sides[end]);
                // Where the other neighbor of the end carries a direction for
                // another double bond, it lies on the other side.
                if let Some(other) = other_ligand(molecule, geometry, end, carrier) {
                    let bond = bond_between(molecule, geometry.ends[end], other);
                    if bond.is_some_and(|bond| is_carrier[bond as usize]) {
                        self.set_side(molecule, geometry.ends[end], other, -sides[end]);
                    }
                }
            }
        }
    }

    /// The ligand whose bond carries the direction; [`NONE`] is the hydrogen.
    ///
    /// A bond that leads straight to another double bond without known geometry
    /// would seem to state that geometry as well, so it is avoided.
    fn carrier(
        &self,
        molecule: &Molecule,
        kept: &[Geometry],
        geometry: &Geometry,
        end: usize,
    ) -> u32 {
        let atom = geometry.ends[end];
        let others = || {
            molecule
                .neighbors(atom)
                .iter()
                .filter(|neighbor| neighbor.atom != geometry.ends[1 - end])
        };
        let misleads = |ligand: u32| {
            molecule.neighbors(ligand).iter().any(|neighbor| {
                let is_open = neighbor.order == BondOrder::Double
                    && !kept.iter().any(|other| other.bond == neighbor.bond);
                is_open
                    && molecule.neighbors(neighbor.atom).iter().any(|beyond| {
                        kept.iter()
                            .any(|other| other.ends.contains(&beyond.atom) && beyond.atom != ligand)
                    })
            })
        };
        let best = others()
            .min_by_key(|neighbor| (misleads(neighbor.atom), self.times[neighbor.atom as usize]));
        match best {
            Some(best)
                if misleads(best.atom)
                    && others().count() == 1
                    && molecule.atoms()[atom as usize].hydrogens == 1 =>
            {
                NONE
            }
            Some(best) => best.atom,
            None => NONE,
        }
    }

    /// On which side of a double bond a ligand of one end is known to lie; 0
    /// where it is not known yet.
    fn side(&self, molecule: &Molecule, geometry: &Geometry, end: usize, ligand: u32) -> i8 {
        let atom = geometry.ends[end];
        let own = if ligand == NONE {
            self.hydrogen_directions[atom as usize]
        } else {
            self.bond_side(molecule, atom, ligand)
        };
        match own {
            0 => other_ligand(molecule, geometry, end, ligand)
                .map_or(0, |other| -self.bond_side(molecule, atom, other)),
            own => own,
        }
    }

    fn bond_side(&self, molecule: &Molecule, end: u32, ligand: u32) -> i8 {
        match bond_between(molecule, end, ligand) {
            Some(bond) => self.directions[bond as usize] * self.sign(end, ligand),
            None => 0,
        }
    }

    fn set_side(&mut self, molecule: &Molecule, end: u32, ligand: u32, side: i8) {
        if ligand == NONE {
            self.hydrogen_directions[end as usize] = side;
        } else if let Some(bond) = bond_between(molecule, end, ligand) {
            self.directions[bond as usize] = side * self.sign(end, ligand);
        }
    }

    /// `/` says that what is printed second lies above what is printed first.
    fn sign(&self, end: u32, ligand: u32) -> i8 {
        if self.times[ligand as usize] > self.times[end as usize] {
            1
        } else {
            -1
        }
    }
}

/// The neighbor of one end of a double bond that is neither the other end nor `ligand`.
fn other_ligand(molecule: &Molecule, geometry: &Geometry, end: usize, ligand: u32) -> Option<u32> {
    molecule
        .neighbors(geometry.ends[end])
        .iter()
        .map(|neighbor| neighbor.atom)
        .find(|&atom| atom != geometry.ends[1 - end] && atom != ligand)
}

fn bond_between(molecule: &Molecule, a: u32, b: u32) -> Option<u32> {
    molecule
        .neighbors(a)
        .iter()
        .find(|neighbor| neighbor.atom == b)
        .map(|neighbor| neighbor.bond)
}

fn push_direction(direction: i8, text: &mut String) {
    match direction {
        1 => text.push('/'),
        -1 => text.push('\\'),
        _ => {}
    }
}

fn write_h2(hydrogen: &Atom, with_isotopes: bool, text: &mut String) {
    let bound = 1 + u16::from(hydrogen.deuterium) + 2 * u16::from(hydrogen.tritium);
    for mass_number in [hydrogen.isotope.unwrap_or(1), bound] {
        text.push_str(match mass_number {
            2 if with_isotopes => "[2H]",
            3 if with_isotopes => "[3H]",
            _ => "[H]",
        });
    }
}

fn write_number(number: u32, text: &mut String) {
    let result = match number {
        0..=9 => write!(text, "{number}"),
        10..=99 => write!(text, "%{number}"),
        // No reader of SMILES has to know this; it keeps the text unique.
        _ => write!(text, "%({number})"),
    };
    result.expect("writing to a string does not fail");
}

/// Writes an atom. `sense`: for a tetrahedral mark, whether the ligands of the
/// text are an even permutation of those of the mark.
fn write_symbol(
    molecule: &Molecule,
    index: u32,
    isotopes: bool,
    hydrogens_apart: u8,
    sense: Option<bool>,
    text: &mut String,
) {
    let atom = &molecule.atoms()[index as usize];
    let isotope = atom.isotope.filter(|_| isotopes);
    let symbol = atom.element.symbol();
    let is_bare = isotope.is_none()
        && sense.is_none()
        && atom.charge == 0
        && reads_without_brackets(molecule, index, hydrogens_apart);
    if is_bare {
        push_symbol(symbol, atom.aromatic, text);
        return;
    }
    text.push('[');
    if let Some(mass_number) = isotope {
        write!(text, "{mass_number}").expect("writing to a string does not fail");
    }
    push_symbol(symbol, atom.aromatic, text);
    match sense {
        Some(true) => text.push('@'),
        Some(false) => text.push_str("@@"),
        None => {}
    }
    match atom.hydrogens - hydrogens_apart {
        0 => {}
        1 => text.push('H'),
        more => write!(text, "H{more}").expect("writing to a string does not fail"),
    }
    match atom.charge {
        0 => {}
        1 => text.push('+'),
        -1 => text.push('-'),
        charge => write!(text, "{charge:+}").expect("writing to a string does not fail"),
    }
    text.push(']');
}

fn push_symbol(symbol: &str, aromatic: bool, text: &mut String) {
    if aromatic {
        text.extend(symbol.chars().map(|letter| letter.to_ascii_lowercase()));
    } else {
        text.push_str(symbol);
    }
}

/// Whether the bare symbol is read as this atom with its hydrogens.
fn reads_without_brackets(molecule: &Molecule, index: u32, hydrogens_apart: u8) -> bool {
    let atom = &molecule.atoms()[index as usize];
    if matches!(atom.element, Element::Si | Element::H) {
        return false;
    }
    let hydrogens = atom.hydrogens - hydrogens_apart;
    let mut bonds = hydrogens_apart;
    let mut has_ring_double_bond = false;
    let mut has_multiple_bond = false;
    for neighbor in molecule.neighbors(index) {
        let kekule = molecule.bonds()[neighbor.bond as usize].kekule;
        if neighbor.order == BondOrder::Aromatic {
            bonds += 1;
            has_ring_double_bond |= kekule == 2;
        } else {
            bonds += kekule;
            has_multiple_bond |= kekule > 1;
        }
    }
    if atom.aromatic && !has_multiple_bond {
        if atom.element == Element::C && bonds <= 3 {
            return has_ring_double_bond && hydrogens == 3 - bonds;
        }
        let valences = implicit(atom.element);
        let lacks_bond = !valences.contains(&bonds) && valences.contains(&(bonds + 1));
        return hydrogens == 0
            && lacks_bond == has_ring_double_bond
            && allowed(atom.element, 0).contains(&(bonds + u8::from(lacks_bond)));
    }
    implicit(atom.element)
        .iter()
        .find(|&&valence| valence >= bonds)
        .is_some_and(|valence| valence - bonds == hydrogens)
}

/// Whether two orders of the same four ligands differ by an even permutation.
fn is_even(from: &[u32; 4], to: &[u32]) -> bool {
    debug_assert_eq!(to.len(), 4, "a center has four ligands in the text");
    let mut places = [0; 4];
    for (place, ligand) in places.iter_mut().zip(from) {
        *place = to.iter().position(|other| other == ligand).unwrap_or(0);
    }
    let inversions = (0..4)
        .flat_map(|i| (i + 1..4).map(move |j| (i, j)))
        .filter(|&(i, j)| places[i] > places[j])
        .count();
    inversions % 2 == 0
}
