//! Atoms that no group covers, in a chemist's words.

use super::{Breakdown, Coverage, GroupSet};
use crate::chem::{BondOrder, Element, Molecule};

/// The uncovered atoms of a breakdown, one clause each, equal ones joined.
pub(super) fn gaps(molecule: &Molecule, breakdown: &Breakdown, set: &GroupSet) -> String {
    match breakdown.coverage {
        Coverage::Complete => return String::new(),
        Coverage::TooAmbiguous => {
            return format!(
                "so many groups of {} compete here that the work limit was reached",
                set.id()
            );
        }
        Coverage::Unbalanced => {
            return format!(
                "the groups found in {} do not add up to the molecule",
                set.id()
            );
        }
        Coverage::Partial => {}
    }
    let mut kinds: Vec<(&'static str, Vec<u32>)> = Vec::new();
    for &atom in &breakdown.uncovered {
        let name = name(molecule, atom);
        match kinds.iter_mut().find(|(known, _)| *known == name) {
            Some((_, atoms)) => atoms.push(atom),
            None => kinds.push((name, vec![atom])),
        }
    }
    kinds
        .iter()
        .map(|(name, atoms)| match atoms[..] {
            [atom] => format!("atom {}, {name}, is in no group of this set", atom + 1),
            _ => {
                let list: Vec<_> = atoms.iter().map(|atom| (atom + 1).to_string()).collect();
                format!(
                    "atoms {}, each {name}, are in no group of this set",
                    list.join(" ")
                )
            }
        })
        .collect::<Vec<_>>()
        .join("; ")
}

/// What a chemist would call the atom.
fn name(molecule: &Molecule, index: u32) -> &'static str {
    use Element::{B, Br, C, Cl, F, H, I, N, O, P, S, Si};
    let atom = &molecule.atoms()[index as usize];
    let around = molecule.neighbors(index);
    let element_of = |other: u32| molecule.atoms()[other as usize].element;
    let is_carbonyl = |other: u32| {
        element_of(other) == C
            && molecule
                .neighbors(other)
                .iter()
                .any(|bond| bond.order == BondOrder::Double && element_of(bond.atom) == O)
    };
    let next_to = |element: Element| around.iter().any(|bond| element_of(bond.atom) == element);
    let doubly = |element: Element| {
        around
            .iter()
            .any(|bond| bond.order == BondOrder::Double && element_of(bond.atom) == element)
    };
    let next_to_carbonyl = around
        .iter()
        .filter(|bond| is_carbonyl(bond.atom) && bond.order != BondOrder::Double)
        .count();
    let next_to_aromatic = around
        .iter()
        .any(|bond| molecule.atoms()[bond.atom as usize].aromatic);
    let triple = around.iter().any(|bond| bond.order == BondOrder::Triple);
    match atom.element {
        H => "a hydrogen molecule",
        B => "a boron",
        Si => "a silicon",
        P => "a phosphorus",
        F if next_to_aromatic => "a fluorine on an aromatic ring",
        Cl if next_to_aromatic => "a chlorine on an aromatic ring",
        Br if next_to_aromatic => "a bromine on an aromatic ring",
        I if next_to_aromatic => "an iodine on an aromatic ring",
        F => "a fluorine",
        Cl if next_to_carbonyl > 0 => "an acyl chloride chlorine",
        Cl => "a chlorine",
        Br => "a bromine",
        I => "an iodine",
        S if atom.aromatic => "an aromatic ring sulfur",
        S if doubly(O) => "an oxidized sulfur (sulfoxide, sulfone, sulfonyl)",
        S if doubly(C) => "a thiocarbonyl sulfur",
        S if atom.hydrogens > 0 => "a thiol sulfur",
        S if next_to(S) => "a disulfide sulfur",
        S => "a sulfide sulfur",
        O if atom.hydrogens == 2 => "a water molecule",
        O if atom.charge < 0 && next_to(N) => "an oxygen of a nitro group or N-oxide",
        O if atom.aromatic => "an aromatic ring oxygen",
        O if doubly(C)
            && around.iter().any(|bond| {
                molecule
                    .neighbors(bond.atom)
                    .iter()
                    .any(|other| element_of(other.atom) == N)
            }) =>
        {
            "an amide or urea carbonyl oxygen"
        }
        O if doubly(C) => "a carbonyl oxygen",
        O if doubly(S) => "an oxygen on sulfur",
        O if doubly(N) => "an oxygen on nitrogen",
        O if doubly(P) => "an oxygen on phosphorus",
        O if next_to(O) => "a peroxide oxygen",
        O if atom.hydrogens > 0 && next_to_carbonyl > 0 => "an acid O–H",
        O if atom.hydrogens > 0 && next_to_aromatic => "a phenol O–H",
        O if atom.hydrogens > 0 && next_to(N) => "a hydroxylamine or oxime O–H",
        O if atom.hydrogens > 0 => "an alcohol O–H",
        O if next_to_carbonyl > 1 => "an anhydride oxygen",
        O if next_to_carbonyl > 0 => "an ester oxygen",
        O if next_to(P) => "a phosphate or phosphonate ester oxygen",
        O if next_to(Si) => "an oxygen on silicon",
        O if atom.in_ring => "a ring ether oxygen",
        O => "an ether oxygen",
        N if triple && next_to(C) && atom.charge == 0 => "a nitrile nitrogen",
        N if atom.charge > 0 && triple => "an isocyanide or nitrilium nitrogen",
        N if atom.charge > 0 && doubly(O) => "a nitro nitrogen",
        N if atom.charge != 0 && next_to(N) => "an azide or diazo nitrogen",
        N if atom.charge > 0 => "an N-oxide nitrogen",
        N if atom.aromatic && atom.hydrogens > 0 => "an aromatic ring N–H",
        N if atom.aromatic => "an aromatic ring nitrogen",
        N if next_to_carbonyl > 0 && atom.hydrogens > 1 => "an amide NH2",
        N if next_to_carbonyl > 0 && atom.hydrogens == 1 => "an amide N–H",
        N if next_to_carbonyl > 0 => "an amide nitrogen",
        N if doubly(C) && next_to(O) => "an oxime nitrogen",
        N if doubly(C) => "an imine nitrogen",
        N if doubly(N) => "an azo nitrogen",
        N if doubly(O) => "a nitroso nitrogen",
        N if next_to(N) => "a hydrazine nitrogen",
        N if next_to_aromatic => "a nitrogen on an aromatic ring",
        N if atom.hydrogens > 1 => "a primary amine nitrogen",
        N if atom.hydrogens == 1 => "a secondary amine nitrogen",
        N => "a tertiary amine nitrogen",
        C if atom.aromatic => "an aromatic ring carbon",
        C if triple && next_to(N) => "a nitrile carbon",
        C if triple => "an alkyne carbon",
        C if doubly(O) && next_to(N) => "an amide or urea carbonyl carbon",
        C if doubly(O) && atom.hydrogens > 0 => "an aldehyde carbon",
        C if doubly(O)
            && around
                .iter()
                .any(|bond| bond.order == BondOrder::Single && element_of(bond.atom) == O) =>
        {
            "an ester, acid or carbonate carbonyl carbon"
        }
        C if doubly(O) && (next_to(Cl) || next_to(F) || next_to(Br)) => "an acyl halide carbon",
        C if doubly(O) => "a ketone carbonyl carbon",
        C if doubly(N) => "an imine carbon",
        C if doubly(S) => "a thiocarbonyl carbon",
        C if doubly(C) => "an alkene carbon",
        C if next_to(F) || next_to(Cl) || next_to(Br) || next_to(I) => "a halogenated carbon",
        C if next_to(O) => "a carbon bound to oxygen",
        C if next_to(N) => "a carbon bound to nitrogen",
        C if next_to(S) => "a carbon bound to sulfur",
        C if atom.in_ring => "a ring carbon",
        C => "an alkyl carbon",
    }
}
