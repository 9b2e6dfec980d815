//! The integration tests, one module for each room.
//! Integration tests, one module a room.
//! Integration tests, one module for each room.

mod chem;
mod data;
mod mixture;
mod pure;
mod tables;
