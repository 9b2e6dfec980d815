//! The environments that occur in the fit.

use std::sync::Arc;

use rustc_hash::FxHashMap;

use crate::chem::Element;
use crate::groups::environment::{Environment, EnvironmentKey, Order};

/// One environment of the fit.
#[derive(Clone, Debug, PartialEq)]
pub struct EnvironmentEntry {
    /// Its key.
    pub key: EnvironmentKey,
    /// Its order.
    pub order: Order,
    /// Reference molecules that have it, whatever is measured of them.
    pub molecules: u32,
    /// Weight of the root of its count in the distance of two molecules; 0 where it does not count.
    pub distance_weight: f32,
    /// Which classes its atom belongs to; see [`classes_of`].
    pub classes: u16,
    /// In words.
    pub words: Arc<str>,
}

/// Names of the classes whose products are terms, in bit order.
pub(super) const CLASSES: [&str; 10] = [
    "O with H",
    "N with H",
    "O doubly bound",
    "O between",
    "N without H",
    "halogen",
    "fluorine",
    "aromatic carbon",
    "sulfur",
    "ring",
];

/// The class of rings, which no atom belongs to.
pub(super) const RING_CLASS: usize = 9;

/// Classes that tell families apart and have no products, by bit.
pub(super) const SILICON: usize = 10;
pub(super) const PHOSPHORUS_OR_BORON: usize = 11;
/// Hydroxyl at a carbonyl carbon.
pub(super) const CARBOXYL: usize = 12;

/// The classes of an atom by itself, one bit each in the order of the list:
/// hydroxyl and the like, N with H, doubly bound O, other O, N without H,
/// halogen, fluorine, aromatic carbon, sulfur; then silicon, phosphorus or boron.
/// Of atoms with their neighbors only the hydroxyl of a carboxyl group has a class.
pub fn classes_of(environment: &Environment) -> u16 {
    let atom = match environment {
        Environment::Atom(atom) => atom,
        Environment::Around(atom, around)
            if atom.element() == Element::O
                && atom.hydrogens() > 0
                && around.iter().any(|seen| seen.is_carbonyl_carbon()) =>
        {
            return 1 << CARBOXYL;
        }
        _ => return 0,
    };
    let class = match (atom.element(), atom.hydrogens(), atom.has_multiple_bond()) {
        (Element::O, 1.., _) => 0,
        (Element::N, 1.., _) => 1,
        (Element::O, 0, true) => 2,
        (Element::O, 0, false) => 3,
        (Element::N, 0, _) => 4,
        (Element::F, ..) => return 1 << 5 | 1 << 6,
        (Element::Cl | Element::Br | Element::I, ..) => 5,
        (Element::C, ..) if atom.is_aromatic() => 7,
        (Element::S, ..) => 8,
        (Element::Si, ..) => SILICON,
        (Element::P | Element::B, ..) => PHOSPHORUS_OR_BORON,
        _ => return 0,
    };
    1 << class
}

/// Every environment of the fit, by position.
#[derive(Clone, Debug, Default)]
pub struct EnvironmentTable {
    entries: Vec<EnvironmentEntry>,
    by_key: FxHashMap<EnvironmentKey, u32>,
}

impl EnvironmentTable {
    /// The table of these entries.
    pub fn new(entries: Vec<EnvironmentEntry>) -> Self {
        let by_key = entries
            .iter()
            .enumerate()
            .map(|(position, entry)| (entry.key, position as u32))
            .collect();
        Self { entries, by_key }
    }

    /// The entries, by position.
    pub fn entries(&self) -> &[EnvironmentEntry] {
        &self.entries
    }

    /// Position of an environment.
    pub fn position(&self, key: EnvironmentKey) -> Option<u32> {
        self.by_key.get(&key).copied()
    }
}
