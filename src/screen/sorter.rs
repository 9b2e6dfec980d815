//! Sorting more records than memory should hold.

use std::cmp::Reverse;
use std::collections::BinaryHeap;
use std::fs::File;
use std::io::{self, BufReader, BufWriter, Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};
use std::vec;

/// A record of fixed size that can be written to a temporary file.
pub(super) trait Record: Ord + Copy {
    /// Bytes of the written form.
    const SIZE: usize;
    /// Writes the record to `bytes`, which are `SIZE` long.
    fn write(&self, bytes: &mut [u8]);
    /// Reads what [`write`](Self::write) wrote.
    fn read(bytes: &[u8]) -> Self;
}

/// Memory that the records of one sorter may take before they go to disk.
const MEMORY: usize = 12 << 20;

/// Collects records, at most [`MEMORY`] of them at a time, the rest as sorted
/// runs in temporary files beside the result.
pub(super) struct Sorter<R> {
    records: Vec<R>,
    most: usize,
    runs: Vec<File>,
    folder: PathBuf,
}

impl<R: Record> Sorter<R> {
    /// An empty sorter whose runs go to temporary files in `folder`.
    pub(super) fn new(folder: &Path) -> Self {
        Self::with_room(folder, MEMORY / size_of::<R>())
    }

    /// The same, with room for `most` records in memory.
    fn with_room(folder: &Path, most: usize) -> Self {
        Self {
            records: Vec::new(),
            most,
            runs: Vec::new(),
            folder: folder.to_owned(),
        }
    }

    /// Adds a record.
    pub(super) fn push(&mut self, record: R) -> io::Result<()> {
        if self.records.len() == self.most {
            self.write_run()?;
        }
        self.records.push(record);
        Ok(())
    }

    fn write_run(&mut self) -> io::Result<()> {
        self.records.sort_unstable();
        let mut run = BufWriter::new(tempfile::tempfile_in(&self.folder)?);
        let mut bytes = vec![0; R::SIZE];
        for record in self.records.drain(..) {
            record.write(&mut bytes);
            run.write_all(&bytes)?;
        }
        let mut run = run.into_inner().map_err(io::IntoInnerError::into_error)?;
        run.seek(SeekFrom::Start(0))?;
        self.runs.push(run);
        Ok(())
    }

    /// The records in ascending order.
    pub(super) fn sorted(mut self) -> io::Result<Sorted<R>> {
        self.records.sort_unstable();
        let mut sorted = Sorted {
            memory: self.records.into_iter(),
            runs: self
                .runs
                .into_iter()
                .map(|run| BufReader::with_capacity(1 << 16, run))
                .collect(),
            heap: BinaryHeap::new(),
        };
        for source in 0..=sorted.runs.len() {
            sorted.refill(source)?;
        }
        Ok(sorted)
    }
}

/// Sorted records, merged from memory and runs.
pub(super) struct Sorted<R> {
    memory: vec::IntoIter<R>,
    runs: Vec<BufReader<File>>,
    /// Next record of each source; the source after the last run is the memory.
    heap: BinaryHeap<Reverse<(R, usize)>>,
}

impl<R: Record> Sorted<R> {
    fn refill(&mut self, source: usize) -> io::Result<()> {
        let next = match self.runs.get_mut(source) {
            Some(run) => {
                let mut bytes = vec![0; R::SIZE];
                match run.read_exact(&mut bytes) {
                    Ok(()) => Some(R::read(&bytes)),
                    Err(error) if error.kind() == io::ErrorKind::UnexpectedEof => None,
                    Err(error) => return Err(error),
                }
            }
            None => self.memory.next(),
        };
        if let Some(record) = next {
            self.heap.push(Reverse((record, source)));
        }
        Ok(())
    }

    /// The next record, `None` at the end.
    pub(super) fn next(&mut self) -> io::Result<Option<R>> {
        let Some(Reverse((record, source))) = self.heap.pop() else {
            return Ok(None);
        };
        self.refill(source)?;
        Ok(Some(record))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    impl Record for u64 {
        const SIZE: usize = 8;
        fn write(&self, bytes: &mut [u8]) {
            bytes.copy_from_slice(&self.to_le_bytes());
        }
        fn read(bytes: &[u8]) -> Self {
            Self::from_le_bytes(bytes.try_into().expect("eight bytes"))
        }
    }

    #[test]
    fn runs_and_memory_merge_in_order() {
        let folder = tempfile::tempdir().unwrap();
        let mut sorter = Sorter::with_room(folder.path(), 7);
        for value in 0..100_u64 {
            sorter.push(value * 37 % 100).unwrap();
        }
        let mut sorted = sorter.sorted().unwrap();
        let mut values = Vec::new();
        while let Some(value) = sorted.next().unwrap() {
            values.push(value);
        }
        assert_eq!(values, (0..100).collect::<Vec<_>>());
    }
}
