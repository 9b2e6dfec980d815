//! Groupsmith ranks solvent candidates for a stated mixture.
//!
//! Data goes one way: a line of text becomes a [`chem::Molecule`], its
//! [`groups::Breakdown`] gives counts, the counts give estimates, estimates
//! and targets give a verdict, verdicts a ranking. `DEVELOPERS.md` has the map
//! of rooms and what each of them must not do.

pub mod assemble;
pub mod brief;
pub mod chem;
pub mod cli;
pub mod data;
pub mod evaluate;
pub mod groups;
pub mod mixture;
pub mod numeric;
pub mod pure;
pub mod quantity;
pub mod ranking;
pub mod report;
pub mod run;
pub mod screen;
pub mod stability;
pub mod table;
