//! The tables that come with the program.

use super::{TableText, Tables};

macro_rules! table {
    ($file:literal) => {
        Some(TableText {
            file: concat!("groups/substances/", $file),
            text: include_str!(concat!("../../groups/substances/", $file)),
        })
    };
}

/// The built-in layer.
pub(super) const TABLES: Tables<'static> = Tables {
    substances: table!("substances.csv"),
    measured: table!("measured.csv"),
    hansen: table!("hansen.csv"),
    vapor_pressure: table!("vapor_pressure.csv"),
    density: table!("density.csv"),
    hansen_spheres: None,
    supply: None,
    conflicts: table!("conflicts.csv"),
};
