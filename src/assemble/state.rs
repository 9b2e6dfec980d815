//! The state of a search on disk: units done and what they found.
//!
//! Two generations are kept, so that a file that a crash cut short costs one
//! interval and no more. A state says which search it belongs to.

use std::fs;
use std::path::{Path, PathBuf};

use serde::{Deserialize, Serialize};
use thiserror::Error;

use super::account::Account;
use super::best::{Best, Scored};
use crate::run::{FileError, Fingerprint, write_whole};

/// Version of the form; raised when an older program could not read it.
const FORMAT: u32 = 1;

/// Names of the newer and the older state in the folder of a run.
pub const STATE_FILES: [&str; 2] = ["search.json", "search.previous.json"];

/// Which part of a search: `number` of `of`, from 1.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Part {
    /// Its number, from 1.
    pub number: u32,
    /// How many there are.
    pub of: u32,
}

impl Part {
    /// The whole search.
    pub const WHOLE: Self = Self { number: 1, of: 1 };

    /// Reads `K/N`.
    pub fn from_text(text: &str) -> Option<Self> {
        let (number, of) = text.split_once('/')?;
        let (number, of) = (number.trim().parse().ok()?, of.trim().parse().ok()?);
        (1 <= number && number <= of).then_some(Self { number, of })
    }

    /// Whether a unit belongs to it: units go round, so that parts are balanced.
    pub fn takes(self, unit: usize) -> bool {
        unit as u64 % u64::from(self.of) == u64::from(self.number) - 1
    }
}

impl std::fmt::Display for Part {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}/{}", self.number, self.of)
    }
}

/// A state that cannot be used.
#[derive(Debug, Error)]
pub enum StateError {
    /// There is none.
    #[error("{}: there is no state of a search to go on from\n  leave --resume out to begin one", .folder.display())]
    None {
        /// The folder.
        folder: PathBuf,
    },
    /// Neither generation can be read.
    #[error("{}: is no state of a search, or was cut short: {what}", .path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        what: String,
    },
    /// It belongs to another search.
    #[error(
        "{}: belongs to another search: {what} differ\n  the same brief, tables, data folders and version go on; else begin anew without --resume",
        .path.display()
    )]
    Other {
        /// The file.
        path: PathBuf,
        /// What is not the same.
        what: &'static str,
    },
    /// Parts that do not make up one search.
    #[error("the parts do not make up one search: {0}")]
    Parts(String),
}

/// What a search has done.
#[derive(Clone, Debug, PartialEq)]
pub struct State {
    /// What it searches for: brief, tables, folders and version of the program.
    pub search: Fingerprint,
    /// Where the brief stands, for whoever gathers parts.
    pub brief: PathBuf,
    /// Which part of the search it is.
    pub part: Part,
    /// Units in all.
    pub units: u32,
    /// Which are done.
    pub done: Vec<bool>,
    /// What became of the assemblies of the units done.
    pub account: Account,
    /// The best of them.
    pub best: Best,
    /// How many are kept.
    pub keep: usize,
}

#[derive(Serialize, Deserialize)]
struct Written {
    format: u32,
    program: String,
    search: Fingerprint,
    brief: PathBuf,
    part: Part,
    units: u32,
    /// Runs of units: first, and one past the last.
    done: Vec<(u32, u32)>,
    keep: usize,
    account: Account,
    best: Vec<Scored>,
}

#[derive(Serialize, Deserialize)]
struct Sealed {
    state: Written,
    /// Fingerprint of the state as text: a file cut short or changed is found out.
    seal: Fingerprint,
}

fn program() -> String {
    format!("groupsmith {}", env!("CARGO_PKG_VERSION"))
}

impl State {
    /// A search that has not begun.
    pub fn new(
        search: Fingerprint,
        brief: &Path,
        part: Part,
        units: usize,
        keep: usize,
        account: Account,
    ) -> Self {
        Self {
            search,
            brief: brief.to_owned(),
            part,
            units: units as u32,
            done: vec![false; units],
            account,
            best: Best::new(keep),
            keep,
        }
    }

    /// Whether every unit of the part is done.
    pub fn is_complete(&self) -> bool {
        let units = self.done.iter().enumerate();
        units
            .filter(|(unit, _)| self.part.takes(*unit))
            .all(|(_, done)| *done)
    }

    /// Writes it into the folder of a run; what stood there becomes the older generation.
    ///
    /// # Errors
    ///
    /// The file cannot be written; the older generations stay.
    pub fn write(&self, folder: &Path) -> Result<(), FileError> {
        let mut runs: Vec<(u32, u32)> = Vec::new();
        for (unit, _) in (0_u32..).zip(&self.done).filter(|(_, done)| **done) {
            match runs.last_mut() {
                Some(last) if last.1 == unit => last.1 += 1,
                _ => runs.push((unit, unit + 1)),
            }
        }
        let state = Written {
            format: FORMAT,
            program: program(),
            search: self.search,
            brief: self.brief.clone(),
            part: self.part,
            units: self.units,
            done: runs,
            keep: self.keep,
            account: self.account.clone(),
            best: self.best.sorted(),
        };
        let text = serde_json::to_string(&state).expect("a state is plain data");
        let seal = Fingerprint::of(text.as_bytes());
        let text = format!("{{\"state\":{text},\"seal\":\"{seal}\"}}\n");
        let [newer, older] = STATE_FILES.map(|name| folder.join(name));
        if newer.exists() {
            fs::rename(&newer, &older).map_err(|error| FileError::new(&older, error))?;
        }
        write_whole(&newer, text.as_bytes())
    }

    /// Reads the newest state in a folder that is whole.
    ///
    /// # Errors
    ///
    /// There is none, or none that can be read.
    pub fn read(folder: &Path) -> Result<(Self, PathBuf), StateError> {
        let mut fault = StateError::None {
            folder: folder.to_owned(),
        };
        for path in STATE_FILES.map(|name| folder.join(name)) {
            match fs::read_to_string(&path) {
                Err(error) if error.kind() == std::io::ErrorKind::NotFound => {}
                Err(error) => {
                    fault = StateError::Unreadable {
                        path,
                        what: error.to_string(),
                    };
                }
                Ok(text) => match Self::from_text(&text) {
                    Ok(state) => return Ok((state, path)),
                    Err(what) => fault = StateError::Unreadable { path, what },
                },
            }
        }
        Err(fault)
    }

    fn from_text(text: &str) -> Result<Self, String> {
        let sealed: Sealed = serde_json::from_str(text).map_err(|error| error.to_string())?;
        let state = sealed.state;
        let again = serde_json::to_string(&state).map_err(|error| error.to_string())?;
        if Fingerprint::of(again.as_bytes()) != sealed.seal {
            return Err("its seal is broken".into());
        }
        if state.format != FORMAT || state.program != program() {
            return Err(format!("it was written by {}", state.program));
        }
        let mut done = vec![false; state.units as usize];
        for (from, to) in state.done {
            let run = done.get_mut(from as usize..to as usize);
            run.ok_or("it names units that are none")?.fill(true);
        }
        let mut best = Best::new(state.keep);
        state.best.into_iter().for_each(|one| best.offer(one));
        Ok(Self {
            search: state.search,
            brief: state.brief,
            part: state.part,
            units: state.units,
            done,
            account: state.account,
            best,
            keep: state.keep,
        })
    }

    /// Puts parts together.
    ///
    /// # Errors
    ///
    /// A part is missing, double, unfinished, or of another search: each named.
    pub fn gathered(parts: &[(Self, PathBuf)]) -> Result<Self, StateError> {
        let named = |path: &Path| path.parent().unwrap_or(path).display().to_string();
        let fault = |what: String| Err(StateError::Parts(what));
        let Some((first, first_path)) = parts.first() else {
            return fault("there is none".into());
        };
        let of = first.part.of;
        let mut seen: Vec<Option<&Path>> = vec![None; of as usize];
        for (state, path) in parts {
            if state.search != first.search
                || state.units != first.units
                || state.keep != first.keep
            {
                return fault(format!(
                    "{} is of another search than {}",
                    named(path),
                    named(first_path)
                ));
            }
            if state.part.of != of {
                return fault(format!(
                    "{} is one of {} parts, {} one of {of}",
                    named(path),
                    state.part.of,
                    named(first_path)
                ));
            }
            if !state.is_complete() {
                return fault(format!(
                    "{} is not finished: go on with --resume",
                    named(path)
                ));
            }
            if let Some(other) = seen[state.part.number as usize - 1].replace(path) {
                return fault(format!(
                    "part {} is there twice: {} and {}",
                    state.part,
                    named(other),
                    named(path)
                ));
            }
        }
        let missing: Vec<String> = (1..)
            .zip(&seen)
            .filter(|(_, path)| path.is_none())
            .map(|(number, _)| format!("{number}/{of}"))
            .collect();
        if !missing.is_empty() {
            return fault(format!("missing: {}", missing.join(", ")));
        }
        let mut whole = Self {
            part: Part::WHOLE,
            ..first.clone()
        };
        for (state, _) in &parts[1..] {
            for (mine, theirs) in whole.done.iter_mut().zip(&state.done) {
                *mine |= theirs;
            }
            whole
                .account
                .add(&state.account)
                .map_err(|error| StateError::Parts(error.to_string()))?;
            whole.best.merge(state.best.clone());
        }
        Ok(whole)
    }

    /// Whether it belongs to a search; the state of a part to that part.
    ///
    /// # Errors
    ///
    /// What is not the same.
    pub fn belongs(&self, path: &Path, other: &Self) -> Result<(), StateError> {
        let fault = |what| {
            Err(StateError::Other {
                path: path.to_owned(),
                what,
            })
        };
        if self.search != other.search {
            return fault("brief, tables, data or version");
        }
        if self.part != other.part {
            return fault("the parts");
        }
        if self.units != other.units || self.keep != other.keep {
            return fault("the units");
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn state(part: Part) -> State {
        let mut state = State::new(
            Fingerprint::of(b"x"),
            Path::new("b.toml"),
            part,
            10,
            3,
            Account::new(2, 1),
        );
        for unit in 0..10 {
            state.done[unit] = part.takes(unit);
        }
        state.account.scored = u128::from(u64::MAX) * 3 + u128::from(part.number);
        state.best.offer(Scored {
            key: u64::from(part.number),
            advance: 0,
            pieces: smallvec::SmallVec::from_slice(&[(1, 2)]),
        });
        state
    }

    #[test]
    fn what_is_written_is_read_and_a_cut_file_falls_back_to_the_older() {
        let folder = tempfile::tempdir().unwrap();
        let one = state(Part { number: 1, of: 2 });
        one.write(folder.path()).unwrap();
        assert_eq!(State::read(folder.path()).unwrap().0, one);
        let two = state(Part { number: 2, of: 2 });
        two.write(folder.path()).unwrap();
        assert_eq!(State::read(folder.path()).unwrap().0, two);
        let newer = folder.path().join(STATE_FILES[0]);
        let text = fs::read_to_string(&newer).unwrap();
        fs::write(&newer, &text[..text.len() / 2]).unwrap();
        assert_eq!(State::read(folder.path()).unwrap().0, one);
        fs::write(&newer, text.replace("\"keep\":3", "\"keep\":4")).unwrap();
        assert_eq!(State::read(folder.path()).unwrap().0, one);
    }

    #[test]
    fn parts_that_do_not_make_up_a_search_are_named() {
        let at = |number, of| {
            let path = PathBuf::from(format!("p{number}/search.json"));
            (state(Part { number, of }), path)
        };
        let whole = State::gathered(&[at(2, 2), at(1, 2)]).unwrap();
        assert!(whole.is_complete() && whole.part == Part::WHOLE);
        assert_eq!(whole.account.scored, u128::from(u64::MAX) * 6 + 3);
        for (parts, wanted) in [
            (vec![at(1, 3), at(3, 3)], "missing: 2/3"),
            (vec![at(1, 2), at(1, 2)], "part 1/2 is there twice"),
            (vec![at(1, 2), at(2, 3)], "p2 is one of 3 parts"),
        ] {
            let told = State::gathered(&parts).unwrap_err().to_string();
            assert!(told.contains(wanted), "{told}");
        }
    }
}
