//! Activity models and phase equilibrium of liquid mixtures.
//!
//! Works on component records (group counts turned into `r`, `q` and group
//! areas) and a state; never on a molecule, a file or a vapor-pressure method:
//! table texts come in as strings and vapor pressures as a function of the
//! caller. Mole fractions are used as given and never renormalised in silence.
//!
//! Entry points: [`ActivityModel`] (the registry), [`Unifac`] and its
//! [`Component`]s, [`UnifacMixture`] with its [`UnifacState`] (ln γ and its
//! derivatives), [`Liquid`] (what every model offers to phase equilibrium:
//! [`bubble_temperature`], [`azeotropes`], [`liquid_phases`],
//! [`relative_volatility`]), [`KeysAtTemperature`] and [`HostAtTemperature`]
//! (the batch path), [`SharedGroups`] (the same for candidates of the same main
//! groups, side by side), [`ActivityErrors`] (90 % intervals of ln γ∞), [`UnifacTables`] (what `groupsmith tables` shows).

mod composition;
mod equilibrium;
mod error;
mod excess;
mod liquid;
mod model;
mod uncertainty;
mod unifac;

pub use composition::{MassFractions, MoleFractions, SUM_TOLERANCE, VolumeFractions};
pub use equilibrium::{
    Azeotrope, AzeotropeKind, Boiling, BubblePoint, Condition, Extremum, LiquidPhase, Vapor,
    VaporPressures, VolatilityPoint, azeotropes, boiling_pressure, boiling_temperature,
    bubble_pressure, bubble_temperature, liquid_phases, relative_volatility,
};
pub use error::{MixtureError, PairGap};
pub use excess::Excess;
pub use liquid::{IdealState, Liquid, LiquidMixture};
pub use model::{ActivityModel, ModelStatus, RESERVED_MODELS};
pub use uncertainty::{ActivityErrors, ChemicalClass, ErrorModel, Likeness, LnError};
pub use unifac::{
    CandidateLanes, Component, Coverage, GroupsAtTemperature, HostAtTemperature, Interaction,
    KeysAtTemperature, MainGroup, Override, PairRecord, SharedGroups, Slip, Slips, Subgroup,
    TableFile, Unifac, UnifacMixture, UnifacOverlay, UnifacState, UnifacTables, UnifacTexts,
};
