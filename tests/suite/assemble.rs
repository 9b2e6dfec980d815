//! The assembly search: pieces, spaces, structures, accounts.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::{Arc, LazyLock};

use groupsmith::assemble::{
    Drawer, Drawing, Found, Job, Limits, Pieces, Realizer, Role, Space, score_key,
};
use groupsmith::brief::{Brief, Job as Purpose};
use groupsmith::evaluate::{
    CATALOG, EstimateLevel, Library, Plan, Profiler, Quick, Scratch, Verdict,
};
use groupsmith::groups::{Coverage, GroupCounts, SetId};
use groupsmith::mixture::Slips;
use proptest::prelude::*;

static LIBRARY: LazyLock<Arc<Library>> =
    LazyLock::new(|| Arc::new(Library::built_in(Slips::Corrected)));
static COUNTED: LazyLock<Arc<Library>> = LazyLock::new(|| {
    Arc::new(Library::built_in(Slips::Corrected).with_level(EstimateLevel::Count))
});
static PIECES: LazyLock<Pieces> =
    LazyLock::new(|| Pieces::built_in(|set| LIBRARY.set(set)).unwrap());

fn brief(text: &str) -> Brief {
    Brief::read_for(text, "brief.toml", &CATALOG, Purpose::Assemble).unwrap()
}

fn plan(library: &Arc<Library>, text: &str) -> Plan {
    Plan::new(Arc::clone(library), brief(text), false).unwrap()
}

fn limits(plan: &Plan) -> Limits {
    let asked = plan.brief.assembly.as_ref().map(|assembly| &assembly.value);
    Limits::of(&PIECES, asked).unwrap()
}

/// Pieces by name with their counts, ascending by place.
fn assembly(parts: &[(&str, u8)]) -> Vec<(u16, u8)> {
    let mut all: BTreeMap<u16, u8> = BTreeMap::new();
    for &(name, count) in parts {
        let piece = PIECES
            .find(name)
            .unwrap_or_else(|| panic!("no piece {name}"));
        *all.entry(piece as u16).or_insert(0) += count;
    }
    all.into_iter().filter(|one| one.1 > 0).collect()
}

fn groups_of(assembly: &[(u16, u8)], set: SetId) -> Option<GroupCounts> {
    let mut counts = GroupCounts::new();
    for &(piece, count) in assembly {
        let own = PIECES.all[usize::from(piece)].groups[set as usize].as_ref()?;
        for (number, groups) in own.iter() {
            counts.add(number, groups * u16::from(count));
        }
    }
    Some(counts)
}

fn in_words(assembly: &[(u16, u8)]) -> String {
    let parts = assembly
        .iter()
        .map(|&(piece, count)| format!("{count} {}", PIECES.all[usize::from(piece)].name));
    parts.collect::<Vec<_>>().join(", ")
}

/// Draws all structures and compares their ordinary breakdown with the pieces'; the
/// molecules by canonical SMILES.
fn broken_down_again(
    drawer: &mut Drawer<'_>,
    profiler: &mut Profiler,
    assembly: &[(u16, u8)],
) -> BTreeSet<String> {
    let structures = drawer.structures(assembly, usize::MAX);
    let mut seen = BTreeSet::new();
    for smiles in &structures.drawn {
        let profile = profiler
            .profile(&LIBRARY, smiles)
            .unwrap_or_else(|error| panic!("{}: {smiles}: {error}", in_words(assembly)));
        for set in SetId::ALL {
            let Some(settled) = groups_of(assembly, set) else {
                continue;
            };
            assert_eq!(
                profile.counts[set as usize],
                settled,
                "{} of {}: {smiles}",
                set.id(),
                in_words(assembly)
            );
            assert_eq!(profile.coverage.of(set), Coverage::Complete);
        }
        // an ether may be cut on either side of its oxygen: one molecule, two trees of pieces
        seen.insert(profile.keys.full.clone());
    }
    seen
}

/// A plain end with what closes it: CH3, ethyl, isopropyl, tert-butyl.
const CAPS: [&[(&str, u8)]; 4] = [
    &[("CH3", 1)],
    &[("CH2", 1), ("CH3", 1)],
    &[("CH", 1), ("CH3", 2)],
    &[("C", 1), ("CH3", 3)],
];

/// What fills a ring up beside some members.
fn filled(members: &[usize]) -> Vec<(&'static str, u8)> {
    let atoms: u32 = members.iter().map(|&at| PIECES.all[at].ring_atoms()).sum();
    match members.first().map(|&at| PIECES.all[at].role) {
        Some(Role::Aromatic) => vec![("ACH", 6 - atoms as u8)],
        Some(Role::Ring) => vec![("cCH2", 6 - atoms as u8)],
        _ => Vec::new(),
    }
}

#[test]
fn every_piece_and_every_two_pieces_break_down_as_they_say() {
    let mut drawer = Drawer::new(&PIECES);
    let mut profiler = Profiler::new();
    let (mut structures, mut together) = (0, BTreeSet::new());
    let joined = |at: &usize| PIECES.all[*at].role != Role::Whole;
    let all: Vec<usize> = (0..PIECES.all.len()).filter(joined).collect();
    for (place, &one) in all.iter().enumerate() {
        for &other in &all[place..] {
            let of_ring: Vec<usize> = [one, other]
                .into_iter()
                .filter(|&at| PIECES.all[at].role != Role::Chain)
                .collect();
            let roles = of_ring.iter().map(|&at| PIECES.all[at].role);
            let atoms: u32 = of_ring.iter().map(|&at| PIECES.all[at].ring_atoms()).sum();
            if roles.collect::<BTreeSet<_>>().len() > 1 || atoms > 6 {
                continue;
            }
            let ends = PIECES.all[one].ends.len() + PIECES.all[other].ends.len();
            // two in one ring are not joined to each other by their ends
            let open = if of_ring.len() == 2 {
                ends
            } else {
                ends.saturating_sub(2)
            };
            for cap in CAPS {
                let mut parts = vec![
                    (PIECES.all[one].name.as_str(), 1),
                    (PIECES.all[other].name.as_str(), 1),
                ];
                parts.extend(filled(&of_ring));
                for _ in 0..open {
                    parts.extend(cap);
                }
                let drawn = broken_down_again(&mut drawer, &mut profiler, &assembly(&parts)).len();
                structures += drawn;
                if drawn > 0 {
                    together.extend([one, other]);
                }
                if open == 0 {
                    break;
                }
            }
        }
    }
    assert!(structures > 10_000, "{structures}");
    let alone: Vec<&str> = all
        .iter()
        .filter(|at| !together.contains(at))
        .map(|&at| PIECES.all[at].name.as_str())
        .collect();
    assert_eq!(
        alone,
        Vec::<&str>::new(),
        "pieces that can be joined to nothing"
    );
}

/// 1.3: the subgroups that pieces hold.
#[test]
fn pieces_hold_enough_subgroups() {
    for set in [SetId::Unifac, SetId::UnifacDortmund] {
        let held: BTreeSet<u16> = PIECES
            .all
            .iter()
            .filter_map(|piece| piece.groups[set as usize].as_ref())
            .flat_map(|counts| counts.iter().map(|(number, _)| number).collect::<Vec<_>>())
            .collect();
        assert!(held.len() >= 45, "{}: {} subgroups", set.id(), held.len());
    }
    for piece in PIECES.all.iter().filter(|piece| piece.off.is_none()) {
        let halogens = PIECES.class("halogen").unwrap();
        assert_eq!(piece.of_class(halogens), 0, "{} is on", piece.name);
    }
}

/// Molecules of all assemblies that a brief allows, by canonical SMILES.
fn molecules_of(text: &str) -> BTreeSet<String> {
    let plan = plan(&LIBRARY, text);
    let limits = limits(&plan);
    let job = Job::new(&PIECES, &limits, Quick::new(&plan), LIBRARY.fitted(), &[]).unwrap();
    let (_, Found { account, best }) = job.search_all(100_000);
    assert_eq!(account.total().unwrap(), job.space().size());
    let mut drawer = Drawer::new(&PIECES);
    let mut profiler = Profiler::new();
    let all = best.sorted();
    assert_eq!(all.len() as u128, account.scored);
    all.iter()
        .flat_map(|scored| broken_down_again(&mut drawer, &mut profiler, &scored.pieces))
        .collect()
}

fn isomers(pieces: &[&str], heavy_atoms: u32, limits: &str) -> usize {
    molecules(pieces, heavy_atoms, limits).len()
}

fn molecules(pieces: &[&str], heavy_atoms: u32, limits: &str) -> BTreeSet<String> {
    let pieces: Vec<String> = pieces.iter().map(|name| format!("{name:?}")).collect();
    molecules_of(&format!(
        "[assembly]\npieces = [{}]\ncount = {{ least = 1, most = 14 }}\n\
         heavy_atoms = {{ at_least = {heavy_atoms}, at_most = {heavy_atoms} }}\n\
         molar_mass = {{ at_most = \"400 g/mol\" }}\n\
         limits = {{ branches = 12, quaternary_carbons = 6, {limits} }}\n\
         [[target]]\nfigure = \"molar_mass\"\nat_most = \"400 g/mol\"\n",
        pieces.join(", ")
    ))
}

const PLAIN: [&str; 4] = ["CH3", "CH2", "CH", "C"];

/// Alkanes C2 to C12: H. R. Henze, C. M. Blair, J. Am. Chem. Soc. 53 (1931)
/// 3077–3085; OEIS A000602.
#[test]
fn alkanes_are_as_many_as_henze_and_blair_count() {
    let counted = [1, 1, 2, 3, 5, 9, 18, 35, 75, 159, 355];
    for (carbons, wanted) in (2..=12).zip(counted) {
        assert_eq!(isomers(&PLAIN, carbons, ""), wanted, "C{carbons}");
    }
}

/// Alkyl radicals by carbons from 1, all and those with their free bond at a
/// tertiary carbon: OEIS A000598 (H. R. Henze, C. M. Blair, J. Am. Chem. Soc. 53
/// (1931) 3042–3046). The tertiary ones follow by Pólya counting of three
/// radicals of together one carbon less, which the test does for itself.
fn radicals(most: usize) -> (Vec<usize>, Vec<usize>, Vec<usize>) {
    // r[0] stands for hydrogen
    let mut all = vec![1_usize];
    let (mut tertiary, mut secondary) = (vec![0], vec![0]);
    for carbons in 1..=most {
        let (mut three, mut two, mut one) = (0, 0, 0);
        for a in 0..carbons {
            for b in a..carbons {
                let Some(c) = (carbons - 1).checked_sub(a + b).filter(|&c| c >= b) else {
                    continue;
                };
                let (x, y, z) = (all[a], all[b], all[c]);
                let ways = if a == b && b == c {
                    x * (x + 1) * (x + 2) / 6
                } else if a == b {
                    x * (x + 1) / 2 * z
                } else if b == c {
                    x * (y * (y + 1) / 2)
                } else {
                    x * y * z
                };
                match [a, b, c].iter().filter(|&&part| part > 0).count() {
                    3 => three += ways,
                    2 => two += ways,
                    _ => one += ways,
                }
            }
        }
        all.push(three + two + one);
        tertiary.push(three);
        secondary.push(two);
    }
    (all, secondary, tertiary)
}

#[test]
fn alkanols_and_primary_amines_are_as_many_as_radicals() {
    let (all, _, tertiary) = radicals(9);
    assert_eq!(&all[1..], [1, 1, 2, 4, 8, 17, 39, 89, 211], "A000598");
    let mut pieces = PLAIN.to_vec();
    pieces.extend(["CH2OH", "CHOH", "COH"]);
    let mut amines = PLAIN.to_vec();
    amines.extend(["CH2NH2", "CHNH2"]);
    for carbons in 2..=9 {
        let atoms = carbons as u32 + 1;
        assert_eq!(
            isomers(&pieces, atoms, "functional_groups = 1, OH = 1") - isomers(&PLAIN, atoms, ""),
            all[carbons],
            "C{carbons} alkanols"
        );
        // amines at a tertiary carbon have no group in the original set
        assert_eq!(
            isomers(&amines, atoms, "functional_groups = 1") - isomers(&PLAIN, atoms, ""),
            all[carbons] - tertiary[carbons],
            "C{carbons} amines"
        );
    }
}

/// R–X–R' with X the same both ways: unordered pairs of radicals.
fn pairs(of: &[usize], carbons: usize) -> usize {
    (1..carbons)
        .filter(|&a| 2 * a <= carbons)
        .map(|a| match carbons - a {
            b if a == b => of[a] * (of[a] + 1) / 2,
            b => of[a] * of[b],
        })
        .sum()
}

/// Ketones, ethers and esters by Pólya counting, less what the group sets cannot
/// express: ketones without CH3 or CH2 at the carbonyl, ethers and esters between
/// two carbons that have no hydrogen left.
#[test]
fn ketones_ethers_and_esters_are_as_many_as_polya_counts() {
    let (all, secondary, tertiary) = radicals(8);
    // a radical by its first carbon: CH3, CH2, CH, C
    let primary: Vec<usize> = (0..all.len())
        .map(|n| {
            if n == 0 {
                0
            } else {
                all[n] - secondary[n] - tertiary[n]
            }
        })
        .collect();
    let branched: Vec<usize> = secondary
        .iter()
        .zip(&tertiary)
        .map(|(a, b)| a + b)
        .collect();
    let with = |more: &[&'static str]| [&PLAIN[..], more].concat();
    for carbons in 3..=8 {
        let plain = |atoms: usize| isomers(&PLAIN, atoms as u32, "");
        let alkyls = carbons - 1;
        let ketones = pairs(&all, alkyls) - pairs(&branched, alkyls);
        assert_eq!(
            isomers(
                &with(&["CH3CO", "CH2CO"]),
                carbons as u32 + 1,
                "functional_groups = 1"
            ) - plain(carbons + 1),
            ketones,
            "C{carbons} ketones"
        );
        let ethers = pairs(&all, carbons) - pairs(&tertiary, carbons);
        assert_eq!(
            isomers(
                &with(&["CH3O", "CH2O", "CHO-ether"]),
                carbons as u32 + 1,
                "functional_groups = 1, ether = 1"
            ) - plain(carbons + 1),
            ethers,
            "C{carbons} ethers"
        );
    }
    // esters R-CO-O-R': R is hydrogen, CH3, CH2-, CH- or C-
    for carbons in 2..=8 {
        let alkyls = carbons - 1;
        let esters: usize = (0..alkyls).map(|acid| all[acid] * all[alkyls - acid]).sum();
        assert_eq!(
            isomers(
                &with(&["HCOO", "CH3COO", "CH2COO", "COO"]),
                carbons as u32 + 2,
                "functional_groups = 1"
            ) - isomers(&PLAIN, carbons as u32 + 2, ""),
            esters,
            "C{carbons} esters"
        );
    }
    assert_eq!(primary[4], 2);
}

/// Alkylbenzenes C6H6 to C10H14: 1, 1, 4, 8, 22 (of 22 with ten carbons all can be
/// made of groups: E. Rouvray, Chem. Soc. Rev. 3 (1974) 355, from memory).
#[test]
fn alkylbenzenes_are_as_many_as_counted() {
    let mut pieces = PLAIN.to_vec();
    pieces.extend(["ACH", "AC", "ACCH3", "ACCH2", "ACCH"]);
    for (carbons, wanted) in [(6, 1), (7, 1), (8, 4), (9, 8), (10, 22)] {
        let found = isomers(&pieces, carbons, "");
        assert_eq!(found - isomers(&PLAIN, carbons, ""), wanted, "C{carbons}");
    }
}

/// Five small spaces and what they are searched for.
const SMALL: [&str; 5] = [
    "[assembly]\ncount = { least = 2, most = 6 }\nheavy_atoms = { at_least = 4, at_most = 9 }\n",
    "[assembly]\npieces = [\"CH3\", \"CH2\", \"CH\", \"CH2OH\", \"CHOH\", \"CH3O\", \"CH2O\", \"HOCH2CH2O\", \"CH3COO\", \"CH2COO\"]\ncount = { least = 2, most = 9 }\n",
    "[assembly]\npieces = [\"CH3\", \"CH2\", \"CH\", \"C\", \"ACH\", \"AC\", \"ACCH3\", \"ACCH2\", \"ACCH\", \"CH3CO\", \"COOH\", \"CH2=CH\", \"ACOCH3\", \"CH3O\"]\ncount = { least = 2, most = 9 }\n",
    "[assembly]\npieces = [\"CH3\", \"CH2\", \"CH\", \"cCH2\", \"cCH\", \"cC\", \"cCH2OCH2\", \"cCH2CO\", \"cCHOH\", \"CH3NH\", \"CH2NH2\", \"COOH\", \"CH2OH\"]\ncount = { least = 2, most = 8 }\n",
    "[assembly]\npieces = [\"CH3\", \"CH2\", \"CH2CN\", \"CONMe2\", \"CH2Cl\", \"CHCl\", \"CH2NH2\", \"CHO\", \"CH3S\", \"acetonitrile\", \"N-methylpyrrolidone\", \"CH2NO2\"]\ncount = { least = 2, most = 7 }\nlimits = { functional_kinds = 3 }\n",
];

const TARGETS: &str = r#"
[mixture]
components = ["acetone", "methanol"]
temperature = "328.5 K"
model = "unifac-dortmund"
[ranking]
confidence = 0.0
[[target]]
figure = "boiling_point"
at_least = "370 K"
at_most = "480 K"
must = true
[[target]]
figure = "melting_point"
at_most = "290 K"
must = true
[[target]]
figure = "selectivity_infinite_dilution"
prefer = "high"
worst = 1.0
best = 3.0
[[target]]
figure = "flash_point"
prefer = "high"
worst = "290 K"
best = "350 K"
"#;

/// Every multiset of the space, by adding one piece after the other and asking
/// each limit in words.
fn by_hand(limits: &Limits) -> Vec<Vec<(u16, u8)>> {
    fn add(
        limits: &Limits,
        from: usize,
        so_far: &mut Vec<(u16, u8)>,
        all: &mut Vec<Vec<(u16, u8)>>,
    ) {
        if belongs(limits, so_far, true) {
            all.push(so_far.clone());
        }
        for piece in from..PIECES.all.len() {
            if !limits.pieces[piece] || PIECES.all[piece].role == Role::Whole {
                continue;
            }
            match so_far.last_mut() {
                Some(last) if usize::from(last.0) == piece => last.1 += 1,
                _ => so_far.push((piece as u16, 1)),
            }
            if belongs(limits, so_far, false) {
                add(limits, piece, so_far, all);
            }
            match so_far.last_mut() {
                Some(last) if last.1 > 1 => last.1 -= 1,
                _ => {
                    so_far.pop();
                }
            }
        }
    }
    let mut all = Vec::new();
    add(limits, 0, &mut Vec::new(), &mut all);
    for (at, piece) in PIECES.all.iter().enumerate() {
        let mut classes = limits.classes.iter().enumerate();
        if limits.pieces[at]
            && piece.role == Role::Whole
            && piece.heavy_atoms() <= limits.heavy_atoms.1
            && classes.all(|(class, &most)| piece.of_class(class) <= most)
        {
            all.push(vec![(at as u16, 1)]);
        }
    }
    all
}

/// Whether a multiset keeps the limits; `whole`: as a molecule, else as a part of one.
fn belongs(limits: &Limits, parts: &[(u16, u8)], whole: bool) -> bool {
    use groupsmith::chem::Element;
    let sum = |of: &dyn Fn(usize) -> u32| -> u32 {
        parts
            .iter()
            .map(|&(piece, count)| of(usize::from(piece)) * u32::from(count))
            .sum()
    };
    let piece = |at: usize| &PIECES.all[at];
    let chain = |at: usize| piece(at).role == Role::Chain;
    let ends = |at: usize| piece(at).ends.len() as u32;
    let count = sum(&|_| 1);
    let heavy = sum(&|at| piece(at).heavy_atoms());
    let of_class = |class: usize| sum(&|at| piece(at).of_class(class));
    let classes: Vec<u32> = (0..PIECES.classes.len()).map(of_class).collect();
    let ether = PIECES.class("ether").unwrap();
    let functional: u32 = classes.iter().sum::<u32>() - classes[ether];
    let kinds = classes.iter().filter(|&&number| number > 0).count() as u32;
    let atoms = |element| sum(&|at| u32::from(piece(at).composition.count(element)));
    let halogens = [Element::F, Element::Cl, Element::Br, Element::I]
        .map(atoms)
        .iter()
        .sum::<u32>();
    let branches = sum(&|at| {
        if chain(at) {
            ends(at).saturating_sub(2)
        } else {
            0
        }
    });
    let quaternary = sum(&|at| {
        let four = chain(at) && ends(at) == 4 || piece(at).role == Role::Ring && ends(at) == 2;
        u32::from(four && piece(at).classes.is_empty() && piece(at).heavy_atoms() == 1)
    });
    let aromatic = sum(&|at| {
        if piece(at).role == Role::Aromatic {
            piece(at).ring_atoms()
        } else {
            0
        }
    });
    let saturated = sum(&|at| {
        if piece(at).role == Role::Ring {
            piece(at).ring_atoms()
        } else {
            0
        }
    });
    let upper = count <= limits.count.1
        && heavy <= limits.heavy_atoms.1
        && functional <= limits.functional_groups
        && kinds <= limits.functional_kinds
        && atoms(Element::N) <= limits.nitrogen_atoms
        && halogens <= limits.halogen_atoms
        && branches <= limits.branches
        && quaternary <= limits.quaternary_carbons
        && aromatic <= 6
        && saturated <= 6
        && classes
            .iter()
            .zip(&limits.classes)
            .all(|(number, most)| number <= most);
    if !whole || !upper {
        return upper;
    }
    let ring = aromatic > 0 || saturated > 0;
    let complete = match (aromatic, saturated) {
        (0, 0) => true,
        (6, 0) | (0, 5 | 6) => limits.rings > 0,
        _ => false,
    };
    // a tree: its joints use up two ends each, one joint less than there are nodes
    let nodes = sum(&|at| u32::from(chain(at))) + u32::from(ring);
    let all_ends = sum(&|at| ends(at));
    complete
        && nodes > 0
        && all_ends + 2 == 2 * nodes
        && count >= limits.count.0
        && heavy >= limits.heavy_atoms.0
}

/// The search against simple code: the space, every category, every score.
#[test]
fn the_search_is_brute_force() {
    for (at, text) in SMALL.iter().enumerate() {
        let plan = plan(&COUNTED, &format!("{text}{TARGETS}"));
        let limits = limits(&plan);
        let job = Job::new(&PIECES, &limits, Quick::new(&plan), COUNTED.fitted(), &[]).unwrap();
        let (_, found) = job.search_all(1_000_000);
        let all = by_hand(&limits);
        assert!(all.len() > 400, "space {at} holds {}", all.len());
        assert_eq!(job.space().size(), all.len() as u128, "space {at}");
        assert_eq!(
            found.account.total().unwrap(),
            all.len() as u128,
            "account {at}"
        );
        compare_with(&plan, &limits, &all, &found);
    }
}

/// Evaluates a structure of each assembly by the ordinary way at count level.
fn compare_with(plan: &Plan, limits: &Limits, all: &[Vec<(u16, u8)>], found: &Found) {
    let mut drawer = Drawer::new(&PIECES);
    let mut realizer = Realizer::new(&PIECES);
    let mut scratch = Scratch::new();
    let scored: BTreeMap<Vec<(u16, u8)>, u64> = found
        .best
        .sorted()
        .into_iter()
        .map(|scored| (scored.pieces.to_vec(), scored.key))
        .collect();
    assert_eq!(scored.len() as u128, found.account.scored);
    let [amine, acid, aldehyde, halogen] =
        ["amine", "COOH", "aldehyde", "halogen"].map(|name| PIECES.class(name).unwrap());
    let (mut qualified, mut unrealizable) = (0, 0);
    for parts in all {
        let structures = drawer.structures(parts, 1);
        let realizable = structures.found > 0;
        assert_eq!(
            realizer.is_realizable(parts),
            realizable,
            "{}",
            in_words(parts)
        );
        let of = |class: usize| {
            parts
                .iter()
                .any(|&(piece, _)| PIECES.all[usize::from(piece)].of_class(class) > 0)
        };
        let mass: f64 = parts
            .iter()
            .map(|&(piece, count)| {
                PIECES.all[usize::from(piece)]
                    .composition
                    .molar_mass_kg_per_mol()
                    * f64::from(count)
            })
            .sum();
        let ruled_out = mass > limits.molar_mass_kg_per_mol
            || of(amine) && (of(acid) || of(aldehyde) || of(halogen));
        unrealizable += u128::from(!realizable);
        if !realizable || ruled_out {
            assert!(!scored.contains_key(parts), "{}", in_words(parts));
            continue;
        }
        let verdict = plan.evaluate(&mut scratch, &structures.drawn[0]).unwrap();
        match verdict {
            Verdict::Qualified {
                score, known: 1.0, ..
            } => {
                let key = scored.get(parts);
                assert!(key.is_some(), "{} qualifies: {score}", in_words(parts));
                assert!(
                    key.unwrap().abs_diff(score_key(score)) <= 1,
                    "{}: {key:?} against {score}",
                    in_words(parts)
                );
                qualified += 1;
            }
            // a figure that counts is absent: a gap of the model, cut at once
            Verdict::Qualified { .. } | Verdict::NotAssessable { .. } => {}
            Verdict::Missed { .. } => {
                assert!(!scored.contains_key(parts), "{}", in_words(parts));
            }
        }
    }
    assert!(qualified > 10, "{qualified}");
    assert!(found.account.without_structure <= unrealizable);
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 12, ..ProptestConfig::default() })]

    /// Random small briefs: the space and the account by simple code.
    #[test]
    fn random_spaces_are_counted_and_accounted_for(
        picked in proptest::collection::btree_set(0..100_usize, 3..9),
        most in 3..8_u32,
        heavy in 5..11_u32,
        functional in 1..4_u32,
        kinds in 1..4_u32,
        low in 300..420_u32,
        window in 20..150_u32,
    ) {
        let usable: Vec<&str> = PIECES.all.iter().map(|piece| piece.name.as_str()).collect();
        let mut names = PLAIN.map(|name| format!("{name:?}")).to_vec();
        names.extend(
            picked.iter().map(|at| format!("{:?}", usable[at % usable.len()])).filter(|name| !PLAIN.iter().any(|plain| *name == format!("{plain:?}"))),
        );
        names.sort();
        names.dedup();
        let text = format!(
            "[assembly]\npieces = [{}]\ncount = {{ least = 2, most = {most} }}\n\
             heavy_atoms = {{ at_least = 3, at_most = {heavy} }}\n\
             limits = {{ functional_groups = {functional}, functional_kinds = {kinds} }}\n\
             [ranking]\nconfidence = 0.0\n\
             [[target]]\nfigure = \"boiling_point\"\nat_least = \"{low} K\"\nat_most = \"{} K\"\nmust = true\n",
            names.join(", "),
            low + window,
        );
        let plan = plan(&COUNTED, &text);
        let limits = limits(&plan);
        let job = Job::new(&PIECES, &limits, Quick::new(&plan), COUNTED.fitted(), &[]).unwrap();
        let (_, found) = job.search_all(1_000_000);
        let all = by_hand(&limits);
        prop_assert_eq!(job.space().size(), all.len() as u128);
        prop_assert_eq!(found.account.total().unwrap(), all.len() as u128);
        let mut drawer = Drawer::new(&PIECES);
        let mut realizer = Realizer::new(&PIECES);
        let mut scratch = Scratch::new();
        let scored: BTreeSet<Vec<(u16, u8)>> =
            found.best.sorted().into_iter().map(|scored| scored.pieces.to_vec()).collect();
        for parts in &all {
            let structures = drawer.structures(parts, 1);
            prop_assert_eq!(realizer.is_realizable(parts), structures.found > 0, "{}", in_words(parts));
            if let (Some(smiles), true) = (structures.drawn.first(), scored.contains(parts)) {
                let verdict = plan.evaluate(&mut scratch, smiles).unwrap();
                prop_assert!(matches!(verdict, Verdict::Qualified { .. }), "{}: {verdict:?}", in_words(parts));
            }
        }
    }
}

/// A space with everything on is counted without being walked.
#[test]
fn a_space_too_large_to_walk_is_counted() {
    let plan = plan(
        &LIBRARY,
        "[assembly]\ncount = { least = 2, most = 12 }\nheavy_atoms = { at_least = 2, at_most = 40 }\n\
         limits = { functional_groups = 6, functional_kinds = 7, ether = 6, OH = 6, COOH = 6, \"C=C\" = 6, nitrogen_atoms = 12, branches = 12, quaternary_carbons = 12 }\n\
         [[target]]\nfigure = \"molar_mass\"\nat_most = \"400 g/mol\"\n",
    );
    let size = Space::new(&PIECES, &limits(&plan)).size();
    assert!(size > 100_000_000, "{size}");
}

#[test]
fn whole_molecules_are_drawn_as_they_are() {
    let mut drawer = Drawer::new(&PIECES);
    for (at, piece) in PIECES.all.iter().enumerate() {
        if let Drawing::Molecule(smiles) = &piece.drawing {
            let drawn = drawer.structures(&[(at as u16, 1)], 5);
            assert_eq!(drawn.drawn, std::slice::from_ref(smiles), "{}", piece.name);
            assert!(drawn.complete && drawn.found == 1);
        }
    }
}

/// Structures as RDKit read them: the same are drawn, no more and no fewer.
#[test]
fn structures_are_those_that_rdkit_took() {
    let text = include_str!("../data/assemble/structures.csv");
    let body: String = text
        .lines()
        .filter(|line| !line.starts_with('#'))
        .map(|line| format!("{line}\n"))
        .collect();
    let mut frozen: BTreeMap<(String, String, u32), BTreeSet<String>> = BTreeMap::new();
    let mut profiler = Profiler::new();
    for row in csv::Reader::from_reader(body.as_bytes()).records() {
        let row = row.unwrap();
        // RDKit's SMILES, read by ours
        let key = profiler.profile(&LIBRARY, &row[4]).unwrap().keys.full;
        let series = (
            row[0].to_owned(),
            row[1].to_owned(),
            row[2].parse().unwrap(),
        );
        assert!(
            frozen.entry(series).or_default().insert(key),
            "{} twice",
            &row[4]
        );
    }
    assert!(frozen.len() >= 9);
    for ((series, pieces, heavy_atoms), wanted) in frozen {
        let names: Vec<&str> = pieces.split(' ').collect();
        let drawn = molecules(
            &names,
            heavy_atoms,
            "functional_groups = 1, ether = 1, OH = 1",
        );
        assert_eq!(drawn, wanted, "{series}");
    }
}
