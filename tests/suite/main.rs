//! The integration tests, one module for each room.

mod chem;
mod pure;
