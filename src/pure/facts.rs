//! What a method needs to know of a molecule beyond its group counts.

use crate::chem::{Composition, Element};

/// Structure facts that travel with the group counts of a molecule.
///
/// Filled by whoever knows the structure; a group assembly fills it from the
/// compositions of its groups.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct StructureFacts {
    /// Molar mass in kg/mol.
    pub molar_mass_kg_per_mol: f64,
    /// Atoms by element, hydrogens included.
    pub composition: Composition,
    /// Atoms, hydrogens included.
    pub atoms: u32,
    /// Atoms that are not hydrogen.
    pub heavy_atoms: u32,
    /// Whether its vapor consists of pairs in part, as that of carboxylic acids does.
    pub associates: bool,
}

impl StructureFacts {
    /// Whether halogens take the place of hydrogen so far that burning is in doubt.
    pub fn burns_doubtfully(&self) -> bool {
        let of = |element| self.composition.count(element);
        let halogens = of(Element::F) + of(Element::Cl) + of(Element::Br) + of(Element::I);
        halogens > 0 && halogens >= of(Element::H)
    }

    /// Facts of a molecule of this composition; atoms are counted from it, and its vapor
    /// is taken for one of single molecules.
    pub fn new(composition: Composition, molar_mass_kg_per_mol: f64) -> Self {
        let heavy_atoms = u32::from(composition.heavy_atoms());
        Self {
            molar_mass_kg_per_mol,
            composition,
            atoms: heavy_atoms + u32::from(composition.count(Element::H)),
            heavy_atoms,
            associates: false,
        }
    }
}
