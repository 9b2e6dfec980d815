//! Reading the file of a brief.

use std::fs::File;
use std::io::{ErrorKind, Read};
use std::path::Path;

use super::catalog::FigureCatalog;
use super::error::BriefError;
use super::types::{Brief, Job};

/// The largest file that is read as a brief.
const LARGEST_BRIEF_BYTES: u64 = 4 << 20;

impl Brief {
    /// Reads and checks the brief at a path; relative paths in it start from its folder.
    ///
    /// Faults name the brief by its file name, so that they (and the run
    /// record) do not depend on where it was started from.
    ///
    /// # Errors
    ///
    /// No such file, a folder, unreadable, larger than 4 MiB, not UTF-8, or
    /// faults in the text: see [`BriefError`].
    pub fn load(path: &Path, catalog: &FigureCatalog<'_>, job: Job) -> Result<Self, BriefError> {
        let text = text_of(path)?;
        let file = path.file_name().unwrap_or(path.as_os_str());
        let mut brief = Self::read_for(&text, &file.to_string_lossy(), catalog, job)?;
        brief.folder = path.parent().map(Path::to_path_buf).unwrap_or_default();
        Ok(brief)
    }
}

fn text_of(path: &Path) -> Result<String, BriefError> {
    let unreadable = |source: std::io::Error| match source.kind() {
        ErrorKind::NotFound => BriefError::Missing {
            path: path.to_owned(),
        },
        ErrorKind::IsADirectory => BriefError::Folder {
            path: path.to_owned(),
        },
        _ => BriefError::Unreadable {
            path: path.to_owned(),
            source,
        },
    };
    let file = File::open(path).map_err(unreadable)?;
    let facts = file.metadata().map_err(unreadable)?;
    if facts.is_dir() {
        return Err(BriefError::Folder {
            path: path.to_owned(),
        });
    }
    if facts.len() > LARGEST_BRIEF_BYTES {
        return Err(BriefError::TooLarge {
            path: path.to_owned(),
            bytes: facts.len(),
            largest: LARGEST_BRIEF_BYTES,
        });
    }
    // A pipe has no length: the limit holds for what is read, too.
    let mut bytes = Vec::new();
    file.take(LARGEST_BRIEF_BYTES + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    if bytes.len() as u64 > LARGEST_BRIEF_BYTES {
        return Err(BriefError::TooLarge {
            path: path.to_owned(),
            bytes: bytes.len() as u64,
            largest: LARGEST_BRIEF_BYTES,
        });
    }
    String::from_utf8(bytes).map_err(|error| {
        let sound = &error.as_bytes()[..error.utf8_error().valid_up_to()];
        let line = 1 + sound.iter().filter(|&&byte| byte == b'\n').count();
        BriefError::NotText {
            path: path.to_owned(),
            line: u32::try_from(line).unwrap_or(u32::MAX),
        }
    })
}
