//! Where molecules, tables, data, methods and models meet: a brief becomes a
//! plan, a candidate becomes figures and a verdict, a mixture is described.
//!
//! Reads no file, starts no thread, prints nothing. Entry points:
//! [`Library::built_in`], [`Plan::new`] and [`Plan::evaluate`],
//! [`properties`], [`describe_mixture`].

mod candidate;
mod component;
mod dilution;
mod error;
mod family;
mod figure;
mod fitted;
mod interval;
mod library;
mod naming;
mod plan;
mod profile;
mod quick;
mod solution;
mod source;
mod stability;
mod structure;
mod uncertainty;

pub use candidate::{Scratch, Verdict};
pub use component::{MixtureComponent, VaporCurve};
pub use error::{PlanCause, PlanFault, UnknownMolecule};
pub use family::{Families, Family};
pub use figure::{CATALOG, FIGURES, FigureEntry, FigureKind, figure};
pub use fitted::{EstimateLevel, fitted_quantity};
pub use library::{Library, LibraryError, USER_TABLES, UserTable};
pub use naming::NoSubstance;
#[cfg(test)]
pub(crate) use plan::IntervalsForTests;
pub use plan::{DEFAULT_MODEL, Plan, PlannedFigure, PlannedTarget};
pub use profile::{Coverages, Known, Profile, Profiler, properties, properties_with};
pub use quick::{Quick, QuickFigure, QuickTarget};
pub use solution::{
    MixtureFigure, StatedState, describe_mixture, measured_at_dilution, mole_fractions,
};
pub use source::Source;
pub use uncertainty::{
    Judgement, Spread, interval_that_counts, probability_of_better, score_interval,
};
