//! UNIFAC and modified UNIFAC (Dortmund): tables, components, mixtures.

mod component;
mod dilute;
mod kernel;
mod lanes;
mod reader;
mod tables;

pub use component::{Component, Unifac};
pub use dilute::{GroupsAtTemperature, HostAtTemperature, KeysAtTemperature};
pub use kernel::{UnifacMixture, UnifacState};
pub use lanes::{CandidateLanes, SharedGroups};
pub use tables::{
    Coverage, Interaction, MainGroup, Override, PairRecord, Slip, Slips, Subgroup, TableFile,
    UnifacOverlay, UnifacTables, UnifacTexts,
};
