//! The count level taken apart: what each piece of a molecule adds, and what
//! only the whole knows.
//!
//! For those who build molecules from pieces and ask for millions of sums. The
//! numbers are those of [`Fitted::predict`](super::Fitted::predict) at
//! [`Level::Count`], but for the rarity of second-order environments, which
//! pieces do not settle.

use super::described::{Described, INPUTS, Known, PRODUCTS, SIZES};
use super::model::{Model, Relatives};
use super::quantity::{Level, PerAtom, Quantity};
use super::scale::{Ground, Standing};
use super::table::{CLASSES, EnvironmentTable, RING_CLASS};
use crate::groups::environment::{EnvironmentCounts, Order};

/// Members of each class of atoms, the number of rings, and which classes occur.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct ClassCounts {
    members: [u8; CLASSES.len()],
    /// Classes that are not counted among them too, as bits.
    present: u16,
}

impl ClassCounts {
    /// Of a piece; `rings`: those that are closed within it.
    pub fn of(table: &EnvironmentTable, counts: &EnvironmentCounts, rings: u8) -> Self {
        let mut all = Self::default();
        for (key, _, count) in counts.iter() {
            let Some(position) = table.position(key) else {
                continue;
            };
            let classes = table.entries()[position as usize].classes;
            all.present |= classes;
            for (class, members) in all.members.iter_mut().enumerate() {
                if classes >> class & 1 == 1 {
                    *members += count as u8;
                }
            }
        }
        all.members[RING_CLASS] = rings;
        all
    }

    /// Adds so many pieces.
    pub fn add(&mut self, piece: &Self, times: u8) {
        if times == 0 {
            return;
        }
        self.present |= piece.present;
        for (mine, own) in self.members.iter_mut().zip(piece.members) {
            *mine += own * times;
        }
    }

    /// The same with one ring more.
    #[must_use]
    pub fn with_ring(mut self) -> Self {
        self.members[RING_CLASS] += 1;
        self
    }
}

/// What a piece adds to the sum of a quantity.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct PieceSum {
    /// Added as it is.
    pub by_count: f64,
    /// Added over the heavy atoms of the whole.
    pub by_share: f64,
    /// What it adds to the rarity.
    pub rarity: f64,
    /// Whether it has an atom of a kind that the fit has not seen: then there is
    /// no value.
    pub new_kind: bool,
    /// Whether a hetero atom of it is bound in a way that the fit has not seen.
    pub unknown: bool,
}

/// The count-level model of one quantity.
#[derive(Clone, Copy, Debug)]
pub struct CountModel<'f> {
    model: &'f Model,
    table: &'f EnvironmentTable,
}

impl<'f> CountModel<'f> {
    pub(super) fn new(model: &'f Model, table: &'f EnvironmentTable) -> Self {
        debug_assert_eq!(model.level, Level::Count);
        Self { model, table }
    }

    /// What it gives.
    pub fn quantity(&self) -> Quantity {
        self.model.quantity
    }

    /// What a piece adds: its own environments of first order.
    pub fn piece(&self, counts: &EnvironmentCounts) -> PieceSum {
        let environments = self.table.entries().len();
        let per_atom = self.quantity().terms(Level::Count).per_atom;
        let mut sum = PieceSum::default();
        for (key, order, count) in counts.iter() {
            if order > Order::First {
                continue;
            }
            let count = f64::from(count);
            let position = self.table.position(key).map(|position| position as usize);
            let seen = position.map_or(0, |position| self.model.occurrences[position]);
            if seen == 0 {
                sum.unknown = true;
                sum.new_kind |= order == Order::Atom;
            }
            let Some(position) = position else {
                sum.rarity += 2.0;
                continue;
            };
            // an environment counts once, however often it occurs; the pieces of a
            // molecule may share it, so this is the most that its rarity can be
            sum.rarity += 1.0 / (f64::from(seen) + 0.5);
            if per_atom != PerAtom::Share {
                sum.by_count += self.model.weights[position] * count;
            }
            if per_atom != PerAtom::Count {
                sum.by_share += self.model.weights[environments + position] * count;
            }
        }
        sum
    }

    /// What products of classes add: as it is, and over the heavy atoms.
    pub fn products(&self, classes: &ClassCounts) -> (f64, f64) {
        if !self.quantity().terms(Level::Count).products {
            return (0.0, 0.0);
        }
        let per_atom = self.quantity().terms(Level::Count).per_atom;
        let (mut by_count, mut by_share) = (0.0, 0.0);
        let mut number = 2 * self.table.entries().len() + SIZES;
        for (at, &members) in classes.members.iter().enumerate() {
            for (&others, again) in classes.members[at..].iter().zip(0..) {
                let pairs = match again {
                    0 => 0.5 * f64::from(members) * (f64::from(members) - 1.0),
                    _ => f64::from(members) * f64::from(others),
                };
                if per_atom != PerAtom::Share {
                    by_count += self.model.weights[number] * pairs;
                }
                by_share += self.model.weights[number + PRODUCTS] * pairs;
                number += 1;
            }
        }
        (by_count, by_share)
    }

    /// What the size alone adds to the sum, in a molecule of `n` heavy atoms.
    pub fn size(&self, n: f64) -> f64 {
        let sizes = 2 * self.table.entries().len();
        let weights = &self.model.weights[sizes..sizes + SIZES];
        let both = self.quantity().terms(Level::Count).per_atom == PerAtom::Both;
        let root = if both { weights[2] * n.sqrt() } else { 0.0 };
        self.model.intercept + weights[0] / n + weights[1] * n.ln() + root
    }

    /// What the properties it rests on add.
    pub fn inputs(&self, n: f64, known: Option<Known>) -> f64 {
        let (Some(known), true) = (known, self.quantity().terms(Level::Count).rests_on_others)
        else {
            return 0.0;
        };
        let (first, _) = Described::input_terms(self.table);
        let weights = &self.model.weights[first as usize..first as usize + INPUTS];
        known
            .input_values(n)
            .iter()
            .zip(weights)
            .map(|(value, weight)| value * weight)
            .sum()
    }

    /// Half width of the 90 % interval of a sum.
    pub fn half_width(&self, n: f64, rarity: f64, classes: &ClassCounts, sum: f64) -> f64 {
        let standing = standing(n, rarity, classes, sum);
        self.model.scale.half_width(&standing)
    }

    /// The least and the most that the half width can be, whatever the sum.
    pub fn half_widths(&self, n: f64, rarity: f64, classes: &ClassCounts) -> (f64, f64) {
        let standing = standing(n, rarity, classes, 0.0);
        self.model.scale.range(&standing)
    }
}

fn standing(n: f64, rarity: f64, classes: &ClassCounts, sum: f64) -> Standing {
    let molecule = Described::of_classes(n, classes.members.map(f64::from), classes.present);
    let ground = Ground {
        sum,
        rarity,
        unknown_environments: 0,
        unknown_atoms: false,
        relatives: &Relatives::unknown(),
    };
    Standing::of(&molecule, &ground)
}
