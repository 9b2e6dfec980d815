//! The folder of tables given with `--tables`.

use std::fs;
use std::path::Path;

use super::error::CliError;
use crate::evaluate::{USER_TABLES, UserTable};

/// Reads every table of the folder; a file that is none of those known is a fault.
pub(super) fn read(folder: &Path) -> Result<Vec<UserTable>, CliError> {
    if !folder.is_dir() {
        return Err(CliError::Usage(format!(
            "--tables: {} is no folder",
            folder.display()
        )));
    }
    let mut unknown = Vec::new();
    let mut tables = Vec::new();
    for below in sorted(folder)? {
        let name = below
            .file_name()
            .unwrap_or_default()
            .to_string_lossy()
            .into_owned();
        if !below.is_dir() {
            unknown.push(name);
            continue;
        }
        for file in sorted(&below)? {
            let place = format!(
                "{name}/{}",
                file.file_name().unwrap_or_default().to_string_lossy()
            );
            if !USER_TABLES.contains(&place.as_str()) {
                unknown.push(place);
                continue;
            }
            let text = fs::read_to_string(&file)
                .map_err(|error| CliError::Usage(format!("{}: {error}", file.display())))?;
            tables.push(UserTable {
                place,
                file: file.display().to_string(),
                text,
            });
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

fn sorted(folder: &Path) -> Result<Vec<std::path::PathBuf>, CliError> {
    let wrong = |error: std::io::Error| CliError::Usage(format!("{}: {error}", folder.display()));
    let mut paths = fs::read_dir(folder)
        .map_err(wrong)?
        .map(|entry| entry.map(|entry| entry.path()).map_err(wrong))
        .collect::<Result<Vec<_>, _>>()?;
    paths.sort();
    Ok(paths)
}
