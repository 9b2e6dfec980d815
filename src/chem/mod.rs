//! Molecules: reading SMILES, valence, rings, aromaticity, canonical form,
//! formula and molar mass.
//!
//! Knows no groups, no properties, no files. Entry points: [`Reader`] (or
//! [`Molecule::from_smiles`]) and [`Canonicalizer`] (or [`Molecule::keys`]).

mod aromaticity;
mod canonical;
mod composition;
mod element;
mod error;
mod graph;
mod kekule;
mod molecule;
mod normalise;
mod reader;
mod rings;
mod smiles;
mod stereo;
mod valence;
mod weights;

pub use canonical::{Canonicalizer, Keys};
pub use composition::Composition;
pub use element::Element;
pub use error::{SmilesError, SmilesFault};
pub use molecule::{Atom, Bond, BondOrder, Molecule, Neighbor};
pub use reader::Reader;
pub use smiles::{MAX_HEAVY_ATOMS, MAX_LINE_BYTES};
