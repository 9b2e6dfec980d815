//! Tetrahedral and double bond marks of a line, tied to the atoms of the molecule.
//!
//! Kept: `@` and `@@` (also `@TH1`, `@TH2`) at an atom with four ligands, one of
//! them a hydrogen or, at S and P, a lone pair; `/` and `\` around a double
//! bond of C or N outside rings of fewer than eight atoms. Dropped as without
//! meaning or not kept: allene, square-planar, bipyramidal and octahedral
//! classes; nitrogen with three bonds, which inverts; atoms with two hydrogens
//! even if one of them is deuterium; a double bond where only one side is
//! marked, or one end of which is an aromatic atom. Whether a mark distinguishes anything is decided by
//! [`super::Canonicalizer`].

use super::molecule::{Center, Geometry};
use super::rings::Rings;
use super::smiles::{Fault, Line, LineAtom, NONE, Place, Turn};
use super::{BondOrder, Element, Molecule, SmilesFault};

/// Smallest ring with two forms of its double bond.
const SMALLEST_RING_WITH_GEOMETRY: u8 = 8;

/// Keeps the marks of a line. `index` gives the atom of the molecule for each
/// atom of the line, [`NONE`] for hydrogens that were folded.
pub(super) fn keep_marks(
    line: &Line,
    index: &[u32],
    rings: &Rings,
    molecule: &mut Molecule,
) -> Result<(), Fault> {
    if line.has_turns {
        for (at, atom) in line.atoms.iter().enumerate() {
            if atom.turn != Turn::None
                && index[at] != NONE
                && let Some(center) = center(line, index, molecule, at as u32, atom)
            {
                molecule.centers.push(center);
            }
        }
    }
    if line.has_directions {
        for bond in 0..molecule.bonds.len() as u32 {
            if let Some(geometry) = geometry(line, index, rings, molecule, bond)? {
                molecule.geometries.push(geometry);
            }
        }
    }
    Ok(())
}

fn center(
    line: &Line,
    index: &[u32],
    molecule: &Molecule,
    at: u32,
    line_atom: &LineAtom,
) -> Option<Center> {
    let atom = index[at as usize];
    let here = &molecule.atoms[atom as usize];
    // Place in the text, doubled to leave room behind the first neighbor for
    // the hydrogen of the bracket or the lone pair.
    let mut ligands: Vec<(u32, u32)> = Vec::with_capacity(5);
    let mut behind_parent = 0;
    for bond in &line.bonds {
        let Some(end) = bond.atoms.iter().position(|&end| end == at) else {
            continue;
        };
        ligands.push((2 * bond.places[end], index[bond.atoms[1 - end] as usize]));
        if end == 1 && bond.ring_event == NONE {
            behind_parent = 2 * bond.places[1] + 1;
        }
    }
    let has_lone_pair = matches!(here.element, Element::S | Element::P)
        && here.hydrogens == 0
        && ligands.len() == 3;
    if line_atom.hydrogens == 1 {
        ligands.push((behind_parent, NONE));
    } else if has_lone_pair {
        // Seen from the first neighbor, whichever it is.
        let first = ligands.iter().map(|&(place, _)| place).min()?;
        ligands.push((first + 1, NONE));
    }
    let unseen = ligands
        .iter()
        .filter(|&&(_, ligand)| ligand == NONE)
        .count();
    if ligands.len() != 4 || unseen > 1 || usize::from(here.hydrogens) > unseen {
        return None;
    }
    ligands.sort_unstable();
    if line_atom.turn == Turn::Clockwise {
        ligands.swap(2, 3);
    }
    Some(Center {
        atom,
        ligands: [ligands[0].1, ligands[1].1, ligands[2].1, ligands[3].1],
    })
}

fn geometry(
    line: &Line,
    index: &[u32],
    rings: &Rings,
    molecule: &Molecule,
    bond: u32,
) -> Result<Option<Geometry>, Fault> {
    let here = &molecule.bonds[bond as usize];
    let ring = rings.shortest_through(bond);
    if here.order != BondOrder::Double || (1..SMALLEST_RING_WITH_GEOMETRY).contains(&ring) {
        return Ok(None);
    }
    let ends = here.atoms;
    let mut ligands = [NONE; 2];
    let mut sides = [0; 2];
    let mut contradiction = None;
    for (end, partner) in [(0, 1), (1, 0)] {
        let atom = ends[end];
        match side(line, index, molecule, atom, ends[partner]) {
            Side::Unmarked => return Ok(None),
            Side::Marked(ligand, side) => {
                ligands[end] = ligand;
                sides[end] = side;
            }
            Side::Contradiction(at) => contradiction = Some(at),
        }
    }
    // Marks at one end alone may belong to double bonds next to this one.
    if let Some(at) = contradiction {
        return Err((Place::Atom(at), SmilesFault::Direction));
    }
    Ok(Some(Geometry {
        bond,
        ends,
        ligands,
        same_side: sides[0] == sides[1],
    }))
}

/// What the marks say about one end of a double bond.
enum Side {
    Unmarked,
    /// A neighbor ([`NONE`] is the hydrogen) and the side it lies on.
    Marked(u32, i8),
    /// Both neighbors lie on one side of this atom of the line.
    Contradiction(u32),
}

/// A marked neighbor of one end of a double bond and the side it lies on.
fn side(line: &Line, index: &[u32], molecule: &Molecule, atom: u32, partner: u32) -> Side {
    let here = &molecule.atoms[atom as usize];
    // The bonds of an aromatic ring cannot carry a direction.
    if here.aromatic || !matches!(here.element, Element::C | Element::N) {
        return Side::Unmarked;
    }
    let others = molecule.degree(atom) - 1;
    let has_two_sides = match others {
        0 | 1 => here.hydrogens == 1 || (others == 1 && here.hydrogens == 0),
        2 => here.hydrogens == 0,
        _ => false,
    };
    if !has_two_sides {
        return Side::Unmarked;
    }
    let mut marked: Option<(u32, i8)> = None;
    for bond in line.bonds.iter().filter(|bond| bond.direction != 0) {
        for (end, sign) in [(0, 1), (1, -1)] {
            if index[bond.atoms[end] as usize] != atom {
                continue;
            }
            let ligand = index[bond.atoms[1 - end] as usize];
            let side = sign * bond.direction;
            match marked {
                None => marked = Some((ligand, side)),
                Some((_, other)) if other == side => {
                    return Side::Contradiction(bond.atoms[end]);
                }
                // One neighbor in two spellings of the same side: keep a heavy one.
                Some((NONE, _)) => marked = Some((ligand, side)),
                Some(_) => {}
            }
        }
    }
    let heavy = molecule
        .neighbors(atom)
        .iter()
        .map(|neighbor| neighbor.atom)
        .find(|&neighbor| neighbor != partner);
    match (marked, heavy) {
        (None, _) => Side::Unmarked,
        (Some((NONE, side)), Some(heavy)) => Side::Marked(heavy, -side),
        (Some((ligand, side)), _) => Side::Marked(ligand, side),
    }
}
