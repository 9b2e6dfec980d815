//! A user's folder of measured data: `--data`, `[data]` of a brief, `check`.

use crate::workbench::{Bench, Said, csv_rows, groupsmith, say};

const HEAD: &str = "# title: own values\n# source: lab: own laboratory (invented)\n# transcribed: today\n# checked: no\n";
const MEASURED: &str =
    "substance,property,value,unit,temperature,pressure,source\n-,-,-,-,K,kPa,-\n";
const DENSITY: &str = "substance,equation,a,b,c,d,critical_temperature,critical_density,low,high,source\n-,-,-,-,-,-,K,kg/m3,K,K,-\n";

const SOUND: &str = "ethanol,boiling_point,78.3,degC,,101.325,lab\n\
    acetone,flash_point,-18,degC,,,lab\n\
    acetone,liquid_viscosity,0.31,mPa s,298.15,,lab\n";

/// A folder `lab` with these rows of measured values.
fn lab(rows: &str) -> Bench {
    let bench = Bench::new();
    bench.write("lab/measured.csv", format!("{HEAD}{MEASURED}{rows}"));
    bench
}

/// A command run where the folders are.
fn run(bench: &Bench, arguments: &[&str]) -> Said {
    let mut command = groupsmith();
    command.current_dir(bench.path("")).args(arguments);
    command.output().unwrap().into()
}

fn boiling_point(said: &Said) -> Vec<String> {
    let rows = csv_rows(&said.out);
    let row = rows.iter().find(|row| row[3] == "boiling_point");
    row.unwrap_or_else(|| panic!("{said:?}")).clone()
}

#[test]
fn values_of_the_folder_go_before_those_built_in() {
    let bench = lab(SOUND);
    let ask = ["properties", "ethanol", "--format", "csv", "--data", "lab"];
    let said = run(&bench, &ask);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    let row = boiling_point(&said);
    assert_eq!((&row[5][..], &row[10][..]), ("351.45", "measured"));
    assert!(row[11].contains("own laboratory"), "{row:?}");
    let said = run(&bench, &[&ask[..], &["--estimates-only"]].concat());
    assert_eq!(boiling_point(&said)[10], "estimated");
}

#[test]
fn a_sound_folder_is_told_what_it_brings() {
    let bench = lab(SOUND);
    bench.write(
        "lab/density.csv",
        format!("{HEAD}{DENSITY}ethanol,constant,786,,,,,,298,298.3,lab\n"),
    );
    bench.write("lab/mesured.csv", "x");
    let said = run(&bench, &["check", "--data", "lab"]);
    assert_eq!(said.code, 0, "{}", said.err);
    insta::assert_snapshot!("own_data", format!("{}\n{}", said.out, said.err));
    let quiet = run(&bench, &["check", "--data", "lab", "--quiet"]);
    assert_eq!((quiet.out, quiet.err), (said.out, String::new()));
}

#[test]
fn all_faults_of_all_files_come_at_once() {
    let bench =
        lab("ethanol,boiling_point,x,degC,,101.325,lab\nacetne,flash_point,-18,degC,,,lab\n");
    bench.write(
        "lab/density.csv",
        format!("{HEAD}{DENSITY}ethanol,constant,9,,,,,,298,298.3,lab\n"),
    );
    let said = run(&bench, &["check", "--data", "lab"]);
    assert_eq!((said.code, said.out.as_str()), (2, ""));
    insta::assert_snapshot!("own_data_faults", said.err);
}

#[test]
fn folders_that_cannot_be_used_are_told() {
    let bench = lab(SOUND);
    let refused = |arguments: &[&str], message: &str| {
        let said = run(&bench, arguments);
        assert_eq!((said.code, said.out.as_str()), (2, ""), "{said:?}");
        assert!(said.err.contains(message), "{}", said.err);
    };
    refused(
        &["tables", "--data", "laboratory"],
        "there is no folder laboratory",
    );
    std::fs::create_dir(bench.path("empty")).unwrap();
    refused(
        &["tables", "--data", "empty"],
        "empty holds no table of measured data",
    );
    bench.write("other/measurd.csv", "x");
    refused(
        &["tables", "--data", "other"],
        "not a table: measurd.csv; did you mean `measured.csv`?",
    );
    refused(&["check"], "nothing to check is given");
    // The same table from two sides: nobody could say which counts.
    bench.write(
        "own/substances/measured.csv",
        bench.read("lab/measured.csv"),
    );
    refused(
        &["tables", "--data", "lab", "--tables", "own"],
        "are the same table\n  leave one of them out",
    );
}

/// A file typed by hand, without a head and with temperatures in degC.
#[test]
fn a_file_without_a_head_is_told_too() {
    let bench = Bench::new();
    bench.write(
        "lab/measured.csv",
        "substance,property,value,unit,temperature,pressure,source\n-,-,-,-,degC,kPa,-\n\
         toluene,liquid_density,0.868,g/cm3,20,,own\n\
         acetone,boiling_point,340,K,,101.325,own\n",
    );
    let said = run(&bench, &["check", "--data", "lab"]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    let told = |words: &[&str]| {
        let line = |line: &str| words.iter().all(|word| line.contains(word));
        assert!(said.out.lines().any(line), "{words:?} in\n{}", said.out);
    };
    told(&["measured.csv", "2", "liquid_density, boiling_point"]);
    told(&["acetone", "boiling_point", "329.23", "340"]);
    told(&["acetone", "vapor_pressure", "340.00", "101.3"]);
    told(&["toluene", "liquid_density", "293.15", "868.0"]);
}

/// What is no table at all says what it is and what to do.
#[test]
fn rubbish_is_told_in_a_few_words() {
    let bench = Bench::new();
    let refused = |folder: &str, wanted: &[&str]| {
        let said = run(&bench, &["check", "--data", folder]);
        assert_eq!((said.code, said.out.as_str()), (2, ""), "{said:?}");
        for words in wanted {
            assert!(said.err.contains(words), "{words} in {}", said.err);
        }
        said.err.lines().count()
    };
    std::fs::create_dir(bench.path("binary")).unwrap();
    std::fs::write(bench.path("binary/measured.csv"), [0xff, 0xfe, 0, 1]).unwrap();
    refused("binary", &["is no text in UTF-8", "save the table as CSV"]);
    std::fs::create_dir_all(bench.path("nested/measured.csv")).unwrap();
    refused("nested", &["measured.csv is a folder"]);
    bench.write("nothing/measured.csv", "");
    refused("nothing", &["begins with its column names"]);
    bench.write(
        "comma/supply.csv",
        "substance,price,price_unit,source\n-,-,-,-\nacetone,\"1,5\",EUR/kg,own\n",
    );
    refused("comma", &["decimals take a point (found `1,5`)"]);
    let rows = "unheard of,flash_point,280,K,,,own\n".repeat(5_000);
    bench.write("long/measured.csv", format!("{MEASURED}{rows}"));
    let lines = refused("long", &["the rest of the table is not read"]);
    assert_eq!(lines, 100);
}

const BRIEF: &str = "[data]\nfolder = \"lab\"\n[pool]\nfile = \"pool.csv\"\n\
    [[target]]\nfigure = \"boiling_point\"\nat_least = \"1 K\"\n";

#[test]
fn a_brief_names_its_folder_and_the_run_records_it() {
    let bench = Bench::with(BRIEF, "smiles,name\nCCO,ethanol\n");
    bench.write("lab/measured.csv", format!("{HEAD}{MEASURED}{SOUND}"));
    let said = bench.screen(&[]);
    assert_eq!(said.code, 0, "{}", said.err);
    let value = bench.ranked("boiling_point_k").remove(0).1;
    assert_eq!(value, "351.45");
    let record = bench.record().tables;
    assert_eq!(record.of_user, ["substances/measured.csv"]);
    let results = bench.results();

    // Naming it twice is naming it once.
    assert_eq!(bench.screen(&["--data", "lab"]).code, 0);
    assert_eq!(bench.results(), results);

    // Another value is another run.
    let changed = SOUND.replace("78.3", "78.4");
    bench.write("lab/measured.csv", format!("{HEAD}{MEASURED}{changed}"));
    assert_eq!(bench.screen(&[]).code, 0);
    assert_ne!(bench.record().tables.fingerprint, record.fingerprint);

    let check = run(&bench, &["check", "brief.toml"]);
    assert_eq!(check.code, 0, "{}", check.err);
    assert!(check.out.contains("Your tables: sound"), "{}", check.out);

    bench.write("brief.toml", BRIEF.replace("\"lab\"", "\"laboratory\""));
    let said = bench.screen(&[]);
    assert_eq!(said.code, 2);
    assert!(
        said.err
            .contains("brief.toml:2: `data.folder`: there is no folder laboratory"),
        "{}",
        said.err
    );
    bench.write("brief.toml", BRIEF.replace("folder =", "dir ="));
    let said = bench.screen(&[]);
    assert!(said.code == 2 && said.err.contains("`folder`"), "{said:?}");
}

#[test]
fn every_command_takes_the_folder() {
    let bench = lab(SOUND);
    let folder = bench.argument("lab");
    for arguments in [
        &["breakdown", "CCO"][..],
        &["mixture", "--component", "CCO", "--temperature", "300 K"],
        &["tables"],
    ] {
        let said = say(&[arguments, &["--data", &folder]].concat());
        assert_eq!(said.code, 0, "{}", said.err);
    }
}
