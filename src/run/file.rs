//! Files that appear whole or not at all.

use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

use super::error::FileError;

/// Ending of a file that is being written.
const PART_ENDING: &str = "part";

/// A file that is written beside its place and renamed into it when it is whole.
///
/// Dropped before [`put_in_place`](Self::put_in_place), it leaves nothing
/// behind but what stood at its place before.
#[derive(Debug)]
pub struct NewFile {
    place: PathBuf,
    part: PathBuf,
    writer: Option<BufWriter<File>>,
}

impl NewFile {
    /// Begins a file that is to stand at `place`; its folder has to exist.
    ///
    /// # Errors
    ///
    /// The folder cannot be written to, or a folder stands at the place.
    pub fn begin(place: &Path) -> Result<Self, FileError> {
        if place.is_dir() {
            return Err(FileError::IsFolder {
                path: place.to_owned(),
            });
        }
        let part = part_of(place);
        let file = File::create(&part).map_err(|error| FileError::new(place, error))?;
        Ok(Self {
            place: place.to_owned(),
            part,
            writer: Some(BufWriter::with_capacity(1 << 16, file)),
        })
    }

    /// Where the file is going to stand.
    pub fn place(&self) -> &Path {
        &self.place
    }

    /// Adds bytes.
    ///
    /// # Errors
    ///
    /// A full disk, most likely; see [`FileError`].
    pub fn add(&mut self, bytes: &[u8]) -> Result<(), FileError> {
        self.write_all(bytes)
            .map_err(|error| FileError::new(&self.place, error))
    }

    /// Flushes the file to the disk and renames it into place.
    ///
    /// # Errors
    ///
    /// A full disk, most likely. Whatever stood at the place still stands there.
    pub fn put_in_place(mut self) -> Result<(), FileError> {
        let writer = self.writer.take().expect("open until put in place");
        let finish = || -> io::Result<()> {
            let file = writer
                .into_inner()
                .map_err(io::IntoInnerError::into_error)?;
            file.sync_all()?;
            drop(file);
            fs::rename(&self.part, &self.place)
        };
        let result = finish();
        if result.is_err() {
            // The error is what matters; a part that stays is overwritten next time.
            let _ = fs::remove_file(&self.part);
        }
        result.map_err(|error| FileError::new(&self.place, error))?;
        sync_folder(&self.place);
        Ok(())
    }
}

impl Write for NewFile {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        self.writer
            .as_mut()
            .expect("open until put in place")
            .write(bytes)
    }

    fn flush(&mut self) -> io::Result<()> {
        self.writer
            .as_mut()
            .expect("open until put in place")
            .flush()
    }
}

impl Drop for NewFile {
    fn drop(&mut self) {
        if let Some(writer) = self.writer.take() {
            // Without `into_parts` the buffer would be written once more first.
            let (file, _) = writer.into_parts();
            drop(file);
            let _ = fs::remove_file(&self.part);
        }
    }
}

/// Writes a whole file in one go.
///
/// # Errors
///
/// As [`NewFile`].
pub fn write_whole(place: &Path, bytes: &[u8]) -> Result<(), FileError> {
    let mut file = NewFile::begin(place)?;
    file.add(bytes)?;
    file.put_in_place()
}

/// Makes a folder with all above it, and finds out at once whether files can
/// be written in it: a run of an hour is not to fail at its last step.
///
/// # Errors
///
/// A file stands in the way, or there is no right to write.
pub fn make_folder(folder: &Path) -> Result<(), FileError> {
    if folder.is_file() {
        return Err(FileError::IsFile {
            path: folder.to_owned(),
        });
    }
    fs::create_dir_all(folder).map_err(|error| FileError::new(folder, error))?;
    let probe = folder.join(format!("writable.{PART_ENDING}"));
    File::create(&probe)
        .and_then(|file| {
            drop(file);
            fs::remove_file(&probe)
        })
        .map_err(|error| FileError::new(folder, error))
}

/// Removes the files an earlier run left at these names in a folder, the last
/// name first: `run.json` marks a complete run, so it must go before the
/// tables it vouches for change.
///
/// # Errors
///
/// A file that is there and cannot be removed.
pub fn remove_stale(folder: &Path, names: &[&str]) -> Result<(), FileError> {
    for name in names.iter().rev() {
        let path = folder.join(name);
        for path in [part_of(&path), path] {
            match fs::remove_file(&path) {
                Ok(()) => {}
                Err(error) if error.kind() == io::ErrorKind::NotFound => {}
                Err(error) => return Err(FileError::new(&path, error)),
            }
        }
    }
    Ok(())
}

fn part_of(place: &Path) -> PathBuf {
    let mut name = place.as_os_str().to_owned();
    name.push(".");
    name.push(PART_ENDING);
    name.into()
}

/// Makes a rename outlast a power failure, where folders can be synced.
fn sync_folder(place: &Path) {
    if let Some(folder) = place.parent() {
        let folder = if folder.as_os_str().is_empty() {
            Path::new(".")
        } else {
            folder
        };
        // Not every system lets a folder be opened; the file is in place anyway.
        let _ = File::open(folder).and_then(|folder| folder.sync_all());
    }
}
