//! What the tests of whole commands have in common: a temporary folder with a
//! brief and a pool, and the program run in it.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Output;
use std::time::Duration;

use assert_cmd::Command;
use groupsmith::run::RunRecord;
use tempfile::TempDir;

/// The program, ready to be told more.
pub(crate) fn groupsmith() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_groupsmith"));
    command.timeout(Duration::from_secs(60));
    command
}

/// A file or folder of the repository.
pub(crate) fn repository(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// What a command said and how it ended.
#[derive(Debug)]
pub(crate) struct Said {
    pub(crate) code: i32,
    pub(crate) out: String,
    pub(crate) err: String,
}

impl From<Output> for Said {
    fn from(output: Output) -> Self {
        let text = |bytes| String::from_utf8(bytes).expect("the program writes UTF-8");
        Self {
            code: output.status.code().expect("the program ends by itself"),
            out: text(output.stdout),
            err: text(output.stderr),
        }
    }
}

/// Runs a command with these arguments.
pub(crate) fn say(arguments: &[&str]) -> Said {
    let output = groupsmith().args(arguments).output();
    output.expect("the program starts").into()
}

/// Rows of a CSV text, header first.
pub(crate) fn csv_rows(text: &str) -> Vec<Vec<String>> {
    csv::ReaderBuilder::new()
        .has_headers(false)
        .from_reader(text.as_bytes())
        .records()
        .map(|record| {
            let record = record.expect("every row has the cells of the header");
            record.iter().map(str::to_owned).collect()
        })
        .collect()
}

/// A temporary folder in which a screening is prepared and run.
pub(crate) struct Bench {
    folder: TempDir,
}

impl Bench {
    /// An empty one.
    pub(crate) fn new() -> Self {
        let folder = tempfile::tempdir().expect("a temporary folder");
        Self { folder }
    }

    /// One with this brief and this pool, `pool.csv`.
    pub(crate) fn with(brief: &str, pool: impl AsRef<[u8]>) -> Self {
        let bench = Self::new();
        bench.write("brief.toml", brief);
        bench.write("pool.csv", pool);
        bench
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    /// A path as an argument.
    pub(crate) fn argument(&self, name: &str) -> String {
        self.path(name).display().to_string()
    }

    pub(crate) fn write(&self, name: &str, content: impl AsRef<[u8]>) {
        let path = self.path(name);
        fs::create_dir_all(path.parent().expect("inside the folder")).unwrap();
        fs::write(path, content).unwrap();
    }

    pub(crate) fn read(&self, name: &str) -> String {
        let path = self.path(name);
        fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
    }

    /// `groupsmith screen brief.toml --out out` and more.
    pub(crate) fn screen(&self, more: &[&str]) -> Said {
        self.screening(more).output().unwrap().into()
    }

    /// The same, not yet started.
    pub(crate) fn screening(&self, more: &[&str]) -> Command {
        let mut command = groupsmith();
        command
            .current_dir(self.folder.path())
            .args(["screen", "brief.toml", "--out", "out"])
            .args(more);
        command
    }

    /// The run record, checked for counts that add up.
    pub(crate) fn record(&self) -> RunRecord {
        let record: RunRecord = serde_json::from_str(&self.read("out/run.json")).unwrap();
        assert!(record.counts.add_up(), "{:?}", record.counts);
        record
    }

    /// `(name, cell)` of a column of `ranked.csv`, in the order of the ranking.
    pub(crate) fn ranked(&self, column: &str) -> Vec<(String, String)> {
        named_cells(&self.read("out/ranked.csv"), column)
    }

    /// The same of `not_ranked.csv`.
    pub(crate) fn not_ranked(&self, column: &str) -> Vec<(String, String)> {
        named_cells(&self.read("out/not_ranked.csv"), column)
    }

    /// The names of the ranking, best first.
    pub(crate) fn ranking(&self) -> Vec<String> {
        self.ranked("name")
            .into_iter()
            .map(|(name, _)| name)
            .collect()
    }

    /// Names of the files in the folder of results, sorted.
    pub(crate) fn files(&self) -> Vec<String> {
        let Ok(entries) = fs::read_dir(self.path("out")) else {
            return Vec::new();
        };
        let mut names: Vec<String> = entries
            .map(|entry| entry.unwrap().file_name().into_string().unwrap())
            .collect();
        names.sort();
        names
    }

    /// The files of a run, without what depends on the hour.
    pub(crate) fn results(&self) -> [String; 3] {
        let mut record: serde_json::Value =
            serde_json::from_str(&self.read("out/run.json")).unwrap();
        record.as_object_mut().unwrap().remove("timing").unwrap();
        [
            self.read("out/ranked.csv"),
            self.read("out/not_ranked.csv"),
            serde_json::to_string_pretty(&record).unwrap(),
        ]
    }
}

fn named_cells(text: &str, column: &str) -> Vec<(String, String)> {
    let mut rows = csv_rows(text).into_iter();
    let head = rows.next().expect("a header");
    let place = |wanted: &str| {
        let found = head.iter().position(|cell| cell == wanted);
        found.unwrap_or_else(|| panic!("no column {wanted} in {head:?}"))
    };
    let (name, cell) = (place("name"), place(column));
    rows.map(|row| (row[name].clone(), row[cell].clone()))
        .collect()
}
