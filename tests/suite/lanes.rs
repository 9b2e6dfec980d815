//! The vector kernel for candidates of the same main groups, against the plain batch path.

use groupsmith::groups::GroupCounts;
use groupsmith::mixture::{
    ActivityModel, CandidateLanes, Component, KeysAtTemperature, SharedGroups, Slips, Unifac,
};
use groupsmith::numeric::lanes::{Instructions, LANES};
use proptest::prelude::*;
use proptest::sample::{Index, select, subsequence};

const MODELS: [ActivityModel; 3] = [
    ActivityModel::Unifac,
    ActivityModel::UnifacDortmund,
    ActivityModel::UnifacDortmund2006,
];

/// Subgroups that all three models have, of 14 main groups; not all pairs are published.
const SUBGROUPS: [u16; 20] = [
    1, 2, 3, 5, 6, 9, 10, 11, 14, 16, 18, 21, 22, 25, 26, 31, 40, 42, 44, 50,
];

/// Acetone, methanol, ethyl acetate, benzene, water, acetic acid, trichloromethane.
const KEYS: [&str; 7] = [
    "1:1;18:1",
    "15:1",
    "1:1;2:1;21:1",
    "9:6",
    "16:1",
    "1:1;42:1",
    "50:1",
];

fn component(unifac: &Unifac, groups: &str) -> Component {
    unifac
        .component(&GroupCounts::from_text(groups).unwrap())
        .unwrap()
}

/// Counts of the same subgroups, and what the kernel takes of them.
struct Family<'a> {
    unifac: &'a Unifac,
    subgroups: Vec<u16>,
    mains: Vec<u16>,
}

impl<'a> Family<'a> {
    fn new(unifac: &'a Unifac, subgroups: &[u16]) -> Self {
        let mut mains = Vec::new();
        for &number in subgroups {
            let main = unifac.tables().subgroup(number).unwrap().main_group;
            if !mains.contains(&main) {
                mains.push(main);
            }
        }
        Self {
            unifac,
            subgroups: subgroups.to_vec(),
            mains,
        }
    }

    fn component(&self, counts: &[u16]) -> Component {
        let counts = self.subgroups.iter().copied().zip(counts.iter().copied());
        let present = counts.filter(|&(_, count)| count > 0);
        self.unifac
            .component(&GroupCounts::from_iter(present))
            .unwrap()
    }

    /// r, q, and the areas by main group, of each row of counts.
    fn lanes(&self, all: &[Vec<u16>]) -> (Vec<f64>, Vec<f64>, Vec<Vec<f64>>) {
        let mut areas = vec![vec![0.0; all.len()]; self.mains.len()];
        for (lane, counts) in all.iter().enumerate() {
            for (&number, &count) in self.subgroups.iter().zip(counts) {
                let group = self.unifac.tables().subgroup(number).unwrap();
                let main = self.mains.iter().position(|&main| main == group.main_group);
                areas[main.unwrap()][lane] += f64::from(count) * group.q;
            }
        }
        let each = all.iter().map(|counts| self.component(counts));
        let (r, q) = each.map(|one| (one.r(), one.q())).unzip();
        (r, q, areas)
    }
}

/// ln γ∞ of each key (outer) in each candidate from `from` on.
fn side_by_side(
    shared: &SharedGroups,
    instructions: Instructions,
    keys: usize,
    (r, q, areas): &(Vec<f64>, Vec<f64>, Vec<Vec<f64>>),
    from: usize,
) -> Vec<Vec<f64>> {
    let areas: Vec<&[f64]> = areas.iter().map(|areas| &areas[from..]).collect();
    let mut out = vec![vec![f64::NAN; r.len() - from]; keys];
    let mut slices: Vec<&mut [f64]> = out.iter_mut().map(Vec::as_mut_slice).collect();
    let candidates = CandidateLanes {
        r: &r[from..],
        q: &q[from..],
        areas: &areas,
    };
    shared.ln_gamma_inf(instructions, &candidates, &mut slices);
    out
}

fn bits(all: &[Vec<f64>]) -> Vec<Vec<u64>> {
    let of_one = |one: &Vec<f64>| one.iter().map(|x| x.to_bits()).collect();
    all.iter().map(of_one).collect()
}

/// Counts of six subgroups in each of up to five blocks of candidates.
fn counts() -> impl Strategy<Value = Vec<Vec<u16>>> {
    let one = prop::collection::vec(0_u16..7, 6).prop_filter("no group", |counts| counts[0] > 0);
    prop::collection::vec(one, 1..5 * LANES)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    #[test]
    fn lanes_agree_with_the_plain_path_and_with_one_another(
        model in select(&MODELS[..]),
        keys in subsequence(&KEYS[..], 1..4),
        subgroups in subsequence(&SUBGROUPS[..], 1..=6),
        counts in counts(),
        temperature_k in 280.0_f64..420.0,
        from in any::<Index>(),
    ) {
        let unifac = Unifac::built_in(model, Slips::Corrected).unwrap().unwrap();
        let keys: Vec<_> = keys.iter().map(|groups| component(&unifac, groups)).collect();
        let groups = unifac.at_temperature(temperature_k).unwrap();
        let plain = KeysAtTemperature::new(&groups, &keys).unwrap();
        let family = Family::new(&unifac, &subgroups);
        let mut expected = vec![0.0; keys.len()];

        let whole = family.component(&[1; 6]);
        let gap = plain.ln_gamma_inf(&whole, &mut expected).err();
        let shared = SharedGroups::new(&plain, &family.mains);
        prop_assert_eq!(gap, shared.as_ref().err().copied());
        let Ok(shared) = shared else { return Ok(()) };

        let lanes = family.lanes(&counts);
        let best = side_by_side(&shared, Instructions::Best, keys.len(), &lanes, 0);
        for (lane, counts) in counts.iter().enumerate() {
            plain.ln_gamma_inf(&family.component(counts), &mut expected).unwrap();
            for (found, &expected) in best.iter().zip(&expected) {
                let tolerance = 1e-12 * expected.abs().max(1.0);
                prop_assert!((found[lane] - expected).abs() <= tolerance, "{} instead of {expected}", found[lane]);
            }
        }

        let basic = side_by_side(&shared, Instructions::Plain, keys.len(), &lanes, 0);
        prop_assert_eq!(bits(&best), bits(&basic));
        // the same candidates in other lanes
        let from = from.index(counts.len());
        let moved = side_by_side(&shared, Instructions::Best, keys.len(), &lanes, from);
        let rest: Vec<_> = best.iter().map(|one| one[from..].to_vec()).collect();
        prop_assert_eq!(bits(&moved), bits(&rest));
    }
}

#[test]
fn a_set_with_an_unpublished_pair_is_refused_with_its_gap() {
    let unifac = Unifac::built_in(ActivityModel::Unifac, Slips::Corrected)
        .unwrap()
        .unwrap();
    let groups = unifac.at_temperature(298.15).unwrap();
    // dimethyl sulfide (48) with bromobenzene (33): not published
    let sulfide = component(&unifac, "1:1;102:1");
    let keys = KeysAtTemperature::new(&groups, &[sulfide]).unwrap();
    let gap = SharedGroups::new(&keys, &[1, 33]).unwrap_err();
    assert_eq!((gap.first, gap.second), (33, 48));
    assert!(SharedGroups::new(&keys, &[1]).is_ok());
}

#[test]
#[should_panic(expected = "one area for each candidate")]
fn slices_of_unlike_length_are_a_broken_promise() {
    let unifac = Unifac::built_in(ActivityModel::Unifac, Slips::Corrected)
        .unwrap()
        .unwrap();
    let groups = unifac.at_temperature(298.15).unwrap();
    let keys = KeysAtTemperature::new(&groups, &[component(&unifac, "15:1")]).unwrap();
    let shared = SharedGroups::new(&keys, &[1]).unwrap();
    let candidates = CandidateLanes {
        r: &[3.0, 4.0],
        q: &[3.0, 4.0],
        areas: &[&[3.0]],
    };
    shared.ln_gamma_inf(Instructions::Plain, &candidates, &mut [&mut [0.0; 2]]);
}
