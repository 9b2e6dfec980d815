//! Units: any text, and there and back.

use groupsmith::quantity::{Dimension, number, unit};
use proptest::prelude::*;

fn dimension() -> impl Strategy<Value = Dimension> {
    prop::sample::select(Dimension::ALL.to_vec())
}

proptest! {
    #[test]
    fn no_text_panics_and_what_is_read_is_finite(text in "\\PC{0,24}", dimension in dimension()) {
        for read in [unit::parse(&text, dimension), unit::parse_difference(&text, dimension)] {
            match read {
                Ok(value) => prop_assert!(value.is_finite()),
                Err(error) => {
                    prop_assert_eq!(error.wanted(), dimension);
                    prop_assert!(error.remedy().contains("accepted: "));
                }
            }
        }
    }

    #[test]
    fn what_tables_show_is_read_back(value_si in 1e-6_f64..1e6, dimension in dimension()) {
        let shown = number::text(unit::to_table(value_si, dimension), 15);
        let symbol = unit::si_symbol(dimension);
        let read = unit::parse(&format!("{shown} {symbol}"), dimension).unwrap();
        prop_assert!((read - value_si).abs() <= 1e-14 * value_si, "{} {}", read, value_si);
    }

    #[test]
    fn what_people_read_is_read_back(value_si in 1e-3_f64..1e6, dimension in dimension()) {
        if let Some(unit) = unit::reading_unit(dimension) {
            let shown = number::for_reading(unit.from_si(value_si));
            let read = unit::parse(&format!("{shown} {unit}"), dimension).unwrap();
            prop_assert!((read - value_si).abs() <= 1e-3 * value_si);
        }
    }
}

#[test]
fn a_wrong_unit_says_what_is_accepted() {
    let error = unit::parse("115 g/mol", Dimension::Temperature).unwrap_err();
    assert_eq!(
        format!("`at_most` {error}\n  {}", error.remedy()),
        "`at_most` is given in `g/mol`, which is not a temperature\n  \
         accepted: K, degC, degF — for example \"120 degC\""
    );
}
