//! One form for groups that are spelled in several ways.
//!
//! | group | form kept | also read |
//! |---|---|---|
//! | nitro, N-oxide, nitrone, azoxy, nitrile oxide | `[N+][O-]` | `N=O` with five bonds at N; `[C-]=[N+]=O` |
//! | azide, diazo, dinitrogen oxide | `X=[N+]=[N-]` | `X=N#N`, `[X-][N+]#N` |
//! | isocyanide | `[N+]#[C-]` | `N#C`, `N=[C]` with terminal C |
//! | carbon monoxide | `[C-]#[O+]` | `[C]=O` |
//! | sulfoxide, sulfone, phosphine oxide, their S, N and C relatives | `S=O`, `P=O` | `[S+][O-]`, `[P+][O-]`; N⁻ and C⁻ outside rings |
//!
//! Other zwitterions and all tautomers stay as they are written.

use super::kekule::Spelling;
use super::smiles::NONE;
use super::{BondOrder, Element, Molecule};

/// Rewrites `n(=O)` of a lower-case ring to `[n+]([O-])`, before the Kekulé form.
pub(super) fn aromatic_n_oxides(molecule: &mut Molecule, spelling: &mut Spelling) {
    for atom in 0..molecule.atoms.len() as u32 {
        let here = molecule.atoms[atom as usize];
        if spelling.lower_case[atom as usize]
            && here.element == Element::N
            && here.charge == 0
            && let Some(bond) = double_bonded_oxygen(molecule, atom)
        {
            separate(molecule, spelling, atom, bond);
        }
    }
}

/// Brings all groups of the table above to their one form; hydrogens are known.
pub(super) fn normalise(molecule: &mut Molecule, spelling: &mut Spelling) {
    for atom in 0..molecule.atoms.len() as u32 {
        let here = molecule.atoms[atom as usize];
        match (here.element, here.charge) {
            (Element::N, 0) => {
                pentavalent_nitrogen(molecule, spelling, atom);
            }
            (Element::C, 0) => bare_carbon(molecule, spelling, atom),
            _ => {}
        }
    }
    for atom in 0..molecule.atoms.len() as u32 {
        if molecule.atoms[atom as usize].charge == -1 {
            negative_atom(molecule, spelling, atom);
        }
    }
}

fn bonds_of(molecule: &Molecule, spelling: &Spelling, atom: u32) -> u8 {
    spelling.sums[atom as usize] + molecule.atoms[atom as usize].hydrogens
}

fn is_terminal(molecule: &Molecule, atom: u32, element: Element, charge: i8) -> bool {
    let there = &molecule.atoms[atom as usize];
    there.element == element
        && there.charge == charge
        && there.hydrogens == 0
        && molecule.degree(atom) == 1
}

/// Bond of `atom` with this order to a terminal atom of this element and charge.
fn bond_to_terminal(
    molecule: &Molecule,
    atom: u32,
    order: u8,
    element: Element,
    charge: i8,
) -> Option<u32> {
    molecule
        .neighbors(atom)
        .iter()
        .find(|neighbor| {
            molecule.bonds[neighbor.bond as usize].kekule == order
                && is_terminal(molecule, neighbor.atom, element, charge)
        })
        .map(|neighbor| neighbor.bond)
}

/// Bond of a nitrogen to a terminal, uncharged, doubly bonded oxygen.
pub(super) fn double_bonded_oxygen(molecule: &Molecule, atom: u32) -> Option<u32> {
    bond_to_terminal(molecule, atom, 2, Element::O, 0)
}

/// Bond of a nitrogen to a terminal carbon without hydrogen written `N#C`.
pub(super) fn isocyanide_carbon(molecule: &Molecule, atom: u32) -> Option<u32> {
    bond_to_terminal(molecule, atom, 3, Element::C, 0)
}

fn far_end(molecule: &Molecule, bond: u32, atom: u32) -> u32 {
    let [a, b] = molecule.bonds[bond as usize].atoms;
    if a == atom { b } else { a }
}

/// Changes the order of a bond by `by` and the sums of its ends with it.
fn change_order(molecule: &mut Molecule, spelling: &mut Spelling, bond: u32, by: i8) {
    let bond = &mut molecule.bonds[bond as usize];
    bond.kekule = bond.kekule.wrapping_add_signed(by);
    for atom in bond.atoms {
        let sum = &mut spelling.sums[atom as usize];
        *sum = sum.wrapping_add_signed(by);
    }
}

/// Lowers a bond by one: `atom` becomes positive, its partner negative.
fn separate(molecule: &mut Molecule, spelling: &mut Spelling, atom: u32, bond: u32) {
    let partner = far_end(molecule, bond, atom);
    change_order(molecule, spelling, bond, -1);
    molecule.atoms[atom as usize].charge += 1;
    molecule.atoms[partner as usize].charge -= 1;
    spelling.fixed[atom as usize] = true;
    spelling.fixed[partner as usize] = true;
}

/// Raises a bond by one: the charges of its ends move towards zero.
fn join(molecule: &mut Molecule, spelling: &mut Spelling, positive: u32, bond: u32) {
    let negative = far_end(molecule, bond, positive);
    change_order(molecule, spelling, bond, 1);
    molecule.atoms[positive as usize].charge -= 1;
    molecule.atoms[negative as usize].charge += 1;
}

fn pentavalent_nitrogen(molecule: &mut Molecule, spelling: &mut Spelling, atom: u32) {
    let bonds = bonds_of(molecule, spelling, atom);
    if bonds == 4 {
        if let Some(bond) = isocyanide_carbon(molecule, atom) {
            let carbon = far_end(molecule, bond, atom);
            molecule.atoms[atom as usize].charge = 1;
            molecule.atoms[carbon as usize].charge = -1;
            spelling.fixed[atom as usize] = true;
            spelling.fixed[carbon as usize] = true;
        }
        return;
    }
    if bonds != 5 {
        return;
    }
    if let Some(bond) = double_bonded_oxygen(molecule, atom) {
        separate(molecule, spelling, atom, bond);
    } else if let Some(bond) = bond_to_terminal(molecule, atom, 3, Element::N, 0) {
        separate(molecule, spelling, atom, bond);
    }
}

/// `[C]=N` of isocyanides and `[C]=O`.
fn bare_carbon(molecule: &mut Molecule, spelling: &mut Spelling, atom: u32) {
    if !spelling.fixed[atom as usize] || bonds_of(molecule, spelling, atom) != 2 {
        return;
    }
    let &[neighbor] = molecule.neighbors(atom) else {
        return;
    };
    let there = molecule.atoms[neighbor.atom as usize];
    let full = match there.element {
        Element::N => 3,
        Element::O => 2,
        _ => return,
    };
    if there.charge == 0 && bonds_of(molecule, spelling, neighbor.atom) == full {
        change_order(molecule, spelling, neighbor.bond, 1);
        molecule.atoms[atom as usize].charge = -1;
        molecule.atoms[neighbor.atom as usize].charge = 1;
    }
}

/// A negative atom next to a positive one, where the pair has a better form.
fn negative_atom(molecule: &mut Molecule, spelling: &mut Spelling, atom: u32) {
    let here = molecule.atoms[atom as usize];
    let mut rewrite = None;
    for neighbor in molecule.neighbors(atom) {
        let positive = neighbor.atom;
        let there = molecule.atoms[positive as usize];
        if there.charge < 1 {
            continue;
        }
        let bond = &molecule.bonds[neighbor.bond as usize];
        let bonds = bonds_of(molecule, spelling, positive);
        match there.element {
            Element::S | Element::P if bond.kekule == 1 => {
                let most = if there.element == Element::S { 6 } else { 5 };
                let suits = match here.element {
                    Element::O | Element::S => true,
                    Element::N | Element::C => !bond.in_ring,
                    _ => false,
                };
                if suits && bonds < most {
                    rewrite = Some((positive, neighbor.bond, NONE));
                    break;
                }
            }
            Element::N if bond.kekule == 1 => {
                // X⁻–N⁺≡N
                let suits = matches!(here.element, Element::N | Element::C | Element::O);
                let end = bond_to_terminal(molecule, positive, 3, Element::N, 0);
                if let (true, Some(end)) = (suits, end) {
                    rewrite = Some((positive, neighbor.bond, end));
                    break;
                }
            }
            Element::N if bond.kekule == 2 && here.element == Element::C => {
                // C⁻=N⁺=O
                if let Some(end) = double_bonded_oxygen(molecule, positive) {
                    rewrite = Some((positive, neighbor.bond, end));
                    break;
                }
            }
            _ => {}
        }
    }
    if let Some((positive, bond, end)) = rewrite {
        join(molecule, spelling, positive, bond);
        if end != NONE {
            separate(molecule, spelling, positive, end);
        }
    }
}

/// Sets the order of every bond that is not aromatic from its Kekulé form.
pub(super) fn settle_orders(molecule: &mut Molecule) {
    for bond in &mut molecule.bonds {
        if bond.order != BondOrder::Aromatic {
            bond.order = match bond.kekule {
                1 => BondOrder::Single,
                2 => BondOrder::Double,
                _ => BondOrder::Triple,
            };
        }
    }
}
