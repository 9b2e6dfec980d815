//! Atomic weights and molar mass.

use std::sync::LazyLock;

use super::{Composition, Element, Molecule};
use crate::table::{Table, TableError};

/// The table that is built in, `groups/elements.csv`.
const ELEMENTS: &str = include_str!("../../groups/elements.csv");

/// Atomic weights of the elements and masses of their isotopes, in g/mol.
#[derive(Debug)]
struct Weights {
    natural: [f64; Element::COUNT],
    isotopes: Vec<(Element, u16, f64)>,
}

static WEIGHTS: LazyLock<Weights> = LazyLock::new(|| {
    Weights::read("elements.csv", ELEMENTS).expect("the built-in table is checked by a test")
});

impl Weights {
    fn read(file: &str, text: &str) -> Result<Self, TableError> {
        let table = Table::read(file, text)?;
        let symbol = table.column("symbol")?;
        let mass_number = table.column("mass_number")?;
        let weight = table.column_in("atomic_weight", "g/mol")?;
        let mut natural = [None; Element::COUNT];
        let mut isotopes = Vec::new();
        for row in table.rows() {
            let element = Element::from_symbol(row.required_text(symbol)?)
                .ok_or_else(|| row.fault(symbol, "is not an element that is read"))?;
            let value = row.required_number(weight)?;
            if value <= 0.0 {
                return Err(row.fault(weight, "has to be positive"));
            }
            if row.text(mass_number).is_empty() {
                if natural[element as usize].replace(value).is_some() {
                    return Err(row.fault(symbol, "stands twice"));
                }
            } else {
                let number = row.required_integer(mass_number)?;
                if isotopes
                    .iter()
                    .any(|&(e, n, _)| (e, n) == (element, number))
                {
                    return Err(row.fault(mass_number, "stands twice"));
                }
                if (value - f64::from(number)).abs() > 0.2 {
                    return Err(row.fault(weight, "is far from the mass number"));
                }
                isotopes.push((element, number, value));
            }
        }
        let mut weights = [0.0; Element::COUNT];
        for (element, value) in Element::ALL.into_iter().zip(natural) {
            weights[element as usize] = value.ok_or_else(|| TableError::Column {
                file: file.to_owned(),
                line: 0,
                column: element.symbol().to_owned(),
                fault: "row is missing",
            })?;
        }
        Ok(Self {
            natural: weights,
            isotopes,
        })
    }

    fn isotope(&self, element: Element, mass_number: u16) -> Option<f64> {
        self.isotopes
            .iter()
            .find(|&&(e, n, _)| (e, n) == (element, mass_number))
            .map(|&(_, _, mass)| mass)
    }
}

/// Whether the table has the mass of an isotope.
pub(super) fn is_listed_isotope(element: Element, mass_number: u16) -> bool {
    WEIGHTS.isotope(element, mass_number).is_some()
}

impl Element {
    /// Conventional standard atomic weight in kg/mol.
    ///
    /// # Source
    ///
    /// Head of `groups/elements.csv`.
    pub fn atomic_weight_kg_per_mol(self) -> f64 {
        WEIGHTS.natural[self as usize] * 1e-3
    }
}

impl Composition {
    /// Molar mass in kg/mol of atoms of natural isotopes.
    ///
    /// # Source
    ///
    /// Head of `groups/elements.csv`.
    pub fn molar_mass_kg_per_mol(&self) -> f64 {
        let atoms = Element::ALL.into_iter();
        atoms
            .map(|element| f64::from(self.count(element)) * element.atomic_weight_kg_per_mol())
            .sum()
    }
}

impl Molecule {
    /// Molar mass in kg/mol.
    ///
    /// Sum of conventional standard atomic weights; an atom whose isotope is
    /// stated counts with the mass of that isotope.
    ///
    /// # Source
    ///
    /// Head of `groups/elements.csv`.
    pub fn molar_mass_kg_per_mol(&self) -> f64 {
        let weights = &*WEIGHTS;
        let hydrogen = weights.natural[Element::H as usize];
        let isotope = |element, mass_number| {
            weights
                .isotope(element, mass_number)
                .expect("the reader refuses isotopes that are not listed")
        };
        let grams: f64 = self
            .atoms
            .iter()
            .map(|atom| {
                let own = match atom.isotope {
                    None => weights.natural[atom.element as usize],
                    Some(mass_number) => isotope(atom.element, mass_number),
                };
                let mut bound = f64::from(atom.hydrogens) * hydrogen;
                if atom.deuterium > 0 {
                    bound += f64::from(atom.deuterium) * (isotope(Element::H, 2) - hydrogen);
                }
                if atom.tritium > 0 {
                    bound += f64::from(atom.tritium) * (isotope(Element::H, 3) - hydrogen);
                }
                own + bound
            })
            .sum();
        grams * 1e-3
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn built_in_table_is_sound() {
        let weights = Weights::read("elements.csv", ELEMENTS).unwrap();
        assert_eq!(weights.natural[Element::C as usize], 12.011);
        assert_eq!(weights.natural[Element::I as usize], 126.90447);
        assert_eq!(weights.isotope(Element::C, 12), Some(12.0));
        assert_eq!(weights.isotope(Element::C, 15), None);
    }

    #[test]
    fn faulty_tables_are_refused() {
        let head = "# title: t\n# source: s\n# transcribed: d\n# checked: c\n";
        let columns = "symbol,mass_number,atomic_weight\n-,-,g/mol\n";
        for rows in [
            "C,,12.011\n",
            "C,,12.011\nC,,12.011\n",
            "Xx,,1\n",
            "C,13,23\n",
        ] {
            let text = format!("{head}{columns}{rows}");
            assert!(Weights::read("t.csv", &text).is_err(), "{rows}");
        }
    }
}
