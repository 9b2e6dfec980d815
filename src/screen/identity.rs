//! Which lines of a pool are the same molecule, and which are stereoisomers.

use std::io::{self, BufReader, BufWriter, Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};

use tempfile::SpooledTempFile;

use super::sorter::{Record, Sorted, Sorter};

/// A line's identity: hashes of the two canonical keys.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Line {
    constitution: u128,
    full: u128,
    line: u64,
}

impl Record for Line {
    const SIZE: usize = 40;

    fn write(&self, bytes: &mut [u8]) {
        bytes[..16].copy_from_slice(&self.constitution.to_le_bytes());
        bytes[16..32].copy_from_slice(&self.full.to_le_bytes());
        bytes[32..].copy_from_slice(&self.line.to_le_bytes());
    }

    fn read(bytes: &[u8]) -> Self {
        let wide =
            |at: usize| u128::from_le_bytes(bytes[at..at + 16].try_into().expect("sixteen bytes"));
        let line = u64::from_le_bytes(bytes[32..40].try_into().expect("eight bytes"));
        Self {
            constitution: wide(0),
            full: wide(16),
            line,
        }
    }
}

/// How a line is related to an earlier one.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Kinship {
    /// The same molecule, stereochemistry and isotopes included.
    Duplicate,
    /// The same constitution only.
    Stereoisomer,
}

/// A line that is related to an earlier one; ordered by line.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Relation {
    /// The line.
    pub(super) line: u64,
    /// How it is related.
    pub(super) kinship: Kinship,
    /// The earliest line it is so related to.
    pub(super) earlier: u64,
}

impl Record for Relation {
    const SIZE: usize = 17;

    fn write(&self, bytes: &mut [u8]) {
        bytes[..8].copy_from_slice(&self.line.to_le_bytes());
        bytes[8..16].copy_from_slice(&self.earlier.to_le_bytes());
        bytes[16] = u8::from(self.kinship == Kinship::Stereoisomer);
    }

    fn read(bytes: &[u8]) -> Self {
        let wide =
            |at: usize| u64::from_le_bytes(bytes[at..at + 8].try_into().expect("eight bytes"));
        let kinship = if bytes[16] == 1 {
            Kinship::Stereoisomer
        } else {
            Kinship::Duplicate
        };
        Self {
            line: wide(0),
            kinship,
            earlier: wide(8),
        }
    }
}

/// Collects the identities of the lines of a pool.
pub(super) struct Identities {
    lines: Sorter<Line>,
    folder: PathBuf,
}

impl Identities {
    /// None yet; temporary files go to `folder`.
    pub(super) fn new(folder: &Path) -> Self {
        Self {
            lines: Sorter::new(folder),
            folder: folder.to_owned(),
        }
    }

    /// Adds a line with the hashes of its two keys.
    pub(super) fn push(&mut self, line: u64, constitution: u128, full: u128) -> io::Result<()> {
        self.lines.push(Line {
            constitution,
            full,
            line,
        })
    }

    /// The relations, ascending by line.
    pub(super) fn relations(self) -> io::Result<Relations> {
        let mut relations = Sorter::new(&self.folder);
        let mut lines = self.lines.sorted()?;
        let mut next = lines.next()?;
        // First lines of the different full keys of one constitution.
        let mut firsts: Vec<u64> = Vec::new();
        while let Some(first) = next {
            firsts.push(first.line);
            next = lines.next()?;
            while let Some(line) = next.filter(|line| line.full == first.full) {
                if line.constitution != first.constitution {
                    break;
                }
                relations.push(Relation {
                    line: line.line,
                    kinship: Kinship::Duplicate,
                    earlier: first.line,
                })?;
                next = lines.next()?;
            }
            if next.is_none_or(|line| line.constitution != first.constitution) {
                let earliest = firsts.iter().copied().min().expect("just pushed");
                for &line in firsts.iter().filter(|&&line| line != earliest) {
                    relations.push(Relation {
                        line,
                        kinship: Kinship::Stereoisomer,
                        earlier: earliest,
                    })?;
                }
                firsts.clear();
            }
        }
        let mut sorted = relations.sorted()?;
        let next = sorted.next()?;
        Ok(Relations { sorted, next })
    }
}

/// Relations in line order, to be read beside the lines.
pub(super) struct Relations {
    sorted: Sorted<Relation>,
    next: Option<Relation>,
}

impl Relations {
    /// The relation of a line, if it has one; lines have to be asked for in
    /// ascending order.
    pub(super) fn of(&mut self, line: u64) -> io::Result<Option<Relation>> {
        while let Some(relation) = self.next {
            if relation.line > line {
                return Ok(None);
            }
            self.next = self.sorted.next()?;
            if relation.line == line {
                return Ok(Some(relation));
            }
        }
        Ok(None)
    }
}

/// Relations written down in line order, to be read beside the lines again.
pub(super) struct RelationLog {
    file: BufWriter<SpooledTempFile>,
}

/// Bytes of relations that stay in memory.
const LOG_MEMORY: usize = 4 << 20;

impl RelationLog {
    /// An empty log that goes to a temporary file in `folder` when it grows.
    pub(super) fn new(folder: &Path) -> Self {
        Self {
            file: BufWriter::new(tempfile::spooled_tempfile_in(LOG_MEMORY, folder)),
        }
    }

    /// Writes one down.
    pub(super) fn add(&mut self, relation: &Relation) -> io::Result<()> {
        let mut bytes = [0; Relation::SIZE];
        relation.write(&mut bytes);
        self.file.write_all(&bytes)
    }

    /// Ends writing and starts reading.
    pub(super) fn finish(self) -> io::Result<WrittenRelations> {
        let mut file = self
            .file
            .into_inner()
            .map_err(io::IntoInnerError::into_error)?;
        file.seek(SeekFrom::Start(0))?;
        let mut log = WrittenRelations {
            file: BufReader::new(file),
            next: None,
        };
        log.advance()?;
        Ok(log)
    }
}

/// A [`RelationLog`] that is read.
pub(super) struct WrittenRelations {
    file: BufReader<SpooledTempFile>,
    next: Option<Relation>,
}

impl WrittenRelations {
    fn advance(&mut self) -> io::Result<()> {
        let mut bytes = [0; Relation::SIZE];
        self.next = match self.file.read_exact(&mut bytes) {
            Ok(()) => Some(Relation::read(&bytes)),
            Err(error) if error.kind() == io::ErrorKind::UnexpectedEof => None,
            Err(error) => return Err(error),
        };
        Ok(())
    }

    /// The relation of a line, if it has one; lines in ascending order.
    pub(super) fn of(&mut self, line: u64) -> io::Result<Option<Relation>> {
        match self.next {
            Some(relation) if relation.line == line => {
                self.advance()?;
                Ok(Some(relation))
            }
            _ => Ok(None),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn duplicates_and_stereoisomers_are_told_apart() {
        let folder = tempfile::tempdir().unwrap();
        let mut identities = Identities::new(folder.path());
        // Lines 2 and 5 are one molecule, 4 its stereoisomer, 3 another molecule.
        for (line, constitution, full) in [(2, 1, 10), (3, 2, 20), (4, 1, 9), (5, 1, 10)] {
            identities.push(line, constitution, full).unwrap();
        }
        let mut relations = identities.relations().unwrap();
        let found: Vec<_> = (2..6)
            .map(|line| {
                relations
                    .of(line)
                    .unwrap()
                    .map(|found| (found.kinship, found.earlier))
            })
            .collect();
        assert_eq!(
            found,
            [
                None,
                None,
                Some((Kinship::Stereoisomer, 2)),
                Some((Kinship::Duplicate, 2))
            ]
        );
    }
}
