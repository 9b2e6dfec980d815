//! The registry of pure-component properties.

use super::unit::Dimension;

/// A pure-component property that Groupsmith can show, target or rank on.
///
/// Listed once, in the order in which every table shows them.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum Property {
    /// Molar mass.
    MolarMass,
    /// Normal boiling point (at 101.325 kPa).
    BoilingPoint,
    /// Melting point at atmospheric pressure.
    MeltingPoint,
    /// Critical temperature.
    CriticalTemperature,
    /// Critical pressure.
    CriticalPressure,
    /// Critical molar volume.
    CriticalVolume,
    /// Pitzer's acentric factor.
    AcentricFactor,
    /// Density of the saturated liquid at the stated temperature.
    LiquidDensity,
    /// Vapor pressure at the stated temperature.
    VaporPressure,
    /// Enthalpy of vaporization at the normal boiling point.
    EnthalpyOfVaporization,
    /// Enthalpy of fusion at the melting point.
    EnthalpyOfFusion,
    /// Ideal-gas enthalpy of formation at 298.15 K.
    IdealGasEnthalpyOfFormation,
    /// Ideal-gas Gibbs energy of formation at 298.15 K.
    IdealGasGibbsEnergyOfFormation,
    /// Ideal-gas heat capacity at the stated temperature.
    IdealGasHeatCapacity,
    /// Liquid viscosity at the stated temperature.
    LiquidViscosity,
    /// Surface tension at the stated temperature.
    SurfaceTension,
    /// Closed-cup flash point.
    FlashPoint,
    /// Hansen dispersion parameter.
    HansenDispersion,
    /// Hansen polar parameter.
    HansenPolar,
    /// Hansen hydrogen-bonding parameter.
    HansenHydrogenBonding,
    /// log10 of the octanol–water partition coefficient.
    LogPOctanolWater,
    /// Molar heat capacity of the liquid less that of the solid at the melting point.
    HeatCapacityChangeOfFusion,
    /// Evaporation rate of a film against that of n-butyl acetate, which is 1.
    RelativeEvaporationRate,
    /// Enthalpy of vaporization at 298.15 K.
    EnthalpyOfVaporizationAt298,
}

impl Property {
    /// How many properties there are; the length of [`Property::ALL`].
    pub const COUNT: usize = 24;

    /// Every property, in display order; `ALL[p as usize] == p`.
    pub const ALL: [Self; Self::COUNT] = [
        Self::MolarMass,
        Self::BoilingPoint,
        Self::MeltingPoint,
        Self::CriticalTemperature,
        Self::CriticalPressure,
        Self::CriticalVolume,
        Self::AcentricFactor,
        Self::LiquidDensity,
        Self::VaporPressure,
        Self::EnthalpyOfVaporization,
        Self::EnthalpyOfFusion,
        Self::IdealGasEnthalpyOfFormation,
        Self::IdealGasGibbsEnergyOfFormation,
        Self::IdealGasHeatCapacity,
        Self::LiquidViscosity,
        Self::SurfaceTension,
        Self::FlashPoint,
        Self::HansenDispersion,
        Self::HansenPolar,
        Self::HansenHydrogenBonding,
        Self::LogPOctanolWater,
        Self::HeatCapacityChangeOfFusion,
        Self::RelativeEvaporationRate,
        Self::EnthalpyOfVaporizationAt298,
    ];

    /// The name used in briefs, CSV and JSON.
    pub const fn id(self) -> &'static str {
        match self {
            Self::MolarMass => "molar_mass",
            Self::BoilingPoint => "boiling_point",
            Self::MeltingPoint => "melting_point",
            Self::CriticalTemperature => "critical_temperature",
            Self::CriticalPressure => "critical_pressure",
            Self::CriticalVolume => "critical_volume",
            Self::AcentricFactor => "acentric_factor",
            Self::LiquidDensity => "liquid_density",
            Self::VaporPressure => "vapor_pressure",
            Self::EnthalpyOfVaporization => "enthalpy_of_vaporization",
            Self::EnthalpyOfFusion => "enthalpy_of_fusion",
            Self::IdealGasEnthalpyOfFormation => "ideal_gas_enthalpy_of_formation",
            Self::IdealGasGibbsEnergyOfFormation => "ideal_gas_gibbs_energy_of_formation",
            Self::IdealGasHeatCapacity => "ideal_gas_heat_capacity",
            Self::LiquidViscosity => "liquid_viscosity",
            Self::SurfaceTension => "surface_tension",
            Self::FlashPoint => "flash_point",
            Self::HansenDispersion => "hansen_dispersion",
            Self::HansenPolar => "hansen_polar",
            Self::HansenHydrogenBonding => "hansen_hydrogen_bonding",
            Self::LogPOctanolWater => "log_p_octanol_water",
            Self::HeatCapacityChangeOfFusion => "heat_capacity_change_of_fusion",
            Self::RelativeEvaporationRate => "relative_evaporation_rate",
            Self::EnthalpyOfVaporizationAt298 => "enthalpy_of_vaporization_298",
        }
    }

    /// The property with this [`id`](Self::id), if there is one.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|property| property.id() == id)
    }

    /// The dimension of its value, which decides the units a user may write.
    pub const fn dimension(self) -> Dimension {
        match self {
            Self::MolarMass => Dimension::MolarMass,
            Self::BoilingPoint
            | Self::MeltingPoint
            | Self::CriticalTemperature
            | Self::FlashPoint => Dimension::Temperature,
            Self::CriticalPressure | Self::VaporPressure => Dimension::Pressure,
            Self::CriticalVolume => Dimension::MolarVolume,
            Self::AcentricFactor | Self::LogPOctanolWater | Self::RelativeEvaporationRate => {
                Dimension::Number
            }
            Self::LiquidDensity => Dimension::Density,
            Self::EnthalpyOfVaporization
            | Self::EnthalpyOfVaporizationAt298
            | Self::EnthalpyOfFusion
            | Self::IdealGasEnthalpyOfFormation
            | Self::IdealGasGibbsEnergyOfFormation => Dimension::MolarEnergy,
            Self::IdealGasHeatCapacity | Self::HeatCapacityChangeOfFusion => {
                Dimension::MolarHeatCapacity
            }
            Self::LiquidViscosity => Dimension::Viscosity,
            Self::SurfaceTension => Dimension::SurfaceTension,
            Self::HansenDispersion | Self::HansenPolar | Self::HansenHydrogenBonding => {
                Dimension::SolubilityParameter
            }
        }
    }

    /// Whether the value depends on the temperature it is asked for at.
    pub const fn depends_on_temperature(self) -> bool {
        matches!(
            self,
            Self::LiquidDensity
                | Self::VaporPressure
                | Self::IdealGasHeatCapacity
                | Self::LiquidViscosity
                | Self::SurfaceTension
        )
    }

    /// Whether a value of zero or less makes no sense.
    pub const fn is_always_positive(self) -> bool {
        !matches!(
            self,
            Self::AcentricFactor
                | Self::IdealGasEnthalpyOfFormation
                | Self::IdealGasGibbsEnergyOfFormation
                | Self::HansenPolar
                | Self::HansenHydrogenBonding
                | Self::LogPOctanolWater
        )
    }

    /// Whether its value is counted from a zero of its own, so that a share of
    /// it means something: not a temperature, a heat of formation, a logarithm.
    pub const fn has_natural_zero(self) -> bool {
        !matches!(self.dimension(), Dimension::Temperature)
            && !matches!(
                self,
                Self::AcentricFactor
                    | Self::IdealGasEnthalpyOfFormation
                    | Self::IdealGasGibbsEnergyOfFormation
                    | Self::LogPOctanolWater
            )
    }
}

/// A set of properties.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct PropertySet(u32);

impl PropertySet {
    /// No property.
    pub const NONE: Self = Self(0);
    /// Every property.
    pub const ALL: Self = Self((1 << Property::COUNT) - 1);

    /// This set with one more property.
    #[must_use]
    pub const fn with(self, property: Property) -> Self {
        Self(self.0 | 1 << property as u8)
    }

    /// Properties of either set.
    #[must_use]
    pub const fn union(self, other: Self) -> Self {
        Self(self.0 | other.0)
    }

    /// Whether the property is in the set.
    pub const fn contains(self, property: Property) -> bool {
        self.0 & 1 << property as u8 != 0
    }

    /// Whether every property of the other set is in this one.
    pub const fn contains_all(self, other: Self) -> bool {
        other.0 & !self.0 == 0
    }

    /// The properties of the set, in their order.
    pub fn iter(self) -> impl Iterator<Item = Property> {
        Property::ALL
            .into_iter()
            .filter(move |&property| self.contains(property))
    }
}

impl FromIterator<Property> for PropertySet {
    fn from_iter<I: IntoIterator<Item = Property>>(properties: I) -> Self {
        properties.into_iter().fold(Self::NONE, Self::with)
    }
}
