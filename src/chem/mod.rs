//! Molecules: reading SMILES, valence, rings, aromaticity, canonical form,
//! formula and molar mass.
//!
//! Knows no groups, no properties, no files. Entry points: [`Reader`] (or
//! [`Molecule::from_smiles`]) and [`Canonicalizer`] (or [`Molecule::keys`]).

mod composition;
mod element;
mod molecule;

pub use composition::Composition;
pub use element::Element;
pub use molecule::{Atom, Bond, BondOrder, Molecule, Neighbor};
