//! What programs and people get to read.

use std::sync::Arc;

use groupsmith::quantity::{Absent, Dimension, Estimate, Flag, Flags, Property, Status};
use groupsmith::report::{
    BreakdownRow, BreakdownStatus, CsvRow, FigureColumn, MixtureRow, MixtureStatus, NotRankedRow,
    PropertyRow, RankedRow, RankedTable, RowForm, TargetLabel, Uncertainty, breakdown_text,
    mixture_text, outcome_text, property_text, write_rows,
};
use groupsmith::run::{Counts, Outcome};
use proptest::prelude::*;
use serde::Serialize;

fn csv<R: CsvRow + Serialize>(rows: impl IntoIterator<Item = R>) -> String {
    let mut out = Vec::new();
    write_rows(&mut out, RowForm::Csv, rows).unwrap();
    String::from_utf8(out).unwrap()
}

fn not_ranked_csv(row: NotRankedRow<'_>) -> String {
    let mut out = format!("{}\n", NotRankedRow::HEAD).into_bytes();
    row.write_csv(&mut out);
    String::from_utf8(out).unwrap()
}

fn json<R: CsvRow + Serialize>(rows: impl IntoIterator<Item = R>) -> String {
    let mut out = Vec::new();
    write_rows(&mut out, RowForm::Json, rows).unwrap();
    String::from_utf8(out).unwrap()
}

fn breakdowns() -> [BreakdownRow<'static>; 3] {
    let row = BreakdownRow {
        line: 1,
        name: "ethanol",
        smiles: "CCO",
        set: "unifac",
        status: BreakdownStatus::Complete,
        groups: "1:1;2:1;14:1",
        detail: "",
    };
    [
        row,
        BreakdownRow {
            set: "joback",
            groups: "1:1;2:1;20:1",
            ..row
        },
        BreakdownRow {
            line: 2,
            name: "",
            smiles: "CC(",
            set: "unifac",
            status: BreakdownStatus::Unreadable,
            groups: "",
            detail: "column 4: the branch is not closed, or \"(\" is one too many",
        },
    ]
}

fn properties() -> Vec<PropertyRow<'static>> {
    let row =
        |property, outcome| PropertyRow::new(3, "ethanol, dry", "CCO", property, 298.15, &outcome);
    let mut measured = Estimate::new(351.44, "measured");
    measured.status = Status::Measured;
    measured.source = Some(Arc::from("a handbook"));
    let mut interval = Estimate::new(17_400.0, "some-method");
    interval.interval = Some((16_000.0, 18_800.0));
    interval.flags = Flags::NONE
        .with(Flag::OutsideFamily)
        .with(Flag::RestsOnEstimate);
    vec![
        row(Property::MolarMass, Ok(Estimate::new(0.046_069, "formula"))),
        row(Property::BoilingPoint, Ok(measured)).beside(&Ok(Estimate::new(337.54, "some-method"))),
        row(
            Property::VaporPressure,
            Ok(Estimate::new(7_872.0 / 3.0, "some-method").at(298.15)),
        ),
        row(Property::HansenDispersion, Ok(interval)),
        row(Property::LiquidViscosity, Err(Absent::NoMethod)),
        row(
            Property::LogPOctanolWater,
            Ok(Estimate::new(-0.31, "some-method")),
        ),
    ]
}

fn mixtures() -> Vec<MixtureRow<'static>> {
    let row = |quantity, component, value, unit, model, status, detail: &str| MixtureRow {
        quantity,
        component,
        value,
        unit,
        model,
        status,
        detail: detail.to_owned(),
        low: None,
        high: None,
    };
    use MixtureStatus::{Calculated, NotAssessable};
    let why = "the interaction of main groups A and B is not published";
    vec![
        row(
            "ln_activity_coefficient",
            Some(1),
            Some(0.123_456_789_012_3),
            "",
            "ideal",
            Calculated,
            "",
        ),
        MixtureRow {
            low: Some(0.5),
            high: Some(1.75),
            ..row(
                "ln_activity_coefficient",
                Some(2),
                Some(1.0),
                "",
                "ideal",
                Calculated,
                "",
            )
        },
        row(
            "ln_activity_coefficient",
            Some(1),
            None,
            "",
            "unifac",
            NotAssessable,
            why,
        ),
        row(
            "ln_activity_coefficient",
            Some(2),
            None,
            "",
            "unifac",
            NotAssessable,
            why,
        ),
        row(
            "bubble_temperature",
            None,
            Some(345.678_9),
            "K",
            "ideal",
            Calculated,
            "vapor association not modelled",
        ),
    ]
}

fn ranking() -> (RankedTable, String, String) {
    let table = RankedTable::new(
        vec![
            FigureColumn {
                name: "boiling_point".into(),
                dimension: Dimension::Temperature,
            },
            FigureColumn {
                name: "vapor_pressure".into(),
                dimension: Dimension::Pressure,
            },
            FigureColumn {
                name: "selectivity_infinite_dilution".into(),
                dimension: Dimension::Number,
            },
        ],
        &["supplier", "notes"],
    )
    .with_intervals(|at| at == 0);
    let rows = [
        RankedRow {
            rank: 1,
            name: "1,2-ethanediol",
            smiles: "OCCO",
            score: Some(0.75),
            uncertainty: Some(Uncertainty {
                probability: 0.625,
                score: Some((0.6, 0.875)),
                band: Some(1),
            }),
            figures: &[Some(470.45), Some(12.0), Some(2.0 / 3.0)],
            intervals: &[Some((455.0, 490.5)), None, None],
            line: 17,
            notes: "",
            carried: &["A \"B\" C", ""],
        },
        RankedRow {
            rank: 2,
            name: "",
            smiles: "CS(C)=O",
            score: None,
            uncertainty: None,
            figures: &[Some(462.15), None, Some(12.5)],
            intervals: &[None; 3],
            line: 4,
            notes: "no vapor_pressure: outside the domain",
            carried: &["", "x"],
        },
    ];
    let mut out = Vec::new();
    table.write_head(&mut out);
    for row in &rows {
        table.write_row(row, &mut out);
    }
    (
        table.clone(),
        String::from_utf8(out).unwrap(),
        table.text(rows, Some(80)),
    )
}

#[test]
fn csv_has_the_agreed_columns() {
    let not_ranked = NotRankedRow {
        line: 9,
        name: "hexane",
        smiles: "CCCCCC",
        outcome: Outcome::NotQualified,
        figure: "boiling_point",
        value: Some((341.88, Dimension::Temperature)),
        wanted: "at least 390 K",
        reason: "48.12 K too low",
    };
    insta::assert_snapshot!(
        "csv",
        [
            csv(breakdowns()),
            csv(properties()),
            csv(mixtures()),
            ranking().1,
            not_ranked_csv(not_ranked),
        ]
        .join("\n")
    );
}

#[test]
fn json_has_the_same_facts() {
    let text = [json(breakdowns()), json(properties()), json(mixtures())].join("\n");
    insta::assert_snapshot!("json", text);
    let rows: Vec<serde_json::Value> = serde_json::from_str(&json(properties())).unwrap();
    assert_eq!(rows[0]["value"], 0.046_069);
    assert!(rows[4]["value"].is_null());
    assert_eq!(json(Vec::<BreakdownRow<'_>>::new()), "[]\n");
}

#[test]
fn people_get_aligned_tables() {
    let formulas = ["CH3, CH2, OH", "CH3, CH2, OH", ""];
    let mut counts = Counts::default();
    for _ in 0..12 {
        counts.add(Outcome::Ranked, "");
        counts.add(Outcome::NotQualified, "boiling_point");
        counts.add(Outcome::NotQualified, "pattern peroxide");
    }
    counts.ranked_incomplete = 1;
    counts.add(Outcome::NotQualified, "element Cl");
    counts.add(Outcome::NotAssessable, "selectivity_infinite_dilution");
    counts.add(Outcome::Refused, "valence");
    let targets = [
        TargetLabel {
            name: "boiling_point",
            wanted: "at least 390 K",
        },
        TargetLabel {
            name: "selectivity_infinite_dilution",
            wanted: "",
        },
    ];
    insta::assert_snapshot!(
        "text",
        [
            breakdown_text(breakdowns().into_iter().zip(formulas), Some(80)),
            property_text(&properties(), Some(100)),
            mixture_text(&mixtures(), &["ethyl acetate", "ethanol"], Some(80)),
            ranking().2,
            outcome_text(&counts, &targets),
        ]
        .join("\n")
    );
}

struct Closed;

impl std::io::Write for Closed {
    fn write(&mut self, _: &[u8]) -> std::io::Result<usize> {
        Err(std::io::ErrorKind::BrokenPipe.into())
    }

    fn flush(&mut self) -> std::io::Result<()> {
        Ok(())
    }
}

#[test]
fn a_closed_pipe_is_told_as_such() {
    let kind = |result: std::io::Result<()>| result.unwrap_err().kind();
    assert_eq!(
        kind(write_rows(&mut Closed, RowForm::Csv, breakdowns())),
        std::io::ErrorKind::BrokenPipe
    );
    assert_eq!(
        kind(write_rows(&mut Closed, RowForm::Json, breakdowns())),
        std::io::ErrorKind::BrokenPipe
    );
}

proptest! {
    #[test]
    fn any_text_survives_csv(cells in prop::collection::vec("(?s).{0,12}", 3)) {
        let row = BreakdownRow {
            name: &cells[0],
            smiles: &cells[1],
            detail: &cells[2],
            ..breakdowns()[0]
        };
        let text = csv([row]);
        let mut reader = csv::Reader::from_reader(text.as_bytes());
        let record = reader.records().next().unwrap().unwrap();
        prop_assert_eq!(&record[1], &cells[0]);
        prop_assert_eq!(&record[2], &cells[1]);
        prop_assert_eq!(&record[6], &cells[2]);
    }

    #[test]
    fn any_text_stays_on_its_line_of_a_table(name in "(?s).{0,40}", width in 20_usize..90) {
        let row = BreakdownRow { name: &name, ..breakdowns()[0] };
        let text = breakdown_text([(row, "CH3")], Some(width));
        prop_assert_eq!(text.lines().count(), 2);
    }
}
