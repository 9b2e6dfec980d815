//! The one integration binary: a module for each room.

mod activity_errors;
mod assemble;
mod brief;
mod chem;
mod cli;
mod data;
mod data_folder;
mod evaluate;
mod family;
mod fitted;
mod groups;
mod handbook;
mod independent;
mod intervals;
mod mixture;
mod own_data;
mod pairs;
mod pool;
mod pure;
mod quantity;
mod report;
mod run;
mod screen;
mod tables;
mod workbench;
mod worked_examples;
