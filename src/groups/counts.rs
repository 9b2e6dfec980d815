//! How often each group of a set occurs.

use std::fmt;

use smallvec::SmallVec;

/// Group counts of one molecule in one set: (published group number, count),
/// ascending by number, no zero counts.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct GroupCounts(SmallVec<[(u16, u16); 8]>);

impl GroupCounts {
    /// No groups.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds `count` groups of this number.
    pub fn add(&mut self, number: u16, count: u16) {
        if count == 0 {
            return;
        }
        match self.0.binary_search_by_key(&number, |entry| entry.0) {
            Ok(at) => self.0[at].1 += count,
            Err(at) => self.0.insert(at, (number, count)),
        }
    }

    /// Count of one group, 0 where it does not occur.
    pub fn count(&self, number: u16) -> u16 {
        self.0
            .binary_search_by_key(&number, |entry| entry.0)
            .map_or(0, |at| self.0[at].1)
    }

    /// The groups, ascending by number.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = (u16, u16)> + '_ {
        self.0.iter().copied()
    }

    /// Whether there is no group at all.
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// Number of groups, repeats counted.
    pub fn total(&self) -> u32 {
        self.0.iter().map(|&(_, count)| u32::from(count)).sum()
    }

    /// Removes all groups, keeping the memory.
    pub fn clear(&mut self) {
        self.0.clear();
    }

    /// Reads `number:count;number:count`; `None` if it is anything else.
    pub fn from_text(text: &str) -> Option<Self> {
        let mut counts = Self::new();
        for entry in text.split(';').filter(|entry| !entry.is_empty()) {
            let (number, count) = entry.split_once(':')?;
            counts.add(number.trim().parse().ok()?, count.trim().parse().ok()?);
        }
        Some(counts)
    }
}

impl FromIterator<(u16, u16)> for GroupCounts {
    fn from_iter<I: IntoIterator<Item = (u16, u16)>>(entries: I) -> Self {
        let mut counts = Self::new();
        for (number, count) in entries {
            counts.add(number, count);
        }
        counts
    }
}

impl fmt::Display for GroupCounts {
    /// The form of the `groups` column: `1:2;2:4`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, (number, count)) in self.iter().enumerate() {
            if position > 0 {
                f.write_str(";")?;
            }
            write!(f, "{number}:{count}")?;
        }
        Ok(())
    }
}
