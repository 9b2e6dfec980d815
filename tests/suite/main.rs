//! The integration tests, one module for each room.
//! Integration tests, one module a room.
//! Integration tests, one module for each room.
//! The one integration binary: a module for each room.

mod brief;
mod chem;
mod data;
mod groups;
mod mixture;
mod pure;
mod quantity;
mod report;
mod run;
mod tables;
