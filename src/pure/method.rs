//! The register of pure-component methods.

use super::corresponding_states::{
    CATOIRE_NAUDET, LiquidDensityMethod, SASTRI_RAO, VaporPressureMethod,
};
use super::joback;
use crate::quantity::Property;

/// Whether a method is used unless another is asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// Used by default.
    Default,
    /// Used when named.
    Selectable,
}

/// One way to one property.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Method {
    /// Identifier, unique for the property.
    pub id: &'static str,
    /// What it gives.
    pub property: Property,
    /// Published source.
    pub source: &'static str,
    /// Other properties it starts from, measured or estimated.
    pub needs: &'static [Property],
    /// Whether it needs the groups of Joback and Reid.
    pub needs_groups: bool,
    /// Default or not.
    pub role: Role,
}

/// Identifier of a molar mass, which the caller computes.
pub(super) const ATOMIC_WEIGHTS: &str = "standard-atomic-weights";

const JOBACK: &str =
    "Joback and Reid, Chem. Eng. Commun. 57 (1987) 233-243, doi:10.1080/00986448708960487";
const AMBROSE_WALTON: &str =
    "Ambrose and Walton, Pure Appl. Chem. 61 (1989) 1395-1403, doi:10.1351/pac198961081395";
const LEE_KESLER: &str = "Lee and Kesler, AIChE J. 21 (1975) 510-527, doi:10.1002/aic.690210313";
const RIEDEL: &str = "Riedel, Chem. Ing. Tech. 26 (1954) 83-89, doi:10.1002/cite.330260206";
const EDMISTER: &str = "Edmister, Petroleum Refiner 37(4) (1958) 173-179";
const TYN_CALUS: &str = "Tyn and Calus, Processing 21(4) (1975) 16-17, carried to T with Rackett, \
     J. Chem. Eng. Data 15 (1970) 514-517, doi:10.1021/je60047a012, and Yamada and Gunn, \
     J. Chem. Eng. Data 18 (1973) 234-236, doi:10.1021/je60057a006";
const YAMADA_GUNN: &str = "Rackett, J. Chem. Eng. Data 15 (1970) 514-517, doi:10.1021/je60047a012; \
     Yamada and Gunn, J. Chem. Eng. Data 18 (1973) 234-236, doi:10.1021/je60057a006";
const RACKETT: &str = "Rackett, J. Chem. Eng. Data 15 (1970) 514-517, doi:10.1021/je60047a012";
const HANKINSON_THOMSON: &str =
    "Hankinson and Thomson, AIChE J. 25 (1979) 653-663, doi:10.1002/aic.690250412";

const CRITICAL_POINT: &[Property] = &[
    Property::BoilingPoint,
    Property::CriticalTemperature,
    Property::CriticalPressure,
];
const CRITICAL_POINT_AND_VOLUME: &[Property] = &[
    Property::BoilingPoint,
    Property::CriticalTemperature,
    Property::CriticalPressure,
    Property::CriticalVolume,
];

const fn additive(property: Property, needs: &'static [Property]) -> Method {
    Method {
        id: joback::ID,
        property,
        source: JOBACK,
        needs,
        needs_groups: true,
        role: Role::Default,
    }
}

const fn relation(
    id: &'static str,
    property: Property,
    source: &'static str,
    needs: &'static [Property],
    role: Role,
) -> Method {
    Method {
        id,
        property,
        source,
        needs,
        needs_groups: false,
        role,
    }
}

/// Every method that is built in, by property in display order, the default first.
pub const METHODS: &[Method] = &[
    relation(
        ATOMIC_WEIGHTS,
        Property::MolarMass,
        "conventional standard atomic weights of IUPAC/CIAAW",
        &[],
        Role::Default,
    ),
    additive(Property::BoilingPoint, &[]),
    additive(Property::MeltingPoint, &[]),
    additive(Property::CriticalTemperature, &[Property::BoilingPoint]),
    additive(Property::CriticalPressure, &[]),
    additive(Property::CriticalVolume, &[]),
    relation(
        VaporPressureMethod::AmbroseWalton.id(),
        Property::AcentricFactor,
        AMBROSE_WALTON,
        CRITICAL_POINT,
        Role::Default,
    ),
    relation(
        VaporPressureMethod::LeeKesler.id(),
        Property::AcentricFactor,
        LEE_KESLER,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    relation(
        VaporPressureMethod::Riedel.id(),
        Property::AcentricFactor,
        RIEDEL,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    relation(
        "edmister",
        Property::AcentricFactor,
        EDMISTER,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    relation(
        LiquidDensityMethod::TynCalus.id(),
        Property::LiquidDensity,
        TYN_CALUS,
        CRITICAL_POINT_AND_VOLUME,
        Role::Default,
    ),
    relation(
        LiquidDensityMethod::RackettYamadaGunn.id(),
        Property::LiquidDensity,
        YAMADA_GUNN,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    relation(
        LiquidDensityMethod::Rackett.id(),
        Property::LiquidDensity,
        RACKETT,
        CRITICAL_POINT_AND_VOLUME,
        Role::Selectable,
    ),
    relation(
        LiquidDensityMethod::HankinsonThomson.id(),
        Property::LiquidDensity,
        HANKINSON_THOMSON,
        CRITICAL_POINT_AND_VOLUME,
        Role::Selectable,
    ),
    relation(
        VaporPressureMethod::AmbroseWalton.id(),
        Property::VaporPressure,
        AMBROSE_WALTON,
        CRITICAL_POINT,
        Role::Default,
    ),
    relation(
        VaporPressureMethod::LeeKesler.id(),
        Property::VaporPressure,
        LEE_KESLER,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    relation(
        VaporPressureMethod::Riedel.id(),
        Property::VaporPressure,
        RIEDEL,
        CRITICAL_POINT,
        Role::Selectable,
    ),
    additive(Property::EnthalpyOfVaporization, &[]),
    additive(Property::EnthalpyOfFusion, &[]),
    additive(Property::IdealGasEnthalpyOfFormation, &[]),
    additive(Property::IdealGasGibbsEnergyOfFormation, &[]),
    additive(Property::IdealGasHeatCapacity, &[]),
    additive(Property::LiquidViscosity, &[]),
    Method {
        id: SASTRI_RAO,
        property: Property::SurfaceTension,
        source: "Sastri and Rao, Chem. Eng. J. 59 (1995) 181-186, doi:10.1016/0923-0467(94)02946-6",
        needs: CRITICAL_POINT,
        // Its class constants ask for alcohol and acid groups.
        needs_groups: true,
        role: Role::Default,
    },
    relation(
        CATOIRE_NAUDET,
        Property::FlashPoint,
        "Catoire and Naudet, J. Phys. Chem. Ref. Data 33 (2004) 1083-1111, doi:10.1063/1.1835321; \
         enthalpy of vaporization carried to 298.15 K with Watson, Ind. Eng. Chem. 35 (1943) 398-406",
        &[
            Property::BoilingPoint,
            Property::CriticalTemperature,
            Property::EnthalpyOfVaporization,
        ],
        Role::Default,
    ),
];

/// The methods of a property, the default first.
pub fn methods_of(property: Property) -> impl Iterator<Item = &'static Method> {
    METHODS
        .iter()
        .filter(move |method| method.property == property)
}

/// The default method of a property, if any is built in.
pub fn default_method(property: Property) -> Option<&'static Method> {
    methods_of(property).find(|method| method.role == Role::Default)
}
