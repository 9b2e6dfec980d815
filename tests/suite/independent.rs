//! Built-in measured data held against copies and tables of other hands.

use std::collections::{BTreeMap, BTreeSet};
use std::io::Read;

use groupsmith::data::{Substance, Substances};
use groupsmith::quantity::Property;

fn built_in() -> Substances {
    Substances::built_in().unwrap()
}

fn rows(text: &str) -> csv::Reader<&[u8]> {
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes())
}

// ------------------------------------------------- saturation at many pressures

const MMHG_PA: f64 = 101_325.0 / 760.0;

/// Substances whose old values lie 1.5 K and more off the newer sets, all of which
/// agree with one another there.
const OFF_IN_1947: [&str; 5] = [
    "MEK",
    "ethylene glycol",
    "glycerol",
    "o-xylene",
    "naphthalene",
];

/// Boiling temperatures at ten pressures. The table is from 1947; its low
/// pressures were measured less well, hence the two widths.
#[test]
fn boiling_temperatures_at_several_pressures() {
    let substances = built_in();
    let text = include_str!("../data/data/boiling_temperatures.csv");
    let mut reader = rows(text);
    let pressures: Vec<f64> = reader
        .headers()
        .unwrap()
        .iter()
        .skip(1)
        .map(|cell| cell.parse().unwrap())
        .collect();
    let mut deviations = Vec::new();
    let mut misses = Vec::new();
    for row in reader.records() {
        let row = row.unwrap();
        let substance = substances.find(&row[0]).unwrap();
        for (cell, mmhg) in row.iter().skip(1).zip(&pressures) {
            let Ok(celsius) = cell.parse::<f64>() else {
                continue;
            };
            let curve = substance.vapor_pressure().unwrap();
            let Ok(found) = curve.saturation_temperature_k(mmhg * MMHG_PA) else {
                continue;
            };
            let off = found - (celsius + 273.15);
            let width = match (&row[0], *mmhg) {
                (_, mmhg) if mmhg < 40.0 => 4.0,
                (name, _) if OFF_IN_1947.contains(&name) => 3.5,
                _ => 1.5,
            };
            if off.abs() > width {
                misses.push(format!("{} at {mmhg} mmHg: {off:+.2} K", &row[0]));
            }
            deviations.push(off.abs());
        }
    }
    assert!(deviations.len() > 230, "{}", deviations.len());
    assert!(misses.is_empty(), "{}", misses.join("\n"));
    deviations.sort_by(f64::total_cmp);
    let median = deviations[deviations.len() / 2];
    assert!(median < 0.5, "median {median} K");
}

#[test]
fn water_follows_the_steam_table() {
    let substances = built_in();
    let water = substances.find("water").unwrap();
    let curve = water.vapor_pressure().unwrap();
    let mut seen = 0;
    for row in rows(include_str!("../data/data/steam_table.csv")).records() {
        let row = row.unwrap();
        let number = |at: usize| row[at].parse::<f64>().unwrap();
        let (t, p) = (number(0) + 273.15, number(1) * 1e3);
        let saturation = curve.saturation_temperature_k(p).unwrap();
        assert!((saturation - t).abs() < 0.15, "{saturation} K at {p} Pa");
        let density = water.measured(Property::LiquidDensity, t);
        let density = density.unwrap().unwrap().value;
        assert!(
            (density / number(2) - 1.0).abs() < 0.005,
            "{density} at {t} K"
        );
        seen += 1;
    }
    assert_eq!(seen, 16);
}

// -------------------------------------------------------------- second copy

/// By how much the used value may differ from the other copy's where the two
/// settled on different sources, and below what they count as the same number.
struct Width {
    same: f64,
    most: f64,
    relative: bool,
}

fn width(property: Property) -> Width {
    let absolute = |same, most| Width {
        same,
        most,
        relative: false,
    };
    let relative = |same, most| Width {
        same,
        most,
        relative: true,
    };
    match property {
        Property::BoilingPoint | Property::MeltingPoint => absolute(0.06, 3.0),
        Property::FlashPoint => absolute(0.06, 10.0),
        Property::LiquidDensity => relative(2e-4, 0.01),
        Property::VaporPressure => relative(2e-4, 0.05),
        Property::EnthalpyOfVaporization => relative(2e-4, 0.05),
        _ => absolute(10.0, 1000.0),
    }
}

#[test]
fn built_in_values_equal_a_second_copy() {
    let packed = include_bytes!("../data/data/second_copy.csv.gz");
    let mut text = String::new();
    flate2::read::GzDecoder::new(&packed[..])
        .read_to_string(&mut text)
        .unwrap();
    let substances = built_in();
    let mut seen: BTreeMap<&str, [usize; 2]> = BTreeMap::new();
    let mut far = Vec::new();
    let disputes: BTreeSet<(&str, &str)> = substances
        .conflicts()
        .iter()
        .map(|conflict| {
            let substance = substances.iter().nth(conflict.substance).unwrap();
            (substance.name().as_ref(), conflict.property.as_ref())
        })
        .collect();
    for row in rows(&text).records() {
        let row = row.unwrap();
        let substance = substances.find(&row[0]).unwrap();
        let property = Property::from_id(&row[1]).unwrap();
        let value: f64 = row[3].parse().unwrap();
        let Some(found) = used(substance, property, &row[2]) else {
            continue;
        };
        let width = width(property);
        let mut off = (found - value).abs();
        if width.relative {
            off /= value.abs();
        }
        let count = seen.entry(property.id()).or_default();
        count[0] += 1;
        count[1] += usize::from(off <= width.same);
        let disputed = property == Property::VaporPressure
            && OTHER_SET_IN_USE.contains(&substance.name().as_ref())
            || disputes.contains(&(substance.name().as_ref(), kind(property)));
        if off > width.most && !disputed {
            far.push(format!(
                "{},{},{},{found},{value},{}",
                substance.name(),
                property.id(),
                &row[2],
                &row[4]
            ));
        }
    }
    assert!(far.is_empty(), "{}", far.join("\n"));
    // Rows compared, and how many of them are the same number: of 4,588 rows 4,096 are.
    let [rows, same] = seen.values().fold([0, 0], |[rows, same], count| {
        [rows + count[0], same + count[1]]
    });
    assert!(rows > 4500, "{seen:?}");
    assert!(same * 100 > rows * 88, "{seen:?}");
}

/// Substances of which the other copy used a vapor-pressure set 5 to 20 % away
/// from the one in use, at pressures where neither can be told to be wrong.
const OTHER_SET_IN_USE: [&str; 8] = [
    "pentachloroethane",
    "diethyl succinate",
    "butylcyclohexane",
    "isovaleric acid",
    "phenylhydrazine",
    "cyclohexylbenzene",
    "m-nitrotoluene",
    "1,3-propanediol",
];

/// What disagreements about a property are recorded under.
fn kind(property: Property) -> &'static str {
    match property.id() {
        id if id.starts_with("hansen") => "hansen",
        id => id,
    }
}

/// The value in use; `None` where the table has none for that state.
fn used(substance: &Substance, property: Property, temperature: &str) -> Option<f64> {
    let temperature_k = match temperature {
        "" | "Tb" => 298.15,
        "293-298" => 298.15,
        text => text.parse().unwrap(),
    };
    if property == Property::EnthalpyOfVaporization && temperature != "Tb" {
        return None;
    }
    Some(substance.measured(property, temperature_k)?.ok()?.value)
}
