//! Fitted estimates as values that the other methods start from.

use std::sync::Arc;

use smallvec::SmallVec;

use super::Library;
use super::profile::{GivenValues, Profile};
use crate::groups::environment::{EnvironmentReader, Order};
use crate::pure::corresponding_states::Constants;
use crate::pure::enthalpy_of_vaporization_of_slope;
use crate::pure::fitted::{
    FittedInput, Known, Level, Prediction, Quantity, volume_carried, volume_temperature_k,
};
use crate::quantity::{Absent, Estimate, Flag, Flags, Property, REFERENCE_TEMPERATURE_K};

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

/// Fitted estimates of a molecule, and why there are none of other properties.
#[derive(Clone, Debug, Default)]
pub(super) struct FittedValues {
    /// What was estimated.
    pub(super) values: GivenValues,
    /// What was refused.
    pub(super) refused: SmallVec<[(Property, Absent); 4]>,
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

/// Fitted estimates of what is not among the values given, which are
/// those for 298.15 K. The same estimates serve at every temperature.
pub(super) fn fitted_beside(
    library: &Library,
    profile: &Profile,
    mut given: GivenValues,
) -> FittedValues {
    let measured = given.len();
    let mut refused = SmallVec::new();
    let Some(level) = library.level().fitted() else {
        return FittedValues::default();
    };
    let mut molecule = Fitting {
        library,
        profile,
        level,
        input: FittedInput::default(),
    };
    library
        .fitted()
        .describe(&profile.environments, &mut molecule.input);
    let have = |given: &GivenValues, property: Property| {
        given
            .iter()
            .find(|(known, _)| *known == property)
            .map(|(_, estimate)| estimate.value)
    };
    let mut boiling_point_k = have(&given, Property::BoilingPoint);
    if boiling_point_k.is_none() {
        match molecule.estimate(Quantity::BoilingPoint, None) {
            Ok(estimate) => {
                boiling_point_k = Some(estimate.value);
                given.push((Property::BoilingPoint, estimate));
            }
            Err(reason) => refused.push((Property::BoilingPoint, reason)),
        }
    }
    let molar_mass = profile.facts.molar_mass_kg_per_mol;
    let measured_density = given.iter().find(|(known, estimate)| {
        *known == Property::LiquidDensity
            && estimate
                .temperature_k
                .is_some_and(|t| (t - REFERENCE_TEMPERATURE_K).abs() < 0.01)
    });
    let volume_k = boiling_point_k.map_or(REFERENCE_TEMPERATURE_K, volume_temperature_k);
    let mut volume = measured_density.and_then(|(_, density)| {
        // Guldberg's critical temperature will do for so short a way
        let critical_k = 1.5 * boiling_point_k?;
        let volume = molar_mass / density.value;
        volume_carried(volume, REFERENCE_TEMPERATURE_K, volume_k, critical_k)
    });
    if volume.is_none() {
        match molecule.estimate(Quantity::MolarVolume, None) {
            Ok(estimate) => {
                volume = Some(estimate.value);
                if have(&given, Property::LiquidDensity).is_none() {
                    let density = density_of(estimate, molar_mass, volume_k);
                    given.push((Property::LiquidDensity, density));
                }
            }
            Err(reason) => refused.push((Property::LiquidDensity, reason)),
        }
    }
    let known = match (boiling_point_k, volume) {
        (Some(boiling_point_k), Some(molar_volume_m3_per_mol)) => Some(Known {
            boiling_point_k,
            molar_volume_m3_per_mol,
            molar_mass_kg_per_mol: molar_mass,
        }),
        _ => None,
    };
    for (property, quantity) in DIRECT {
        // whether there is a flash point at all cannot be told there
        let no_flash = property == Property::FlashPoint && profile.facts.burns_doubtfully();
        if no_flash || have(&given, property).is_some() {
            continue;
        }
        match molecule.estimate(quantity, known) {
            Ok(estimate) if property.depends_on_temperature() => {
                given.push((property, estimate.at(REFERENCE_TEMPERATURE_K)));
            }
            Ok(estimate) => given.push((property, estimate)),
            Err(reason) => refused.push((property, reason)),
        }
    }
    if have(&given, Property::EnthalpyOfVaporization).is_none() {
        match molecule.enthalpy_of_vaporization(&given, known) {
            Ok(estimate) => given.push((Property::EnthalpyOfVaporization, estimate)),
            Err(reason) => refused.push((Property::EnthalpyOfVaporization, reason)),
        }
    }
    given.drain(..measured);
    FittedValues {
        values: given,
        refused,
    }
}

/// The density that goes with a molar volume at a temperature in K.
fn density_of(volume: Estimate, molar_mass_kg_per_mol: f64, volume_k: f64) -> Estimate {
    let ends = |(low, high)| (molar_mass_kg_per_mol / high, molar_mass_kg_per_mol / low);
    Estimate {
        value: molar_mass_kg_per_mol / volume.value,
        interval: volume.interval.map(ends),
        ..volume
    }
    .at(volume_k)
}

struct Fitting<'a> {
    library: &'a Library,
    profile: &'a Profile,
    level: Level,
    input: FittedInput,
}

impl Fitting<'_> {
    fn estimate(&mut self, quantity: Quantity, known: Option<Known>) -> Result<Estimate, Absent> {
        let fitted = self.library.fitted();
        let model = fitted.model(quantity, self.level);
        if model.has_new_kind_of_atom(&self.input.molecule) {
            let words = self.unknown_words(quantity);
            return Err(Absent::Because(
                format!("{}: {words}", self.level.id()).into(),
            ));
        }
        let prediction: Prediction =
            fitted.predict(quantity, self.level, &mut self.input, known)?;
        let mut flags = Flags::NONE;
        let mut note = None;
        if prediction.unknown_atoms {
            flags = flags.with(Flag::OutsideFamily);
            note = Some(self.unknown_words(quantity));
        }
        Ok(Estimate {
            interval: Some(prediction.interval),
            note,
            ..Estimate::new(prediction.value, self.level.id())
        }
        .flagged(flags))
    }

    /// From the fitted slope of the vapor-pressure curve at the boiling point.
    fn enthalpy_of_vaporization(
        &mut self,
        given: &GivenValues,
        known: Option<Known>,
    ) -> Result<Estimate, Absent> {
        let slope = self.estimate(Quantity::VaporPressureSlope, known)?;
        let of = |property: Property| {
            given
                .iter()
                .find(|(known, _)| *known == property)
                .map(|(_, estimate)| estimate)
                .ok_or(Absent::NoMethod)
        };
        let tb = of(Property::BoilingPoint)?;
        let constants = Constants::new(
            tb.value,
            of(Property::CriticalTemperature)?.value,
            of(Property::CriticalPressure)?.value,
            self.level.id(),
        )?;
        let associates = self.profile.facts.associates;
        Ok(enthalpy_of_vaporization_of_slope(
            slope, tb, &constants, associates,
        ))
    }

    /// Which atoms of the molecule no molecule of the fit has.
    fn unknown_words(&self, quantity: Quantity) -> Arc<str> {
        let fitted = self.library.fitted();
        let model = fitted.model(quantity, self.level);
        let mut first: Option<String> = None;
        EnvironmentReader::new().each_of(&self.profile.molecule, |environment, _| {
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
}
