//! The errors of the cross-validation, by quantity, level, family and size.

use std::collections::BTreeMap;
use std::error::Error;
use std::fmt::Write as _;
use std::path::Path;

use groupsmith::pure::fitted::{Family, Level, Quantity, SizeClass, Standing};

use super::Fit;
use super::data::Reference;

/// Position of ln (1 + rarity) among the signs.
const RARITY: usize = 3;

/// What the cross-validation found for one quantity at one level.
pub(crate) struct Outcome {
    pub(crate) quantity: Quantity,
    pub(crate) level: Level,
    setting: (f64, f64),
    pub(crate) points: Vec<Point>,
}

pub(crate) struct Point {
    pub(crate) molecule: usize,
    /// Measured value, SI.
    pub(crate) value: f64,
    /// Value of the fit without the part, SI.
    pub(crate) estimate: f64,
    /// Ends of the 90 % interval, where the closing function has a value there.
    pub(crate) interval: [Option<f64>; 2],
    error: f64,
    /// Residual of the sum over the half width of its interval.
    ratio: f64,
    half_width: f64,
    residual: f64,
    nearest: f64,
    rarity: f64,
    family: Family,
    size: SizeClass,
    /// Whether the fit without its part has all of its atoms.
    pub(crate) inside: bool,
    /// Whether a value would be given at all: no kind of atom is new.
    pub(crate) given: bool,
}

/// How an error is told.
fn scale(quantity: Quantity) -> (&'static str, fn(f64, f64) -> f64) {
    match quantity {
        Quantity::BoilingPoint | Quantity::FlashPoint | Quantity::MeltingPoint => {
            ("K", |estimate, value| estimate - value)
        }
        Quantity::Viscosity => ("ln", |estimate, value| (estimate / value).ln()),
        Quantity::HansenDispersion | Quantity::HansenPolar | Quantity::HansenHydrogenBonding => {
            ("MPa^0.5", |estimate, value| (estimate - value) / 1000.0)
        }
        Quantity::LogPOctanolWater => ("-", |estimate, value| estimate - value),
        Quantity::IdealGasEnthalpyOfFormation => {
            ("kJ/mol", |estimate, value| (estimate - value) / 1000.0)
        }
        _ => ("%", |estimate, value| 100.0 * (estimate / value - 1.0)),
    }
}

impl Outcome {
    #[expect(
        clippy::too_many_arguments,
        reason = "everything the cross-validation found"
    )]
    pub(crate) fn new(
        quantity: Quantity,
        level: Level,
        fit: &Fit,
        members: &[usize],
        sums: &[f64],
        targets: &[f64],
        half_widths: &[f64],
        standings: &[Standing],
        inside: &[bool],
        has_kinds: &[bool],
        setting: (f64, f64),
    ) -> Self {
        let (_, error) = scale(quantity);
        let points = (0..members.len())
            .map(|i| {
                let molecule = members[i];
                let atoms = fit.molecules[molecule].heavy_atoms();
                let known = fit.known(level, molecule);
                let closed = |sum: f64| quantity.closed(sum, atoms, known);
                let value = closed(targets[i]).unwrap_or(f64::NAN);
                let estimate = closed(sums[i]).unwrap_or(f64::NAN);
                let residual = targets[i] - sums[i];
                Point {
                    molecule,
                    value,
                    estimate,
                    interval: [-1.0, 1.0].map(|sign| closed(sums[i] + sign * half_widths[i])),
                    error: error(estimate, value),
                    ratio: residual.abs() / half_widths[i],
                    half_width: half_widths[i],
                    residual,
                    nearest: standings[i].nearest,
                    rarity: standings[i].signs[RARITY],
                    family: standings[i].family,
                    size: standings[i].size,
                    inside: inside[i],
                    given: has_kinds[i],
                }
            })
            .filter(|point| point.error.is_finite())
            .collect();
        Self {
            quantity,
            level,
            setting,
            points,
        }
    }

    /// Lines for the head of the parameter file.
    pub(crate) fn head(&self) -> String {
        let (unit, _) = scale(self.quantity);
        let all: Vec<&Point> = self.points.iter().collect();
        let s = Summary::of(&all);
        let mut text = format!(
            "# cross-validation: five parts by constitution; {} molecules; near {}, noise {}\n",
            s.count, self.setting.0, self.setting.1
        );
        let line = |class: &str, s: &Summary| {
            format!(
                "# error: {class},{unit},{},{:.4},{:.4},{:.4},{:.4},{:.3}\n",
                s.count, s.mean, s.median, s.p90, s.bias, s.coverage
            )
        };
        text.push_str("# errors: class,unit,molecules,mean absolute,median absolute,90th percentile,bias,coverage\n");
        text.push_str(&line("all", &s));
        for (class, points) in self.classes() {
            text.push_str(&line(&class, &Summary::of(&points)));
        }
        text
    }

    fn classes(&self) -> BTreeMap<String, Vec<&Point>> {
        let mut classes: BTreeMap<String, Vec<&Point>> = BTreeMap::new();
        for point in &self.points {
            for class in [
                format!("family: {}", point.family.id()),
                format!("size: {}", point.size.id()),
            ] {
                classes.entry(class).or_default().push(point);
            }
            let domain = if point.inside {
                "inside the fit"
            } else {
                "outside the fit"
            };
            classes.entry(domain.to_owned()).or_default().push(point);
            if point.given {
                classes.entry("given".to_owned()).or_default().push(point);
            }
        }
        classes
    }
}

struct Summary {
    count: usize,
    mean: f64,
    median: f64,
    p90: f64,
    bias: f64,
    coverage: f64,
}

impl Summary {
    fn of(points: &[&Point]) -> Self {
        let count = points.len();
        let mut errors: Vec<f64> = points.iter().map(|point| point.error.abs()).collect();
        errors.sort_by(f64::total_cmp);
        let n = count as f64;
        Self {
            count,
            mean: errors.iter().sum::<f64>() / n,
            median: errors[count / 2],
            p90: errors[(count * 9 / 10).min(count - 1)],
            bias: points.iter().map(|point| point.error).sum::<f64>() / n,
            coverage: points.iter().filter(|point| point.ratio <= 1.0).count() as f64 / n,
        }
    }
}

/// Everything for the results folder.
#[derive(Default)]
pub(crate) struct Report {
    pub(crate) outcomes: Vec<Outcome>,
}

impl Report {
    pub(crate) fn add(&mut self, outcome: Outcome) {
        self.outcomes.push(outcome);
    }

    pub(crate) fn write(&self, folder: &Path, reference: &Reference) -> Result<(), Box<dyn Error>> {
        let mut errors = String::from(
            "quantity,level,class,unit,molecules,mean_abs,median_abs,p90_abs,bias,coverage\n",
        );
        let mut widths = String::from(
            "quantity,level,molecules,coverage,width_of_all,constant_width,narrowest_third_over_constant,coverage_of_narrowest_third,nearest_third_over_constant,coverage_of_nearest_third,mean_abs_95_percent_least_rare,mean_abs_98_percent_least_rare\n",
        );
        let mut suspects =
            String::from("quantity,name,smiles,error,unit,half_widths_off,distance_to_nearest\n");
        for outcome in &self.outcomes {
            let (unit, _) = scale(outcome.quantity);
            let (id, level) = (outcome.quantity.id(), outcome.level.id());
            let all: Vec<&Point> = outcome.points.iter().collect();
            let mut classes = outcome.classes();
            classes.insert("all".to_owned(), all.clone());
            for (class, points) in &classes {
                let s = Summary::of(points);
                writeln!(
                    errors,
                    "{id},{level},{class},{unit},{},{:.4},{:.4},{:.4},{:.4},{:.3}",
                    s.count, s.mean, s.median, s.p90, s.bias, s.coverage
                )?;
            }
            widths.push_str(&self.widths(outcome, &all));
            if outcome.level == Level::Structure {
                let mut far: Vec<&&Point> = all.iter().filter(|point| point.ratio > 3.0).collect();
                far.sort_by(|a, b| b.ratio.total_cmp(&a.ratio));
                for point in far {
                    let molecule = &reference.molecules[point.molecule];
                    writeln!(
                        suspects,
                        "{id},\"{}\",{},{:.3},{unit},{:.1},{:.2}",
                        molecule.name,
                        molecule.constitution,
                        point.error,
                        point.ratio,
                        point.nearest
                    )?;
                }
            }
        }
        std::fs::write(folder.join("worst.csv"), self.worst(reference)?)?;
        std::fs::write(folder.join("errors.csv"), errors)?;
        std::fs::write(folder.join("intervals.csv"), widths)?;
        std::fs::write(folder.join("suspect_points.csv"), suspects)?;
        let left_out = reference.left_out.join("\n");
        std::fs::write(
            folder.join("left_out.csv"),
            format!("quantity,name,smiles,value_si,reason\n{left_out}\n"),
        )?;
        Ok(())
    }

    /// The largest errors of each quantity at structure level.
    fn worst(&self, reference: &Reference) -> Result<String, Box<dyn Error>> {
        const EACH: usize = 25;
        let mut text = String::from("quantity,name,smiles,family,error,unit,inside_the_fit\n");
        for outcome in &self.outcomes {
            if outcome.level != Level::Structure {
                continue;
            }
            let (unit, _) = scale(outcome.quantity);
            let mut points: Vec<&Point> = outcome.points.iter().collect();
            points.sort_by(|a, b| b.error.abs().total_cmp(&a.error.abs()));
            for point in points.into_iter().take(EACH) {
                let molecule = &reference.molecules[point.molecule];
                writeln!(
                    text,
                    "{},\"{}\",{},{},{:.3},{unit},{}",
                    outcome.quantity.id(),
                    molecule.name,
                    molecule.constitution,
                    point.family.id(),
                    point.error,
                    point.inside
                )?;
            }
        }
        Ok(text)
    }

    /// Widths in units of the sum against one width for all: of the third that the fit itself
    /// holds for best known (the narrowest), and of the third with the nearest molecules, where
    /// there are distances.
    fn widths(&self, outcome: &Outcome, all: &[&Point]) -> String {
        let sorted = |by: fn(&Point) -> f64| {
            let mut points = all.to_vec();
            points.sort_by(|a, b| by(a).total_cmp(&by(b)));
            points
        };
        let mean = |points: &[&Point], of: fn(&Point) -> f64| {
            points.iter().map(|point| of(point)).sum::<f64>() / points.len() as f64
        };
        let covered = |point: &Point| f64::from(u8::from(point.ratio <= 1.0));
        let half_width = |point: &Point| point.half_width;
        let residuals = sorted(|point| point.residual.abs());
        let constant = residuals[all.len() * 9 / 10].residual.abs();
        let mut text = format!(
            "{},{},{},{:.3},{:.4},{constant:.4}",
            outcome.quantity.id(),
            outcome.level.id(),
            all.len(),
            mean(all, covered),
            mean(all, half_width),
        );
        for (by, has) in [
            (half_width as fn(&Point) -> f64, true),
            (|point| point.nearest, outcome.level == Level::Structure),
        ] {
            if !has {
                text.push_str(",,");
                continue;
            }
            let third = &sorted(by)[..all.len().div_ceil(3)];
            let width = mean(third, half_width) / constant;
            let _ = write!(text, ",{width:.3},{:.3}", mean(third, covered));
        }
        let by_rarity = sorted(|point| point.rarity);
        for percent in [95, 98] {
            let kept = &by_rarity[..all.len() * percent / 100];
            let _ = write!(text, ",{:.4}", mean(kept, |point| point.error.abs()));
        }
        text.push('\n');
        text
    }
}
