//! Candidates that qualified, put in order: their rows, the total order, bands of
//! those that cannot be told apart, the measurement worth most.
//!
//! Knows neither where candidates come from (`screen`, `assemble`) nor how they
//! are shown. Entry points: [`Ranked`], [`Standing`], [`number_bands`],
//! [`next_measurement`].

mod bands;
mod fallen;
mod next_measurement;
mod ranked;

pub use bands::{BAND_CHANCE, number_bands};
pub use fallen::Fallen;
pub use next_measurement::{NextMeasurement, next_measurement};
pub use ranked::{Ranked, Standing, merits, ranking_record, ranks};
