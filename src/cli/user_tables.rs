//! The user's tables: folders given with `--tables` and `--data`, and the
//! `[data]` folder of a brief.

use std::fs;
use std::path::{Path, PathBuf};

use super::args::Arguments;
use super::error::CliError;
use super::output::Notes;
use super::tables::meant;
use crate::brief::Brief;
use crate::evaluate::{EstimateLevel, Library, USER_TABLES, UserTable};
use crate::mixture::Slips;

/// Rooms of [`USER_TABLES`] whose files may lie flat in a folder of measured data.
const DATA_ROOMS: [&str; 2] = ["substances", "pairs"];

/// Where the tables of a command come from, as its arguments say.
pub(super) struct Sources<'a> {
    slips: Slips,
    level: EstimateLevel,
    tables: Option<&'a Path>,
    data: Option<&'a Path>,
    notes: Notes,
}

/// A folder of measured data and who named it.
struct DataFolder {
    named_by: String,
    path: PathBuf,
}

impl<'a> Sources<'a> {
    /// # Errors
    ///
    /// There is no such level of estimates.
    pub(super) fn new(arguments: &'a Arguments, notes: Notes) -> Result<Self, CliError> {
        let level = EstimateLevel::from_id(&arguments.estimates).ok_or_else(|| {
            let known = EstimateLevel::ALL.map(EstimateLevel::id);
            CliError::Usage(format!(
                "there is no level of estimates `{}`{}\n  levels: {}",
                arguments.estimates,
                meant(&arguments.estimates, known),
                known.join(", ")
            ))
        })?;
        Ok(Self {
            level,
            slips: match arguments.as_circulated {
                true => Slips::AsCirculated,
                false => Slips::Corrected,
            },
            tables: arguments.tables.as_deref(),
            data: arguments.data.as_deref(),
            notes,
        })
    }

    /// Whether the command line names a folder of measured data.
    pub(super) fn name_data(&self) -> bool {
        self.data.is_some()
    }

    /// Everything built in, under the user's tables; a brief may name a folder.
    pub(super) fn library(&self, brief: Option<&Brief>) -> Result<Library, CliError> {
        let tables = self.user_tables(brief)?;
        if tables.is_empty() {
            return Ok(Library::built_in(self.slips).with_level(self.level));
        }
        Library::with_user_tables(self.slips, tables.clone())
            .map(|library| library.with_level(self.level))
            .map_err(|first| {
                CliError::Usage(match self.faults_by_room(&tables).as_slice() {
                    [] => first.to_string(),
                    faults => faults.join("\n"),
                })
            })
    }

    /// What is wrong with the tables of each room, so that a fault in one does
    /// not hide those of another. Pairs name substances, so that they are judged
    /// beside the user's list of them.
    fn faults_by_room(&self, tables: &[UserTable]) -> Vec<String> {
        let fault = |chosen: &dyn Fn(&UserTable) -> bool| {
            let chosen = tables.iter().filter(|table| chosen(table)).cloned();
            Library::with_user_tables(self.slips, chosen.collect())
                .err()
                .map(|fault| fault.to_string())
        };
        let is_list = |table: &UserTable| table.place == "substances/substances.csv";
        let mut faults = Vec::new();
        let mut rooms: Vec<&str> = tables.iter().map(room).collect();
        rooms.dedup();
        for wanted in rooms {
            if wanted != "pairs" {
                faults.extend(fault(&|table| room(table) == wanted));
            } else if fault(&is_list).is_none() {
                faults.extend(fault(&|table| room(table) == wanted || is_list(table)));
            }
        }
        faults
    }

    /// The user's tables by place; none twice.
    fn user_tables(&self, brief: Option<&Brief>) -> Result<Vec<UserTable>, CliError> {
        let mut tables = match self.tables {
            Some(folder) => laid_out(folder)?,
            None => Vec::new(),
        };
        for folder in self.data_folders(brief) {
            tables.extend(self.flat(&folder)?);
        }
        tables.sort_by(|one, other| one.place.cmp(&other.place));
        match tables.windows(2).find(|two| two[0].place == two[1].place) {
            None => Ok(tables),
            Some(two) => Err(CliError::Usage(format!(
                "{} and {} are the same table\n  leave one of them out",
                two[0].file, two[1].file
            ))),
        }
    }

    fn data_folders(&self, brief: Option<&Brief>) -> Vec<DataFolder> {
        let of_arguments = self.data.map(|path| DataFolder {
            named_by: "--data".into(),
            path: path.to_owned(),
        });
        let of_brief = brief.and_then(|brief| {
            let line = brief.data_folder.as_ref()?.place.line;
            Some(DataFolder {
                named_by: format!("{}:{line}: `data.folder`", brief.file),
                path: brief.data_path()?,
            })
        });
        let is_same = |one: &DataFolder, other: &DataFolder| {
            let full = |folder: &DataFolder| fs::canonicalize(&folder.path).ok();
            full(one).is_some_and(|path| Some(path) == full(other))
        };
        match (of_arguments, of_brief) {
            (Some(one), Some(other)) if is_same(&one, &other) => vec![one],
            (one, other) => one.into_iter().chain(other).collect(),
        }
    }

    /// The tables that lie flat in a folder; what is none of them is told.
    fn flat(&self, folder: &DataFolder) -> Result<Vec<UserTable>, CliError> {
        let DataFolder { named_by, path } = folder;
        if !path.is_dir() {
            return Err(CliError::Usage(format!(
                "{named_by}: there is no folder {}\n  it holds tables of measured data: {}",
                path.display(),
                data_files().collect::<Vec<_>>().join(", ")
            )));
        }
        let mut tables = Vec::new();
        let mut unknown = Vec::new();
        for file in sorted(path)? {
            let name = file_name(&file);
            match place_of(&name) {
                Some(place) if !file.is_dir() => tables.push(read(place.to_owned(), &file)?),
                // What editors and file managers leave is nobody's table.
                None if name.starts_with('.') => {}
                Some(_) => unknown.push(format!("{name} is a folder")),
                None => unknown.push(format!("{name}{}", meant(&name, data_files()))),
            }
        }
        if tables.is_empty() {
            let also = match unknown.as_slice() {
                [] => String::new(),
                names => format!("\n  not a table: {}", names.join(", ")),
            };
            return Err(CliError::Usage(format!(
                "{named_by}: {} holds no table of measured data{also}\n  tables: {}",
                path.display(),
                data_files().collect::<Vec<_>>().join(", ")
            )));
        }
        for name in unknown {
            self.notes.say(&format!(
                "note: {}: not a table of measured data, left aside: {name}",
                path.display()
            ));
        }
        Ok(tables)
    }
}

/// The room a table belongs to.
fn room(table: &UserTable) -> &str {
    table.place.split('/').next().unwrap_or_default()
}

/// The place of a table of measured data by its file name.
fn place_of(name: &str) -> Option<&'static str> {
    data_places().find(|place| file_of(place) == name)
}

/// File names of the tables of measured data.
fn data_files() -> impl Iterator<Item = &'static str> {
    data_places().map(file_of)
}

fn data_places() -> impl Iterator<Item = &'static str> {
    USER_TABLES.into_iter().filter(|place| {
        let room = place.split('/').next();
        room.is_some_and(|room| DATA_ROOMS.contains(&room))
    })
}

/// The file name of a place.
pub(super) fn file_of(place: &str) -> &str {
    place.rsplit('/').next().unwrap_or(place)
}

/// Every table of a folder that is laid out like `groups/`; a file that is none
/// of those known is a fault.
fn laid_out(folder: &Path) -> Result<Vec<UserTable>, CliError> {
    if !folder.is_dir() {
        return Err(CliError::Usage(format!(
            "--tables: {} is no folder",
            folder.display()
        )));
    }
    let mut unknown = Vec::new();
    let mut tables = Vec::new();
    for below in sorted(folder)? {
        let name = file_name(&below);
        if !below.is_dir() {
            unknown.push(name);
            continue;
        }
        for file in sorted(&below)? {
            let place = format!("{name}/{}", file_name(&file));
            if USER_TABLES.contains(&place.as_str()) {
                tables.push(read(place, &file)?);
            } else {
                unknown.push(place);
            }
        }
    }
    if unknown.is_empty() && !tables.is_empty() {
        return Ok(tables);
    }
    let what = match unknown.as_slice() {
        [] => "holds no table".to_owned(),
        names => format!("holds what is no table: {}", names.join(", ")),
    };
    Err(CliError::Usage(format!(
        "--tables: {} {what}\n  tables: {}",
        folder.display(),
        USER_TABLES.join(", ")
    )))
}

fn read(place: String, file: &Path) -> Result<UserTable, CliError> {
    let text = fs::read_to_string(file).map_err(|error| {
        let fault = match error.kind() {
            std::io::ErrorKind::InvalidData => {
                "is no text in UTF-8\n  save the table as CSV in UTF-8".to_owned()
            }
            _ => error.to_string(),
        };
        CliError::Usage(format!("{}: {fault}", file.display()))
    })?;
    Ok(UserTable {
        place,
        file: file.display().to_string(),
        text,
    })
}

fn file_name(path: &Path) -> String {
    let name = path.file_name().unwrap_or_default();
    name.to_string_lossy().into_owned()
}

fn sorted(folder: &Path) -> Result<Vec<PathBuf>, CliError> {
    let wrong = |error: std::io::Error| CliError::Usage(format!("{}: {error}", folder.display()));
    let mut paths = fs::read_dir(folder)
        .map_err(wrong)?
        .map(|entry| entry.map(|entry| entry.path()).map_err(wrong))
        .collect::<Result<Vec<_>, _>>()?;
    paths.sort();
    Ok(paths)
}
