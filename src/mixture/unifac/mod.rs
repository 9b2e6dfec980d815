//! UNIFAC and modified UNIFAC (Dortmund): tables, components, mixtures.

mod component;
mod dilute;
mod kernel;
mod reader;
mod tables;

pub use component::{Component, Unifac};
pub use dilute::{GroupsAtTemperature, HostAtTemperature, KeysAtTemperature};
pub use kernel::{UnifacMixture, UnifacState};
pub use tables::{
    Coverage, Interaction, MainGroup, Override, PairRecord, Slip, Slips, Subgroup, TableFile,
    UnifacOverlay, UnifacTables, UnifacTexts,
};
