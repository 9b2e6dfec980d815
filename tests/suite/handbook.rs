//! Fitted estimates held against handbook values with measured data off: a hundred
//! well-known substances, and the members of homologous series.
//!
//! Some of the values are in the fit and some are not; the data files say which, and bounds
//! are apart. The bounds are half as wide again as what was found when they were set: they
//! guard against decay and claim no accuracy (`results/2026-12-01-accuracy`).

use std::collections::BTreeMap;

use groupsmith::evaluate::{EstimateLevel, Library, Profiler, properties};
use groupsmith::mixture::Slips;
use groupsmith::pure::Estimates;
use groupsmith::quantity::Property;

const ROOM_K: f64 = 298.15;

/// The levels that are fitted.
const FITTED: [EstimateLevel; 2] = [EstimateLevel::Structure, EstimateLevel::Count];

/// Estimates at room temperature by SMILES, each made once.
struct Estimator {
    library: Library,
    profiler: Profiler,
    made: BTreeMap<String, Estimates>,
}

impl Estimator {
    fn at(level: EstimateLevel) -> Self {
        Self {
            library: Library::built_in(Slips::Corrected).with_level(level),
            profiler: Profiler::new(),
            made: BTreeMap::new(),
        }
    }

    /// The value of a property with measured data off.
    fn value(&mut self, smiles: &str, property: Property) -> Option<f64> {
        let all = self.made.entry(smiles.to_owned()).or_insert_with(|| {
            let profile = self.profiler.profile(&self.library, smiles).unwrap();
            properties(&self.library, &profile, None, ROOM_K)
        });
        all[property as usize]
            .as_ref()
            .ok()
            .map(|found| found.value)
    }
}

/// A published value.
struct Published {
    name: String,
    smiles: String,
    property: Property,
    value: f64,
    in_the_fit: bool,
}

fn hundred() -> Vec<Published> {
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(include_str!("../data/pure/handbook_100.csv").as_bytes())
        .records()
        .map(|row| {
            let row = row.unwrap();
            assert!(["", "298.15"].contains(&&row[4]), "{row:?}");
            assert!(!row[7].is_empty(), "{row:?} has no source");
            Published {
                name: row[0].to_owned(),
                smiles: row[2].to_owned(),
                property: Property::from_id(&row[3]).unwrap(),
                value: row[5].parse().unwrap(),
                in_the_fit: &row[6] == "yes",
            }
        })
        .collect()
}

/// How the error of a property is told.
fn error(property: Property, estimate: f64, value: f64) -> f64 {
    use Property::*;
    match property {
        BoilingPoint | MeltingPoint | FlashPoint | LogPOctanolWater => estimate - value,
        HansenDispersion | HansenPolar | HansenHydrogenBonding | IdealGasEnthalpyOfFormation => {
            1e-3 * (estimate - value)
        }
        LiquidViscosity | VaporPressure => (estimate / value).ln(),
        _ => 100.0 * (estimate / value - 1.0),
    }
}

/// Greatest mean and greatest single error at structure level: of values that are in the
/// fit, and of values that no fit has seen. K; percent; ln of viscosity and vapor pressure;
/// MPa^0.5; kJ/mol.
const BOUNDS: [(Property, [f64; 2], [f64; 2]); 17] = [
    (Property::BoilingPoint, [3.3, 14.0], [8.0, 60.0]),
    (Property::MeltingPoint, [23.0, 86.0], [25.0, 77.0]),
    (Property::CriticalTemperature, [2.1, 30.0], [5.9, 46.0]),
    (Property::CriticalPressure, [4.1, 23.0], [10.0, 43.0]),
    (Property::CriticalVolume, [2.4, 11.0], [4.9, 14.0]),
    // acetonitrile, whose T_c comes out 31 % low: the volume at 0.65 T_b is carried by it
    (Property::LiquidDensity, [1.05, 5.7], [2.8, 33.0]),
    // formamide, whose curve is carried over 195 K
    (Property::VaporPressure, [0.57, 11.0], [0.74, 3.1]),
    (Property::EnthalpyOfVaporization, [7.5, 52.0], [4.6, 27.0]),
    // acetic acid: the vapor is half dimers, which a relative cannot tell
    (
        Property::EnthalpyOfVaporizationAt298,
        [3.8, 27.0],
        [15.0, 150.0],
    ),
    (Property::LiquidViscosity, [0.3, 2.6], [0.35, 1.2]),
    (Property::SurfaceTension, [8.2, 86.0], [15.6, 50.0]),
    (Property::FlashPoint, [13.3, 97.0], [11.5, 30.0]),
    (Property::LogPOctanolWater, [0.12, 0.46], [0.23, 1.25]),
    (
        Property::IdealGasEnthalpyOfFormation,
        [3.6, 15.5],
        [11.6, 53.0],
    ),
    (Property::HansenDispersion, [0.59, 2.2], [0.6, 1.7]),
    (Property::HansenPolar, [2.0, 7.0], [2.4, 8.3]),
    (Property::HansenHydrogenBonding, [1.95, 7.8], [2.4, 6.6]),
];

#[test]
fn a_hundred_well_known_substances_stay_near_their_handbook_values() {
    let mut estimator = Estimator::at(EstimateLevel::Structure);
    let mut errors: BTreeMap<(Property, bool), Vec<(f64, String)>> = BTreeMap::new();
    let mut without = Vec::new();
    let published = hundred();
    for one in &published {
        match estimator.value(&one.smiles, one.property) {
            Some(estimate) => errors
                .entry((one.property, one.in_the_fit))
                .or_default()
                .push((error(one.property, estimate, one.value), one.name.clone())),
            None => without.push(one.name.as_str()),
        }
    }
    // Their atoms are in too few molecules to be known; the flash point of one that may have none.
    without.dedup();
    assert_eq!(without, ["water", "trichloroethylene", "carbon disulfide"]);
    let mut faults = Vec::new();
    for (property, seen, unseen) in BOUNDS {
        for (in_the_fit, [mean_bound, worst_bound]) in [(true, seen), (false, unseen)] {
            let errors = &errors[&(property, in_the_fit)];
            assert!(errors.len() >= 15, "{property:?} {in_the_fit}");
            let mean = errors.iter().map(|one| one.0.abs()).sum::<f64>() / errors.len() as f64;
            let worst = errors
                .iter()
                .max_by(|a, b| a.0.abs().total_cmp(&b.0.abs()))
                .unwrap();
            if mean > mean_bound || worst.0.abs() > worst_bound {
                faults.push(format!(
                    "{} ({}in the fit): mean {mean:.3}, bound {mean_bound}; worst {worst:?}, bound {worst_bound}",
                    property.id(),
                    if in_the_fit { "" } else { "not " }
                ));
            }
        }
    }
    assert_eq!(errors.len(), 2 * BOUNDS.len());
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

/// The list is what it says: a hundred substances, of which a quarter is in no fit.
#[test]
fn the_hundred_are_a_hundred_and_a_quarter_is_unseen() {
    let published = hundred();
    let names: std::collections::BTreeSet<&str> =
        published.iter().map(|one| one.name.as_str()).collect();
    assert_eq!(names.len(), 100);
    let boiling: Vec<bool> = published
        .iter()
        .filter(|one| one.property == Property::BoilingPoint)
        .map(|one| one.in_the_fit)
        .collect();
    let unseen = boiling.iter().filter(|seen| !**seen).count();
    assert!(
        boiling.len() >= 95 && unseen >= 25,
        "{unseen} of {}",
        boiling.len()
    );
}

// ------------------------------------------------------------ homologous series

/// Name, what stands behind the chain, carbons outside the chain.
const SERIES: [(&str, &str, usize); 5] = [
    ("n-alkanes", "", 0),
    ("1-alkanols", "O", 0),
    ("n-alkylbenzenes", "c1ccccc1", 6),
    ("methyl n-alkanoates", "C(=O)OC", 2),
    ("2-alkanones", "C(=O)C", 2),
];

/// Most carbons of a member.
const CARBONS: usize = 30;

/// From so many carbons on members are looked at one by one: the first ones are molecules of their own kind.
const SETTLED: usize = 6;

/// A property along a series from [`SETTLED`] carbons on, with the numbers of carbons.
fn along(
    estimator: &mut Estimator,
    (_, after, others): (&str, &str, usize),
    property: Property,
) -> Vec<(usize, f64)> {
    (SETTLED.max(others + 1)..=CARBONS)
        .map(|carbons| {
            let smiles = format!("{}{after}", "C".repeat(carbons - others));
            (carbons, estimator.value(&smiles, property).unwrap())
        })
        .collect()
}

fn steps(points: &[(usize, f64)]) -> Vec<(usize, f64)> {
    points
        .windows(2)
        .map(|pair| (pair[1].0, pair[1].1 - pair[0].1))
        .collect()
}

/// Greatest mean and greatest single error, K: of the boiling point, and of the critical temperature.
type Bounds = [[f64; 2]; 2];

/// Bounds against published values by series, at structure level and at count level; values that are in the
/// fit and those that are not together.
const AGAINST_PUBLISHED: [(&str, Bounds, Bounds); 5] = [
    (
        "n-alkanes",
        [[2.7, 26.0], [6.3, 22.0]],
        [[10.6, 43.0], [15.6, 34.0]],
    ),
    (
        "1-alkanols",
        [[8.6, 30.0], [11.2, 33.0]],
        [[9.9, 42.0], [5.9, 12.0]],
    ),
    (
        "n-alkylbenzenes",
        [[5.2, 15.5], [2.9, 6.6]],
        [[14.2, 39.0], [7.3, 16.0]],
    ),
    (
        "methyl n-alkanoates",
        [[4.3, 18.0], [3.7, 8.5]],
        [[11.5, 28.0], [7.6, 15.0]],
    ),
    (
        "2-alkanones",
        [[6.7, 20.0], [3.7, 17.0]],
        [[5.6, 22.0], [8.3, 14.0]],
    ),
];

#[test]
fn homologues_follow_published_boiling_and_critical_temperatures() {
    let mut faults = Vec::new();
    let mut compared = 0;
    for (level, of_level) in FITTED.into_iter().zip([0, 1]) {
        let mut estimator = Estimator::at(level);
        let mut errors: BTreeMap<(String, Property), Vec<f64>> = BTreeMap::new();
        let rows = csv::ReaderBuilder::new()
            .comment(Some(b'#'))
            .from_reader(include_str!("../data/pure/homologues.csv").as_bytes())
            .into_records();
        for row in rows {
            let row = row.unwrap();
            let property = Property::from_id(&row[3]).unwrap();
            let published: f64 = row[4].parse().unwrap();
            // methane: its atom is in no other molecule
            let Some(estimate) = estimator.value(&row[2], property) else {
                assert_eq!(&row[2], "C");
                continue;
            };
            compared += 1;
            errors
                .entry((row[0].to_owned(), property))
                .or_default()
                .push(estimate - published);
        }
        for (series, structure, count) in AGAINST_PUBLISHED {
            let bounds = [structure, count][of_level];
            let both = [Property::BoilingPoint, Property::CriticalTemperature];
            for (property, [mean_bound, worst_bound]) in both.into_iter().zip(bounds) {
                let errors = &errors[&(series.to_owned(), property)];
                let mean = errors.iter().map(|e| e.abs()).sum::<f64>() / errors.len() as f64;
                let worst = errors.iter().fold(0.0_f64, |most, e| most.max(e.abs()));
                if mean > mean_bound || worst > worst_bound {
                    faults.push(format!(
                        "{level:?} {series} {}: mean {mean:.2} K, bound {mean_bound}; worst {worst:.2} K, bound {worst_bound}",
                        property.id()
                    ));
                }
            }
        }
    }
    assert_eq!(compared, 2 * 181);
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

/// Each CH2 raises the critical temperature and T_b/T_c and lowers the critical
/// pressure, all by less and less.
#[test]
fn critical_point_of_homologues_goes_one_way_without_kinks() {
    for level in FITTED {
        let mut estimator = Estimator::at(level);
        for series in SERIES {
            let [tb, tc, pc] = [
                Property::BoilingPoint,
                Property::CriticalTemperature,
                Property::CriticalPressure,
            ]
            .map(|property| along(&mut estimator, series, property));
            let place = |carbons| format!("{level:?} {} {carbons}", series.0);
            let rises = steps(&tc);
            for pair in rises.windows(2) {
                let ((_, before), (carbons, after)) = (pair[0], pair[1]);
                assert!(after > 0.0, "{}: {after} K", place(carbons));
                // the steps of the n-alkanes at structure level go up and down by 0.3 K
                let allowed = if carbons > 12 { -2.5..=0.4 } else { -7.5..=0.4 };
                let growth = after - before;
                assert!(allowed.contains(&growth), "{}: {growth} K", place(carbons));
            }
            let ratio: Vec<(usize, f64)> = tb
                .iter()
                .zip(&tc)
                .map(|(tb, tc)| (tb.0, tb.1 / tc.1))
                .collect();
            for (carbons, step) in steps(&ratio) {
                assert!(step > 0.0 && step < 0.02, "{}: {step}", place(carbons));
            }
            assert!(ratio.last().unwrap().1 < 0.88, "{}", series.0);
            let logarithms: Vec<(usize, f64)> = pc.iter().map(|p| (p.0, p.1.ln())).collect();
            let falls = steps(&logarithms);
            for pair in falls.windows(2) {
                let (carbons, fall) = pair[1];
                assert!(fall < 0.0, "{}: {fall}", place(carbons));
                let kink = fall - pair[0].1;
                assert!((-0.005..0.03).contains(&kink), "{}: {kink}", place(carbons));
            }
        }
    }
}

/// Each CH2 adds to the molar volume what it adds to liquid n-alkanes, 16.2 cm3/mol by handbook
/// densities from hexane to hexadecane, give or take 1.3; so the densities of all series end
/// near one another. Up to twelve carbons, where volumes are fitted at 0.65 T_b and carried to
/// 298.15 K, steps are less even.
#[test]
fn molar_volume_grows_by_the_same_for_each_carbon() {
    for level in FITTED {
        let mut estimator = Estimator::at(level);
        let mut ends = Vec::new();
        for series in SERIES {
            let density = along(&mut estimator, series, Property::LiquidDensity);
            let mass = along(&mut estimator, series, Property::MolarMass);
            let volume: Vec<(usize, f64)> = mass
                .iter()
                .zip(&density)
                .map(|(mass, density)| (mass.0, 1e6 * mass.1 / density.1))
                .collect();
            let steps_of_volume = steps(&volume);
            for &(carbons, step) in &steps_of_volume {
                let allowed = if carbons > 12 {
                    14.9..=17.4
                } else {
                    14.5..=18.0
                };
                assert!(
                    allowed.contains(&step),
                    "{level:?} {} {carbons}: {step} cm3/mol",
                    series.0
                );
            }
            for pair in steps_of_volume.windows(2) {
                let kink = (pair[1].1 - pair[0].1).abs();
                let bound = if pair[1].0 > 13 { 0.25 } else { 2.0 };
                assert!(
                    kink < bound,
                    "{level:?} {} {}: {kink} cm3/mol",
                    series.0,
                    pair[1].0
                );
            }
            // towards a limit: the density changes less and less
            let changes = steps(&density);
            let (early, late) = (changes[0].1.abs(), changes[changes.len() - 1].1.abs());
            assert!(
                late < 3.0 && (late < early || early < 3.0),
                "{level:?} {}: {early}, {late}",
                series.0
            );
            ends.push(density[density.len() - 1].1);
        }
        let (low, high) = ends
            .iter()
            .fold((f64::INFINITY, 0.0_f64), |(l, h), &e| (l.min(e), h.max(e)));
        assert!(high / low - 1.0 < 0.08, "{level:?}: {ends:?}");
    }
}

/// A step lies within 0.6 K of the mean of the two beside it: the boiling points of odd and even
/// members lie on one curve.
#[test]
fn boiling_points_of_odd_and_even_members_lie_on_one_curve() {
    for level in FITTED {
        let mut estimator = Estimator::at(level);
        for series in SERIES {
            let steps = steps(&along(&mut estimator, series, Property::BoilingPoint));
            for three in steps.windows(3).filter(|three| three[0].0 > 12) {
                let parity = three[1].1 - 0.5 * (three[0].1 + three[2].1);
                assert!(
                    parity.abs() < 0.6,
                    "{level:?} {} {}: {parity} K",
                    series.0,
                    three[1].0
                );
            }
        }
    }
}
