//! The register of pure-component methods.

use super::corresponding_states::{
    CATOIRE_NAUDET, LiquidDensityMethod, SASTRI_RAO, VaporPressureMethod,
};
use super::fitted::Level;
use super::joback;
use crate::quantity::{Property, PropertySet};

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

impl Method {
    /// Whether it is fitted on measured values of this project.
    pub fn is_fitted(&self) -> bool {
        Level::ALL.iter().any(|level| level.id() == self.id)
    }
}

/// Identifier of a molar mass, which the caller computes.
pub(super) const ATOMIC_WEIGHTS: &str = "standard-atomic-weights";

/// Identifier of an enthalpy of vaporization carried along the saturation curve.
pub(super) const WATSON: &str = "watson";

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

const BOILING_POINT_AND_DENSITY: &[Property] = &[Property::BoilingPoint, Property::LiquidDensity];
const CRITICAL_POINT_AND_DENSITY: &[Property] = &[
    Property::BoilingPoint,
    Property::CriticalTemperature,
    Property::CriticalPressure,
    Property::LiquidDensity,
];
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

const fn additive(property: Property, needs: &'static [Property], role: Role) -> Method {
    Method {
        id: joback::ID,
        property,
        source: JOBACK,
        needs,
        needs_groups: true,
        role,
    }
}

/// Where the fitted estimates come from.
const FITTED: &str = "fitted on measured values of the project's reference data (groups/estimates, \
     program fit_estimates); linear sums over atom environments, corrected by Gaussian-process \
     regression (C. E. Rasmussen, C. K. I. Williams, Gaussian Processes for Machine Learning, \
     MIT Press 2006)";

const fn fitted(
    level: Level,
    property: Property,
    needs: &'static [Property],
    role: Role,
) -> Method {
    Method {
        id: level.id(),
        property,
        source: FITTED,
        needs,
        needs_groups: false,
        role,
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
    fitted(Level::Structure, Property::BoilingPoint, &[], Role::Default),
    fitted(Level::Count, Property::BoilingPoint, &[], Role::Selectable),
    additive(Property::BoilingPoint, &[], Role::Selectable),
    fitted(Level::Structure, Property::MeltingPoint, &[], Role::Default),
    fitted(Level::Count, Property::MeltingPoint, &[], Role::Selectable),
    additive(Property::MeltingPoint, &[], Role::Selectable),
    fitted(
        Level::Structure,
        Property::CriticalTemperature,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::CriticalTemperature,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    additive(
        Property::CriticalTemperature,
        &[Property::BoilingPoint],
        Role::Selectable,
    ),
    fitted(
        Level::Structure,
        Property::CriticalPressure,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::CriticalPressure,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    additive(Property::CriticalPressure, &[], Role::Selectable),
    fitted(
        Level::Structure,
        Property::CriticalVolume,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::CriticalVolume,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    additive(Property::CriticalVolume, &[], Role::Selectable),
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
    fitted(
        Level::Structure,
        Property::LiquidDensity,
        &[],
        Role::Default,
    ),
    fitted(Level::Count, Property::LiquidDensity, &[], Role::Selectable),
    relation(
        LiquidDensityMethod::TynCalus.id(),
        Property::LiquidDensity,
        TYN_CALUS,
        CRITICAL_POINT_AND_VOLUME,
        Role::Selectable,
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
    fitted(
        Level::Structure,
        Property::EnthalpyOfVaporization,
        CRITICAL_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::EnthalpyOfVaporization,
        CRITICAL_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    additive(Property::EnthalpyOfVaporization, &[], Role::Selectable),
    fitted(
        Level::Structure,
        Property::EnthalpyOfVaporizationAt298,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::EnthalpyOfVaporizationAt298,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    relation(
        WATSON,
        Property::EnthalpyOfVaporizationAt298,
        "Watson, Ind. Eng. Chem. 35 (1943) 398-406",
        &[
            Property::BoilingPoint,
            Property::CriticalTemperature,
            Property::EnthalpyOfVaporization,
        ],
        Role::Selectable,
    ),
    additive(Property::EnthalpyOfFusion, &[], Role::Default),
    fitted(
        Level::Structure,
        Property::IdealGasEnthalpyOfFormation,
        &[],
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::IdealGasEnthalpyOfFormation,
        &[],
        Role::Selectable,
    ),
    additive(Property::IdealGasEnthalpyOfFormation, &[], Role::Selectable),
    additive(Property::IdealGasGibbsEnergyOfFormation, &[], Role::Default),
    additive(Property::IdealGasHeatCapacity, &[], Role::Default),
    fitted(
        Level::Structure,
        Property::LiquidViscosity,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::LiquidViscosity,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    additive(Property::LiquidViscosity, &[], Role::Selectable),
    fitted(
        Level::Structure,
        Property::SurfaceTension,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::SurfaceTension,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    Method {
        id: SASTRI_RAO,
        property: Property::SurfaceTension,
        source: "Sastri and Rao, Chem. Eng. J. 59 (1995) 181-186, doi:10.1016/0923-0467(94)02946-6",
        needs: CRITICAL_POINT,
        // Its class constants ask for alcohol and acid groups.
        needs_groups: true,
        role: Role::Selectable,
    },
    fitted(
        Level::Structure,
        Property::FlashPoint,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::FlashPoint,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
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
        Role::Selectable,
    ),
    fitted(
        Level::Structure,
        Property::HansenDispersion,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::HansenDispersion,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    fitted(
        Level::Structure,
        Property::HansenPolar,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::HansenPolar,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    fitted(
        Level::Structure,
        Property::HansenHydrogenBonding,
        BOILING_POINT_AND_DENSITY,
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::HansenHydrogenBonding,
        BOILING_POINT_AND_DENSITY,
        Role::Selectable,
    ),
    fitted(
        Level::Structure,
        Property::LogPOctanolWater,
        &[],
        Role::Default,
    ),
    fitted(
        Level::Count,
        Property::LogPOctanolWater,
        &[],
        Role::Selectable,
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

/// Properties with all that [`estimate_all`](super::estimate_all) starts from for them,
/// whichever of its methods answers. What the fits start from is not among it: fitted
/// values are given.
pub fn with_inputs(wanted: PropertySet) -> PropertySet {
    let inputs = |of: PropertySet| -> PropertySet {
        METHODS
            .iter()
            .filter(|method| of.contains(method.property) && !method.is_fitted())
            .flat_map(|method| method.needs.iter().copied())
            .collect()
    };
    let mut all = wanted;
    loop {
        let mut more = all.union(inputs(all));
        // every curve of vapor pressures starts from the critical pressure, and takes its
        // slope at the boiling point from the enthalpy of vaporization where there is one
        if more.contains(Property::CriticalPressure) {
            more = more.union([Property::EnthalpyOfVaporization].into_iter().collect());
        }
        if more == all {
            return all;
        }
        all = more;
    }
}
