//! What is fitted, and from which terms.

use crate::groups::environment::Order;

/// How much is known of the molecule.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Level {
    /// Counts of first-order environments, which pieces settle.
    Count,
    /// The whole structure.
    Structure,
}

impl Level {
    /// Both.
    pub const ALL: [Self; 2] = [Self::Count, Self::Structure];

    /// The word in files and method names.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Count => "count-level",
            Self::Structure => "structure-level",
        }
    }
}

/// A fitted quantity. Values are in SI units; temperatures 298.15 K where one matters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[repr(u8)]
pub enum Quantity {
    /// Normal boiling point, K.
    BoilingPoint,
    /// Molar volume of the liquid at its [reference temperature](super::volume_temperature_k), m³/mol.
    MolarVolume,
    /// Critical temperature, K.
    CriticalTemperature,
    /// Critical pressure, Pa.
    CriticalPressure,
    /// Critical volume, m³/mol.
    CriticalVolume,
    /// Enthalpy of vaporization at 298.15 K, J/mol.
    EnthalpyOfVaporizationAt298,
    /// Slope of the vapor-pressure curve at the normal boiling point, d ln P / d ln T.
    VaporPressureSlope,
    /// Closed-cup flash point, K.
    FlashPoint,
    /// Melting point, K.
    MeltingPoint,
    /// Liquid viscosity at 298.15 K, Pa s.
    Viscosity,
    /// Surface tension at 298.15 K, N/m.
    SurfaceTension,
    /// Hansen dispersion parameter, Pa^0.5.
    HansenDispersion,
    /// Hansen polar parameter, Pa^0.5.
    HansenPolar,
    /// Hansen hydrogen-bonding parameter, Pa^0.5.
    HansenHydrogenBonding,
    /// log10 of the octanol–water partition coefficient.
    LogPOctanolWater,
    /// Ideal-gas enthalpy of formation at 298.15 K, J/mol.
    IdealGasEnthalpyOfFormation,
}

/// Whether terms count whole molecules or are shared out over the heavy atoms.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PerAtom {
    /// Counts, for what adds up.
    Count,
    /// Counts over heavy atoms, for what is an average or is fitted per atom.
    Share,
    /// Both, with terms in the size.
    Both,
}

/// The terms of a linear sum.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Terms {
    /// How environments are counted.
    pub per_atom: PerAtom,
    /// Whether bonds and other pairs count beside first and second order.
    pub pairs: bool,
    /// Whether products of class counts (hydroxyls, carbonyls, rings, …) count.
    pub products: bool,
    /// Whether boiling point and molar volume are among the inputs.
    pub rests_on_others: bool,
}

impl Quantity {
    /// How many there are.
    pub const COUNT: usize = 16;

    /// Every quantity; `ALL[q as usize] == q`. Later ones may rest on earlier ones.
    pub const ALL: [Self; Self::COUNT] = [
        Self::BoilingPoint,
        Self::MolarVolume,
        Self::CriticalTemperature,
        Self::CriticalPressure,
        Self::CriticalVolume,
        Self::EnthalpyOfVaporizationAt298,
        Self::VaporPressureSlope,
        Self::FlashPoint,
        Self::MeltingPoint,
        Self::Viscosity,
        Self::SurfaceTension,
        Self::HansenDispersion,
        Self::HansenPolar,
        Self::HansenHydrogenBonding,
        Self::LogPOctanolWater,
        Self::IdealGasEnthalpyOfFormation,
    ];

    /// The name in parameter files.
    pub const fn id(self) -> &'static str {
        match self {
            Self::BoilingPoint => "boiling_point",
            Self::MolarVolume => "molar_volume",
            Self::CriticalTemperature => "critical_temperature",
            Self::CriticalPressure => "critical_pressure",
            Self::CriticalVolume => "critical_volume",
            Self::EnthalpyOfVaporizationAt298 => "enthalpy_of_vaporization_298",
            Self::VaporPressureSlope => "vapor_pressure_slope",
            Self::FlashPoint => "flash_point",
            Self::MeltingPoint => "melting_point",
            Self::Viscosity => "liquid_viscosity",
            Self::SurfaceTension => "surface_tension",
            Self::HansenDispersion => "hansen_dispersion",
            Self::HansenPolar => "hansen_polar",
            Self::HansenHydrogenBonding => "hansen_hydrogen_bonding",
            Self::LogPOctanolWater => "log_p_octanol_water",
            Self::IdealGasEnthalpyOfFormation => "ideal_gas_enthalpy_of_formation",
        }
    }

    /// The quantity of this name.
    pub fn from_id(id: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|quantity| quantity.id() == id)
    }

    /// The terms of its linear sum.
    pub const fn terms(self, level: Level) -> Terms {
        let structure = matches!(level, Level::Structure);
        match self {
            Self::BoilingPoint => Terms {
                per_atom: PerAtom::Both,
                pairs: structure,
                products: true,
                rests_on_others: false,
            },
            Self::MolarVolume => Terms {
                per_atom: PerAtom::Share,
                pairs: structure,
                products: !structure,
                rests_on_others: false,
            },
            Self::MeltingPoint | Self::LogPOctanolWater => Terms {
                per_atom: PerAtom::Both,
                pairs: structure,
                products: false,
                rests_on_others: false,
            },
            Self::IdealGasEnthalpyOfFormation => Terms {
                per_atom: PerAtom::Count,
                pairs: structure,
                products: false,
                rests_on_others: false,
            },
            _ => Terms {
                per_atom: PerAtom::Share,
                pairs: false,
                products: false,
                rests_on_others: true,
            },
        }
    }

    /// Whether an environment of this order is a term.
    pub fn takes(self, level: Level, order: Order) -> bool {
        let terms = self.terms(level);
        match order {
            Order::Atom | Order::First => true,
            Order::Second | Order::Shape => level == Level::Structure && !terms.rests_on_others,
            Order::Pair => level == Level::Structure && terms.pairs,
        }
    }
}
