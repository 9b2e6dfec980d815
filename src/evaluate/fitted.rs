//! Fitted estimates as values that the other methods start from.

use std::sync::Arc;

use smallvec::SmallVec;

use super::Library;
use super::profile::{GivenValues, Profile};
use crate::groups::environment::{EnvironmentReader, Order};
use crate::pure::corresponding_states::Constants;
use crate::pure::fitted::{
    FittedInput, Known, Level, Prediction, Quantity, volume_carried, volume_temperature_k,
};
use crate::pure::{density_of_fitted_volume, enthalpy_of_vaporization_of_slope};
use crate::quantity::{
    Absent, Estimate, Flag, Flags, Property, PropertySet, REFERENCE_TEMPERATURE_K,
};

/// Which methods estimate what was not measured.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum EstimateLevel {
    /// Fitted sums over the whole structure, corrected by similar molecules.
    #[default]
    Structure,
    /// Fitted sums over counts of first-order environments.
    Count,
    /// Joback and Reid, and what follows from them.
    Joback,
}

impl EstimateLevel {
    /// Every choice.
    pub const ALL: [Self; 3] = [Self::Structure, Self::Count, Self::Joback];

    /// Up to which order environments are counted: no further than estimates need them.
    pub(super) const fn environments(self) -> Option<Order> {
        match self {
            Self::Structure => Some(Order::Pair),
            Self::Count => Some(Order::Second),
            Self::Joback => None,
        }
    }

    /// The word for it on the command line and in briefs.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Structure => "structure",
            Self::Count => "count",
            Self::Joback => "joback-reid",
        }
    }

    /// The choice of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|level| level.id() == id)
    }

    const fn fitted(self) -> Option<Level> {
        match self {
            Self::Structure => Some(Level::Structure),
            Self::Count => Some(Level::Count),
            Self::Joback => None,
        }
    }
}

/// Fitted estimates of a molecule, and why there are none of other properties, as far
/// as they were asked for; memory that is used again.
#[derive(Clone, Debug, Default)]
pub(super) struct FittedValues {
    /// What was estimated.
    pub(super) values: GivenValues,
    /// What was refused.
    pub(super) refused: SmallVec<[(Property, Absent); 4]>,
    /// What was asked for.
    told: PropertySet,
    /// Boiling point and molar volume, once they were asked for; the volume in m³/mol.
    boiling_point_k: Option<Option<f64>>,
    volume: Option<Option<f64>>,
    input: FittedInput,
    is_described: bool,
}

/// What is fitted directly, and from which quantity, beside boiling point, density and
/// the enthalpy of vaporization at the boiling point.
const DIRECT: [(Property, Quantity); 13] = [
    (Property::CriticalTemperature, Quantity::CriticalTemperature),
    (Property::CriticalPressure, Quantity::CriticalPressure),
    (Property::CriticalVolume, Quantity::CriticalVolume),
    (
        Property::EnthalpyOfVaporizationAt298,
        Quantity::EnthalpyOfVaporizationAt298,
    ),
    (Property::FlashPoint, Quantity::FlashPoint),
    (Property::MeltingPoint, Quantity::MeltingPoint),
    (Property::LiquidViscosity, Quantity::Viscosity),
    (Property::SurfaceTension, Quantity::SurfaceTension),
    (Property::HansenDispersion, Quantity::HansenDispersion),
    (Property::HansenPolar, Quantity::HansenPolar),
    (
        Property::HansenHydrogenBonding,
        Quantity::HansenHydrogenBonding,
    ),
    (Property::LogPOctanolWater, Quantity::LogPOctanolWater),
    (
        Property::IdealGasEnthalpyOfFormation,
        Quantity::IdealGasEnthalpyOfFormation,
    ),
];

/// The fitted quantity that a property is, if it is one.
pub fn fitted_quantity(property: Property) -> Option<Quantity> {
    let direct = DIRECT.iter().find(|direct| direct.0 == property);
    match property {
        Property::BoilingPoint => Some(Quantity::BoilingPoint),
        Property::EnthalpyOfVaporization => Some(Quantity::VaporPressureSlope),
        _ => direct.map(|direct| direct.1),
    }
}

/// What estimates are made of.
#[derive(Clone, Copy)]
struct Subject<'a> {
    library: &'a Library,
    profile: &'a Profile,
    level: Level,
    given: &'a GivenValues,
}

impl FittedValues {
    /// Forgets the molecule.
    pub(super) fn clear(&mut self) {
        self.values.clear();
        self.refused.clear();
        self.told = PropertySet::NONE;
        self.boiling_point_k = None;
        self.volume = None;
        self.is_described = false;
    }

    /// Adds fitted estimates of the properties asked that are not among the values
    /// given, which are those for 298.15 K and stay the same for a molecule. The
    /// same estimates serve at every temperature.
    pub(super) fn add(
        &mut self,
        library: &Library,
        profile: &Profile,
        given: &GivenValues,
        asked: PropertySet,
    ) {
        let Some(level) = library.level().fitted() else {
            return;
        };
        let asked = with_constants(asked);
        if self.told.contains_all(asked) {
            return;
        }
        if !self.is_described {
            let fitted = library.fitted();
            fitted.describe(&profile.environments, &mut self.input);
            self.is_described = true;
        }
        let of = Subject {
            library,
            profile,
            level,
            given,
        };
        let new =
            |told: PropertySet, property| asked.contains(property) && !told.contains(property);
        if new(self.told, Property::BoilingPoint) {
            self.boiling_point_k(of);
        }
        if new(self.told, Property::LiquidDensity) {
            self.volume(of);
        }
        for (property, quantity) in DIRECT {
            // whether there is a flash point at all cannot be told there
            let no_flash = property == Property::FlashPoint && profile.facts.burns_doubtfully();
            if !new(self.told, property) || no_flash || have(given, property).is_some() {
                continue;
            }
            let known = match quantity.terms(level).rests_on_others {
                true => self.known(of),
                false => None,
            };
            match self.estimate(of, quantity, known) {
                Ok(estimate) if property.depends_on_temperature() => {
                    let estimate = estimate.at(REFERENCE_TEMPERATURE_K);
                    self.values.push((property, estimate));
                }
                Ok(estimate) => self.values.push((property, estimate)),
                Err(reason) => self.refused.push((property, reason)),
            }
        }
        if new(self.told, Property::EnthalpyOfVaporization)
            && have(given, Property::EnthalpyOfVaporization).is_none()
        {
            match self.enthalpy_of_vaporization(of) {
                Ok(estimate) => self
                    .values
                    .push((Property::EnthalpyOfVaporization, estimate)),
                Err(reason) => self
                    .refused
                    .push((Property::EnthalpyOfVaporization, reason)),
            }
        }
        self.told = self.told.union(asked);
    }

    /// From the fitted slope of the vapor-pressure curve at the boiling point; the critical
    /// constants have been asked for before.
    fn enthalpy_of_vaporization(&mut self, of: Subject<'_>) -> Result<Estimate, Absent> {
        let known = self.known(of);
        let slope = self.estimate(of, Quantity::VaporPressureSlope, known)?;
        let value = |property: Property| {
            of.given
                .iter()
                .chain(&self.values)
                .find(|(known, _)| *known == property)
                .map(|(_, estimate)| estimate)
                .ok_or(Absent::NoMethod)
        };
        let tb = value(Property::BoilingPoint)?;
        let constants = Constants::new(
            tb.value,
            value(Property::CriticalTemperature)?.value,
            value(Property::CriticalPressure)?.value,
            of.level.id(),
        )?;
        let associates = of.profile.facts.associates;
        Ok(enthalpy_of_vaporization_of_slope(
            slope, tb, &constants, associates,
        ))
    }

    /// What other quantities rest on.
    fn known(&mut self, of: Subject<'_>) -> Option<Known> {
        let boiling_point_k = self.boiling_point_k(of);
        let volume = self.volume(of);
        Some(Known {
            boiling_point_k: boiling_point_k?,
            molar_volume_m3_per_mol: volume?,
            molar_mass_kg_per_mol: of.profile.facts.molar_mass_kg_per_mol,
        })
    }

    fn boiling_point_k(&mut self, of: Subject<'_>) -> Option<f64> {
        if let Some(known) = self.boiling_point_k {
            return known;
        }
        let mut found = have(of.given, Property::BoilingPoint);
        if found.is_none() {
            match self.estimate(of, Quantity::BoilingPoint, None) {
                Ok(estimate) => {
                    found = Some(estimate.value);
                    self.values.push((Property::BoilingPoint, estimate));
                }
                Err(reason) => self.refused.push((Property::BoilingPoint, reason)),
            }
        }
        *self.boiling_point_k.insert(found)
    }

    fn volume(&mut self, of: Subject<'_>) -> Option<f64> {
        if let Some(known) = self.volume {
            return known;
        }
        let molar_mass = of.profile.facts.molar_mass_kg_per_mol;
        let measured_density = of.given.iter().find(|(known, estimate)| {
            *known == Property::LiquidDensity
                && estimate
                    .temperature_k
                    .is_some_and(|t| (t - REFERENCE_TEMPERATURE_K).abs() < 0.01)
        });
        let boiling_point_k = self.boiling_point_k(of);
        let volume_k = boiling_point_k.map_or(REFERENCE_TEMPERATURE_K, volume_temperature_k);
        let mut found = measured_density.and_then(|(_, density)| {
            // Guldberg's critical temperature will do for so short a way
            let critical_k = 1.5 * boiling_point_k?;
            let volume = molar_mass / density.value;
            volume_carried(volume, REFERENCE_TEMPERATURE_K, volume_k, critical_k)
        });
        if found.is_none() {
            match self.estimate(of, Quantity::MolarVolume, None) {
                Ok(estimate) => {
                    found = Some(estimate.value);
                    if have(of.given, Property::LiquidDensity).is_none() {
                        // what boils nowhere is taken for a high boiler
                        let tb = boiling_point_k.unwrap_or(f64::INFINITY);
                        let has_constants = self.has_critical_constants(of);
                        let density =
                            density_of_fitted_volume(estimate, molar_mass, tb, has_constants);
                        self.values.push((Property::LiquidDensity, density));
                    }
                }
                Err(reason) => self.refused.push((Property::LiquidDensity, reason)),
            }
        }
        *self.volume.insert(found)
    }

    /// Whether the fits give critical constants: no kind of atom is new to them.
    fn has_critical_constants(&self, of: Subject<'_>) -> bool {
        let mut both = [Quantity::CriticalTemperature, Quantity::CriticalPressure].into_iter();
        both.all(|quantity| {
            let model = of.library.fitted().model(quantity, of.level);
            !model.has_new_kind_of_atom(&self.input.molecule)
        })
    }

    fn estimate(
        &mut self,
        Subject {
            library,
            profile,
            level,
            ..
        }: Subject<'_>,
        quantity: Quantity,
        known: Option<Known>,
    ) -> Result<Estimate, Absent> {
        let fitted = library.fitted();
        let model = fitted.model(quantity, level);
        if model.has_new_kind_of_atom(&self.input.molecule) {
            let words = unknown_words(library, profile, level, quantity);
            return Err(Absent::Because(format!("{}: {words}", level.id()).into()));
        }
        let prediction: Prediction = fitted.predict(quantity, level, &mut self.input, known)?;
        let mut flags = Flags::NONE;
        let mut note = None;
        if prediction.unknown_atoms {
            flags = flags.with(Flag::OutsideFamily);
            note = Some(unknown_words(library, profile, level, quantity));
        }
        Ok(Estimate {
            interval: Some(prediction.interval),
            note,
            ..Estimate::new(prediction.value, level.id())
        }
        .flagged(flags))
    }
}

/// Properties with the fitted constants that those of them start from which are not
/// fitted themselves.
fn with_constants(asked: PropertySet) -> PropertySet {
    let critical = [Property::CriticalTemperature, Property::CriticalPressure];
    match asked.contains(Property::EnthalpyOfVaporization) {
        true => asked.union(critical.into_iter().collect()),
        false => asked,
    }
}

/// The value given of a property.
fn have(given: &GivenValues, property: Property) -> Option<f64> {
    given
        .iter()
        .find(|(known, _)| *known == property)
        .map(|(_, estimate)| estimate.value)
}

/// Which atoms of the molecule no molecule of the fit has.
fn unknown_words(
    library: &Library,
    profile: &Profile,
    level: Level,
    quantity: Quantity,
) -> Arc<str> {
    let fitted = library.fitted();
    let model = fitted.model(quantity, level);
    let mut first: Option<String> = None;
    EnvironmentReader::new().each_of(&profile.molecule, |environment, _| {
        if environment.order() > Order::First {
            return;
        }
        let position = fitted.table().position(environment.key());
        let seen = position.map_or(0, |position| model.occurrences[position as usize]);
        if seen == 0 {
            // the first by its words, so that the numbering of atoms does not matter
            let words = environment.to_string();
            if first.as_ref().is_none_or(|first| words < *first) {
                first = Some(words);
            }
        }
    });
    match first {
        Some(words) => format!("no molecule of the fit has {words}").into(),
        None => "no molecule of the fit has some of its atoms".into(),
    }
}
