//! From a line of text to a molecule.

use super::aromaticity::{Aromaticity, check_unambiguous};
use super::kekule::{Kekule, Spelling};
use super::normalise::{
    aromatic_n_oxides, double_bonded_oxygen, isocyanide_carbon, normalise, settle_orders,
};
use super::rings::Rings;
use super::smiles::{Fault, Line, LineOrder, NONE, Place, locate};
use super::stereo::keep_marks;
use super::valence::{allowed, implicit};
use super::weights::is_listed_isotope;
use super::{Atom, Bond, BondOrder, Element, Molecule, SmilesError, SmilesFault};

/// Reads SMILES into molecules; holds the scratch memory, so keep one per thread.
#[derive(Debug, Default)]
pub struct Reader {
    line: Line,
    /// Atom of the molecule for each atom of the line.
    index: Vec<u32>,
    /// Parent atom and bond in the spanning tree of the line.
    parents: Vec<(u32, u32)>,
    cursor: Vec<u32>,
    spelling: Spelling,
    kekule: Kekule,
    rings: Rings,
    aromaticity: Aromaticity,
}

impl Reader {
    /// A reader with empty scratch.
    pub fn new() -> Self {
        Self::default()
    }

    /// Reads one line of SMILES.
    ///
    /// # Errors
    ///
    /// Those of [`Reader::read_into`].
    pub fn read(&mut self, text: &str) -> Result<Molecule, SmilesError> {
        let mut molecule = Molecule::default();
        self.read_into(text, &mut molecule)?;
        Ok(molecule)
    }

    /// Reads one line of SMILES into a molecule whose memory is used again.
    ///
    /// The line holds the SMILES and nothing else, blanks included. Atom
    /// classes (`[CH4:1]`) are read and forgotten.
    ///
    /// # Errors
    ///
    /// [`SmilesError`] with the column where the line cannot be read, describes
    /// no possible neutral molecule of one component, or is larger than
    /// [`MAX_LINE_BYTES`](super::MAX_LINE_BYTES) or
    /// [`MAX_HEAVY_ATOMS`](super::MAX_HEAVY_ATOMS). The molecule is empty then.
    ///
    /// # Complexity
    ///
    /// Linear for acyclic molecules; with fused rings at most quadratic.
    pub fn read_into(&mut self, text: &str, molecule: &mut Molecule) -> Result<(), SmilesError> {
        molecule.clear();
        self.line.read(text)?;
        self.build(molecule).map_err(|fault| {
            molecule.clear();
            locate(text, fault)
        })
    }

    fn build(&mut self, molecule: &mut Molecule) -> Result<(), Fault> {
        self.check_net_charge()?;
        self.place_atoms(molecule)?;
        self.place_bonds(molecule)?;
        molecule.link(&mut self.cursor);
        let has_rings = molecule.bonds.len() >= molecule.atoms.len();
        if has_rings {
            self.check_doubled_rings(molecule)?;
            Rings::mark(molecule, &self.parents);
        }
        if self.line.has_lower_case {
            self.offer_aromatic_bonds(molecule);
        }
        if has_rings {
            molecule.refresh_neighbors();
        }
        for (atom, sum) in self.spelling.sums.iter_mut().enumerate() {
            *sum = molecule
                .neighbors(atom as u32)
                .iter()
                .map(|neighbor| molecule.bonds[neighbor.bond as usize].kekule)
                .fold(0, u8::saturating_add);
        }
        if self.line.has_lower_case {
            aromatic_n_oxides(molecule, &mut self.spelling);
            self.kekule.assign(molecule, &mut self.spelling)?;
        }
        let needs_form = self.add_hydrogens(molecule)?;
        if needs_form {
            normalise(molecule, &mut self.spelling);
        }
        self.check_valences(molecule)?;
        self.rings.clear();
        if has_rings {
            self.rings.find(molecule);
            self.aromaticity
                .perceive(molecule, &self.rings, &self.spelling);
            self.aromaticity.prefer_inside(molecule);
            if self.line.has_lower_case {
                check_unambiguous(molecule, &self.kekule, &self.spelling)?;
            }
        }
        settle_orders(molecule);
        molecule.refresh_neighbors();
        if self.line.has_turns || self.line.has_directions {
            keep_marks(&self.line, &self.index, &self.rings, molecule)?;
        }
        Ok(())
    }

    fn check_net_charge(&self) -> Result<(), Fault> {
        if !self.line.has_charges {
            return Ok(());
        }
        let charge: i32 = self.line.atoms.iter().map(|a| i32::from(a.charge)).sum();
        if charge == 0 {
            return Ok(());
        }
        let atom = self
            .line
            .atoms
            .iter()
            .position(|atom| i32::from(atom.charge).signum() == charge.signum())
            .expect("a sum has the sign of one of its terms");
        Err((Place::Atom(atom as u32), SmilesFault::NetCharge { charge }))
    }

    /// Atoms of the molecule: heavy ones, and one for H2. Hydrogens are folded.
    fn place_atoms(&mut self, molecule: &mut Molecule) -> Result<(), Fault> {
        self.index.clear();
        self.spelling.clear();
        for (at, line_atom) in self.line.atoms.iter().enumerate() {
            if line_atom.element == Element::H && !self.stays(at as u32)? {
                self.index.push(NONE);
                continue;
            }
            let isotope = match line_atom.isotope {
                0 => None,
                1 if line_atom.element == Element::H => None,
                mass_number if is_listed_isotope(line_atom.element, mass_number) => {
                    Some(mass_number)
                }
                mass_number => {
                    let element = line_atom.element;
                    let fault = SmilesFault::Isotope {
                        element,
                        mass_number,
                    };
                    return Err((Place::Atom(at as u32), fault));
                }
            };
            self.index.push(molecule.atoms.len() as u32);
            self.spelling.source.push(at as u32);
            self.spelling.lower_case.push(line_atom.lower_case);
            self.spelling.fixed.push(line_atom.bracket);
            molecule.atoms.push(Atom {
                element: line_atom.element,
                charge: line_atom.charge,
                hydrogens: line_atom.hydrogens,
                deuterium: 0,
                tritium: 0,
                isotope,
                aromatic: false,
                in_ring: false,
                ring_sizes: 0,
            });
        }
        self.spelling.sums.resize(molecule.atoms.len(), 0);
        if self.line.has_hydrogen_atoms {
            self.fold_hydrogens(molecule)?;
        }
        Ok(())
    }

    /// Whether a hydrogen of the line stays an atom: the only one, or the first of H2.
    fn stays(&self, at: u32) -> Result<bool, Fault> {
        let hydrogen = &self.line.atoms[at as usize];
        let mut bonds = self.line.bonds.iter().filter(|b| b.atoms.contains(&at));
        let refuse = |bonds: usize| {
            let fault = SmilesFault::Valence {
                element: Element::H,
                charge: hydrogen.charge,
                bonds: bonds.min(99) as u8,
            };
            Err((Place::Atom(at), fault))
        };
        let Some(bond) = bonds.next() else {
            return Ok(true);
        };
        let more = bonds.count();
        let single = matches!(bond.order, LineOrder::Elided | LineOrder::Single);
        if more > 0 || !single || hydrogen.hydrogens > 0 || hydrogen.charge != 0 {
            let order = match bond.order {
                LineOrder::Double => 2,
                LineOrder::Triple => 3,
                _ => 1,
            };
            return refuse(more + order + usize::from(hydrogen.hydrogens));
        }
        let partner = bond.atoms[usize::from(bond.atoms[0] == at)];
        let is_hydrogen = self.line.atoms[partner as usize].element == Element::H;
        Ok(is_hydrogen && at < partner)
    }

    fn fold_hydrogens(&self, molecule: &mut Molecule) -> Result<(), Fault> {
        for bond in &self.line.bonds {
            for (end, other) in [(0, 1), (1, 0)] {
                if self.index[bond.atoms[end] as usize] != NONE {
                    continue;
                }
                let hydrogen = &self.line.atoms[bond.atoms[end] as usize];
                let holder = self.index[bond.atoms[other] as usize];
                let holder = &mut molecule.atoms[holder as usize];
                holder.hydrogens = holder.hydrogens.saturating_add(1);
                match hydrogen.isotope {
                    0 | 1 => {}
                    2 => holder.deuterium = holder.deuterium.saturating_add(1),
                    3 => holder.tritium = holder.tritium.saturating_add(1),
                    mass_number => {
                        let fault = SmilesFault::Isotope {
                            element: Element::H,
                            mass_number,
                        };
                        return Err((Place::Atom(bond.atoms[end]), fault));
                    }
                }
            }
        }
        if let [hydrogen] = molecule.atoms.as_mut_slice()
            && hydrogen.element == Element::H
            && hydrogen.hydrogens == 1
        {
            settle_isotopes_of_h2(hydrogen);
        }
        Ok(())
    }

    fn place_bonds(&mut self, molecule: &mut Molecule) -> Result<(), Fault> {
        self.parents.clear();
        self.parents.resize(molecule.atoms.len(), (NONE, NONE));
        for bond in &self.line.bonds {
            let [mut a, mut b] = bond.atoms.map(|atom| self.index[atom as usize]);
            if a == NONE || b == NONE {
                continue;
            }
            let (order, kekule) = match bond.order {
                LineOrder::Elided | LineOrder::Single => (BondOrder::Single, 1),
                LineOrder::Double => (BondOrder::Double, 2),
                LineOrder::Triple => (BondOrder::Triple, 3),
                LineOrder::Aromatic => {
                    // A `:` says that both ends are aromatic, however they are written.
                    self.line.has_lower_case = true;
                    self.spelling.lower_case[a as usize] = true;
                    self.spelling.lower_case[b as usize] = true;
                    (BondOrder::Aromatic, 1)
                }
            };
            if bond.ring_event == NONE {
                self.parents[b as usize] = (a, molecule.bonds.len() as u32);
            } else if a > b {
                std::mem::swap(&mut a, &mut b);
            }
            molecule.bonds.push(Bond {
                atoms: [a, b],
                order,
                kekule,
                in_ring: false,
            });
        }
        Ok(())
    }

    fn check_doubled_rings(&self, molecule: &Molecule) -> Result<(), Fault> {
        for bond in self.line.bonds.iter().filter(|b| b.ring_event != NONE) {
            let [a, b] = bond.atoms.map(|atom| self.index[atom as usize]);
            let between = molecule.neighbors(a).iter().filter(|n| n.atom == b).count();
            if between > 1 {
                return Err((
                    Place::RingNumber(bond.ring_event),
                    SmilesFault::DoubledRing { number: 0 },
                ));
            }
        }
        Ok(())
    }

    /// Elided ring bonds between lower-case atoms may become double.
    fn offer_aromatic_bonds(&self, molecule: &mut Molecule) {
        // Bonds of the line and of the molecule run in the same order.
        let mut next = 0;
        for bond in &self.line.bonds {
            let ends = bond.atoms.map(|atom| self.index[atom as usize]);
            if ends.contains(&NONE) {
                continue;
            }
            let here = &mut molecule.bonds[next];
            next += 1;
            let may_be_aromatic = here.in_ring
                && match bond.order {
                    LineOrder::Aromatic => true,
                    LineOrder::Elided => ends
                        .iter()
                        .all(|&atom| self.spelling.lower_case[atom as usize]),
                    _ => false,
                };
            match (may_be_aromatic, here.order) {
                (true, _) => here.order = BondOrder::Aromatic,
                (false, BondOrder::Aromatic) => here.order = BondOrder::Single,
                _ => {}
            }
        }
        molecule.refresh_neighbors();
    }

    /// Implicit hydrogens of atoms without brackets; whether some group may
    /// have a better form.
    fn add_hydrogens(&mut self, molecule: &mut Molecule) -> Result<bool, Fault> {
        let mut needs_form = self.line.has_charges;
        for index in 0..molecule.atoms.len() as u32 {
            let atom = molecule.atoms[index as usize];
            let bonds = self.spelling.sums[index as usize].saturating_add(atom.hydrogens);
            if self.spelling.fixed[index as usize] {
                needs_form |= (atom.element == Element::C && bonds == 2)
                    || (atom.element == Element::N && bonds > 3);
                continue;
            }
            let is_isocyanide_carbon = atom.element == Element::C
                && bonds == 3
                && molecule.neighbors(index).first().is_some_and(|neighbor| {
                    let nitrogen = &molecule.atoms[neighbor.atom as usize];
                    let sum = self.spelling.sums[neighbor.atom as usize];
                    nitrogen.element == Element::N
                        && nitrogen.charge == 0
                        && sum + nitrogen.hydrogens == 4
                        && isocyanide_carbon(molecule, neighbor.atom)
                            .is_some_and(|bond| bond == neighbor.bond)
                });
            if is_isocyanide_carbon {
                needs_form = true;
                continue;
            }
            if atom.element == Element::N && bonds > 3 {
                needs_form = true;
                if bonds == 4 {
                    if isocyanide_carbon(molecule, index).is_some() {
                        continue;
                    }
                    if double_bonded_oxygen(molecule, index).is_none() {
                        return Err(self.impossible(molecule, index, bonds));
                    }
                }
            }
            let Some(valence) = implicit(atom.element).iter().find(|&&v| v >= bonds) else {
                return Err(self.impossible(molecule, index, bonds));
            };
            molecule.atoms[index as usize].hydrogens += valence - bonds;
        }
        Ok(needs_form)
    }

    fn impossible(&self, molecule: &Molecule, index: u32, bonds: u8) -> Fault {
        let atom = &molecule.atoms[index as usize];
        let fault = SmilesFault::Valence {
            element: atom.element,
            charge: atom.charge,
            bonds,
        };
        self.spelling.at(index, fault)
    }

    fn check_valences(&self, molecule: &Molecule) -> Result<(), Fault> {
        for (index, atom) in molecule.atoms.iter().enumerate() {
            let bonds = self.spelling.sums[index].saturating_add(atom.hydrogens);
            let valences = allowed(atom.element, atom.charge);
            if valences.contains(&bonds) {
                continue;
            }
            let Some(&most) = valences.last() else {
                let fault = SmilesFault::Charge {
                    element: atom.element,
                    charge: atom.charge,
                };
                return Err(self.spelling.at(index as u32, fault));
            };
            if bonds > most {
                return Err(self.impossible(molecule, index as u32, bonds));
            }
            let fault = SmilesFault::Radical {
                element: atom.element,
                charge: atom.charge,
                bonds,
            };
            return Err(self.spelling.at(index as u32, fault));
        }
        Ok(())
    }
}

/// In HD, DT and HT the lighter isotope is the atom, the heavier one is bound to it.
fn settle_isotopes_of_h2(hydrogen: &mut Atom) {
    let bound = 1 + u16::from(hydrogen.deuterium) + 2 * u16::from(hydrogen.tritium);
    let own = hydrogen.isotope.unwrap_or(1);
    let (lighter, heavier) = (own.min(bound), own.max(bound));
    hydrogen.isotope = (lighter > 1).then_some(lighter);
    hydrogen.deuterium = u8::from(heavier == 2);
    hydrogen.tritium = u8::from(heavier == 3);
}
