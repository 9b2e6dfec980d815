//! Pools that name their molecules, and pools with measured values.

use std::io::Write;

use crate::workbench::{Bench, csv_rows, groupsmith, say};

const BRIEF: &str = "[pool]\nfile = \"pool.csv\"\n\
    [[target]]\nfigure = \"boiling_point\"\nat_least = \"1 K\"\n\
    [[target]]\nfigure = \"liquid_density\"\nprefer = \"low\"\nworst = \"2000 kg/m3\"\nbest = \"500 kg/m3\"\n";

fn value(cells: &[(String, String)], name: &str) -> f64 {
    let cell = cells.iter().find(|(known, _)| known == name);
    let (_, cell) = cell.unwrap_or_else(|| panic!("no {name} in {cells:?}"));
    cell.parse().unwrap_or_else(|_| panic!("{cell}"))
}

/// Refused lines as (line, name, reason).
fn refusals(bench: &Bench) -> String {
    csv_rows(&bench.read("out/not_ranked.csv"))
        .iter()
        .filter(|row| row[3] == "refused")
        .map(|row| format!("{} {}: {}\n", row[0], row[1], row[7]))
        .collect()
}

const MIXED: &str = "name,cas,smiles\n\
    acetone,,\n\
    ,64-17-5,\n\
    my ether,,CCOCC\n\
    toluene,108-88-3,\n\
    Toluol?,108-88-3,\n\
    toluene,71-43-2,\n\
    tolune,,\n\
    DEA,,\n\
    ,64-17-6,\n\
    ,99-99-0,\n\
    CCO,,\n\
    ,,\n";

#[test]
fn molecules_are_found_by_name_and_cas_number() {
    let bench = Bench::with(BRIEF, MIXED);
    let said = bench.screen(&[]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    let smiles = bench.ranked("smiles");
    let of = |name: &str| smiles.iter().find(|row| row.0 == name).map(|row| &*row.1);
    assert_eq!(of("acetone"), Some("CC(C)=O"));
    assert_eq!(of("ethanol"), Some("CCO"));
    assert_eq!(of("my ether"), Some("CCOCC"));
    insta::assert_snapshot!("pool_refusals", refusals(&bench));
    let counts = bench.record().counts;
    assert_eq!((counts.lines, counts.ranked, counts.duplicate), (12, 4, 1));
    for reason in [
        "name-against-cas",
        "unknown-name",
        "ambiguous-name",
        "cas-check-digit",
        "no-molecule",
    ] {
        assert!(counts.refused_by_reason.contains_key(reason), "{counts:?}");
    }
}

#[test]
fn a_pool_without_smiles_ranks_like_one_with_them() {
    let named = Bench::with(BRIEF, "name\nacetone\nethanol\ntoluene\n");
    assert_eq!(named.screen(&["--threads", "1"]).code, 0);
    let written = Bench::with(
        BRIEF,
        "name,smiles\nacetone,CC(C)=O\nethanol,CCO\ntoluene,Cc1ccccc1\n",
    );
    assert_eq!(written.screen(&[]).code, 0);
    assert_eq!(named.ranked("score"), written.ranked("score"));

    let mut packed = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::default());
    packed
        .write_all(b"name\nacetone\nethanol\ntoluene\n")
        .unwrap();
    let gz = Bench::with(&BRIEF.replace("pool.csv", "pool.csv.gz"), "not this one");
    gz.write("pool.csv.gz", packed.finish().unwrap());
    assert_eq!(gz.screen(&[]).code, 0);
    assert_eq!(gz.ranked("score"), named.ranked("score"));

    // Standard input tells by its header.
    let mut command = groupsmith();
    command.args([
        "breakdown",
        "--from",
        "-",
        "--set",
        "joback",
        "--format",
        "csv",
    ]);
    let output = command.write_stdin("cas\n67-64-1\n").output().unwrap();
    let out = String::from_utf8(output.stdout).unwrap();
    assert!(
        out.contains("2,acetone,CC(C)=O,joback,complete,1:2;24:1,"),
        "{out}"
    );
}

const MEASURED: &str = "name,boiling_point [degC],liquid_density [g/cm3] at 25 degC,price [EUR/kg]\n\
    acetone,57,0.8,3\n\
    ethanol,,,2\n\
    toluene,110,,1\n";

#[test]
fn measured_columns_go_before_the_tables() {
    let bench = Bench::with(BRIEF, MEASURED);
    let said = bench.screen(&["--explain", "acetone"]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    assert!(
        said.out.contains("column `boiling_point [degC]`"),
        "{}",
        said.out
    );
    let boiling = bench.ranked("boiling_point_k");
    assert_eq!(value(&boiling, "acetone"), 330.15);
    assert_eq!(value(&boiling, "toluene"), 383.15);
    // A blank cell says nothing: the table's value stands.
    assert_eq!(value(&boiling, "ethanol"), 351.39);
    assert_eq!(
        value(&bench.ranked("liquid_density_kg_per_m3"), "acetone"),
        800.0
    );
    assert!(bench.ranked("notes")[0].1.contains("measured"));
    // Every column is carried along.
    assert_eq!(value(&bench.ranked("price [EUR/kg]"), "acetone"), 3.0);
    assert_eq!(
        value(&bench.ranked("boiling_point [degC]"), "acetone"),
        57.0
    );
    let results = bench.results();
    assert_eq!(bench.screen(&["--threads", "1"]).code, 0);
    assert_eq!(bench.results(), results);

    let by_groups = ["--estimates-only", "--estimates", "joback-reid"];
    assert_eq!(bench.screen(&by_groups).code, 0);
    assert_eq!(value(&bench.ranked("boiling_point_k"), "acetone"), 322.11);
}

#[test]
fn a_density_is_carried_to_other_temperatures_where_nothing_else_is_known() {
    let density = |pool: &str| {
        let bench = Bench::with(BRIEF, pool);
        assert_eq!(bench.screen(&[]).code, 0);
        value(&bench.ranked("liquid_density_kg_per_m3"), "x")
    };
    // Not of the tables: 4-ethyl-2-methylhexane.
    let plain = density("name,smiles\nx,CCC(CC)CC(C)C\n");
    let own = density("name,smiles,liquid_density [kg/m3] at 20 degC\nx,CCC(CC)CC(C)C,900\n");
    assert!((own - 900.0).abs() < 10.0 && own < 900.0, "{own} {plain}");
    // Of two the nearer temperature counts.
    let two = density(
        "name,smiles,liquid_density [kg/m3] at 80 degC,liquid_density [kg/m3] at 20 degC\nx,CCC(CC)CC(C)C,700,900\n",
    );
    assert_eq!(two, own);
    // The table has acetone at 25 degC; an own value elsewhere does not move it.
    let table = density("name,smiles\nx,CC(C)=O\n");
    let far = density("name,smiles,liquid_density [kg/m3] at 0 degC\nx,CC(C)=O,900\n");
    assert_eq!(far, table);
}

#[test]
fn measured_values_that_are_none_refuse_their_line() {
    let bench = Bench::with(
        BRIEF,
        "name,boiling_point [K],liquid_density [kg/m3] at 20 degC\n\
        acetone,0,\nethanol,about 350,\ntoluene,\"383,2\",\nbenzene,1e400,\nanisole,,0.99\n\
        furan,9999,\nphenol,-3,\nwater,373.15,998\n",
    );
    assert_eq!(bench.screen(&[]).code, 0);
    insta::assert_snapshot!("pool_values_refused", refusals(&bench));
    assert_eq!(bench.record().counts.refused_by_reason["measured-value"], 7);
}

#[test]
fn columns_that_cannot_be_used_are_told_before_the_run() {
    let mut told = String::new();
    for head in [
        "boiling_point [g/mol]",
        "boiling_point [degc]",
        "boiling_point []",
        "boiling_point [K] at 2 kPa",
        "boiling_point [K] at noon",
        "boiling_point [K] (lab)",
        "liquid_density [g/cm3]",
        "liquid_density [g/cm3] at 3 kPa",
        "flash_point [K] at 20 degC",
        "melting_point [K],Melting point [degC]",
        "liquid_density [g/cm3] at 20 degC,liquid_density [kg/m3] at 293.15 K",
    ] {
        let bench = Bench::with(BRIEF, format!("smiles,{head}\n"));
        let said = bench.screen(&[]);
        assert_eq!((said.code, said.out.as_str()), (2, ""), "{head}");
        let folder = bench.argument("");
        told.push_str(&said.err.replace(&folder, "").replace("groupsmith: ", ""));
    }
    insta::assert_snapshot!("pool_columns_refused", told);
    let bench = Bench::with(BRIEF, "smiles,boiling_point [K] at 1 atm\nCCO,351\n");
    assert_eq!(bench.screen(&[]).code, 0);
    assert_eq!(bench.ranked("boiling_point_k")[0].1, "351");
}

#[test]
fn columns_that_look_like_measured_values_are_noted() {
    let bench = Bench::with(
        BRIEF,
        "smiles,boiling_point,liquid_density at 20 degC,boiling_pont [K],molar_mass [g/mol],note [1]\nCCO,1,2,3,4,5\n",
    );
    let said = bench.screen(&[]);
    assert_eq!(said.code, 0, "{}", said.err);
    insta::assert_snapshot!("pool_columns_noted", said.err);
    assert_eq!(bench.ranked("boiling_point_k")[0].1, "351.39");
    assert_eq!(bench.screen(&["--quiet"]).err, "");
}

#[test]
fn a_look_up_takes_names_and_measured_values_of_its_file() {
    let bench = Bench::with("", MEASURED);
    let pool = bench.argument("pool.csv");
    let groups = ["--estimates", "joback-reid"];
    let said = say(&[
        &["properties", "--from", &pool, "--format", "csv"],
        &groups[..],
    ]
    .concat());
    assert_eq!(said.code, 0, "{}", said.err);
    let rows = csv_rows(&said.out);
    let row = rows
        .iter()
        .find(|row| row[0] == "2" && row[3] == "boiling_point")
        .unwrap();
    assert_eq!(
        [&row[1], &row[5], &row[10], &row[12]],
        ["acetone", "330.15", "measured", "322.11"]
    );
    assert!(
        row[11].ends_with("column `boiling_point [degC]`"),
        "{row:?}"
    );
    let said = say(&[
        "properties",
        "--from",
        &pool,
        "--estimates-only",
        "--format",
        "csv",
    ]);
    assert!(!said.out.contains("measured"), "{}", said.out);
}

#[test]
fn check_tells_which_lines_would_be_refused() {
    let bench = Bench::with(BRIEF, format!("{MIXED}x,,C1CC\nacetone,,CC[Na]\n"));
    let said = say(&["check", &bench.argument("brief.toml")]);
    assert_eq!(said.code, 0, "{}", said.err);
    let out = said.out.replace(&bench.argument(""), "");
    insta::assert_snapshot!("pool_check", out);
    // A run agrees.
    assert_eq!(bench.screen(&[]).code, 0);
    let refused = bench.record().counts.refused;
    assert!(out.contains(&format!(", {refused} of them")), "{out}");
}

#[test]
fn what_cannot_be_explained_is_told_before_the_run() {
    let bench = Bench::with(BRIEF, "smiles,name\nCCO,my solvent\n");
    let said = bench.screen(&["--explain", "my solvnt"]);
    assert_eq!((said.code, said.out.as_str()), (2, ""));
    assert!(
        said.err.contains("no line of the pool is called so"),
        "{}",
        said.err
    );
    assert!(bench.files().is_empty());
    for known in ["My Solvent", "toluene", "CCCC"] {
        assert_eq!(bench.screen(&["--explain", known]).code, 0, "{known}");
    }
}

#[test]
fn measured_columns_of_standard_input_count_and_are_told_where_they_cannot() {
    let bench = Bench::with(&BRIEF.replace("pool.csv", "-"), "");
    let mut command = bench.screening(&["--explain", "acetone"]);
    let output = command.write_stdin(MEASURED).output().unwrap();
    assert_eq!(output.status.code(), Some(0));
    let err = String::from_utf8(output.stderr).unwrap();
    assert!(err.contains("which can be read only once"), "{err}");
    assert_eq!(value(&bench.ranked("boiling_point_k"), "acetone"), 330.15);
}

#[test]
fn a_column_asked_for_by_name_has_to_be_there() {
    let brief = BRIEF.replace(
        "file = \"pool.csv\"",
        "file = \"pool.csv\"\nsmiles_column = \"structure\"",
    );
    let bench = Bench::with(&brief, "name\nacetone\n");
    let said = bench.screen(&[]);
    assert_eq!(said.code, 2);
    assert!(
        said.err.contains("no column is headed `structure`"),
        "{}",
        said.err
    );
    let bench = Bench::with(BRIEF, "solvent\nacetone\n");
    let said = bench.screen(&[]);
    assert_eq!(said.code, 2);
    assert!(
        said.err
            .contains("no column is headed `smiles` or `name` or `cas`"),
        "{}",
        said.err
    );
}
