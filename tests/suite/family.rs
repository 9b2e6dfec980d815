//! `properties --family`: how well the methods do for relatives.

use serde_json::Value;

use crate::workbench::{csv_rows, say};

#[test]
fn relatives_are_compared_property_by_property() {
    let said = say(&["properties", "butyronitrile", "--family"]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    insta::assert_snapshot!("family", said.out);
}

#[test]
fn a_molecule_that_is_in_no_list_is_placed_by_its_functional_groups() {
    // Undecanenitrile, dodecan-1-ol with a branch.
    for (smiles, family) in [
        ("CCCCCCCCCCC#N", "nitriles"),
        ("CCCCCCC(C)CCCCO", "alcohols"),
    ] {
        let said = say(&["properties", smiles, "--family"]);
        assert_eq!(said.code, 0);
        assert!(
            said.out.contains(&format!("family: {family} (")),
            "{}",
            said.out
        );
        assert!(
            said.out
                .contains("substances with the same functional groups)"),
            "{}",
            said.out
        );
    }
    let said = say(&[
        "properties",
        "N#CCCOC(=O)CCS",
        "--family",
        "--format",
        "csv",
    ]);
    assert_eq!(said.code, 1);
    assert!(said.out.contains("absent"), "{}", said.out);
    assert!(said.out.contains("no family fits"), "{}", said.out);
}

#[test]
fn means_and_the_worst_are_those_of_the_rows() {
    let said = say(&[
        "properties",
        "acetone",
        "CCCCC#N",
        "--family",
        "--format",
        "csv",
    ]);
    let rows = csv_rows(&said.out);
    assert_eq!(
        rows[0].join(","),
        "line,name,smiles,family,kind,property,temperature_k,relative,relative_smiles,measured,estimated,difference,unit,method,detail"
    );
    let of = |line: &str, property: &str, kind: &str| -> Vec<f64> {
        rows.iter()
            .filter(|row| row[0] == line && row[5] == property && row[4] == kind)
            .filter_map(|row| row[11].parse().ok())
            .collect()
    };
    for line in ["1", "2"] {
        for property in [
            "boiling_point",
            "liquid_density",
            "enthalpy_of_vaporization",
            "melting_point",
            "flash_point",
        ] {
            let errors = of(line, property, "relative");
            assert!(errors.len() > 3, "{property}");
            let count = errors.len() as f64;
            let near = |kind: &str, wanted: f64| {
                let found = of(line, property, kind);
                assert_eq!(found.len(), 1, "{property} {kind}");
                assert!(
                    (found[0] - wanted).abs() <= 1e-6 * wanted.abs(),
                    "{property} {kind}"
                );
            };
            near("mean", errors.iter().sum::<f64>() / count);
            near(
                "mean-absolute",
                errors.iter().map(|e| e.abs()).sum::<f64>() / count,
            );
            let worst = errors
                .iter()
                .copied()
                .max_by(|a, b| a.abs().total_cmp(&b.abs()));
            near("worst", worst.unwrap());
        }
    }
    // The molecule is not its own relative.
    assert!(!rows.iter().any(|row| row[0] == "1" && row[7] == "acetone"));

    let json = say(&["properties", "acetone", "--family", "--format", "json"]);
    let json: Vec<Value> = serde_json::from_str(&json.out).unwrap();
    assert_eq!(
        json.len(),
        rows[1..].iter().filter(|row| row[0] == "1").count()
    );
    let both = say(&["properties", "acetone", "--family", "--estimates-only"]);
    assert_eq!(both.code, 2);
}
