//! Speed of the activity kernels: ln γ of a ternary, and the batch path.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, Component, HostAtTemperature, KeysAtTemperature, Slips, Unifac,
};

fn unifac(model: ActivityModel) -> Unifac {
    Unifac::built_in(model, Slips::Corrected)
        .expect("the model has groups")
        .expect("built-in tables are sound")
}

fn component(unifac: &Unifac, groups: &str) -> Component {
    let counts = GroupCounts::from_text(groups).expect("counts are written number:count");
    unifac.component(&counts).expect("the groups are listed")
}

/// Ethanol, ethyl acetate, water: four main groups.
const TERNARY: [&str; 3] = ["1:1;2:1;14:1", "1:1;2:1;21:1", "16:1"];

/// Esters, ethers, alcohols, ketones, aromatics, halides: 2 to 4 main groups each.
const CANDIDATES: [&str; 16] = [
    "1:1;2:3;21:1",
    "1:2;2:3;25:1",
    "1:1;2:4;14:1",
    "1:1;2:2;18:1",
    "9:5;11:1",
    "9:4;11:2",
    "1:1;2:2;44:1",
    "62:1",
    "67:1",
    "1:1;2:1;14:1;25:1",
    "9:5;12:1;14:1",
    "1:2;3:1;18:1;14:1",
    "1:1;40:1",
    "1:2;2:6",
    "5:1;1:1;2:1;22:1",
    "1:1;2:5;42:1",
];

fn ternary(c: &mut Criterion) {
    let mut group = c.benchmark_group("ln gamma of ethanol, ethyl acetate, water");
    group.throughput(Throughput::Elements(1));
    for model in [ActivityModel::Unifac, ActivityModel::UnifacDortmund] {
        let unifac = unifac(model);
        let components = TERNARY.map(|groups| component(&unifac, groups));
        let mixture = unifac
            .mixture(&components)
            .expect("all pairs are published");
        let mut state = mixture.state(340.0).expect("a common temperature");
        let mut out = [0.0; 3];
        let mut x1 = 0.1;
        group.bench_function(format!("{}, new x", model.id()), |b| {
            b.iter(|| {
                x1 = if x1 > 0.5 { 0.1 } else { x1 + 1e-6 };
                let x = [x1, 0.3, 0.7 - x1];
                state
                    .ln_gamma(black_box(&x), &mut out)
                    .expect("fractions are sound");
                black_box(&out);
            });
        });
        let mut temperature_k = 340.0;
        group.bench_function(format!("{}, new T and x", model.id()), |b| {
            b.iter(|| {
                temperature_k = if temperature_k > 360.0 {
                    340.0
                } else {
                    temperature_k + 1e-6
                };
                state
                    .set_temperature(black_box(temperature_k))
                    .expect("a common temperature");
                state
                    .ln_gamma(black_box(&[0.2, 0.3, 0.5]), &mut out)
                    .expect("fractions are sound");
                black_box(&out);
            });
        });
    }
    group.finish();
}

fn batch(c: &mut Criterion) {
    let mut group = c.benchmark_group("16 candidates for ethanol and ethyl acetate");
    group.throughput(Throughput::Elements(CANDIDATES.len() as u64));
    for model in [ActivityModel::Unifac, ActivityModel::UnifacDortmund] {
        let unifac = unifac(model);
        let keys = [TERNARY[0], TERNARY[1]].map(|groups| component(&unifac, groups));
        let groups = unifac.at_temperature(345.0).expect("a common temperature");
        let batch = KeysAtTemperature::new(&groups, &keys).expect("pairs are published");
        let host =
            HostAtTemperature::new(&groups, &keys, &[0.54, 0.46]).expect("pairs are published");
        let counts =
            CANDIDATES.map(|text| GroupCounts::from_text(text).expect("counts are well written"));
        let candidates: Vec<Component> = counts
            .iter()
            .map(|counts| unifac.component(counts).expect("the groups are listed"))
            .collect();
        let mut out = [0.0; 2];
        group.bench_function(format!("{}, keys in candidate", model.id()), |b| {
            b.iter(|| {
                for candidate in &candidates {
                    batch
                        .ln_gamma_inf(black_box(candidate), &mut out)
                        .expect("pairs are published");
                    black_box(&out);
                }
            });
        });
        group.bench_function(
            format!("{}, keys in candidate, from counts", model.id()),
            |b| {
                b.iter(|| {
                    for counts in &counts {
                        let candidate = unifac
                            .component(black_box(counts))
                            .expect("the groups are listed");
                        batch
                            .ln_gamma_inf(&candidate, &mut out)
                            .expect("pairs are published");
                        black_box(&out);
                    }
                });
            },
        );
        group.bench_function(format!("{}, candidate in the mixture", model.id()), |b| {
            b.iter(|| {
                for candidate in &candidates {
                    black_box(host.ln_gamma_inf(black_box(candidate))).expect("published");
                }
            });
        });
    }
    group.finish();
}

criterion_group!(benches, ternary, batch);
criterion_main!(benches);
