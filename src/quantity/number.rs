//! Writing numbers: short, deterministic decimal text.
//!
//! [`write_number`] is for CSV and JSON: a stated number of significant digits,
//! trailing zeros dropped, no locale, the same bytes on every machine.
//! [`for_reading`] is for people.

/// Digits written by look-ups: enough for a reader who compares with a reference.
pub const LOOK_UP_DIGITS: u32 = 12;

/// Digits written for each row of a long run.
pub const RUN_DIGITS: u32 = 9;

/// Digits in tables for people.
pub const READING_DIGITS: u32 = 4;

/// Powers of ten that a double holds exactly.
const EXACT_POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16,
    1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
];

/// Appends a finite number with at most `digits` significant digits.
///
/// Plain decimals from 1e-5 up to 1e15 (`0.0125`, `101325`), otherwise with an
/// exponent (`1.5e-7`). Trailing zeros are dropped; negative zero is `0`.
///
/// The digits come from one rounded multiplication or division and one
/// rounding to an integer, both fixed by IEEE 754, so the text is the same on
/// every machine. A value within a rounding error of a tie may be rounded the
/// other way than exact arithmetic would. Text read back and written again
/// with the same digits is the same text.
///
/// # Panics
///
/// If the value is not finite or `digits` is not from 1 to 15: no such number
/// may leave a room.
pub fn write_number(out: &mut Vec<u8>, value: f64, digits: u32) {
    assert!(value.is_finite(), "only finite numbers leave a room");
    assert!((1..=15).contains(&digits), "a double holds 15 digits");
    if value == 0.0 {
        out.push(b'0');
        return;
    }
    if value < 0.0 {
        out.push(b'-');
    }
    let (significand, exponent) = decimal(value.abs(), digits as i32);
    let mut buffer = [0; 20];
    let mut first = buffer.len();
    let mut rest = significand;
    while rest > 0 {
        first -= 1;
        buffer[first] = b'0' + (rest % 10) as u8;
        rest /= 10;
    }
    let all = &buffer[first..];
    let kept = all.len() - all.iter().rev().take_while(|&&digit| digit == b'0').count();
    let shown = &all[..kept];
    if (-5..15).contains(&exponent) {
        if exponent < 0 {
            out.extend_from_slice(b"0.");
            out.resize(out.len() + (-exponent - 1) as usize, b'0');
            out.extend_from_slice(shown);
        } else {
            let whole = exponent as usize + 1;
            if whole >= shown.len() {
                out.extend_from_slice(shown);
                out.resize(out.len() + whole - shown.len(), b'0');
            } else {
                out.extend_from_slice(&shown[..whole]);
                out.push(b'.');
                out.extend_from_slice(&shown[whole..]);
            }
        }
    } else {
        out.push(shown[0]);
        if shown.len() > 1 {
            out.push(b'.');
            out.extend_from_slice(&shown[1..]);
        }
        out.push(b'e');
        if exponent < 0 {
            out.push(b'-');
        }
        write_integer(out, u64::from(exponent.unsigned_abs()));
    }
}

/// Appends a whole number.
pub fn write_integer(out: &mut Vec<u8>, value: u64) {
    let mut buffer = [0; 20];
    let mut first = buffer.len();
    let mut rest = value;
    loop {
        first -= 1;
        buffer[first] = b'0' + (rest % 10) as u8;
        rest /= 10;
        if rest == 0 {
            break;
        }
    }
    out.extend_from_slice(&buffer[first..]);
}

/// A finite number with at most `digits` significant digits, as [`write_number`].
///
/// # Panics
///
/// As [`write_number`].
pub fn text(value: f64, digits: u32) -> String {
    let mut out = Vec::with_capacity(24);
    write_number(&mut out, value, digits);
    String::from_utf8(out).expect("digits are ASCII")
}

/// A number of a brief or a message: as written by a person, conversion dust gone.
pub fn short(value: f64) -> String {
    text(value, LOOK_UP_DIGITS)
}

/// A finite number for people: four significant digits, whole numbers of more
/// digits in full, trailing zeros kept so that a column shows one precision;
/// below 1e-5 and from 1e9 on with an exponent.
///
/// # Panics
///
/// If the value is not finite.
pub fn for_reading(value: f64) -> String {
    assert!(value.is_finite(), "only finite numbers leave a room");
    if value == 0.0 {
        return "0".to_owned();
    }
    let (_, exponent) = decimal(value.abs(), READING_DIGITS as i32);
    if (-5..9).contains(&exponent) {
        let decimals = (READING_DIGITS as i32 - 1 - exponent).max(0) as usize;
        format!("{value:.decimals$}")
    } else {
        text(value, READING_DIGITS)
    }
}

/// The decimal significand with exactly `digits` digits and the exponent of
/// its first digit, for a finite value above 0.
fn decimal(value: f64, digits: i32) -> (u64, i32) {
    let most = EXACT_POWERS[digits as usize];
    // The logarithm of a number just below a power of ten may round up to it.
    let mut exponent = value.log10().floor() as i32;
    // beyond the powers that a double holds exactly, the slow way that always rounds right
    if (digits - exponent).abs() >= EXACT_POWERS.len() as i32 - 1 {
        return decimal_of_any_size(value, digits);
    }
    let mut significand = scaled(value, digits - 1 - exponent);
    if significand < most / 10.0 {
        exponent -= 1;
        significand = scaled(value, digits - 1 - exponent);
    }
    significand = significand.round();
    if significand >= most {
        exponent += 1;
        significand = most / 10.0;
    }
    (significand as u64, exponent)
}

/// [`decimal`] by way of the standard library's text.
fn decimal_of_any_size(value: f64, digits: i32) -> (u64, i32) {
    let text = format!("{value:.*e}", digits as usize - 1);
    let (significand, exponent) = text.split_once('e').expect("written with an exponent");
    let significand = significand.replace('.', "");
    let whole = "digits and an exponent were just written";
    (
        significand.parse().expect(whole),
        exponent.parse().expect(whole),
    )
}

/// value · 10^shift, with one rounding: the power is exact.
fn scaled(value: f64, shift: i32) -> f64 {
    let power = EXACT_POWERS[shift.unsigned_abs() as usize];
    if shift >= 0 {
        value * power
    } else {
        value / power
    }
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    #[test]
    fn numbers_are_short_and_plain() {
        for (value, expected) in [
            (0.0, "0"),
            (-0.0, "0"),
            (1.0, "1"),
            (-1.5, "-1.5"),
            (101_325.0, "101325"),
            (0.1 + 0.2, "0.3"),
            (351.45, "351.45"),
            (0.018_015, "0.018015"),
            (1.0 / 3.0, "0.333333333"),
            (2.0e9 / 3.0, "666666667"),
            (2.0e12 / 3.0, "666666667000"),
            (999_999_999.9, "1000000000"),
            (9.999_999_999_9, "10"),
            (1e-5, "0.00001"),
            (1.5e-7, "1.5e-7"),
            (1e15, "1e15"),
            (-2.5e20, "-2.5e20"),
            (5e-324, "4.94065646e-324"),
            (f64::MAX, "1.79769313e308"),
            (f64::MIN_POSITIVE, "2.22507386e-308"),
        ] {
            assert_eq!(text(value, 9), expected);
        }
    }

    #[test]
    fn people_get_four_digits() {
        for (value, expected) in [
            (0.0, "0"),
            (351.443, "351.4"),
            (1.0, "1.000"),
            (46.069, "46.07"),
            (0.789_3, "0.7893"),
            (101_325.0, "101325"),
            (-234_812.3, "-234812"),
            (0.000_012_3, "0.00001230"),
            (0.000_001_23, "1.23e-6"),
            (9.999_6, "10.00"),
            (9.999_4, "9.999"),
        ] {
            assert_eq!(for_reading(value), expected);
        }
    }

    /// The power of ten that brings its digits before the point is no double's.
    #[test]
    fn very_small_and_large_numbers_are_rounded_right() {
        assert_eq!(text(7.872636453547992e-288, 15), "7.87263645354799e-288");
        assert_eq!(text(1.2345678901234567e300, 15), "1.23456789012346e300");
    }

    proptest! {
        #[test]
        fn text_is_within_half_a_unit_of_the_last_digit(value in any::<f64>().prop_filter("finite", |v| v.is_finite()), digits in 1_u32..=15) {
            let written = text(value, digits);
            let read: f64 = written.parse().unwrap();
            if value.abs() > 1e-290 && value.abs() < 1e290 {
                let unit = 10_f64.powi(value.abs().log10().floor() as i32 + 1 - digits as i32);
                prop_assert!((read - value).abs() <= 0.5 * unit * (1.0 + 1e-9) + 4e-16 * value.abs(), "{value} {written}");
            }
            if digits <= 14 && value.abs() > 1e-290 && value.abs() < 1e290 {
                prop_assert_eq!(text(read, digits), written);
            }
        }
    }
}
