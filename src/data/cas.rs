//! CAS registry numbers.

use std::fmt;

/// A CAS number whose check digit is right.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct CasNumber(u64);

/// Why a text is not a CAS number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum CasFault {
    /// Not two to seven digits, two digits and one digit with hyphens between.
    Form,
    /// Another last digit would be right.
    CheckDigit { expected: u8 },
}

impl CasNumber {
    /// Reads `67-64-1`; `None` if form or check digit is wrong.
    pub fn parse(text: &str) -> Option<Self> {
        Self::parse_or_fault(text).ok()
    }

    /// The check digit is the sum of the other digits, each times its place
    /// counted from the right, modulo 10.
    pub(super) fn parse_or_fault(text: &str) -> Result<Self, CasFault> {
        let mut parts = text.split('-');
        let (Some(first), Some(second), Some(check), None) =
            (parts.next(), parts.next(), parts.next(), parts.next())
        else {
            return Err(CasFault::Form);
        };
        let digits = |part: &str| part.bytes().all(|byte| byte.is_ascii_digit());
        if !(2..=7).contains(&first.len())
            || second.len() != 2
            || check.len() != 1
            || !digits(first)
            || !digits(second)
            || !digits(check)
        {
            return Err(CasFault::Form);
        }
        let mut number = 0;
        let mut sum = 0;
        let places = (1..=first.len() as u64 + 2).rev();
        for (byte, place) in first.bytes().chain(second.bytes()).zip(places) {
            let digit = u64::from(byte - b'0');
            number = number * 10 + digit;
            sum += digit * place;
        }
        let expected = (sum % 10) as u8;
        if check.as_bytes()[0] - b'0' == expected {
            Ok(Self(number * 10 + u64::from(expected)))
        } else {
            Err(CasFault::CheckDigit { expected })
        }
    }
}

impl fmt::Display for CasNumber {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self(number) = self;
        write!(
            f,
            "{}-{:02}-{}",
            number / 1000,
            number / 10 % 100,
            number % 10
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn check_digits_are_verified() {
        // 7732-18-5 (water): 8·1 + 1·2 + 2·3 + 3·4 + 7·5 + 7·6 = 105, last digit 5.
        assert_eq!(
            CasNumber::parse("7732-18-5").unwrap().to_string(),
            "7732-18-5"
        );
        assert_eq!(CasNumber::parse("50-00-0").unwrap().to_string(), "50-00-0");
        assert_eq!(
            CasNumber::parse_or_fault("67-64-2"),
            Err(CasFault::CheckDigit { expected: 1 })
        );
        for text in [
            "",
            "67641",
            "6-64-1",
            "67-64",
            "67-64-1-1",
            "67-6a-1",
            "67-64-é",
        ] {
            assert_eq!(
                CasNumber::parse_or_fault(text),
                Err(CasFault::Form),
                "{text}"
            );
        }
    }
}
