//! Coverage and width on systems that were held out.

use std::collections::BTreeMap;
use std::fmt;
use std::fmt::Write as _;

use groupsmith::mixture::ActivityModel;

use super::Fault;
use super::cases::{Case, Cases, FOLDS};
use super::fit::{self, Variant};

/// An interval around a prediction beside what was measured, both less the prediction.
#[derive(Clone, Copy)]
struct Tested {
    low: f64,
    high: f64,
    found: f64,
}

impl Tested {
    fn holds(&self) -> bool {
        (self.low..=self.high).contains(&self.found)
    }

    fn width(&self) -> f64 {
        self.high - self.low
    }

    /// Width, and twenty times what the interval misses by: small is good
    /// (Gneiting, Raftery, J. Am. Stat. Assoc. 102 (2007) 359-378, eq. 43).
    fn score(&self) -> f64 {
        let missed = (self.low - self.found).max(self.found - self.high).max(0.0);
        self.width() + 20.0 * missed
    }
}

/// All tests of a variant, those of one value and those of a ratio, by what
/// they are grouped by.
pub(super) struct Check {
    model: ActivityModel,
    groups: BTreeMap<(&'static str, &'static str, String), Vec<Tested>>,
}

/// The overall figures of a variant.
pub(super) struct Summary {
    gamma: [f64; 4],
    ratio: [f64; 4],
}

impl Check {
    pub(super) const HEAD: &'static str = "model,figure,by,class,values,coverage,median_width_in_ln,mean_width_in_ln,interval_score\n";

    /// Fits four folds and tests the fifth, each in turn. A ratio is tested
    /// where both of its values are held out.
    pub(super) fn cross_validated(cases: &Cases, variant: Variant) -> Result<Self, Fault> {
        let mut check = Self {
            model: cases.model,
            groups: BTreeMap::new(),
        };
        for fold in 0..FOLDS {
            let fitted = fit::fit(cases, &cases.indices(|case| case.fold != fold), variant)?;
            let model = fitted.error_model(variant)?;
            for case in cases.all.iter().filter(|case| case.fold == fold) {
                let (low, high) = model.interval(fit::error_of(&model, case));
                let tested = Tested {
                    low,
                    high,
                    found: case.residual,
                };
                for (by, class) in groupings(case) {
                    check.add("gamma_infinity", by, class, tested);
                }
            }
            for pair in &cases.pairs {
                let (first, second) = (&cases.all[pair.first], &cases.all[pair.second]);
                if first.fold != fold || second.fold != fold {
                    continue;
                }
                let (low, high) = model.interval_of_difference(
                    fit::error_of(&model, first),
                    fit::error_of(&model, second),
                    pair.likeness,
                    first.solvent.1,
                );
                let tested = Tested {
                    low,
                    high,
                    found: first.residual - second.residual,
                };
                let water = if first.in_water() {
                    "water"
                } else {
                    "not water"
                };
                for (by, class) in [
                    ("all", "all".to_owned()),
                    ("aqueous", water.to_owned()),
                    ("likeness", pair.likeness.id().to_owned()),
                    ("solvent", first.solvent.1.id().to_owned()),
                ] {
                    check.add("selectivity", by, class, tested);
                }
            }
        }
        Ok(check)
    }

    fn add(&mut self, figure: &'static str, by: &'static str, class: String, tested: Tested) {
        let group = self.groups.entry((figure, by, class)).or_default();
        group.push(tested);
    }

    /// Lines of the table of coverage.
    pub(super) fn table(&self) -> String {
        let mut text = String::new();
        for ((figure, by, class), tested) in &self.groups {
            let [coverage, median, mean, score] = figures(tested);
            writeln!(
                text,
                "{},{figure},{by},{class},{},{coverage:.3},{median:.2},{mean:.2},{score:.2}",
                self.model.id(),
                tested.len()
            )
            .expect("writing to a text does not fail");
        }
        text
    }

    pub(super) fn summary(&self) -> Summary {
        let all = |figure| figures(&self.groups[&(figure, "all", "all".to_owned())]);
        Summary {
            gamma: all("gamma_infinity"),
            ratio: all("selectivity"),
        }
    }
}

/// Coverage, median and mean width, mean score.
fn figures(tested: &[Tested]) -> [f64; 4] {
    let n = tested.len() as f64;
    let held = tested.iter().filter(|one| one.holds()).count() as f64;
    let widths = tested.iter().map(|one| (one.width(), 1.0)).collect();
    [
        held / n,
        fit::quantile(widths, 0.5),
        tested.iter().map(Tested::width).sum::<f64>() / n,
        tested.iter().map(Tested::score).sum::<f64>() / n,
    ]
}

/// What the coverage of a case is told by.
fn groupings(case: &Case) -> [(&'static str, String); 6] {
    let water = if case.in_water() {
        "water"
    } else {
        "not water"
    };
    let band = |edges: &[f64], value: f64, unit: &str| {
        let above = edges.iter().filter(|&&edge| value >= edge).count();
        match above {
            0 => format!("1: below {}{unit}", edges[0]),
            above if above == edges.len() => {
                format!("{}: from {}{unit}", above + 1, edges[above - 1])
            }
            above => format!(
                "{}: {} to {}{unit}",
                above + 1,
                edges[above - 1],
                edges[above]
            ),
        }
    };
    [
        ("all", "all".into()),
        ("solute", case.solute.1.id().into()),
        ("solvent", case.solvent.1.id().into()),
        ("aqueous", water.into()),
        (
            "temperature",
            band(
                &[290.0, 310.0, 330.0, 350.0, 370.0],
                case.temperature_k,
                " K",
            ),
        ),
        (
            "predicted",
            band(&[-0.5, 0.0, 0.5, 1.0, 2.0, 4.0, 7.0], case.predicted, ""),
        ),
    ]
}

impl Summary {
    pub(super) const HEAD: &'static str = "model,variant,gamma_coverage,gamma_median_width,gamma_mean_width,gamma_score,ratio_coverage,ratio_median_width,ratio_mean_width,ratio_score\n";

    pub(super) fn line(&self, model: ActivityModel, variant: Variant) -> String {
        let [a, b, c, d] = self.gamma;
        let [e, f, g, h] = self.ratio;
        format!(
            "{},{},{a:.3},{b:.2},{c:.2},{d:.2},{e:.3},{f:.2},{g:.2},{h:.2}\n",
            model.id(),
            variant.name
        )
    }
}

impl fmt::Display for Summary {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "the 90 % interval of ln gamma holds {:.1} % (median width {:.2}), that of a ratio in one solvent {:.1} % (median width {:.2})",
            100.0 * self.gamma[0],
            self.gamma[1],
            100.0 * self.ratio[0],
            self.ratio[1]
        )
    }
}
