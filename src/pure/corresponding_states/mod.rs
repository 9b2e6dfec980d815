//! Relations between T_b, T_c, P_c and what follows from them at a temperature.
//!
//! Every function takes numbers, measured or estimated alike; nothing here
//! knows groups. Entry points: [`Constants`], [`VaporPressureCurve`],
//! [`liquid_density`], [`acentric_factor_edmister`].

mod constants;
mod enthalpy;
mod liquid_density;
mod vapor_pressure;

pub use constants::{Constants, acentric_factor_edmister};
pub use enthalpy::enthalpy_of_vaporization_watson;
pub use liquid_density::{LiquidDensityCurve, LiquidDensityInput, LiquidDensityMethod};
pub use vapor_pressure::{VaporPressureCurve, VaporPressureMethod};
