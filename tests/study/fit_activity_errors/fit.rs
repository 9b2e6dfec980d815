//! Effects of classes by ridge regression, then factors so that coverage holds.

use std::fmt::Write as _;

use groupsmith::mixture::{
    ActivityErrors, ActivityModel, ChemicalClass, ErrorModel, Likeness, LnError, TableFile,
};
use groupsmith::numeric::solve_dense;
use groupsmith::quantity::number;

use super::Fault;
use super::cases::{Case, Cases, FOLDS};

const CLASSES: usize = ChemicalClass::ALL.len();
const COVARIATES: [&str; 5] = [
    "magnitude",
    "negative",
    "solute_surface",
    "solvent_surface",
    "cold",
];

/// Positions of the coefficients: the constant, effects of the class of the
/// solute, of the solvent, of both together, slopes.
const SOLUTE: usize = 1;
const SOLVENT: usize = SOLUTE + CLASSES;
const BOTH: usize = SOLVENT + CLASSES;
const SLOPES: usize = BOTH + CLASSES * CLASSES;
/// The slope with cold is not a regression but made so that coverage holds.
const COLD: usize = SLOPES + 4;
const ALL: usize = SLOPES + COVARIATES.len();

/// Penalties: as if so many values said that the effect is 0.
const MIDDLE_PENALTY: f64 = 20.0;
const CLASS_PENALTY: f64 = 5.0;
const BOTH_PENALTY: f64 = 10.0;
const SLOPE_PENALTY: f64 = 1.0;
/// Errors below this are taken for this: agreement by chance says little of a scale.
const LEAST_ERROR: f64 = 0.03;
/// Classes of fewer values are not taken to be narrower than the average one.
const THIN_ROWS: f64 = 30.0;
/// Pairs with which a correlation is drawn to that of all.
const CORRELATION_PENALTY: f64 = 50.0;
/// Values with which the widening of a class is drawn to none.
const FACTOR_PENALTY: f64 = 20.0;
const FEW_PAIRS: usize = 100;
/// In a correlation, errors count up to so many scales.
const MOST_SCALES: f64 = 4.0;
const STEPS: usize = 12;
/// States below this temperature, in K, set the slope with cold.
const COLD_BELOW_K: f64 = 290.0;

/// What an error model may draw on; the chosen one and what it was compared with.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) struct Variant {
    pub(super) name: &'static str,
    classes: bool,
    both: bool,
    slopes: usize,
    middle: bool,
    correlated: bool,
}

impl Variant {
    pub(super) const CHOSEN: Self = Self {
        name: "chosen",
        classes: true,
        both: true,
        slopes: 5,
        middle: true,
        correlated: true,
    };

    pub(super) const ALL: [Self; 9] = [
        Self::CHOSEN,
        Self {
            name: "one width for all",
            classes: false,
            both: false,
            slopes: 0,
            middle: false,
            ..Self::CHOSEN
        },
        Self {
            name: "classes alone",
            both: false,
            slopes: 0,
            ..Self::CHOSEN
        },
        Self {
            name: "classes and magnitude",
            both: false,
            slopes: 1,
            ..Self::CHOSEN
        },
        Self {
            name: "without classes taken together",
            both: false,
            ..Self::CHOSEN
        },
        Self {
            name: "without cold",
            slopes: 4,
            ..Self::CHOSEN
        },
        Self {
            name: "without cold and surfaces",
            slopes: 2,
            ..Self::CHOSEN
        },
        Self {
            name: "symmetric (no middle)",
            middle: false,
            ..Self::CHOSEN
        },
        Self {
            name: "errors of two solutes independent",
            correlated: false,
            ..Self::CHOSEN
        },
    ];

    /// Penalty of each coefficient of ln s; `None` for those left out.
    fn penalty(&self, at: usize) -> Option<f64> {
        match at {
            0 => Some(0.0),
            SOLUTE..BOTH => self.classes.then_some(CLASS_PENALTY),
            BOTH..SLOPES => self.both.then_some(BOTH_PENALTY),
            COLD => None,
            _ => (at - SLOPES < self.slopes).then_some(SLOPE_PENALTY),
        }
    }

    fn middle_penalty(&self, at: usize) -> Option<f64> {
        match at {
            0 => self.middle.then_some(0.0),
            SOLUTE..BOTH => self.middle.then_some(MIDDLE_PENALTY),
            _ => None,
        }
    }
}

/// The coefficients and the non-zero entries of the design of a case.
type Design = [(usize, f64); 9];

fn design(case: &Case) -> Design {
    let (solute, solvent) = (case.solute.1 as usize, case.solvent.1 as usize);
    let [a, b, c, d, e] = ErrorModel::covariates(
        &case.solute.0,
        &case.solvent.0,
        case.temperature_k,
        case.predicted,
    );
    [
        (0, 1.0),
        (SOLUTE + solute, 1.0),
        (SOLVENT + solvent, 1.0),
        (BOTH + solute * CLASSES + solvent, 1.0),
        (SLOPES, a),
        (SLOPES + 1, b),
        (SLOPES + 2, c),
        (SLOPES + 3, d),
        (SLOPES + 4, e),
    ]
}

fn dot(design: &Design, coefficients: &[f64]) -> f64 {
    design.iter().map(|&(at, x)| x * coefficients[at]).sum()
}

/// Weighted least squares with a penalty on each coefficient.
fn ridge(
    rows: &[(Design, f64, f64)],
    penalty: impl Fn(usize) -> Option<f64>,
) -> Result<Vec<f64>, Fault> {
    let penalties: Vec<Option<f64>> = (0..ALL).map(penalty).collect();
    let (mut matrix, mut right) = (vec![0.0; ALL * ALL], vec![0.0; ALL]);
    for (design, value, weight) in rows {
        for &(i, x) in design.iter().filter(|(i, _)| penalties[*i].is_some()) {
            right[i] += weight * x * value;
            for &(j, y) in design.iter().filter(|(j, _)| penalties[*j].is_some()) {
                matrix[i * ALL + j] += weight * x * y;
            }
        }
    }
    for (at, penalty) in penalties.iter().enumerate() {
        // A coefficient that is left out comes out as 0.
        matrix[at * ALL + at] += penalty.unwrap_or(1.0);
    }
    if solve_dense(&mut matrix, &mut right) {
        Ok(right)
    } else {
        Err("the effects cannot be told apart".into())
    }
}

/// Effects of the classes on middle and scale.
struct Effects {
    middle: Vec<f64>,
    ln_scale: Vec<f64>,
    rows: [[f64; CLASSES]; 2],
}

impl Effects {
    /// Middles by least absolute deviations (reweighted least squares), scales
    /// by regression of the logarithm of the absolute error, in turn.
    fn of(cases: &Cases, chosen: &[usize], variant: Variant) -> Result<Self, Fault> {
        let chosen: Vec<(&Case, Design)> = chosen
            .iter()
            .map(|&at| (&cases.all[at], design(&cases.all[at])))
            .collect();
        let mut middle = vec![0.0; ALL];
        let mut ln_scale = vec![0.0; ALL];
        ln_scale[0] = f64::ln(0.3);
        for _ in 0..STEPS {
            let rows: Vec<_> = chosen
                .iter()
                .map(|(case, design)| {
                    let scale = dot(design, &ln_scale).exp();
                    let error = (case.residual - dot(design, &middle)).abs();
                    let weight = 0.3 / (scale * error.max(0.3 * scale));
                    (*design, case.residual, weight)
                })
                .collect();
            middle = ridge(&rows, |at| variant.middle_penalty(at))?;
            let rows: Vec<_> = chosen
                .iter()
                .map(|(case, design)| {
                    let error = (case.residual - dot(design, &middle)).abs();
                    (*design, error.max(LEAST_ERROR).ln(), 1.0)
                })
                .collect();
            ln_scale = ridge(&rows, |at| variant.penalty(at))?;
        }
        let mut rows = [[0.0; CLASSES]; 2];
        for (case, _) in &chosen {
            rows[0][case.solute.1 as usize] += 1.0;
            rows[1][case.solvent.1 as usize] += 1.0;
        }
        for class in 0..CLASSES {
            for (side, first) in [SOLUTE, SOLVENT].into_iter().enumerate() {
                if rows[side][class] < THIN_ROWS {
                    ln_scale[first + class] = ln_scale[first + class].max(0.0);
                }
            }
        }
        Ok(Self {
            middle,
            ln_scale,
            rows,
        })
    }
}

/// A fitted error model with what stands behind its pairs.
pub(super) struct Fitted {
    model: ActivityModel,
    effects: Effects,
    quantiles: (f64, f64),
    pairs: Vec<FittedPair>,
}

struct FittedPair {
    likeness: Likeness,
    water: bool,
    count: usize,
    solvents: usize,
    correlation: f64,
    factor: f64,
}

/// Fits an error model to some cases; factors come from cases that were held
/// out in turn among these.
pub(super) fn fit(cases: &Cases, chosen: &[usize], variant: Variant) -> Result<Fitted, Fault> {
    let mut fitted = Fitted {
        model: cases.model,
        effects: Effects::of(cases, chosen, variant)?,
        quantiles: (0.0, 0.0),
        pairs: Vec::new(),
    };
    let mut errors: Vec<Option<LnError>> = vec![None; cases.all.len()];
    for fold in 0..FOLDS {
        let (inside, outside): (Vec<usize>, Vec<usize>) =
            chosen.iter().partition(|&&at| cases.all[at].fold == fold);
        if inside.is_empty() {
            continue;
        }
        let part = Fitted {
            model: cases.model,
            effects: Effects::of(cases, &outside, variant)?,
            quantiles: (0.0, 0.0),
            pairs: Vec::new(),
        };
        let part = part.error_model(variant)?;
        for at in inside {
            errors[at] = Some(error_of(&part, &cases.all[at]));
        }
    }
    let widen = |errors: &mut [Option<LnError>], by: &dyn Fn(&Case) -> f64| {
        for (error, case) in errors.iter_mut().zip(&cases.all) {
            if let Some(error) = error {
                error.scale *= by(case).exp();
            }
        }
    };
    if variant.slopes > COLD - SLOPES {
        let cold = cold_slope(cases, &errors);
        fitted.effects.ln_scale[COLD] = cold;
        widen(&mut errors, &|case| cold * coldness(case));
    }
    if variant.classes {
        for (first, class_of) in [
            (SOLUTE, solute_class as fn(&Case) -> ChemicalClass),
            (SOLVENT, solvent_class),
        ] {
            let factors = class_factors(cases, &errors, class_of);
            for (class, factor) in factors.into_iter().enumerate() {
                fitted.effects.ln_scale[first + class] += factor;
            }
            widen(&mut errors, &|case| factors[class_of(case) as usize]);
        }
    }
    let standardised =
        |at: usize, error: LnError| (cases.all[at].residual - error.middle) / error.scale;
    let z: Vec<(f64, f64)> = errors
        .iter()
        .enumerate()
        .filter_map(|(at, error)| Some((standardised(at, (*error)?), 1.0)))
        .collect();
    fitted.quantiles = (quantile(z.clone(), 0.05), quantile(z, 0.95));

    let pairs: Vec<(usize, [f64; 2], [LnError; 2])> = cases
        .pairs
        .iter()
        .enumerate()
        .filter_map(|(at, pair)| {
            let both = [errors[pair.first]?, errors[pair.second]?];
            let z = [
                standardised(pair.first, both[0]),
                standardised(pair.second, both[1]),
            ];
            Some((at, z, both))
        })
        .collect();
    let correlation = |wanted: &dyn Fn(usize) -> bool| {
        let (mut product, mut first, mut second) = (0.0, 0.0, 0.0);
        for (at, z, _) in pairs.iter().filter(|(at, ..)| wanted(*at)) {
            let [a, b] = z.map(|z| z.clamp(-MOST_SCALES, MOST_SCALES));
            let weight = cases.pairs[*at].weight;
            product += weight * a * b;
            first += weight * a * a;
            second += weight * b * b;
        }
        if first * second > 0.0 {
            product / (first * second).sqrt()
        } else {
            0.0
        }
    };
    let is_in_water = |at: usize| cases.all[cases.pairs[at].first].in_water();
    for likeness in Likeness::FITTED {
        for water in [false, true] {
            let of_cell =
                |at: usize| cases.pairs[at].likeness == likeness && is_in_water(at) == water;
            let of_solvent = |at: usize| is_in_water(at) == water;
            let members: Vec<_> = pairs.iter().filter(|(at, ..)| of_cell(*at)).collect();
            let count = members.len();
            let mut solvents: Vec<usize> = members
                .iter()
                .map(|(at, ..)| cases.pairs[*at].solvent)
                .collect();
            solvents.sort_unstable();
            solvents.dedup();
            let measured = correlation(&of_cell);
            let n = count as f64;
            let drawn = (n * measured + CORRELATION_PENALTY * correlation(&of_solvent))
                / (n + CORRELATION_PENALTY);
            let drawn = if variant.correlated {
                drawn.clamp(0.0, 0.95)
            } else {
                0.0
            };
            // The factor belongs to the correlation: what it is short of, the factor makes up.
            let reach = |(at, _, [first, second]): &(usize, [f64; 2], [LnError; 2])| {
                let pair = &cases.pairs[*at];
                let difference = cases.all[pair.first].residual - cases.all[pair.second].residual;
                let middle = first.middle - second.middle;
                let scale = first.scale_of_difference(*second, drawn);
                ((difference - middle).abs() / scale, 1.0)
            };
            let factor = if !variant.correlated {
                // As one would have it without measuring: the reach of one value.
                (fitted.quantiles.1 - fitted.quantiles.0) / 2.0
            } else if water {
                // One solvent, in which a few solutes that miss widely are in many pairs.
                let in_water = pairs.iter().filter(|(at, ..)| is_in_water(*at));
                quantile(in_water.map(reach).collect(), 0.9)
            } else if count >= FEW_PAIRS {
                quantile(members.iter().map(|pair| reach(pair)).collect(), 0.9)
            } else {
                quantile(pairs.iter().map(reach).collect(), 0.9)
            };
            fitted.pairs.push(FittedPair {
                likeness,
                water,
                count,
                solvents: solvents.len(),
                correlation: drawn,
                factor,
            });
        }
    }
    Ok(fitted)
}

fn solute_class(case: &Case) -> ChemicalClass {
    case.solute.1
}

fn solvent_class(case: &Case) -> ChemicalClass {
    case.solvent.1
}

/// The covariate of cold.
fn coldness(case: &Case) -> f64 {
    design(case)[8].1
}

/// Where the 90 % of the errors of some cases end, counted in scales.
fn reach(cases: &Cases, errors: &[Option<LnError>], wanted: impl Fn(&Case) -> bool) -> f64 {
    let scaled = cases.all.iter().zip(errors).filter_map(|(case, error)| {
        let error = (*error)?;
        let scales = (case.residual - error.middle).abs() / error.scale;
        wanted(case).then_some((scales, 1.0))
    });
    quantile(scaled.collect(), 0.9)
}

/// The slope with cold that makes errors of cold states as many scales wide as
/// those of all states; not below 0.
fn cold_slope(cases: &Cases, errors: &[Option<LnError>]) -> f64 {
    let is_cold = |case: &Case| case.temperature_k < COLD_BELOW_K;
    let cold: Vec<f64> = cases
        .all
        .iter()
        .filter(|case| is_cold(case))
        .map(coldness)
        .collect();
    let mean = cold.iter().sum::<f64>() / cold.len() as f64;
    let wider = reach(cases, errors, is_cold) / reach(cases, errors, |_| true);
    (wider.ln() / mean).max(0.0)
}

/// Widens classes whose errors, held out, reach further than those of all:
/// logarithms of factors by class, drawn to 0 and never below it.
fn class_factors(
    cases: &Cases,
    errors: &[Option<LnError>],
    class_of: impl Fn(&Case) -> ChemicalClass,
) -> [f64; CLASSES] {
    let all = reach(cases, errors, |_| true);
    ChemicalClass::ALL.map(|class| {
        let n = cases.all.iter().zip(errors);
        let n = n.filter(|(case, error)| error.is_some() && class_of(case) == class);
        let n = n.count() as f64;
        if n == 0.0 {
            return 0.0;
        }
        let wider = reach(cases, errors, |case| class_of(case) == class) / all;
        (n / (n + FACTOR_PENALTY) * wider.ln()).max(0.0)
    })
}

/// The error that a model expects of a case.
pub(super) fn error_of(model: &ErrorModel, case: &Case) -> LnError {
    model.error(
        (&case.solute.0, case.solute.1),
        (&case.solvent.0, case.solvent.1),
        case.temperature_k,
        case.predicted,
    )
}

/// The weighted quantile of values with weights.
pub(super) fn quantile(mut values: Vec<(f64, f64)>, part: f64) -> f64 {
    values.sort_by(|one, other| one.0.total_cmp(&other.0));
    let all: f64 = values.iter().map(|(_, weight)| weight).sum();
    let mut sum = 0.0;
    for (value, weight) in &values {
        sum += weight;
        if sum >= part * all {
            return *value;
        }
    }
    values.last().map_or(0.0, |(value, _)| *value)
}

pub(super) const CORRELATION_HEAD: &str =
    "model,solutes,solvent,pairs,solvents,correlation,factor\n";

impl Fitted {
    /// The rows of the table of parameters.
    pub(super) fn table(&self, variant: Variant) -> String {
        let id = self.model.id();
        let mut text = String::new();
        let mut put = |term: &str, solute: &str, solvent: &str, value: f64| {
            let value = number::text(value, 5);
            writeln!(text, "{id},{term},{solute},{solvent},{value}")
                .expect("writing to a text does not fail");
        };
        for (class, rows) in ChemicalClass::ALL.iter().zip(self.effects.rows[0]) {
            put("rows", class.id(), "", rows);
        }
        for (class, rows) in ChemicalClass::ALL.iter().zip(self.effects.rows[1]) {
            put("rows", "", class.id(), rows);
        }
        for (term, effects) in [
            ("middle", &self.effects.middle),
            ("ln_scale", &self.effects.ln_scale),
        ] {
            put(term, "", "", effects[0]);
            for (at, class) in ChemicalClass::ALL.iter().enumerate() {
                put(term, class.id(), "", effects[SOLUTE + at]);
                put(term, "", class.id(), effects[SOLVENT + at]);
            }
            for (at, value) in effects[BOTH..SLOPES].iter().enumerate() {
                if *value != 0.0 {
                    let [solute, solvent] =
                        [at / CLASSES, at % CLASSES].map(|class| ChemicalClass::ALL[class].id());
                    put(term, solute, solvent, *value);
                }
            }
        }
        for (name, slope) in COVARIATES.iter().zip(&self.effects.ln_scale[SLOPES..]) {
            put("slope", name, "", *slope);
        }
        let (low, high) = self.quantiles;
        put("quantile", "low", "", low);
        put("quantile", "high", "", high);
        for pair in &self.pairs {
            let solvent = if pair.water { "water" } else { "" };
            put("correlation", pair.likeness.id(), solvent, pair.correlation);
            put("factor", pair.likeness.id(), solvent, pair.factor);
        }
        debug_assert!(variant.middle || self.effects.middle.iter().all(|value| *value == 0.0));
        text
    }

    /// The error model that the table describes: what is checked is what is read.
    pub(super) fn error_model(&self, variant: Variant) -> Result<ErrorModel, Fault> {
        let text = format!(
            "# title: t\n# source: s\n# transcribed: t\n# checked: c\nmodel,term,solute,solvent,value\n-,-,-,-,-\n{}",
            self.table(variant)
        );
        let file = TableFile {
            name: "fitted",
            text: &text,
        };
        let errors = ActivityErrors::read(file)?;
        Ok(errors.of(self.model).ok_or("no model was fitted")?.clone())
    }

    /// Correlations by likeness and solvent as lines of a table.
    pub(super) fn correlations(&self) -> String {
        let mut text = String::new();
        for pair in &self.pairs {
            writeln!(
                text,
                "{},{},{},{},{},{:.2},{:.2}",
                self.model.id(),
                pair.likeness.id(),
                if pair.water { "water" } else { "not water" },
                pair.count,
                pair.solvents,
                pair.correlation,
                pair.factor
            )
            .expect("writing to a text does not fail");
        }
        text
    }
}
