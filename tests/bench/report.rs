//! How fast the rows of a run are written.
//!
//! Input: one made-up candidate with 24 figures, written over and over into a
//! buffer that is cleared, and single numbers of 17 digits.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::quantity::{Dimension, number};
use groupsmith::report::{CsvRow, FigureColumn, NotRankedRow, RankedRow, RankedTable};
use groupsmith::run::Outcome;

fn rows(criterion: &mut Criterion) {
    let figures: Vec<FigureColumn> = (0..24)
        .map(|at| FigureColumn {
            name: format!("figure_{at}"),
            dimension: Dimension::ALL[at % Dimension::ALL.len()],
        })
        .collect();
    let table = RankedTable::new(figures, &[]);
    let values: Vec<Option<f64>> = (0..24_u32)
        .map(|at| (at % 7 != 6).then(|| (f64::from(at) + 0.1).powi(at as i32 % 9 - 4) / 3.0))
        .collect();
    let ranked = RankedRow {
        rank: 1_234,
        name: "1,2-ethanediol",
        smiles: "OCCO",
        score: Some(0.612_345_678_9),
        uncertainty: None,
        figures: &values,
        intervals: &[None; 24],
        line: 56_789,
        notes: "no flash_point: no method for this property is built in",
        carried: &[],
    };
    let not_ranked = NotRankedRow {
        line: 9,
        name: "hexane",
        smiles: "CCCCCC",
        outcome: Outcome::NotQualified,
        figure: "boiling_point",
        value: Some((341.88, Dimension::Temperature)),
        wanted: "at least 390 K",
        reason: "lower than wanted",
    };
    let mut out = Vec::with_capacity(1 << 12);
    let mut group = criterion.benchmark_group("report");
    group.throughput(Throughput::Elements(1));
    group.bench_function("ranked row of 24 figures", |bencher| {
        bencher.iter(|| {
            out.clear();
            table.write_row(black_box(&ranked), &mut out);
            out.len()
        });
    });
    group.bench_function("row that is not ranked", |bencher| {
        bencher.iter(|| {
            out.clear();
            black_box(&not_ranked).write_csv(&mut out);
            out.len()
        });
    });
    group.bench_function("number with nine digits", |bencher| {
        bencher.iter(|| {
            out.clear();
            number::write_number(&mut out, black_box(351.443_218_765_432_1), 9);
            out.len()
        });
    });
    group.finish();
}

criterion_group!(benches, rows);
criterion_main!(benches);
