//! The integration tests, one module for each room.
//! Integration tests, one module a room.

mod chem;
mod data;
mod pure;
