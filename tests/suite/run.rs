//! Files of a run: whole or not at all.

use std::fs;
use std::io::Write;

use groupsmith::run::{
    BriefRecord, Ending, Event, FileError, Fingerprint, Listener, NewFile, Outcome, RunRecord,
    TablesRecord, make_folder, remove_stale, write_whole,
};

fn record() -> RunRecord {
    let mut record = RunRecord::new(
        "screen",
        BriefRecord::new("brief.toml", "title = \"Entrainers\"\n"),
        TablesRecord {
            fingerprint: Fingerprint::of(b"tables"),
            of_user: Vec::new(),
            choices: Vec::new(),
        },
    );
    record.models.push("unifac-dortmund".into());
    for _ in 0..3 {
        record.counts.add(Outcome::Ranked, "");
    }
    record.counts.add(Outcome::NotQualified, "boiling_point");
    record.counts.add(Outcome::Refused, "valence");
    record
}

fn names(folder: &std::path::Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    names
}

#[test]
fn a_file_that_is_given_up_leaves_what_was_there() {
    let folder = tempfile::tempdir().unwrap();
    let place = folder.path().join("ranked.csv");
    write_whole(&place, b"old").unwrap();
    {
        let mut file = NewFile::begin(&place).unwrap();
        file.write_all(&vec![b'x'; 200_000]).unwrap();
        assert_eq!(fs::read(&place).unwrap(), b"old");
        assert_eq!(names(folder.path()), ["ranked.csv", "ranked.csv.part"]);
    }
    assert_eq!(fs::read(&place).unwrap(), b"old");
    assert_eq!(names(folder.path()), ["ranked.csv"]);

    let mut file = NewFile::begin(&place).unwrap();
    file.add(b"new").unwrap();
    file.put_in_place().unwrap();
    assert_eq!(fs::read(&place).unwrap(), b"new");
    assert_eq!(names(folder.path()), ["ranked.csv"]);
}

#[test]
fn what_stands_in_the_way_is_named() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("file");
    fs::write(&file, b"").unwrap();
    assert!(matches!(make_folder(&file), Err(FileError::IsFile { .. })));
    assert!(matches!(
        make_folder(&file.join("below")),
        Err(FileError::IsFile { .. })
    ));
    let inner = folder.path().join("a/b/c");
    make_folder(&inner).unwrap();
    assert!(names(&inner).is_empty());
    assert!(matches!(
        NewFile::begin(&inner),
        Err(FileError::IsFolder { .. })
    ));
    assert!(matches!(
        write_whole(&folder.path().join("absent/file"), b""),
        Err(FileError::Other { .. })
    ));
}

/// `/dev/full` takes no byte. A part file there cannot be made, so the part
/// file is a link to it.
#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_puts_nothing_into_place() {
    let folder = tempfile::tempdir().unwrap();
    let place = folder.path().join("ranked.csv");
    fs::write(&place, b"old").unwrap();
    std::os::unix::fs::symlink("/dev/full", folder.path().join("ranked.csv.part")).unwrap();
    let mut file = NewFile::begin(&place).unwrap();
    file.add(b"new").unwrap();
    let error = file.put_in_place().unwrap_err();
    assert!(matches!(error, FileError::DiskFull { .. }), "{error}");
    assert_eq!(fs::read(&place).unwrap(), b"old");
    assert_eq!(names(folder.path()), ["ranked.csv"]);
}

#[test]
fn the_record_of_an_earlier_run_goes_before_its_tables() {
    let folder = tempfile::tempdir().unwrap();
    for name in ["ranked.csv", "run.json", "ranked.csv.part", "mine.txt"] {
        fs::write(folder.path().join(name), b"").unwrap();
    }
    remove_stale(folder.path(), &["ranked.csv", "not_ranked.csv", "run.json"]).unwrap();
    assert_eq!(names(folder.path()), ["mine.txt"]);
}

#[test]
fn the_record_says_what_was_run_and_how_it_ended() {
    let folder = tempfile::tempdir().unwrap();
    let mut record = record();
    assert_eq!(record.ended, Ending::Failed);
    record.end(false);
    record.put_in_place(folder.path()).unwrap();
    assert_eq!(names(folder.path()), ["run.json"]);
    let text = fs::read_to_string(folder.path().join(RunRecord::FILE_NAME)).unwrap();
    assert_eq!(text, record.to_json());
    let version = env!("CARGO_PKG_VERSION");
    insta::assert_snapshot!(
        "run_record",
        text.replace(version, &"#".repeat(version.len()))
    );
}

#[test]
fn a_failed_run_says_why() {
    let mut record = record();
    record.fail("ranked.csv: the disk is full");
    assert_eq!(record.ended, Ending::Failed);
    assert!(!record.finished);
    assert!(record.to_json().contains("the disk is full"));
}

#[test]
fn closures_hear_events() {
    let heard = std::sync::Mutex::new(Vec::new());
    let listener = |event: Event<'_>| heard.lock().unwrap().push(format!("{event:?}"));
    let all: &dyn Listener = &listener;
    all.hear(Event::Warning {
        text: "a column is missing",
    });
    assert_eq!(
        *heard.lock().unwrap(),
        ["Warning { text: \"a column is missing\" }"]
    );
}
