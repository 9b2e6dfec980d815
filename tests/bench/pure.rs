//! All properties of one molecule from its group counts.

use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use groupsmith::groups::GroupCounts;
use groupsmith::pure::{Estimates, Given, PureMethods, StructureFacts, estimate_all};

fn estimates(criterion: &mut Criterion) {
    let methods = PureMethods::built_in();
    // Acetone, p-dichlorobenzene, n-butyl acetate, morpholine, 1-octanol.
    let molecules: Vec<(GroupCounts, StructureFacts)> = [
        ("1:2;24:1", 0.058_08),
        ("14:4;15:2;17:2", 0.147_00),
        ("1:2;2:3;28:1", 0.116_16),
        ("11:4;23:1;32:1", 0.087_12),
        ("1:1;2:7;20:1", 0.130_23),
    ]
    .into_iter()
    .map(|(text, molar_mass)| {
        let counts = GroupCounts::from_text(text).expect("counts are well formed");
        let composition = methods.joback.atoms_of(&counts).expect("groups exist");
        (counts, StructureFacts::new(composition, molar_mass))
    })
    .collect();
    criterion.bench_function("all properties of five molecules", |bencher| {
        bencher.iter(|| {
            for (counts, facts) in &molecules {
                let _: &Estimates = black_box(&estimate_all(
                    &methods,
                    Ok(black_box(counts)),
                    facts,
                    Given::default(),
                    298.15,
                ));
            }
        });
    });
}

criterion_group!(benches, estimates);
criterion_main!(benches);
