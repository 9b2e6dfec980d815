//! Patterns filed under the atoms they may begin at.

use super::program::Program;
use crate::groups::features::KEYS;

/// For each key of [`features::key`](crate::groups::features::key) the patterns whose first step
/// may be at such an atom: `filed[starts[key]..starts[key + 1]]`.
#[derive(Clone, Debug)]
pub(in crate::groups) struct Filing {
    filed: Vec<u16>,
    starts: [u32; KEYS + 1],
}

impl Filing {
    /// Files patterns by their positions.
    pub(in crate::groups) fn of<'p>(programs: impl Iterator<Item = &'p Program> + Clone) -> Self {
        let mut filed = Vec::new();
        let mut starts = [0; KEYS + 1];
        for key in 0..KEYS {
            for (at, program) in programs.clone().enumerate() {
                if program.may_start_at(key) {
                    filed.push(at as u16);
                }
            }
            starts[key + 1] = filed.len() as u32;
        }
        Self { filed, starts }
    }

    /// The positions of the patterns to be tried at an atom of this key, ascending.
    pub(in crate::groups) fn under(&self, key: u8) -> &[u16] {
        let key = usize::from(key);
        &self.filed[self.starts[key] as usize..self.starts[key + 1] as usize]
    }
}
