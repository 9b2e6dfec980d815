//! Phase equilibrium of a liquid mixture with its vapor and with other liquids.
//!
//! Modified Raoult's law, y_i p = x_i γ_i P_i(T): the vapor is an ideal gas and
//! the Poynting correction is left out, which holds to about 1 % below 3 bar for
//! vapors that do not associate. Vapor pressures are the caller's.

mod azeotrope;
mod boiling;
mod bubble;
mod split;
mod volatility;

pub use azeotrope::{Azeotrope, AzeotropeKind, Condition, Extremum, azeotropes};
pub use boiling::{Boiling, boiling_pressure, boiling_temperature};
pub use bubble::{BubblePoint, Vapor, VaporPressures, bubble_pressure, bubble_temperature};
pub use split::{LiquidPhase, liquid_phases};
pub use volatility::{VolatilityPoint, relative_volatility};
