//! The built-in table of measured data.

use groupsmith::data::Substances;

#[test]
fn the_built_in_table_loads() {
    let substances = Substances::built_in().unwrap_or_else(|error| panic!("{error}"));
    assert!(substances.len() >= 500);
}
