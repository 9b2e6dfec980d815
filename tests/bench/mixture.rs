//! Speed of the activity kernels: ln γ of a ternary, the batch path, and the same side by side.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, CandidateLanes, Component, HostAtTemperature, KeysAtTemperature, SharedGroups,
    Slips, Unifac,
};
use groupsmith::numeric::lanes::{Instructions, LANES};

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

/// Candidates in runs of eight, one CH2 more each; one of each subgroup given,
/// and of the first one more with every run, up to four.
struct Runs {
    mains: Vec<u16>,
    r: Vec<f64>,
    q: Vec<f64>,
    areas: Vec<Vec<f64>>,
}

impl Runs {
    fn new(unifac: &Unifac, subgroups: &[u16], candidates: usize) -> Self {
        let counts = |at: usize| {
            let run = at / 8;
            std::iter::once((2, at % 8 + 1))
                .chain(subgroups.iter().map(|&number| (number, 1)))
                .chain([(subgroups[0], run % 4)])
        };
        let group = |number| unifac.tables().subgroup(number).expect("it is listed");
        let numbers = std::iter::once(&2).chain(subgroups);
        let mains: Vec<u16> = numbers.map(|&number| group(number).main_group).collect();
        let mut runs = Self {
            r: vec![0.0; candidates],
            q: vec![0.0; candidates],
            areas: vec![vec![0.0; candidates]; mains.len()],
            mains,
        };
        for at in 0..candidates {
            for (number, count) in counts(at) {
                let (group, count) = (group(number), count as f64);
                let main = runs.mains.iter().position(|&main| main == group.main_group);
                runs.r[at] += count * group.r;
                runs.q[at] += count * group.q;
                runs.areas[main.expect("it was gathered")][at] += count * group.q;
            }
        }
        runs
    }
}

/// OH, CH2O; CH3COO and CH2CO besides: three and five main groups with CH2.
const SETS: [&[u16]; 2] = [&[14, 25], &[14, 25, 21, 19]];

fn lanes(c: &mut Criterion) {
    let mut group = c.benchmark_group("lanes: assemblies for acetone and methanol");
    for model in [ActivityModel::Unifac, ActivityModel::UnifacDortmund] {
        let unifac = unifac(model);
        let keys = ["1:1;18:1", "15:1"].map(|groups| component(&unifac, groups));
        let groups = unifac.at_temperature(330.0).expect("a common temperature");
        let keys = KeysAtTemperature::new(&groups, &keys).expect("pairs are published");
        for (subgroups, candidates) in [(SETS[0], 512), (SETS[1], 512), (SETS[0], LANES)] {
            let runs = Runs::new(&unifac, subgroups, candidates);
            let shared = SharedGroups::new(&keys, &runs.mains).expect("pairs are published");
            let areas: Vec<&[f64]> = runs.areas.iter().map(Vec::as_slice).collect();
            let mut out = [vec![0.0; candidates], vec![0.0; candidates]];
            group.throughput(Throughput::Elements(candidates as u64));
            for instructions in [Instructions::Plain, Instructions::Best] {
                let name = format!(
                    "{}, {} main groups, {candidates} a call, {instructions:?}",
                    model.id(),
                    runs.mains.len(),
                );
                group.bench_function(name, |b| {
                    b.iter(|| {
                        let candidates = CandidateLanes {
                            r: black_box(&runs.r),
                            q: black_box(&runs.q),
                            areas: black_box(&areas),
                        };
                        let [first, second] = &mut out;
                        shared.ln_gamma_inf(instructions, &candidates, &mut [first, second]);
                        black_box(&out);
                    });
                });
            }
        }
    }
    group.finish();
}

criterion_group!(benches, ternary, batch, lanes);
criterion_main!(benches);
