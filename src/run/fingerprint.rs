//! A stable fingerprint of content.

use std::fmt;

/// FNV-1a with 128 bits over sections of bytes.
///
/// Tells whether two texts or sets of tables are the same; it is no protection
/// against somebody who wants them to look the same. The same content gives
/// the same fingerprint on every machine and in every version.
///
/// # Source
///
/// G. Fowler, L. C. Noll, K.-P. Vo, D. Eastlake, The FNV Non-Cryptographic Hash
/// Algorithm, IETF draft draft-eastlake-fnv; prime 2^88 + 2^8 + 0x3b. Its test
/// values for the empty text and for `a` are checked below.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Fingerprint(u128);

const OFFSET_BASIS: u128 = 0x6c62_272e_07bb_0142_62b8_2175_6295_c58d;
const PRIME: u128 = 0x0000_0000_0100_0000_0000_0000_0000_013b;

impl Fingerprint {
    /// The fingerprint of no content, to be added to.
    pub const fn new() -> Self {
        Self(OFFSET_BASIS)
    }

    /// The fingerprint of one text.
    pub const fn of(bytes: &[u8]) -> Self {
        Self::new().with(bytes)
    }

    /// The 128 bits.
    pub const fn value(self) -> u128 {
        self.0
    }

    /// Adds bytes as they are.
    #[must_use]
    pub const fn with(self, bytes: &[u8]) -> Self {
        let mut hash = self.0;
        let mut at = 0;
        while at < bytes.len() {
            hash = (hash ^ bytes[at] as u128).wrapping_mul(PRIME);
            at += 1;
        }
        Self(hash)
    }

    /// Adds a named section; where one ends and the next begins counts.
    #[must_use]
    pub fn with_section(self, name: &str, bytes: &[u8]) -> Self {
        self.with(&(name.len() as u64).to_le_bytes())
            .with(name.as_bytes())
            .with(&(bytes.len() as u64).to_le_bytes())
            .with(bytes)
    }
}

impl Default for Fingerprint {
    fn default() -> Self {
        Self::new()
    }
}

impl fmt::Display for Fingerprint {
    /// 32 hexadecimal digits.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:032x}", self.0)
    }
}

impl serde::Serialize for Fingerprint {
    fn serialize<S: serde::Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_str(self)
    }
}

impl<'de> serde::Deserialize<'de> for Fingerprint {
    fn deserialize<D: serde::Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = std::borrow::Cow::<'de, str>::deserialize(deserializer)?;
        u128::from_str_radix(&text, 16)
            .map(Self)
            .map_err(|_| serde::de::Error::custom("a fingerprint has 32 hexadecimal digits"))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn published_values_of_the_hash() {
        assert_eq!(
            Fingerprint::of(b"").to_string(),
            "6c62272e07bb014262b821756295c58d"
        );
        assert_eq!(
            Fingerprint::of(b"a").to_string(),
            "d228cb696f1a8caf78912b704e4a8964"
        );
    }

    #[test]
    fn where_sections_end_counts() {
        let split = |first: &[u8], second: &[u8]| {
            Fingerprint::new()
                .with_section("t", first)
                .with_section("t", second)
        };
        assert_ne!(split(b"ab", b"c"), split(b"a", b"bc"));
    }
}
