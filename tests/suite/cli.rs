//! The commands as a script or a person meets them: columns, exit codes, what
//! goes to which stream, messages.

use std::process::{Command, Stdio};

use serde_json::Value;

use crate::workbench::{Bench, Said, csv_rows, groupsmith, repository, say};

/// Rows of `mixture --format csv` as (quantity, component, model) and cells.
struct Mixture(Vec<Vec<String>>);

impl Mixture {
    fn of(arguments: &[&str]) -> Self {
        let said = say(&[&["mixture", "--format", "csv"], arguments].concat());
        assert_eq!(said.code, 0, "{}", said.err);
        Self(csv_rows(&said.out).split_off(1))
    }

    fn rows<'m>(
        &'m self,
        quantity: &'m str,
        component: &'m str,
    ) -> impl Iterator<Item = &'m Vec<String>> {
        self.0
            .iter()
            .filter(move |row| row[0] == quantity && row[1] == component)
    }

    fn value(&self, quantity: &str, component: &str) -> f64 {
        let row = self.rows(quantity, component).next();
        let row = row.unwrap_or_else(|| panic!("no row {quantity} {component}"));
        row[2].parse().unwrap_or_else(|_| panic!("{row:?}"))
    }

    /// Each quantity with the components it is given for, in order.
    fn quantities(&self) -> Vec<(String, String)> {
        self.0
            .iter()
            .map(|row| (row[0].clone(), row[1].clone()))
            .collect()
    }
}

const ETHANOL_WATER: [&str; 6] = [
    "--component",
    "ethanol",
    "--component",
    "water",
    "--fractions",
    "0.3,0.7",
];

fn with(mixture: &[&'static str], more: &[&'static str]) -> Mixture {
    Mixture::of(&[mixture, more].concat())
}

fn close(left: f64, right: f64, relative: f64) {
    assert!(
        (left - right).abs() <= relative * right.abs(),
        "{left} is not {right}"
    );
}

#[test]
fn heads_of_csv_are_those_relied_upon() {
    for (arguments, head) in [
        (
            &["breakdown", "CCO"][..],
            "line,name,smiles,set,status,groups,detail",
        ),
        (
            &["properties", "CCO"][..],
            "line,name,smiles,property,temperature_k,value,unit,low,high,method,status,detail,estimated_value,estimated_method,difference",
        ),
        (
            &["mixture", "--component", "CCO", "--temperature", "300 K"][..],
            "quantity,component,value,unit,model,status,detail,low,high",
        ),
    ] {
        let said = say(&[arguments, &["--format", "csv"]].concat());
        assert_eq!(said.code, 0);
        assert_eq!(said.err, "");
        assert_eq!(said.out.lines().next().unwrap(), head);
        assert!(csv_rows(&said.out).len() > 1);

        // JSON has the same rows under the same names.
        let rows = csv_rows(&said.out);
        let json = say(&[arguments, &["--format", "json"]].concat());
        let json: Vec<Value> = serde_json::from_str(&json.out).unwrap();
        assert_eq!(json.len(), rows.len() - 1);
        for (object, row) in json.iter().zip(&rows[1..]) {
            for (name, cell) in rows[0].iter().zip(row) {
                let shown = match &object[name] {
                    Value::Null => String::new(),
                    Value::String(text) => text.clone(),
                    // CSV writes no exponents where JSON may.
                    Value::Number(number) => {
                        let cell: f64 = cell.parse().unwrap();
                        assert_eq!(number.as_f64(), Some(cell), "{name}");
                        continue;
                    }
                    other => panic!("{name} is {other}"),
                };
                assert_eq!(&shown, cell, "{name}");
            }
        }
    }
}

#[test]
fn breakdowns_count_by_published_numbers() {
    let said = say(&["breakdown", "CCO", "water", "--format", "csv"]);
    let rows = csv_rows(&said.out);
    let shown: Vec<String> = rows[1..]
        .iter()
        .map(|row| format!("{} {} {} {} {}", row[0], row[1], row[3], row[4], row[5]))
        .collect();
    assert_eq!(
        shown,
        [
            "1 ethanol unifac complete 1:1;2:1;14:1",
            "1 ethanol unifac-dortmund complete 1:1;2:1;14:1",
            "1 ethanol joback complete 1:1;2:1;20:1",
            "2 water unifac complete 16:1",
            "2 water unifac-dortmund complete 16:1",
            "2 water joback partial ",
        ]
    );
    assert!(
        rows[6][6].contains("is in no group of this set"),
        "{:?}",
        rows[6]
    );
}

#[test]
fn a_row_that_cannot_be_answered_tells_why_and_spares_the_code() {
    for command in ["breakdown", "properties"] {
        let said = say(&[command, "CCO", "C(", "--format", "csv"]);
        assert_eq!(said.code, 0, "{command}");
        let rows = csv_rows(&said.out);
        let at = rows[0].iter().position(|head| head == "detail").unwrap();
        let bad: Vec<_> = rows.iter().filter(|row| row[0] == "2").collect();
        assert!(!bad.is_empty());
        for row in bad {
            let detail = &row[at];
            assert!(
                detail.contains("column 3: the line ends too early"),
                "{detail}"
            );
            assert!(row.contains(&"unreadable".into()) || row.contains(&"absent".into()));
        }
        let said = say(&[command, "C(", "--format", "csv"]);
        assert_eq!(said.code, 1, "{command}");
        assert_eq!(said.err, "");
    }
}

#[test]
fn molecules_come_from_files_and_standard_input() {
    let bench = Bench::new();
    bench.write("list.smi", b"CCO ethyl alcohol\n\xff\xfe broken\nC( open\n");
    let file = bench.argument("list.smi");
    let wanted = "line,name,smiles,set,status,groups,detail\n\
        1,ethyl alcohol,CCO,joback,complete,1:1;2:1;20:1,\n";
    let arguments = ["breakdown", "--set", "joback", "--format", "csv", "--from"];
    let said = say(&[&arguments[..], &[&file]].concat());
    assert_eq!(said.code, 0);
    assert!(said.out.starts_with(wanted), "{}", said.out);
    let rows = csv_rows(&said.out);
    assert_eq!(rows.len(), 4);
    assert_eq!(rows[2][4], "unreadable");
    assert!(
        rows[2][6].contains("is not UTF-8 text from byte 1 on"),
        "{:?}",
        rows[2]
    );
    assert!(rows[3][6].starts_with("column 3:"), "{:?}", rows[3]);

    let mut command = groupsmith();
    let said: Said = command
        .args(arguments)
        .arg("-")
        .write_stdin("name,smiles\nethyl alcohol,CCO\n")
        .output()
        .unwrap()
        .into();
    assert_eq!(said.out, wanted.replace("\n1,", "\n2,"));

    for (file, message) in [
        ("nowhere.csv", "cannot open the candidate list nowhere.csv"),
        (".", ". is a directory"),
    ] {
        let said = say(&["properties", "--from", file]);
        assert_eq!(said.code, 2);
        assert!(said.err.contains(message), "{}", said.err);
        assert_eq!(said.out, "");
    }
}

#[test]
fn temperatures_may_lie_below_zero() {
    let said = say(&[
        "properties",
        "acetone",
        "--temperature",
        "-20 degC",
        "--format",
        "csv",
    ]);
    assert_eq!(said.code, 0, "{}", said.err);
    assert!(said.out.contains("vapor_pressure,253.15,"), "{}", said.out);
    let mixture = Mixture::of(&["--component", "acetone", "--temperature", "-20 degC"]);
    assert!(mixture.value("bubble_pressure", "") < 1e4);
}

/// Water has no groups of Joback and Reid; its measured values serve.
#[test]
fn measured_values_serve_where_groups_do_not() {
    let by_groups = |more: &[&str]| {
        let water = ["properties", "water", "--estimates", "joback-reid"];
        say(&[&water[..], &["--format", "csv"], more].concat())
    };
    let said = by_groups(&[]);
    let status = |said: &Said, property: &str| {
        let rows = csv_rows(&said.out);
        let row = rows.into_iter().find(|row| row[3] == property).unwrap();
        (row[10].clone(), row[5].clone())
    };
    for property in ["boiling_point", "liquid_density", "vapor_pressure"] {
        assert_eq!(status(&said, property).0, "measured");
    }
    // 1 atm at 373.124 K.
    close(
        status(&said, "boiling_point").1.parse().unwrap(),
        373.124,
        1e-6,
    );
    assert_eq!(
        status(&said, "critical_temperature"),
        ("absent".into(), "".into())
    );

    let said = by_groups(&["--estimates-only"]);
    assert_eq!(status(&said, "boiling_point"), ("absent".into(), "".into()));
    assert_eq!(status(&said, "molar_mass").0, "estimated");
    let said = by_groups(&["--temperature", "20 degC"]);
    close(
        status(&said, "liquid_density").1.parse().unwrap(),
        998.2,
        2e-3,
    );
    assert!(said.out.contains("liquid_density,293.15,"), "{}", said.out);
}

const OF_COMPONENTS: [&str; 3] = [
    "ln_activity_coefficient",
    "activity_coefficient",
    "activity",
];
const OF_THE_WHOLE: [&str; 6] = [
    "excess_gibbs_energy",
    "excess_enthalpy",
    "excess_entropy",
    "excess_internal_energy",
    "molar_volume",
    "density",
];

fn expected(components: &[&str], bubble: &[&str]) -> Vec<(String, String)> {
    let mut rows: Vec<(&str, &str)> = Vec::new();
    for quantity in OF_COMPONENTS {
        rows.extend(components.iter().map(|&component| (quantity, component)));
    }
    rows.extend(OF_THE_WHOLE.map(|quantity| (quantity, "")));
    rows.extend(bubble.iter().map(|&quantity| (quantity, "")));
    rows.extend(
        components
            .iter()
            .map(|&component| ("vapor_mole_fraction", component)),
    );
    if components.len() == 2 {
        rows.push(("azeotrope_temperature", ""));
        rows.push(("azeotrope_pressure", ""));
        rows.extend(
            components
                .iter()
                .map(|&component| ("azeotrope_mole_fraction", component)),
        );
    }
    rows.push(("liquid_phases", ""));
    rows.into_iter()
        .map(|(quantity, component)| (quantity.to_owned(), component.to_owned()))
        .collect()
}

#[test]
fn every_quantity_has_its_row_for_each_way_to_state_a_mixture() {
    let temperature = ["--temperature", "350 K"];
    let pressure = ["--pressure", "1 atm"];
    let both = ["--temperature", "350 K", "--pressure", "1 atm"];
    let two = ["1", "2"];
    for (state, bubble) in [
        (&temperature[..], &["bubble_pressure"][..]),
        (&pressure[..], &["bubble_temperature"][..]),
        (&both[..], &["bubble_temperature", "bubble_pressure"][..]),
    ] {
        assert_eq!(
            with(&ETHANOL_WATER, state).quantities(),
            expected(&two, bubble)
        );
        let one = with(&["--component", "ethanol"], state);
        assert_eq!(one.quantities(), expected(&["1"], bubble));
        let three = with(
            &[
                "--component",
                "ethanol",
                "--component",
                "water",
                "--component",
                "acetone",
                "--fractions",
                "0.3,0.5,0.2",
            ],
            state,
        );
        assert_eq!(three.quantities(), expected(&["1", "2", "3"], bubble));
    }
    // At the bubble temperature the bubble pressure is the stated one.
    let found = with(&ETHANOL_WATER, &pressure).value("bubble_temperature", "");
    let back = Mixture::of(
        &[
            &ETHANOL_WATER[..],
            &["--temperature", &format!("{found} K")],
        ]
        .concat(),
    );
    close(back.value("bubble_pressure", ""), 101_325.0, 1e-6);
    close(
        back.value("activity_coefficient", "1"),
        with(&ETHANOL_WATER, &pressure).value("activity_coefficient", "1"),
        1e-9,
    );
}

#[test]
fn quantities_of_a_mixture_hang_together() {
    let mixture = with(&ETHANOL_WATER, &["--temperature", "350 K"]);
    let ln = |component| mixture.value("ln_activity_coefficient", component);
    close(mixture.value("activity", "1"), 0.3 * ln("1").exp(), 1e-9);
    let gibbs = 8.314_462_618 * 350.0 * (0.3 * ln("1") + 0.7 * ln("2"));
    close(mixture.value("excess_gibbs_energy", ""), gibbs, 1e-9);
    let enthalpy = mixture.value("excess_enthalpy", "");
    close(
        mixture.value("excess_entropy", ""),
        (enthalpy - gibbs) / 350.0,
        1e-9,
    );
    let mass = 0.3 * 0.046_069 + 0.7 * 0.018_015;
    close(
        mixture.value("density", "") * mixture.value("molar_volume", ""),
        mass,
        1e-9,
    );
    let y: f64 = ["1", "2"]
        .map(|i| mixture.value("vapor_mole_fraction", i))
        .iter()
        .sum();
    close(y, 1.0, 1e-12);
}

#[test]
fn the_order_of_components_does_not_matter() {
    let one = with(&ETHANOL_WATER, &["--temperature", "350 K"]);
    let other = with(
        &[
            "--component",
            "water",
            "--component",
            "ethanol",
            "--fractions",
            "0.7,0.3",
        ],
        &["--temperature", "350 K"],
    );
    for row in &one.0 {
        let turned = match row[1].as_str() {
            "1" => "2",
            "2" => "1",
            whole => whole,
        };
        let value: f64 = row[2].parse().unwrap();
        let found = other.value(&row[0], turned);
        assert!(
            (value - found).abs() <= 1e-7 * value.abs().max(1e-3),
            "{row:?}: {found}"
        );
    }
}

#[test]
fn a_fraction_may_be_zero_and_a_single_component_is_a_mixture() {
    let dilute = with(
        &[
            "--component",
            "ethanol",
            "--component",
            "water",
            "--fractions",
            "0,1",
        ],
        &["--temperature", "350 K", "--pressure", "1 atm"],
    );
    assert_eq!(dilute.value("activity", "1"), 0.0);
    assert!(dilute.value("activity_coefficient", "1") > 3.0);
    close(dilute.value("activity_coefficient", "2"), 1.0, 1e-9);
    close(dilute.value("bubble_temperature", ""), 373.12, 3e-4);
    assert_eq!(dilute.value("vapor_mole_fraction", "1"), 0.0);

    let single = with(&["--component", "water"], &["--pressure", "1 atm"]);
    close(single.value("bubble_temperature", ""), 373.12, 3e-4);
    close(single.value("activity_coefficient", "1"), 1.0, 1e-9);
    assert_eq!(single.value("liquid_phases", ""), 1.0);
    assert!(single.0.iter().all(|row| !row[0].starts_with("azeotrope")));
}

#[test]
fn bases_give_the_mixture_they_state() {
    // 0.3 of ethanol by mole is w = 0.3 · 46.069/(0.3 · 46.069 + 0.7 · 18.015) by mass.
    let w = 0.3 * 46.069 / (0.3 * 46.069 + 0.7 * 18.015);
    let fractions = format!("{w},{}", 1.0 - w);
    let by_mass = Mixture::of(&[
        "--component",
        "ethanol",
        "--component",
        "water",
        "--basis",
        "mass",
        "--temperature",
        "350 K",
        "--fractions",
        &fractions,
    ]);
    let by_mole = with(&ETHANOL_WATER, &["--temperature", "350 K"]);
    close(
        by_mass.value("activity", "1"),
        by_mole.value("activity", "1"),
        1e-9,
    );
    let by_volume = with(
        &ETHANOL_WATER,
        &["--temperature", "350 K", "--basis", "volume"],
    );
    // Ethanol takes more room than water: fewer moles of it.
    assert!(by_volume.value("activity", "1") < by_mass.value("activity", "1"));
    let said = say(&[
        &["mixture", "--temperature", "350 K", "--basis", "weight"],
        &ETHANOL_WATER[..],
    ]
    .concat());
    assert_eq!(said.code, 2);
    assert!(
        said.err.contains("a basis is mole, mass or volume"),
        "{}",
        said.err
    );
}

#[test]
fn models_stand_side_by_side() {
    let both = with(
        &ETHANOL_WATER,
        &[
            "--temperature",
            "350 K",
            "--model",
            "unifac",
            "--model",
            "ideal",
            "--model",
            "unifac",
        ],
    );
    let models: Vec<&str> = both
        .rows("activity_coefficient", "1")
        .map(|row| row[4].as_str())
        .collect();
    assert_eq!(models, ["unifac", "ideal"]);
    let text = say(&[
        &[
            "mixture",
            "--temperature",
            "350 K",
            "--model",
            "unifac",
            "--model",
            "ideal",
        ],
        &ETHANOL_WATER[..],
    ]
    .concat());
    let head = text
        .out
        .lines()
        .find(|line| line.starts_with("quantity"))
        .unwrap();
    assert_eq!(
        head.split_whitespace().collect::<Vec<_>>(),
        ["quantity", "component", "unit", "unifac", "ideal"]
    );
    assert!(
        text.out
            .starts_with("ethanol: mole fraction 0.300000\nwater: mole fraction 0.700000\n")
    );
}

/// DMSO with nitriles was not published in either table.
#[test]
fn an_unpublished_pair_is_never_a_number() {
    for model in ["unifac", "unifac-dortmund"] {
        let mixture = with(
            &[
                "--component",
                "dimethyl sulfoxide",
                "--component",
                "acetonitrile",
                "--fractions",
                "0.5,0.5",
            ],
            &[
                "--temperature",
                "300 K",
                "--pressure",
                "1 atm",
                "--model",
                model,
            ],
        );
        for row in &mixture.0 {
            // Volumes of the pure liquids need no pair.
            if ["molar_volume", "density"].contains(&row[0].as_str()) {
                assert_eq!(row[5], "calculated");
                continue;
            }
            assert_eq!(
                (row[2].as_str(), row[5].as_str()),
                ("", "not-assessable"),
                "{row:?}"
            );
            assert!(
                row[6].contains("CCN") && row[6].contains("(CH3)2SO"),
                "{row:?}"
            );
        }
    }
    // A molecule that is not covered names the atom and the molecule.
    let said = say(&[
        "mixture",
        "--component",
        "CC#CB",
        "--temperature",
        "300 K",
        "--format",
        "csv",
        "--estimates",
        "joback-reid",
    ]);
    assert!(said.out.contains("CC#CB: atom "), "{}", said.out);
    assert_eq!(said.code, 1, "nothing could be answered: {}", said.out);
}

#[test]
fn acids_flag_every_figure_of_the_vapor() {
    // Ideal, this pair has no azeotrope: that too rests on the vapor.
    let acid = with(
        &[
            "--component",
            "acetic acid",
            "--component",
            "water",
            "--fractions",
            "0.4,0.6",
        ],
        &[
            "--temperature",
            "370 K",
            "--pressure",
            "1 atm",
            "--model",
            "ideal",
            "--model",
            "unifac",
        ],
    );
    let mut flagged = 0;
    for row in &acid.0 {
        let vapor = ["bubble", "vapor", "azeotrope"]
            .iter()
            .any(|word| row[0].starts_with(word));
        assert_eq!(
            row[6].contains("vapor association not modelled"),
            vapor,
            "{row:?}"
        );
        flagged += usize::from(vapor);
    }
    assert_eq!(flagged, 15);
    assert!(
        acid.0
            .iter()
            .any(|row| row[6].starts_with("no azeotrope at 101325 Pa by this model"))
    );
    let arguments = [
        "mixture",
        "--component",
        "acetic acid",
        "--temperature",
        "300 K",
        "--format",
        "csv",
    ];
    let said = say(&arguments);
    assert!(
        said.err.starts_with("note: a carboxylic acid is present"),
        "{}",
        said.err
    );
    assert_eq!(say(&[&arguments[..], &["--quiet"]].concat()).err, "");
}

#[test]
fn a_brief_gives_the_mixture_and_options_go_before_it() {
    let brief = repository("examples/entrainer-acetone-methanol/brief.toml");
    let brief = brief.to_str().unwrap();
    let mixture = Mixture::of(&[brief]);
    // The azeotrope of acetone and methanol boils at 328.4 K and 1 atm.
    close(mixture.value("azeotrope_temperature", ""), 328.4, 1e-3);
    assert_eq!(
        mixture.rows("activity", "1").next().unwrap()[4],
        "unifac-dortmund"
    );
    let other = Mixture::of(&[
        brief,
        "--temperature",
        "300 K",
        "--fractions",
        "0.5,0.5",
        "--model",
        "unifac",
    ]);
    assert!(other.rows("bubble_temperature", "").next().is_none());
    close(
        other.value("activity", "1"),
        0.5 * other.value("activity_coefficient", "1"),
        1e-9,
    );
    assert_eq!(other.rows("activity", "1").next().unwrap()[4], "unifac");
}

/// Messages as people meet them, each with exit code 2 and nothing on
/// standard output.
#[test]
fn wrong_arguments_are_told_with_the_remedy() {
    let mixture = |more: &[&'static str]| [&["mixture"], more].concat();
    let cases: Vec<Vec<&str>> = vec![
        vec!["breakdown"],
        vec!["breakdown", "--set", "jobak", "CCO"],
        vec!["properties", "CCO", "--temperature", "25 bar"],
        vec!["properties", "CCO", "--temperature", "25 K/min"],
        mixture(&["--component", "CCO"]),
        mixture(&["--temperature", "300 K"]),
        mixture(&["--component", "ethanoll", "--temperature", "300 K"]),
        mixture(&[
            "--component",
            "CCO",
            "--component",
            "O",
            "--temperature",
            "300 K",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--component",
            "O",
            "--temperature",
            "300 K",
            "--fractions",
            "0.5",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--component",
            "O",
            "--temperature",
            "300 K",
            "--fractions",
            "0.5,0.6",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--component",
            "O",
            "--temperature",
            "300 K",
            "--fractions",
            "0.5,half",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--component",
            "ethanol",
            "--temperature",
            "300 K",
            "--fractions",
            "0.5,0.5",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--temperature",
            "300 K",
            "--model",
            "unifacc",
        ]),
        mixture(&[
            "--component",
            "CCO",
            "--temperature",
            "300 K",
            "--model",
            "nrtl",
        ]),
        mixture(&["--component", "CCO", "--temperature", "-5 K"]),
        mixture(&["--component", "CCO", "--pressure", "0 bar"]),
        vec!["tables", "groups", "unifac", "999"],
        vec!["tables", "groups", "unifacc"],
        vec!["tables", "pair", "unifac", "1", "999"],
        vec!["tables", "substances", "ethanoll"],
        vec!["assemble", "nowhere.toml"],
        vec!["assemble", "nowhere.toml", "--part", "3/2"],
        vec!["gather", "nowhere", "--out", "nowhere-else"],
        vec!["report", "nowhere"],
        vec!["mixture", "nowhere.toml"],
        vec!["check", "nowhere.toml"],
        vec!["--tables", "nowhere", "tables"],
    ];
    let mut told = String::new();
    for arguments in cases {
        let said = say(&arguments);
        assert_eq!(said.code, 2, "{arguments:?}: {}", said.err);
        assert_eq!(said.out, "", "{arguments:?}");
        told.push_str(&format!("$ {}\n{}", arguments.join(" "), said.err));
    }
    insta::assert_snapshot!("wrong_arguments", told);
}

#[test]
fn faults_of_a_brief_come_together_with_their_lines() {
    let brief = "[mixture]\ncomponents = [\"acetone\", \"methanol\"]\nfractions = [0.5, 0.6]\n\
        temperature = \"330 Pa\"\nmodel = [\"unifac\", \"nrtl\", \"unifac-dortmunt\"]\n\
        [pool]\nfile = \"pool.csv\"\nsize = 3\n[[target]]\nfigure = \"boiling_pont\"\nat_least = \"390 K\"\n\
        [[target]]\nfigure = \"boiling_point\"\nat_least = \"390 g/mol\"\n[keep]\nbest = 0\n";
    let bench = Bench::with(brief, "smiles\nC\n");
    let said = bench.screen(&[]);
    assert_eq!(said.code, 2);
    assert_eq!(said.out, "");
    assert!(bench.files().is_empty());
    for line in ["3", "4", "5", "8", "10", "14", "16"] {
        let place = format!("brief.toml:{line}:");
        assert!(said.err.contains(&place), "{place} in {}", said.err);
    }
    insta::assert_snapshot!("brief_faults", said.err);
    let mut command = groupsmith();
    let checked: Said = command
        .current_dir(bench.path("."))
        .args(["check", "brief.toml"])
        .output()
        .unwrap()
        .into();
    assert_eq!((checked.code, checked.err), (2, said.err));

    let unknown = brief
        .replace("fractions = [0.5, 0.6]", "")
        .replace("330 Pa", "330 K")
        .replace(", \"nrtl\", \"unifac-dortmunt\"", "")
        .replace("size = 3\n", "")
        .replace("boiling_pont", "boiling_point")
        .replace("390 g/mol", "390 K")
        .replace("best = 0", "best = 1")
        .replace("\"acetone\", \"methanol\"", "\"acetonne\", \"methanoll\"");
    let bench = Bench::with(&unknown, "smiles\nC\n");
    let said = bench.screen(&[]);
    assert_eq!(said.code, 2, "{}", said.out);
    for near in ["near it: `acetone`", "near it: `methanol`"] {
        assert!(said.err.contains(near), "{near} in {}", said.err);
    }
    assert_eq!(said.err.matches("brief.toml:2:").count(), 2, "{}", said.err);
}

#[test]
fn a_sound_brief_is_told_what_will_be_done() {
    let brief = repository("examples/replace-phenol-extractant/brief.toml");
    let said = say(&["check", brief.to_str().unwrap()]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    let folder = brief.parent().unwrap().display().to_string();
    insta::assert_snapshot!("check", said.out.replace(&folder, "[folder]"));
}

#[test]
fn help_and_versions_are_answers() {
    let said = say(&["--version"]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    assert!(said.out.starts_with("groupsmith "), "{}", said.out);
    let said = say(&["--help"]);
    assert_eq!(said.code, 0);
    insta::assert_snapshot!("help", said.out);
    for command in [
        "breakdown",
        "properties",
        "mixture",
        "screen",
        "tables",
        "check",
    ] {
        assert_eq!(say(&[command, "--help"]).code, 0);
    }
    assert_eq!(say(&[]).code, 2);
    assert_eq!(say(&["brakdown"]).code, 2);
}

#[test]
fn tables_tell_what_is_built_in() {
    let said = say(&["tables"]);
    assert_eq!((said.code, said.err.as_str()), (0, ""));
    for word in [
        "joback",
        "unifac-dortmund-2006",
        "doi:10.1002/aic.690210607",
        "reserved:",
    ] {
        assert!(said.out.contains(word), "{word} in {}", said.out);
    }
    let pair = say(&["tables", "pair", "unifac", "1", "7"]);
    assert!(
        pair.out.contains("1 to 7: a = 1318 K, b = 0, c = 0 1/K"),
        "{}",
        pair.out
    );
    assert!(
        pair.out.contains("7 to 1: a = 300 K, b = 0, c = 0 1/K"),
        "{}",
        pair.out
    );
    // In the original table ethers and water have their pair, DMSO and nitriles none.
    let gap = say(&["tables", "pair", "unifac", "19", "35"]);
    assert!(gap.out.contains("not published"), "{}", gap.out);
    let slips = say(&["tables", "slips"]);
    assert!(
        slips.out.contains("unifac-dortmund: main groups 18 and 42"),
        "{}",
        slips.out
    );
    assert!(
        slips
            .out
            .contains("as circulated: a = 268.23 K, b = -1.4137"),
        "{}",
        slips.out
    );
    assert!(!slips.out.contains("Slip {"), "{}", slips.out);
    for arguments in [
        &["tables", "groups", "joback", "20"][..],
        &["tables", "coverage", "unifac"][..],
        &["tables", "methods"][..],
        &["tables", "figures"][..],
        &["tables", "substances"][..],
        &["tables", "substances", "64-17-5"][..],
        &["tables", "patterns"][..],
    ] {
        let said = say(arguments);
        assert_eq!((said.code, said.err.as_str()), (0, ""), "{arguments:?}");
        assert!(said.out.lines().count() > 3, "{}", said.out);
    }
}

#[test]
fn a_substance_is_shown_with_what_is_used_and_why() {
    let bench = Bench::new();
    bench.write(
        "own/substances/measured.csv",
        "substance,property,value,unit,temperature,pressure,source\n-,-,-,-,degC,mbar,-\n\
         acetone,boiling_point,20,degC,,200,own still\n\
         acetone,boiling_point,49.5,degC,,1013.25,own still\n\
         acetone,liquid_density,790,kg/m3,20,,own\n\
         acetone,liquid_viscosity,0.32,mPa s,20,,own\n\
         acetone,liquid_viscosity,0.26,mPa s,40,,own\n\
         acetone,enthalpy_of_vaporization,31,kJ/mol,25,,own\n",
    );
    bench.write(
        "own/substances/supply.csv",
        "substance,price,price_unit,availability,notes,source\n-,-,-,-,-,-\n\
         acetone,0.9,EUR/kg,tank,dry,offer of May\n",
    );
    bench.write(
        "own/substances/hansen_spheres.csv",
        "solute,dispersion,polar,hydrogen_bonding,radius,source\n\
         -,MPa^0.5,MPa^0.5,MPa^0.5,MPa^0.5,-\nPoly-X,18,6,7,8,own\n",
    );
    let folder = bench.argument("own");
    let shown = |name: &str| {
        let said = say(&["--tables", &folder, "tables", "substances", name]);
        assert_eq!((said.code, said.err.as_str()), (0, ""), "{name}");
        said.out
    };
    let told = shown("acetone") + &shown("poly x");
    insta::assert_snapshot!("substance", told);
}

#[test]
fn a_reader_who_has_heard_enough_is_no_error() {
    for arguments in [
        &["tables", "substances"][..],
        &["tables", "patterns"][..],
        &["properties", "CCO", "--format", "csv"][..],
        &["--help"][..],
    ] {
        let mut child = Command::new(env!("CARGO_BIN_EXE_groupsmith"))
            .args(arguments)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        drop(child.stdout.take());
        let output = child.wait_with_output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{arguments:?}");
        assert_eq!(String::from_utf8(output.stderr).unwrap(), "");
    }
}

#[cfg(target_os = "linux")]
#[test]
fn an_output_that_takes_nothing_is_a_failure() {
    let full = std::fs::File::options()
        .write(true)
        .open("/dev/full")
        .unwrap();
    let output = Command::new(env!("CARGO_BIN_EXE_groupsmith"))
        .args(["tables", "patterns"])
        .stdout(full)
        .output()
        .unwrap();
    assert_eq!(output.status.code(), Some(3));
    let err = String::from_utf8(output.stderr).unwrap();
    assert!(err.contains("cannot write the output"), "{err}");
}

/// The cells of a row by their column.
fn cells_of<'r>(rows: &'r [Vec<String>], property: &str, columns: &[&str]) -> Vec<&'r str> {
    let at = |name: &str| rows[0].iter().position(|head| head == name).unwrap();
    let row = rows[1..].iter().find(|row| row[at("property")] == property);
    let row = row.unwrap_or_else(|| panic!("no row {property}"));
    columns.iter().map(|name| row[at(name)].as_str()).collect()
}

#[test]
fn an_estimate_stands_beside_a_measured_value() {
    let columns = [
        "value",
        "status",
        "estimated_value",
        "estimated_method",
        "difference",
    ];
    let by_groups = |more: &[&str]| {
        let acetone = ["properties", "acetone", "--estimates", "joback-reid"];
        say(&[&acetone[..], more].concat())
    };
    let said = by_groups(&["--format", "csv"]);
    let rows = csv_rows(&said.out);
    let boiling = cells_of(&rows, "boiling_point", &columns);
    // Joback and Reid print 322.11 K for acetone.
    assert_eq!(boiling[1..4], ["measured", "322.11", "joback-reid"]);
    let [value, difference] = [boiling[0], boiling[4]].map(|cell| cell.parse::<f64>().unwrap());
    close(value + difference, 322.11, 1e-9);
    // Nothing is compared where nothing is measured, or no method is built in.
    let critical = cells_of(&rows, "critical_temperature", &columns);
    assert_eq!(critical[1..], ["estimated", "", "", ""]);
    let hansen = cells_of(&rows, "hansen_polar", &columns);
    assert_eq!(hansen[1..], ["measured", "", "", ""]);

    let said = by_groups(&["--estimates-only", "--format", "csv"]);
    let rows = csv_rows(&said.out);
    let boiling = cells_of(&rows, "boiling_point", &columns);
    assert_eq!(boiling, ["322.11", "estimated", "", "", ""]);

    let said = by_groups(&[]);
    let line = |name: &str| {
        said.out
            .lines()
            .find(|line| line.starts_with(name))
            .unwrap()
    };
    // A share of a temperature says nothing, one of a density does.
    assert!(line("boiling_point").contains("322.11"), "{}", said.out);
    assert!(said.out.contains("difference"), "{}", said.out);
    let percent = |line: &str| {
        line.split_whitespace()
            .filter(|word| word.starts_with(['+', '-']))
            .count()
    };
    assert_eq!(percent(line("boiling_point")), 1);
    assert_eq!(percent(line("liquid_density")), 2);
}

const HEAD: &str = "# title: own values\n# source: own fit\n# transcribed: today\n# checked: no\n";

/// A folder of tables: one value of one pair changes the mixture and the record.
#[test]
fn tables_of_the_user_go_before_those_built_in() {
    let bench = Bench::new();
    let place = "own/unifac/interactions.csv";
    bench.write(place, format!("{HEAD}i,j,a\n-,-,K\n5,7,500\n"));
    let folder = bench.argument("own");
    let mixture = ["--temperature", "350 K", "--model", "unifac"];
    let built_in = Mixture::of(&[&ETHANOL_WATER[..], &mixture].concat());
    let own = Mixture::of(&[&ETHANOL_WATER[..], &mixture, &["--tables", &folder]].concat());
    let change =
        own.value("ln_activity_coefficient", "2") - built_in.value("ln_activity_coefficient", "2");
    assert!(change.abs() > 1e-3, "{change}");

    let brief = "[mixture]\ncomponents = [\"ethanol\", \"water\"]\ntemperature = \"350 K\"\nmodel = \"unifac\"\n\
        [pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"selectivity_infinite_dilution\"\nprefer = \"high\"\nworst = 0.01\nbest = 100\n";
    let screened = |tables: Option<&str>| {
        let bench = Bench::with(brief, "smiles,name\nOCCO,glycol\n");
        let more: Vec<&str> = tables.map_or(vec![], |folder| vec!["--tables", folder]);
        let said = bench.screen(&more);
        assert_eq!(said.code, 0, "{}", said.err);
        bench.record().tables
    };
    let (without, with) = (screened(None), screened(Some(&folder)));
    assert!(without.of_user.is_empty());
    assert_eq!(with.of_user, ["unifac/interactions.csv"]);
    assert_ne!(with.fingerprint, without.fingerprint);
    // The fingerprint belongs to the values, not to where they are kept.
    let elsewhere = Bench::new();
    elsewhere.write("other/unifac/interactions.csv", bench.read(place));
    assert_eq!(screened(Some(&elsewhere.argument("other"))), with);
    bench.write(place, format!("{HEAD}i,j,a\n-,-,K\n5,7,501\n"));
    assert_ne!(screened(Some(&folder)).fingerprint, with.fingerprint);
}

#[test]
fn choices_are_told_by_the_record() {
    let mixture = [
        "--component",
        "pyridine",
        "--component",
        "cyclohexane",
        "--fractions",
        "1,0",
        "--temperature",
        "300 K",
    ];
    let corrected = Mixture::of(&mixture);
    let circulated = Mixture::of(&[&mixture[..], &["--as-circulated"]].concat());
    let ln = |mixture: &Mixture| mixture.value("ln_activity_coefficient", "2");
    assert!((ln(&corrected) - ln(&circulated)).abs() > 1.0);
    let bench = Bench::with(
        "[pool]\nfile = \"pool.csv\"\n[[target]]\nfigure = \"boiling_point\"\nat_least = \"1 K\"\n",
        "smiles\nCCO\n",
    );
    assert_eq!(bench.screen(&["--as-circulated"]).code, 0);
    assert_eq!(
        bench.record().tables.choices,
        ["parameter tables as circulated"]
    );
    assert_eq!(bench.screen(&["--estimates-only"]).code, 0);
    assert_eq!(
        bench.record().tables.choices,
        ["measured data of candidates left out"]
    );
    assert!(!bench.ranked("notes")[0].1.contains("measured"));
}

#[test]
fn tables_of_the_user_that_are_faulty_are_refused_with_their_place() {
    let refused = |name: &str, text: &str| {
        let bench = Bench::new();
        bench.write(&format!("own/{name}"), text);
        let said = say(&["--tables", &bench.argument("own"), "tables"]);
        assert_eq!(said.code, 2, "{}", said.out);
        assert_eq!(said.out, "");
        said.err.replace(&bench.argument("own"), "[own]")
    };
    let err = refused("unifac/interaction.csv", "x");
    assert!(
        err.contains("holds what is no table: unifac/interaction.csv"),
        "{err}"
    );
    assert!(err.contains("unifac/interactions.csv"), "{err}");
    let err = refused("notes.txt", "x");
    assert!(err.contains("notes.txt"), "{err}");
    let err = refused(
        "unifac/interactions.csv",
        &format!("{HEAD}i,j,a\n-,-,K\n5,7,much\n"),
    );
    assert!(
        err.contains(
            "[own]/unifac/interactions.csv:7: column `a`: is not a finite number (found `much`)"
        ),
        "{err}"
    );
    let err = refused(
        "unifac/interactions.csv",
        &format!("{HEAD}i,j,a\n-,-,degC\n5,7,1\n"),
    );
    assert!(
        err.contains("[own]/unifac/interactions.csv:6: column `a` is in `degC`"),
        "{err}"
    );
    let err = refused(
        "unifac/interactions.csv",
        &format!("{HEAD}i,j,a\n-,-,K\n5,999,1\n"),
    );
    assert!(err.contains("[own]/unifac/interactions.csv:7"), "{err}");
    let err = refused("unifac/interactions.csv", "i,j,a\n-,-,K\n5,7,1\n");
    assert!(err.contains("[own]/unifac/interactions.csv"), "{err}");
    let empty = Bench::new();
    std::fs::create_dir(empty.path("own")).unwrap();
    let said = say(&["--tables", &empty.argument("own"), "tables"]);
    assert!(
        said.code == 2 && said.err.contains("holds no table"),
        "{said:?}"
    );
}

#[test]
fn a_long_text_that_is_no_molecule_is_not_repeated_whole() {
    let branches = format!("{}C{}", "C(".repeat(2000), ")".repeat(2000));
    let said = say(&["breakdown", &branches, "--set", "joback", "--format", "csv"]);
    assert_eq!(said.code, 1);
    let detail = csv_rows(&said.out)[1][6].clone();
    assert!(
        detail.len() < 400 && detail.contains("…` is no SMILES ("),
        "{detail}"
    );
}

/// Water with a tenth of 1-butanol parts in two: its single liquid is not stable.
#[test]
fn a_mixture_that_parts_in_two_is_flagged_where_it_is_taken_as_one() {
    let stated = [
        "--component",
        "1-butanol",
        "--component",
        "water",
        "--temperature",
        "298 K",
        "--pressure",
        "1 atm",
    ];
    let parted = Mixture::of(&[&stated[..], &["--fractions", "0.1,0.9"]].concat());
    assert_eq!(parted.value("liquid_phases", ""), 2.0);
    for row in &parted.0 {
        let of_one = ["ln_activity", "activity", "excess"]
            .iter()
            .any(|word| row[0].starts_with(word));
        assert_eq!(row[6].contains("of one liquid"), of_one, "{row:?}");
        let boils = ["bubble", "vapor"]
            .iter()
            .any(|word| row[0].starts_with(word));
        assert_eq!(row[6].contains("liquids boil together"), boils, "{row:?}");
    }
    let dilute = Mixture::of(&[&stated[..], &["--fractions", "0.005,0.995"]].concat());
    assert_eq!(dilute.value("liquid_phases", ""), 1.0);
    assert!(
        dilute
            .0
            .iter()
            .all(|row| !row[6].contains("of one liquid") && !row[6].contains("together"))
    );
}

/// The density of dimethyl sulfone is not known, and does not matter.
#[test]
fn what_is_absent_from_the_mixture_takes_no_room() {
    let with_none = Mixture::of(&[
        "--component",
        "water",
        "--component",
        "CS(C)(=O)=O",
        "--fractions",
        "1,0",
        "--model",
        "ideal",
        "--temperature",
        "298.15 K",
    ]);
    let pure = Mixture::of(&[
        "--component",
        "water",
        "--model",
        "ideal",
        "--temperature",
        "298.15 K",
    ]);
    close(
        with_none.value("density", ""),
        pure.value("density", ""),
        1e-12,
    );
}

/// Arguments and lines of a file are both counted from 1, and are not the same.
#[test]
fn every_molecule_of_a_text_table_is_named() {
    let bench = Bench::new();
    bench.write("list.smi", "CCO first\nCCC second\n");
    let file = bench.argument("list.smi");
    let said = say(&["breakdown", "CCCC", "--set", "joback", "--from", &file]);
    let names: Vec<&str> = said
        .out
        .lines()
        .skip(1)
        .map(|line| line.split_whitespace().next().unwrap())
        .collect();
    assert_eq!(names, ["n-butane", "first", "second"], "{}", said.out);
}
