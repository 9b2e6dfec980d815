//! How many atoms of each element.

use std::fmt;

use super::Element;

/// Atom counts by element; formulas are printed in Hill order.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Composition([u16; Element::COUNT]);

impl Composition {
    /// Atoms of one element.
    pub const fn count(&self, element: Element) -> u16 {
        self.0[element as usize]
    }

    /// Adds atoms of one element.
    pub const fn add(&mut self, element: Element, atoms: u16) {
        self.0[element as usize] += atoms;
    }

    /// Adds `times` copies of another composition.
    pub fn add_times(&mut self, other: &Self, times: u16) {
        for (mine, theirs) in self.0.iter_mut().zip(other.0) {
            *mine += theirs * times;
        }
    }

    /// Takes `times` copies of another composition away.
    ///
    /// # Panics
    ///
    /// If there are not that many atoms.
    pub fn remove_times(&mut self, other: &Self, times: u16) {
        for (mine, theirs) in self.0.iter_mut().zip(other.0) {
            *mine = mine
                .checked_sub(theirs * times)
                .expect("what is taken away was there");
        }
    }

    /// Atoms that are not hydrogen.
    pub fn heavy_atoms(&self) -> u16 {
        self.0[1..].iter().sum()
    }

    /// Reads a formula such as `C2H6O`, one count after each symbol.
    pub fn from_formula(text: &str) -> Option<Self> {
        let mut composition = Self::default();
        let bytes = text.as_bytes();
        let mut at = 0;
        while at < bytes.len() {
            let mut end = at + 1;
            while end < bytes.len() && bytes[end].is_ascii_lowercase() {
                end += 1;
            }
            let element = Element::from_symbol(text.get(at..end)?)?;
            at = end;
            while end < bytes.len() && bytes[end].is_ascii_digit() {
                end += 1;
            }
            let atoms = if end == at {
                1
            } else {
                text[at..end].parse().ok()?
            };
            composition.0[element as usize] = composition.0[element as usize].checked_add(atoms)?;
            at = end;
        }
        Some(composition)
    }
}

impl fmt::Display for Composition {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut one = |element: Element| match self.count(element) {
            0 => Ok(()),
            1 => f.write_str(element.symbol()),
            n => write!(f, "{}{n}", element.symbol()),
        };
        let mut rest = Element::ALL;
        rest.sort_unstable_by_key(|element| element.symbol());
        if self.count(Element::C) > 0 {
            one(Element::C)?;
            one(Element::H)?;
            rest.into_iter()
                .filter(|element| !matches!(element, Element::C | Element::H))
                .try_for_each(one)
        } else {
            rest.into_iter().try_for_each(one)
        }
    }
}
