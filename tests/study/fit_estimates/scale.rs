//! How the width of the error depends on the molecule.
//!
//! No residual is in both halves: the width of a molecule comes from residuals of the other
//! parts alone, those that enter through its relatives and through the relatives of the
//! molecules learned from included.

use faer::Mat;
use faer::prelude::*;
use groupsmith::pure::fitted::{Scale, Signs, Standing};
use rayon::prelude::*;

use super::data::FOLDS;

const SIGNS: usize = Scale::SIGNS;

/// What part of the residuals the interval is to hold.
const SHARE: f64 = 0.9;

/// Pull of the weights of the standardised signs to zero.
const PULL: f64 = 30.0;

/// How far from the mean a sign counts, in spreads.
const HELD: f64 = 3.0;

/// Range about the quantile in which the loss is rounded, in ln of the width.
const ROUNDING: f64 = 0.2;

/// Members that a class needs for its own term to count half: families and
/// nearness, and sizes, of which there are few.
const HALF_OWN: f64 = 20.0;
const HALF_OWN_SIZE: f64 = 10.0;

/// The scale fitted on all residuals, and for each residual the half width of the 90 %
/// interval that a scale fitted without its part gives.
///
/// `standings` gives the standings of all molecules with the residuals of a part
/// left out, or with all of them.
pub(crate) fn fit(
    standings: &(dyn Fn(Option<usize>) -> Vec<Standing> + Sync),
    residuals: &[f64],
    folds: &[usize],
) -> (Scale, Vec<f64>) {
    let members = |keep: &dyn Fn(usize) -> bool| -> Vec<usize> {
        (0..residuals.len()).filter(|&i| keep(folds[i])).collect()
    };
    let one_out: Vec<(Vec<usize>, Vec<f64>, Vec<f64>)> = (0..FOLDS)
        .into_par_iter()
        .map(|fold| {
            let standings = standings(Some(fold));
            let learned = members(&|other| other != fold);
            // ratios of the parts learned from, each by a shape that did not see it
            let mut ratios = vec![0.0; residuals.len()];
            for part in (0..FOLDS).filter(|&part| part != fold) {
                let inner = shape(
                    &standings,
                    residuals,
                    &members(&|other| other != fold && other != part),
                );
                for i in members(&|other| other == part) {
                    ratios[i] = ln_ratio(&inner, &standings[i], residuals[i]);
                }
            }
            let mut scale = shape(&standings, residuals, &learned);
            let own = members(&|other| other == fold);
            let ratios_of_own = own
                .iter()
                .map(|&i| ln_ratio(&scale, &standings[i], residuals[i]))
                .collect();
            let ratios: Vec<f64> = learned.iter().map(|&i| ratios[i]).collect();
            let learned: Vec<&Standing> = learned.iter().map(|&i| &standings[i]).collect();
            hold(&mut scale, &learned, ratios);
            let half_widths = own
                .iter()
                .map(|&i| scale.half_width(&standings[i]))
                .collect();
            (own, ratios_of_own, half_widths)
        })
        .collect();
    let mut half_widths = vec![0.0; residuals.len()];
    let mut ratios = vec![0.0; residuals.len()];
    for (own, ratios_of_own, half_widths_of_own) in one_out {
        for ((i, ratio), half_width) in own.into_iter().zip(ratios_of_own).zip(half_widths_of_own) {
            ratios[i] = ratio;
            half_widths[i] = half_width;
        }
    }
    let standings = standings(None);
    let mut scale = shape(&standings, residuals, &members(&|_| true));
    hold(&mut scale, &standings.iter().collect::<Vec<_>>(), ratios);
    (scale, half_widths)
}

fn ln_ratio(scale: &Scale, standing: &Standing, residual: f64) -> f64 {
    residual.abs().max(f64::MIN_POSITIVE).ln() - scale.by_signs(&standing.signs)
}

/// Weights of the signs by quantile regression of ln of the residuals (R. Koenker,
/// G. Bassett, Econometrica 46 (1978) 33–50, from memory) with the corner of the loss
/// rounded, which makes it smooth and convex (Newton's method). Classes have no terms yet.
fn shape(standings: &[Standing], residuals: &[f64], chosen: &[usize]) -> Scale {
    let count = chosen.len() as f64;
    let usual = chosen.iter().map(|&i| residuals[i].abs()).sum::<f64>() / count;
    // no residual is taken for better known than a hundredth of the usual
    let targets: Vec<f64> = chosen
        .iter()
        .map(|&i| (residuals[i].abs() + 0.01 * usual).ln())
        .collect();
    let mut scale = Scale::default();
    let mut mean = [0.0; SIGNS];
    let mut spread = [1.0; SIGNS];
    for at in 1..SIGNS {
        let values = || chosen.iter().map(|&i| standings[i].signs[at]);
        mean[at] = values().sum::<f64>() / count;
        let square = values()
            .map(|value| (value - mean[at]).powi(2))
            .sum::<f64>()
            / count;
        spread[at] = square.sqrt();
        scale.least[at] = mean[at] - HELD * spread[at];
        scale.most[at] = mean[at] + HELD * spread[at];
        // a sign that does not vary says nothing and is held where it is
        if spread[at] < 1e-9 {
            spread[at] = 1.0;
        }
    }
    (scale.least[0], scale.most[0]) = (1.0, 1.0);
    let rows: Vec<Signs> = chosen
        .iter()
        .map(|&i| {
            std::array::from_fn(|at| {
                let held = standings[i].signs[at].max(scale.least[at]);
                (held.min(scale.most[at]) - mean[at]) / spread[at]
            })
        })
        .collect();
    let weights = quantile_weights(&rows, &targets);
    for at in 0..SIGNS {
        scale.weights[at] = weights[at] / spread[at];
        scale.weights[0] -= if at > 0 {
            scale.weights[at] * mean[at]
        } else {
            0.0
        };
    }
    scale
}

/// Weights that put a share of the targets below the sum; the first sign is 1 and is
/// not pulled.
fn quantile_weights(rows: &[Signs], targets: &[f64]) -> Signs {
    let pull = |at: usize| if at == 0 { 0.0 } else { PULL };
    let off = |weights: &Signs, i: usize| -> f64 {
        targets[i] - rows[i].iter().zip(weights).map(|(s, w)| s * w).sum::<f64>()
    };
    let loss = |weights: &Signs| -> f64 {
        let pulled: f64 = (0..SIGNS)
            .map(|at| 0.5 * pull(at) * weights[at] * weights[at])
            .sum();
        let each = (0..rows.len()).map(|i| {
            let u = off(weights, i);
            // ln (1 + exp (−u / rounding)) without overflow
            let corner = (-u / ROUNDING).max(0.0) + (-(u / ROUNDING).abs()).exp().ln_1p();
            SHARE * u + ROUNDING * corner
        });
        each.sum::<f64>() + pulled
    };
    let mut weights = [0.0; SIGNS];
    weights[0] = quantile(targets.to_vec());
    let mut now = loss(&weights);
    for _ in 0..200 {
        let mut gradient = [0.0; SIGNS];
        let mut hessian = [[0.0; SIGNS]; SIGNS];
        for (i, row) in rows.iter().enumerate() {
            let below = 1.0 / (1.0 + (off(&weights, i) / ROUNDING).exp());
            let curvature = below * (1.0 - below) / ROUNDING + 1e-4;
            for a in 0..SIGNS {
                gradient[a] += (below - SHARE) * row[a];
                let part = curvature * row[a];
                for b in 0..=a {
                    hessian[a][b] += part * row[b];
                }
            }
        }
        for a in 0..SIGNS {
            gradient[a] += pull(a) * weights[a];
            hessian[a][a] += pull(a) + 1e-6;
        }
        let step = solved(&hessian, &gradient);
        let slope: f64 = step.iter().zip(&gradient).map(|(s, g)| s * g).sum();
        let mut part = 1.0;
        let (next, after) = loop {
            let next: Signs = std::array::from_fn(|at| weights[at] - part * step[at]);
            let after = loss(&next);
            if after <= now - 1e-4 * part * slope || part < 1e-6 {
                break (next, after);
            }
            part *= 0.5;
        };
        if after >= now {
            break;
        }
        let gained = now - after;
        (weights, now) = (next, after);
        if gained < 1e-9 * rows.len() as f64 {
            break;
        }
    }
    weights
}

/// The step of Newton's method; of the positive definite matrix the lower half is given.
fn solved(lower: &[Signs; SIGNS], right: &Signs) -> Signs {
    let matrix = Mat::from_fn(SIGNS, SIGNS, |i, j| lower[i.max(j)][i.min(j)]);
    let right = Mat::from_fn(SIGNS, 1, |i, _| right[i]);
    let step = matrix.partial_piv_lu().solve(&right);
    std::array::from_fn(|i| step[(i, 0)])
}

/// Terms of the classes and the constant that make the intervals hold: split conformal
/// prediction by class (V. Vovk, A. Gammerman, G. Shafer, Algorithmic Learning in a Random
/// World, Springer 2005, Mondrian predictors, from memory), in turn for family, size and
/// nearness, with terms of small classes pulled to nothing.
fn hold(scale: &mut Scale, standings: &[&Standing], mut ratios: Vec<f64>) {
    let mut nearest: Vec<f64> = standings.iter().map(|one| one.nearest).collect();
    nearest.sort_by(f64::total_cmp);
    scale.nearness_ends = [1, 2].map(|third| nearest[third * nearest.len() / 3]);
    let typical = quantile(ratios.clone());
    ratios.iter_mut().for_each(|ratio| *ratio -= typical);
    let classes: [Vec<usize>; 3] = [
        standings.iter().map(|one| one.family as usize).collect(),
        standings.iter().map(|one| one.size.0).collect(),
        standings
            .iter()
            .map(|one| scale.nearness_class(one.nearest))
            .collect(),
    ];
    let terms: [(&mut [f64], f64); 3] = [
        (&mut scale.families, HALF_OWN),
        (&mut scale.sizes, HALF_OWN_SIZE),
        (&mut scale.nearness, HALF_OWN),
    ];
    let mut of_kinds: Vec<_> = terms.into_iter().zip(&classes).collect();
    for _ in 0..8 {
        for ((terms, half_own), classes) in &mut of_kinds {
            for (class, term) in terms.iter_mut().enumerate() {
                let own: Vec<usize> = (0..ratios.len()).filter(|&i| classes[i] == class).collect();
                if own.is_empty() {
                    continue;
                }
                let full = *term + quantile(own.iter().map(|&i| ratios[i]).collect());
                let size = (own.len() as f64).powi(2);
                let settled = full * size / (size + *half_own * *half_own);
                for i in own {
                    ratios[i] -= settled - *term;
                }
                *term = settled;
            }
        }
    }
    drop(of_kinds);
    scale.weights[0] += typical + quantile(ratios);
}

/// The value that one more of the kind stays below nine times of ten.
fn quantile(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    let rank = (SHARE * (values.len() + 1) as f64).ceil() as usize;
    values[rank.min(values.len()) - 1]
}
