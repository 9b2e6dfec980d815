//! Relations between T_b, T_c, P_c and what follows from them at a temperature.
//!
//! Every function takes numbers, measured or estimated alike; nothing here
//! knows groups. Entry points: [`Constants`], [`VaporPressureCurve`],
//! [`liquid_density`], [`acentric_factor_edmister`].

mod constants;
mod enthalpy;
mod flash_point;
mod liquid_density;
mod surface_tension;
mod vapor_pressure;

pub use constants::{Constants, acentric_factor_edmister};
pub use enthalpy::{
    enthalpy_of_vaporization_clapeyron, enthalpy_of_vaporization_watson, slope_of_enthalpy,
};
pub use flash_point::flash_point_catoire_naudet;
pub(super) use flash_point::{
    CATOIRE_NAUDET, CATOIRE_NAUDET_BOILING_POINTS_K, CATOIRE_NAUDET_CARBONS,
};
pub use liquid_density::{LiquidDensityCurve, LiquidDensityInput, LiquidDensityMethod};
pub(super) use surface_tension::SASTRI_RAO;
pub use surface_tension::{SurfaceTensionClass, surface_tension_sastri_rao};
pub use vapor_pressure::{VaporPressureCurve, VaporPressureMethod};
