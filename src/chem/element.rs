//! The elements a molecule may hold.

use std::fmt;

/// An element that Groupsmith reads.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum Element {
    /// Hydrogen.
    H,
    /// Boron.
    B,
    /// Carbon.
    C,
    /// Nitrogen.
    N,
    /// Oxygen.
    O,
    /// Fluorine.
    F,
    /// Silicon.
    Si,
    /// Phosphorus.
    P,
    /// Sulfur.
    S,
    /// Chlorine.
    Cl,
    /// Bromine.
    Br,
    /// Iodine.
    I,
}

impl Element {
    /// How many elements there are.
    pub const COUNT: usize = 12;

    /// Every element by atomic number; `ALL[e as usize] == e`.
    pub const ALL: [Self; Self::COUNT] = [
        Self::H,
        Self::B,
        Self::C,
        Self::N,
        Self::O,
        Self::F,
        Self::Si,
        Self::P,
        Self::S,
        Self::Cl,
        Self::Br,
        Self::I,
    ];

    /// The symbol of the periodic table.
    pub const fn symbol(self) -> &'static str {
        [
            "H", "B", "C", "N", "O", "F", "Si", "P", "S", "Cl", "Br", "I",
        ][self as usize]
    }

    /// The English name, lower case.
    pub const fn name(self) -> &'static str {
        [
            "hydrogen",
            "boron",
            "carbon",
            "nitrogen",
            "oxygen",
            "fluorine",
            "silicon",
            "phosphorus",
            "sulfur",
            "chlorine",
            "bromine",
            "iodine",
        ][self as usize]
    }

    /// The element with this symbol, if it is one of ours.
    pub fn from_symbol(symbol: &str) -> Option<Self> {
        Self::ALL
            .into_iter()
            .find(|element| element.symbol() == symbol)
    }
}

impl fmt::Display for Element {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol())
    }
}
