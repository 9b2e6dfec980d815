//! Measured data of substances: names, synonyms and CAS numbers, constants,
//! vapor-pressure and density curves, each number with its published source.
//!
//! Tables come in as text, the built-in ones from `groups/substances/`, a
//! user's later as further layers whose values go before those already there.
//! Loading checks every row against the others (boiling point against curve,
//! formula against structure, CAS check digits, duplicates) and refuses a
//! layer with file, row and column of everything that is wrong with it.
//!
//! Measured data of pairs of substances are in [`pairs`].
//!
//! Estimates nothing and opens no file. Entry points: [`Substances::built_in`],
//! [`Substances::find`],
//! [`Substances::find_structure`], [`Substance::measured`].

mod agreement;
mod built_in;
mod cas;
mod clapeyron;
mod density;
mod error;
mod load;
mod name;
pub mod pairs;
mod points;
mod structure;
mod substance;
mod substances;
mod supply;
mod vapor_pressure;

pub use cas::CasNumber;
pub use clapeyron::ClapeyronEnthalpy;
pub use density::{DensityEquation, LiquidDensity};
pub use error::{DataError, NameError, OutOfRange};
pub use load::{TableText, Tables};
pub use points::{PointCurve, Points, Straight};
pub use substance::{Constant, Substance};
pub use substances::{Conflict, Substances};
pub use supply::{HansenSphere, Price, Supply};
pub use vapor_pressure::{VaporPressure, VaporPressureEquation, WagnerForm};
