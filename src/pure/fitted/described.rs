//! A molecule as the fitted sums see it.

use super::quantity::{Level, PerAtom, Quantity};
use super::table::{CLASSES, EnvironmentTable, RING_CLASS};
use crate::groups::environment::{
    Environment, EnvironmentCounts, EnvironmentKey, Order, ShapeFact,
};

/// Number of products of two classes, a class with itself included.
pub(super) const PRODUCTS: usize = CLASSES.len() * (CLASSES.len() + 1) / 2;

/// Terms in the size alone: 1/n, ln n, √n.
pub(super) const SIZES: usize = 3;

/// Terms in properties that others rest on.
pub(super) const INPUTS: usize = 7;

/// A molecule with its environments found in the table of the fit.
#[derive(Clone, Debug, Default)]
pub struct Described {
    /// Position and count of the environments that the fit knows.
    pub(super) found: Vec<(u32, f32)>,
    /// Their orders.
    orders: Vec<Order>,
    /// Keys of first- and second-order environments that it does not know.
    pub unknown: Vec<(EnvironmentKey, Order)>,
    /// Heavy atoms.
    pub(super) heavy_atoms: f64,
    /// Members of each class.
    pub(super) classes: [f64; CLASSES.len()],
    /// Which classes it has members of, those beyond [`CLASSES`] included.
    present: u16,
}

/// What quantities that rest on others start from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Known {
    /// Normal boiling point, K, measured or estimated.
    pub boiling_point_k: f64,
    /// Molar volume of the liquid at its [reference temperature](super::volume_temperature_k), m³/mol.
    pub molar_volume_m3_per_mol: f64,
    /// Molar mass, kg/mol.
    pub molar_mass_kg_per_mol: f64,
}

impl Known {
    /// The terms of a sum that stand for it, in a molecule of `n` heavy atoms.
    pub(super) fn input_values(self, n: f64) -> [f64; INPUTS] {
        let volume = self.molar_volume_m3_per_mol;
        [
            self.boiling_point_k.ln(),
            volume.ln(),
            self.molar_mass_kg_per_mol.ln(),
            n.ln(),
            1.0 / n,
            1e5 * volume / n,
            self.boiling_point_k / 100.0,
        ]
    }
}

impl Described {
    /// Looks the environments of a molecule up.
    pub fn fill(&mut self, table: &EnvironmentTable, counts: &EnvironmentCounts) {
        self.found.clear();
        self.orders.clear();
        self.unknown.clear();
        self.heavy_atoms = 0.0;
        self.classes = [0.0; CLASSES.len()];
        self.present = 0;
        for (key, order, count) in counts.iter() {
            if key == EnvironmentKey::ATOMS {
                self.heavy_atoms = f64::from(count);
            }
            match table.position(key) {
                Some(position) => {
                    self.found.push((position, count));
                    self.orders.push(order);
                    // no environment farther out has a class
                    if order > Order::First {
                        continue;
                    }
                    let classes = table.entries()[position as usize].classes;
                    self.present |= classes;
                    for (class, members) in self.classes.iter_mut().enumerate() {
                        if classes >> class & 1 == 1 {
                            *members += f64::from(count);
                        }
                    }
                }
                None if order <= Order::Second => self.unknown.push((key, order)),
                None => {}
            }
        }
        let rings = Environment::Shape(ShapeFact::Rings).key();
        self.classes[RING_CLASS] = counts
            .iter()
            .find(|entry| entry.0 == rings)
            .map_or(0.0, |entry| f64::from(entry.2));
    }

    /// A molecule of which only size and classes are known.
    pub(super) fn of_classes(
        heavy_atoms: f64,
        classes: [f64; CLASSES.len()],
        present: u16,
    ) -> Self {
        Self {
            heavy_atoms,
            classes,
            present,
            ..Self::default()
        }
    }

    /// Whether it has a member of a class of the table.
    pub(super) fn has_class(&self, class: usize) -> bool {
        self.present >> class & 1 == 1
    }

    /// Heavy atoms.
    pub fn heavy_atoms(&self) -> f64 {
        self.heavy_atoms
    }

    /// Positions in the table and counts of the known environments.
    pub fn found(&self) -> &[(u32, f32)] {
        &self.found
    }

    /// Positions of the known environments up to an order.
    pub(super) fn found_up_to(&self, order: Order) -> impl Iterator<Item = u32> + '_ {
        let found = self.found.iter().zip(&self.orders);
        found
            .filter(move |(_, of)| **of <= order)
            .map(|(found, _)| found.0)
    }

    /// The terms of a sum by number, with their values.
    ///
    /// Environments come first (number = position), then their shares of the
    /// heavy atoms (position + size of the table), then sizes, products of
    /// classes, their shares, and inputs.
    pub fn each_term(
        &self,
        table: &EnvironmentTable,
        quantity: Quantity,
        level: Level,
        known: Option<Known>,
        mut one: impl FnMut(u32, f64),
    ) {
        let terms = quantity.terms(level);
        let environments = table.entries().len() as u32;
        let n = self.heavy_atoms.max(1.0);
        for (&(position, count), &order) in self.found.iter().zip(&self.orders) {
            if !quantity.takes(level, order) {
                continue;
            }
            let count = f64::from(count);
            if terms.per_atom != PerAtom::Share {
                one(position, count);
            }
            if terms.per_atom != PerAtom::Count {
                one(environments + position, count / n);
            }
        }
        let sizes = 2 * environments;
        one(sizes, 1.0 / n);
        if terms.per_atom == PerAtom::Both || level == Level::Count {
            one(sizes + 1, n.ln());
        }
        if terms.per_atom == PerAtom::Both {
            one(sizes + 2, n.sqrt());
        }
        let products = sizes + SIZES as u32;
        if terms.products {
            let mut number = products;
            for (at, &members) in self.classes.iter().enumerate() {
                for (&others, again) in self.classes[at..].iter().zip(0..) {
                    let pairs = if again == 0 {
                        0.5 * members * (members - 1.0)
                    } else {
                        members * others
                    };
                    if pairs != 0.0 {
                        if terms.per_atom != PerAtom::Share {
                            one(number, pairs);
                        }
                        one(number + PRODUCTS as u32, pairs / n);
                    }
                    number += 1;
                }
            }
        }
        if terms.rests_on_others
            && let Some(known) = known
        {
            let inputs = products + 2 * PRODUCTS as u32;
            for (number, value) in (inputs..).zip(known.input_values(n)) {
                one(number, value);
            }
        }
    }

    /// Numbers of the terms that stand for inputs: their first and the one past the last.
    pub fn input_terms(table: &EnvironmentTable) -> (u32, u32) {
        let first = 2 * table.entries().len() as u32 + (SIZES + 2 * PRODUCTS) as u32;
        (first, first + INPUTS as u32)
    }

    /// The root of each count times its weight, for environments that count in distances.
    pub(super) fn each_coordinate(&self, table: &EnvironmentTable, mut one: impl FnMut(u32, f32)) {
        for &(position, count) in &self.found {
            let weight = table.entries()[position as usize].distance_weight;
            if weight > 0.0 {
                one(position, weight * count.abs().sqrt() * count.signum());
            }
        }
    }
}
