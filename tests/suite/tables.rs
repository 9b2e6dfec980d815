//! The published UNIFAC tables: transcription, checks of the reader, overlays.

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, Interaction, Slips, TableFile, Unifac, UnifacOverlay, UnifacTables, UnifacTexts,
};
use groupsmith::table::TableError;

fn tables(model: ActivityModel, slips: Slips) -> UnifacTables {
    UnifacTables::read(model.id(), &model.texts().unwrap(), &[], slips).unwrap()
}

#[test]
fn row_counts_are_those_of_the_lists() {
    for (model, mains, subs, pairs) in [
        (ActivityModel::Unifac, 54, 113, 635),
        (ActivityModel::UnifacDortmund, 65, 124, 758),
        (ActivityModel::UnifacDortmund2006, 65, 124, 659),
    ] {
        let tables = tables(model, Slips::Corrected);
        assert_eq!(tables.main_groups().len(), mains, "{}", model.id());
        assert_eq!(tables.subgroups().len(), subs, "{}", model.id());
        let numbers: Vec<_> = tables.main_groups().iter().map(|g| g.number).collect();
        let known = numbers
            .iter()
            .flat_map(|&i| numbers.iter().map(move |&j| (i, j)))
            .filter(|&(i, j)| i < j && tables.pair(i, j).is_some() && tables.pair(j, i).is_some())
            .count();
        assert_eq!(known, pairs, "{}", model.id());
        assert!(tables.sources().len() >= 5);
        assert!(
            tables
                .sources()
                .iter()
                .all(|source| source.contains("doi:"))
        );
    }
}

#[test]
fn spot_cells_are_those_of_the_print() {
    // original: Smith, Van Ness, Abbott, appendix on UNIFAC, and Hansen et al. 1991 (from memory)
    let original = tables(ActivityModel::Unifac, Slips::Corrected);
    for (number, main_group, formula, r, q) in [
        (1, 1, "CH3", 0.9011, 0.848),
        (2, 1, "CH2", 0.6744, 0.540),
        (3, 1, "CH", 0.4469, 0.228),
        (4, 1, "C", 0.2195, 0.0),
        (9, 3, "ACH", 0.5313, 0.400),
        (14, 5, "OH", 1.0, 1.2),
        (15, 6, "CH3OH", 1.4311, 1.432),
        (16, 7, "H2O", 0.92, 1.4),
        (18, 9, "CH3CO", 1.6724, 1.488),
        (32, 15, "CH2NH", 1.2070, 0.936),
        (42, 20, "COOH", 1.3013, 1.224),
        (52, 24, "CCl4", 3.39, 2.91),
    ] {
        let group = original.subgroup(number).unwrap();
        assert_eq!(
            (group.main_group, &*group.formula, group.r, group.q),
            (main_group, formula, r, q)
        );
    }
    for (i, j, a_k) in [
        (1, 5, 986.5),
        (5, 1, 156.4),
        (1, 7, 1318.0),
        (7, 1, 300.0),
        (5, 7, 353.5),
        (7, 5, -229.1),
        (1, 9, 476.4),
        (9, 1, 26.76),
        (1, 15, 255.7),
        (15, 1, 65.33),
        (1, 3, 61.13),
        (3, 1, -11.12),
    ] {
        let used = original.pair(i, j).unwrap().used;
        assert_eq!(
            used,
            Interaction {
                a_k,
                ..Interaction::default()
            },
            "{i}-{j}"
        );
    }
    // Dortmund: Gmehling, Li, Schiller 1993 (from memory)
    let dortmund = tables(ActivityModel::UnifacDortmund, Slips::Corrected);
    for (number, formula, r, q) in [
        (1, "CH3", 0.6325, 1.0608),
        (2, "CH2", 0.6325, 0.7081),
        (14, "OH(p)", 1.2302, 0.8927),
        (81, "OH(s)", 1.0630, 0.8663),
        (82, "OH(t)", 0.6895, 0.8345),
        (16, "H2O", 1.7334, 2.4561),
        (78, "c-CH2", 0.7136, 0.8635),
    ] {
        let group = dortmund.subgroup(number).unwrap();
        assert_eq!((&*group.formula, group.r, group.q), (formula, r, q));
    }
    let used = dortmund.pair(1, 5).unwrap().used;
    assert_eq!(
        (used.a_k, used.b, used.c_per_k),
        (2777.0, -4.674, 0.001_551)
    );
}

#[test]
fn a_printed_zero_is_a_value_and_a_blank_is_none() {
    let original = tables(ActivityModel::Unifac, Slips::Corrected);
    assert_eq!(original.pair(22, 23).unwrap().used, Interaction::default());
    assert!(original.pair(33, 48).is_none());
    let unifac = Unifac::built_in(ActivityModel::Unifac, Slips::Corrected)
        .unwrap()
        .unwrap();
    let one = |text| {
        unifac
            .component(&GroupCounts::from_text(text).unwrap())
            .unwrap()
    };
    assert!(unifac.mixture(&[one("47:1"), one("50:1")]).is_ok());
}

#[test]
fn slips_are_kept_beside_the_values_used() {
    let circulated = tables(ActivityModel::UnifacDortmund, Slips::AsCirculated);
    let corrected = tables(ActivityModel::UnifacDortmund, Slips::Corrected);
    let printed_2006 = tables(ActivityModel::UnifacDortmund2006, Slips::Corrected);
    for (i, j) in [(42, 18), (18, 42)] {
        let (old, new) = (
            circulated.pair(i, j).unwrap(),
            corrected.pair(i, j).unwrap(),
        );
        assert_eq!(old.used, old.circulated);
        assert_eq!(new.circulated, old.circulated);
        assert_ne!(new.used, new.circulated);
        assert_eq!(new.used, printed_2006.pair(i, j).unwrap().used);
        assert!(new.slip.is_some_and(|slip| !slip.reason.is_empty()));
    }
    assert!(printed_2006.slips().is_empty());
    // suspicious, but nothing better is known
    let original = tables(ActivityModel::Unifac, Slips::Corrected);
    let pair = original.pair(8, 24).unwrap();
    assert_eq!(pair.used, pair.circulated);
    assert!(pair.slip.is_some_and(|slip| slip.replacement.is_none()));
}

#[test]
fn coverage_counts_pairs_of_main_groups_with_subgroups() {
    let coverage = tables(ActivityModel::Unifac, Slips::Corrected).coverage();
    assert_eq!((coverage.known, coverage.possible), (635, 54 * 53 / 2));
}

#[test]
fn formulas_name_one_group_each_and_examples_use_them() {
    for model in [ActivityModel::Unifac, ActivityModel::UnifacDortmund] {
        let tables = tables(model, Slips::Corrected);
        let formulas: Vec<_> = tables.subgroups().iter().map(|g| &*g.formula).collect();
        for (at, formula) in formulas.iter().enumerate() {
            assert!(!formulas[..at].contains(formula), "{formula} stands twice");
        }
        for group in tables.subgroups() {
            let Some(example) = &group.example else {
                continue;
            };
            let (_, parts) = example.split_once(" = ").unwrap();
            let mut uses_it = false;
            for part in parts.split(" + ") {
                let (count, formula) = part.split_once(' ').unwrap();
                assert!(count.parse::<u16>().is_ok(), "{example}");
                assert!(formulas.contains(&formula), "{example}: no group {formula}");
                uses_it |= formula == &*group.formula;
            }
            assert!(uses_it, "{example} does not use {}", group.formula);
        }
    }
}

const HEAD: &str = "# title: t\n# source: s, doi:10.1\n# transcribed: d\n# checked: c\n";

/// Tables of two groups with one text replaced; returns what the reader says.
fn read_with(which: &str, body: &str) -> Result<UnifacTables, TableError> {
    let head = |body: &str| format!("{HEAD}{body}");
    let pick = |name: &str, default: &str| head(if name == which { body } else { default });
    let main_groups = pick("main_groups", "number,name\n-,-\n1,CH2\n5,OH\n");
    let subgroups = pick(
        "subgroups",
        "number,main_group,formula,composition,r,q\n-,-,-,-,-,-\n1,1,CH3,C1H3,0.9,0.8\n14,5,OH,H1O1,1,1.2\n",
    );
    let interactions = pick("interactions", "i,j,a\n-,-,K\n1,5,986.5\n5,1,156.4\n");
    let slips = pick(
        "slips",
        "interactions,i,j,a,a_used,reason,evidence\n-,-,-,K,K,-,-\n",
    );
    UnifacTables::read(
        "test",
        &UnifacTexts {
            main_groups: TableFile {
                name: "m.csv",
                text: &main_groups,
            },
            subgroups: TableFile {
                name: "s.csv",
                text: &subgroups,
            },
            interactions: TableFile {
                name: "i.csv",
                text: &interactions,
            },
            slips: Some(TableFile {
                name: "slips.csv",
                text: &slips,
            }),
        },
        &[],
        Slips::Corrected,
    )
}

#[test]
fn faults_of_a_table_are_found_with_file_line_and_column() {
    assert!(read_with("", "").is_ok());
    let sub = "number,main_group,formula,composition,r,q\n-,-,-,-,-,-\n";
    for (which, body, expected) in [
        (
            "main_groups",
            "number,name\n-,-\n1,CH2\n1,OH\n".to_owned(),
            "m.csv:8: column `number`: stands twice",
        ),
        (
            "subgroups",
            format!("{sub}1,1,CH3,C1H3,0.9,0.8\n1,1,CH3,C1H3,0.9,0.8\n"),
            "s.csv:8: column `number`: stands twice",
        ),
        (
            "subgroups",
            format!("{sub}1,9,CH3,C1H3,0.9,0.8\n"),
            "s.csv:7: column `main_group`: is no main group",
        ),
        (
            "subgroups",
            format!("{sub}1,1,CH3,C1H3,0,0.8\n"),
            "s.csv:7: column `r`: is not positive",
        ),
        (
            "subgroups",
            format!("{sub}1,1,CH3,C1H3,0.9,-0.8\n"),
            "s.csv:7: column `q`: is negative",
        ),
        (
            "subgroups",
            format!("{sub}1,1,CH3,3CH,0.9,0.8\n"),
            "s.csv:7: column `composition`: is no formula",
        ),
        (
            "subgroups",
            format!("{sub}1,1,,C1H3,0.9,0.8\n"),
            "s.csv:7: column `formula`: is blank",
        ),
        (
            "interactions",
            "i,j,a\n-,-,K\n1,5,1\n1,5,2\n".to_owned(),
            "i.csv:8: column `i`: stands twice",
        ),
        (
            "interactions",
            "i,j,a\n-,-,K\n1,7,1\n".to_owned(),
            "i.csv:7: column `j`: is no main group",
        ),
        (
            "interactions",
            "i,j,a\n-,-,K\n1,1,3\n".to_owned(),
            "i.csv:7: column `a`: is not zero",
        ),
        (
            "interactions",
            "i,j,a\n-,-,K\n1,5,\n".to_owned(),
            "i.csv:7: column `a`: is blank",
        ),
        (
            "interactions",
            "i,j,a\n-,-,kJ\n1,5,1\n".to_owned(),
            "i.csv:6: column `a` is in `kJ`",
        ),
        (
            "slips",
            "interactions,i,j,a,a_used,reason,evidence\n-,-,-,K,K,-,-\ni,1,5,986,1,r,e\n"
                .to_owned(),
            "slips.csv:7: column `a`: does not repeat",
        ),
    ] {
        let fault = read_with(which, &body).unwrap_err().to_string();
        assert!(fault.starts_with(expected), "{fault} instead of {expected}");
    }
}

#[test]
fn a_folder_of_the_user_adds_and_overrides_and_is_reported() {
    let main_groups = format!("{HEAD}number,name\n-,-\n200,XO\n");
    let subgroups = format!(
        "{HEAD}number,main_group,formula,composition,r,q\n-,-,-,-,-,-\n14,5,OH(p),H1O1,1.5,1\n300,200,XO,O1,0.5,0.4\n"
    );
    let interactions =
        format!("{HEAD}i,j,a,b,c\n-,-,K,-,1/K\n42,18,1,0,0\n1,200,50,0,0\n200,1,-20,0,0\n");
    let file = |name, text| Some(TableFile { name, text });
    let overlay = UnifacOverlay {
        main_groups: file("mine/main_groups.csv", &main_groups),
        subgroups: file("mine/subgroups.csv", &subgroups),
        interactions: file("mine/interactions.csv", &interactions),
    };
    let unifac = Unifac::with_overlays(ActivityModel::UnifacDortmund, &[overlay], Slips::Corrected)
        .unwrap()
        .unwrap();
    let tables = unifac.tables();
    assert_eq!(tables.subgroup(14).unwrap().r, 1.5);
    // the user's value wins over the correction of a slip
    assert_eq!(tables.pair(42, 18).unwrap().used.a_k, 1.0);
    assert!(tables.pair(42, 18).unwrap().slip.is_none());
    assert!(tables.pair(18, 42).unwrap().slip.is_some());
    let said: Vec<_> = tables
        .overrides()
        .iter()
        .map(|one| (one.what.as_str(), one.replaced))
        .collect();
    assert_eq!(
        said,
        [
            ("main group 200", false),
            ("subgroup 14", true),
            ("subgroup 300", false),
            ("interaction 42-18", true),
            ("interaction 1-200", false),
            ("interaction 200-1", false),
        ]
    );
    assert!(
        unifac
            .component(&GroupCounts::from_text("1:2;300:1").unwrap())
            .is_ok()
    );
}
