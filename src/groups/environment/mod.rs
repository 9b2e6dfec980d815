//! Atom environments of a molecule, counted: what the fitted estimates rest on.
//!
//! Two orders. *First-order* environments say what an atom is (element,
//! hydrogens, multiple bonds, ring) and, for atoms other than carbon, what it
//! is bound to: pieces of a molecule settle them, so counts are enough to
//! know them. *Second-order* environments need the structure: neighbors of
//! carbons, bonds, pairs of hetero atoms and their distance, substitution of
//! rings, and the shape of the whole.
//!
//! Entry point: [`EnvironmentReader`].

mod atom;
mod kind;
mod reader;

pub use atom::{AtomType, NeighborType};
pub use kind::{Environment, EnvironmentKey, Order, ShapeFact};
pub use reader::{ENVIRONMENT_ATOM_LIMIT, EnvironmentCounts, EnvironmentReader};
