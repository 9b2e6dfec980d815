//! Loading the built-in table and looking names up in it.

use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use groupsmith::data::Substances;

fn load(c: &mut Criterion) {
    c.bench_function("load the built-in table", |b| {
        b.iter(|| Substances::built_in().expect("the built-in table is sound"));
    });
}

fn look_up(c: &mut Criterion) {
    let substances = Substances::built_in().expect("the built-in table is sound");
    c.bench_function("find by synonym", |b| {
        b.iter(|| {
            substances
                .find(black_box("Isopropyl Alcohol"))
                .map(|found| found.smiles().len())
        });
    });
    c.bench_function("nearest names of an unknown one", |b| {
        b.iter(|| substances.find(black_box("isopropil alkohol")).is_err());
    });
    let acetone = substances.find("acetone").expect("acetone is in the table");
    let curve = acetone.vapor_pressure().expect("acetone has a curve");
    c.bench_function("vapor pressure and slope", |b| {
        b.iter(|| curve.ln_pressure_and_slope(black_box(331.7)));
    });
    c.bench_function("saturation temperature", |b| {
        b.iter(|| curve.saturation_temperature_k(black_box(70_000.0)));
    });
}

criterion_group!(benches, load, look_up);
criterion_main!(benches);
