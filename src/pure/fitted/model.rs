//! One fitted quantity: its sum, its correction, its interval.

use super::described::{Described, Known};
use super::quantity::{Level, Quantity};
use super::scale::Scale;
use super::table::EnvironmentTable;
use crate::groups::environment::Order;

/// Distance at which two molecules have nothing to say about each other.
const REACH: f64 = 3.2;

/// Similarity of two molecules a distance apart: 1 for the same, 0 from [`REACH`] on.
///
/// `(1 − r)^4 (4 r + 1)`, r the distance over the reach: twice differentiable, positive
/// definite, and zero far away.
///
/// # Source
///
/// H. Wendland, Adv. Comput. Math. 4 (1995) 389–396, function φ(3,1), from memory.
pub fn similarity(squared_distance: f64) -> f64 {
    let r = squared_distance.max(0.0).sqrt() / REACH;
    if r >= 1.0 {
        return 0.0;
    }
    let near = (1.0 - r) * (1.0 - r);
    near * near * (4.0 * r + 1.0)
}

/// The same in single precision and without a branch, for many at once.
pub(super) fn similarity_f32(squared_distance: f32) -> f32 {
    let r = (squared_distance.sqrt() * (1.0 / REACH as f32)).min(1.0);
    let near = (1.0 - r) * (1.0 - r);
    near * near * (4.0 * r + 1.0)
}

/// Squared distance below which a molecule counts as a relative.
pub(super) const NEAR: f32 = (REACH * REACH / (RELATIVE * RELATIVE)) as f32;

/// A 90 % interval in the unit of the value.
pub type Interval = (f64, f64);

/// An estimate of a fitted quantity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Prediction {
    /// The value in SI units.
    pub value: f64,
    /// 90 % interval, ends in SI units.
    pub interval: Interval,
    /// Whether there are atoms of a kind that no molecule of this fit has.
    pub unknown_atoms: bool,
}

/// How many times nearer than for the correction a molecule has to be to count as a relative.
const RELATIVE: f64 = 8.0;

/// What counts of relatives before there is any: half a molecule with the usual error.
const NO_RELATIVE: f64 = 0.5;

/// The molecules of a fit near one molecule, and how well they came out in
/// cross-validation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Relatives {
    /// Similarity to the nearest.
    most_similar: f64,
    weight: f64,
    error: f64,
}

impl Default for Relatives {
    fn default() -> Self {
        Self {
            most_similar: 0.0,
            weight: NO_RELATIVE,
            error: NO_RELATIVE,
        }
    }
}

impl Relatives {
    /// Takes a molecule at a squared distance into account; `error` is its own in
    /// cross-validation over the mean of the fit.
    pub fn add(&mut self, squared_distance: f64, error: f64) {
        self.see(similarity(squared_distance));
        let weight = similarity(RELATIVE * RELATIVE * squared_distance);
        self.weight += weight;
        self.error += weight * error;
    }

    /// Takes the similarity to a molecule into account.
    pub(super) fn see(&mut self, similarity: f64) {
        self.most_similar = self.most_similar.max(similarity);
    }

    /// How far the nearest is: the root of what its similarity lacks to one, which
    /// near zero goes with the distance.
    pub fn nearest(&self) -> f64 {
        (1.0 - self.most_similar).max(0.0).sqrt()
    }

    /// As if every molecule were as far as the nearest: for levels without distances.
    pub const fn unknown() -> Self {
        Self {
            most_similar: 1.0,
            weight: 1.0,
            error: 1.0,
        }
    }

    pub(super) fn ln_density(&self) -> f64 {
        self.weight.ln()
    }

    pub(super) fn ln_error(&self) -> f64 {
        (self.error / self.weight).max(0.05).ln()
    }
}

/// A molecule of the fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Supporting {
    /// Its number among all molecules of the reference.
    pub molecule: u32,
    /// Its part in the correction.
    pub part: f32,
    /// Its error in cross-validation over the mean of the fit.
    pub error: f32,
}

/// A fitted quantity at one level.
#[derive(Clone, Debug)]
pub struct Model {
    /// What it gives.
    pub quantity: Quantity,
    /// From what.
    pub level: Level,
    /// Constant term of the sum.
    pub intercept: f64,
    /// Weight of each term by number; see [`Described::each_term`].
    pub weights: Vec<f64>,
    /// Molecules of the fit.
    pub support: Vec<Supporting>,
    /// In how many molecules of this fit each environment occurs, by position.
    pub occurrences: Vec<u32>,
    /// Width of the error.
    pub scale: Scale,
    /// Errors of the support by number of the molecule, NaN for others; made by
    /// [`index`](Self::index).
    pub errors: Vec<f32>,
}

impl Model {
    /// Files the errors of the support by molecule.
    pub fn index(&mut self) {
        let last = self.support.iter().map(|other| other.molecule).max();
        self.errors = vec![f32::NAN; last.map_or(0, |last| last as usize + 1)];
        for other in &self.support {
            self.errors[other.molecule as usize] = other.error;
        }
    }

    /// The relatives of a molecule in this fit; `near` are all that are near enough,
    /// with their squared distances.
    pub(super) fn relatives(
        &self,
        near: impl Iterator<Item = (u32, f32)>,
        most_similar: f64,
    ) -> Relatives {
        let mut relatives = Relatives::default();
        relatives.see(most_similar);
        for (molecule, squared) in near {
            match self.errors.get(molecule as usize) {
                Some(error) if !error.is_nan() => {
                    relatives.add(f64::from(squared), f64::from(*error));
                }
                _ => {}
            }
        }
        relatives
    }

    /// The linear sum without correction.
    pub(super) fn linear(
        &self,
        table: &EnvironmentTable,
        described: &Described,
        known: Option<Known>,
    ) -> f64 {
        let mut sum = self.intercept;
        described.each_term(table, self.quantity, self.level, known, |term, value| {
            sum += self.weights[term as usize] * value;
        });
        sum
    }

    /// How rare the environments of a molecule are in this fit: the sum over
    /// those of first and second order of one over their occurrences.
    pub fn rarity(&self, described: &Described) -> f64 {
        rarity(described, &self.occurrences, self.level)
    }

    /// Whether the molecule has an atom of a kind that no molecule of this fit has,
    /// whatever it is bound to: then there is no value.
    pub fn has_new_kind_of_atom(&self, described: &Described) -> bool {
        has_new_kind_of_atom(described, &self.occurrences)
    }

    /// Whether some atom of the molecule is of a kind that no molecule of this
    /// fit has, be it by itself or, for hetero atoms, with its neighbors.
    pub fn has_unknown_atoms(&self, described: &Described) -> bool {
        has_unknown_atoms(described, &self.occurrences)
    }
}

/// Whether a first-order environment of the molecule occurs nowhere.
pub fn has_unknown_atoms(described: &Described, occurrences: &[u32]) -> bool {
    let new = described.unknown.iter();
    new.map(|entry| entry.1).any(|order| order <= Order::First)
        || described
            .found_up_to(Order::First)
            .any(|position| occurrences[position as usize] == 0)
}

/// Whether the molecule has an atom of a kind that occurs nowhere, whatever it is bound to.
pub fn has_new_kind_of_atom(described: &Described, occurrences: &[u32]) -> bool {
    let mut new = described.unknown.iter();
    new.any(|entry| entry.1 == Order::Atom)
        || described
            .found_up_to(Order::Atom)
            .any(|position| occurrences[position as usize] == 0)
}

/// The sum over the environments that a level looks at, up to the second order, of
/// one over their occurrences.
pub fn rarity(described: &Described, occurrences: &[u32], level: Level) -> f64 {
    let known: f64 = described
        .found_up_to(farthest(level))
        .map(|position| 1.0 / (f64::from(occurrences[position as usize]) + 0.5))
        .sum();
    known + 2.0 * unknown_environments(described, level) as f64
}

/// How many environments that a level looks at the table does not have.
pub fn unknown_environments(described: &Described, level: Level) -> usize {
    let unknown = described.unknown.iter();
    unknown.filter(|entry| entry.1 <= farthest(level)).count()
}

/// The last order that says how rare a molecule is: the count level does not see more
/// than the first.
const fn farthest(level: Level) -> Order {
    match level {
        Level::Count => Order::First,
        Level::Structure => Order::Second,
    }
}

impl Quantity {
    /// The sum that belongs to a value: the inverse of [`closed`](Self::closed).
    pub fn opened(self, value: f64, heavy_atoms: f64, known: Option<Known>) -> Option<f64> {
        let sum = match self {
            Self::BoilingPoint => (value / 400.0).powi(2),
            Self::MolarVolume => 1e5 * value / heavy_atoms,
            Self::MeltingPoint => value / 100.0,
            Self::FlashPoint => (value - self.base(known?)) / 100.0,
            Self::HansenDispersion | Self::HansenPolar | Self::HansenHydrogenBonding => {
                value / 1000.0
            }
            Self::LogPOctanolWater => value,
            Self::IdealGasEnthalpyOfFormation => value / 1e5,
            _ => (value / self.base(known?)).ln(),
        };
        sum.is_finite().then_some(sum)
    }

    /// A sum brought to where the quantity can be: two are not negative by definition.
    pub(super) fn settled(self, sum: f64) -> f64 {
        match self {
            Self::HansenPolar | Self::HansenHydrogenBonding => sum.max(0.0),
            _ => sum,
        }
    }

    /// The value that belongs to a sum: it grows with the sum, for every quantity.
    ///
    /// `None` where the sum is outside what the closing function takes, or
    /// what the quantity rests on is not known.
    pub fn closed(self, sum: f64, heavy_atoms: f64, known: Option<Known>) -> Option<f64> {
        let value = match self {
            // below 60 K nothing of the fit boils
            Self::BoilingPoint => (sum > 0.0225).then(|| 400.0 * sum.sqrt())?,
            Self::MolarVolume => (sum > 0.0).then_some(1e-5 * sum * heavy_atoms)?,
            Self::MeltingPoint => (sum > 0.0).then_some(100.0 * sum)?,
            Self::FlashPoint => {
                let value = self.base(known?) + 100.0 * sum;
                (value > 0.0).then_some(value)?
            }
            Self::HansenPolar | Self::HansenHydrogenBonding => 1000.0 * self.settled(sum),
            Self::HansenDispersion => (sum > 0.0).then_some(1000.0 * sum)?,
            Self::LogPOctanolWater => sum,
            Self::IdealGasEnthalpyOfFormation => 1e5 * sum,
            _ => self.base(known?) * sum.exp(),
        };
        value.is_finite().then_some(value)
    }

    /// A first guess from what the quantity rests on; the sum tells the deviation from it.
    /// The rules are quoted from memory: the fit makes up for what they miss.
    fn base(self, known: Known) -> f64 {
        const R: f64 = crate::quantity::GAS_CONSTANT_J_PER_MOL_K;
        let tb = known.boiling_point_k;
        let volume = known.molar_volume_m3_per_mol;
        match self {
            // Guldberg's rule: the critical temperature is one and a half times the boiling point
            Self::CriticalTemperature => 1.5 * tb,
            Self::CriticalPressure => 0.26 * R * 1.5 * tb / (2.7 * volume),
            Self::CriticalVolume => 2.7 * volume,
            // the rule of Kistiakowsky, carried to 298.15 K in the manner of Watson
            Self::VaporPressureSlope => 4.4 + tb.ln(),
            Self::EnthalpyOfVaporizationAt298 => {
                R * tb * (4.4 + tb.ln()) * (3.0 * room(1.5 * tb)).powf(0.38)
            }
            // the power law of van der Waals and Guggenheim
            Self::SurfaceTension => 0.055 * room(1.6 * tb).powf(11.0 / 9.0),
            Self::FlashPoint => 0.7 * tb,
            Self::Viscosity => (tb / 150.0 - 8.0).exp(),
            _ => 1.0,
        }
    }
}

/// How far 298.15 K is below a critical temperature, as a part of it; at least 0.03, since
/// a rough critical temperature may lie below.
fn room(critical_temperature_k: f64) -> f64 {
    (1.0 - crate::quantity::REFERENCE_TEMPERATURE_K / critical_temperature_k).max(0.03)
}
