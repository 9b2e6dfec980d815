//! How the width of the error depends on the molecule.

use faer::Mat;
use faer::prelude::*;
use groupsmith::pure::fitted::Scale;

use super::data::FOLDS;

const SIGNS: usize = Scale::SIGNS;

/// Pull of the weights to zero, in residuals.
const PULL: f64 = 3.0;

/// The scale fitted on all residuals, and for each residual the half width of the 90 %
/// interval that a scale fitted without its part gives.
pub(crate) fn fit(signs: &[[f64; SIGNS]], residuals: &[f64], folds: &[usize]) -> (Scale, Vec<f64>) {
    let part = |keep: &dyn Fn(usize) -> bool| {
        let chosen: Vec<usize> = (0..residuals.len()).filter(|&i| keep(folds[i])).collect();
        fit_part(signs, residuals, &chosen)
    };
    let mut half_widths = vec![0.0; residuals.len()];
    for fold in 0..FOLDS {
        let scale = part(&|other| other != fold);
        for i in (0..residuals.len()).filter(|&i| folds[i] == fold) {
            half_widths[i] = scale.half_width(&signs[i]);
        }
    }
    (part(&|_| true), half_widths)
}

/// Weights by maximum likelihood of Laplace's distribution, which is convex in them
/// (Newton's method), then the factor that holds nine residuals of ten.
fn fit_part(signs: &[[f64; SIGNS]], residuals: &[f64], chosen: &[usize]) -> Scale {
    let count = chosen.len() as f64;
    let mean = chosen.iter().map(|&i| residuals[i].abs()).sum::<f64>() / count;
    // no residual is taken for better known than a hundredth of the usual
    let floor = 0.01 * mean;
    let mut weights = [0.0; SIGNS];
    weights[0] = mean.ln();
    for _ in 0..100 {
        let mut gradient = [0.0; SIGNS];
        let mut hessian = [[0.0; SIGNS]; SIGNS];
        for &i in chosen {
            let sum: f64 = weights.iter().zip(&signs[i]).map(|(w, s)| w * s).sum();
            let ratio = (residuals[i].abs() + floor) * (-sum).exp();
            // a wild point must not set the width of its kin
            let ratio = ratio.min(8.0);
            for a in 0..SIGNS {
                gradient[a] += (1.0 - ratio) * signs[i][a];
                for b in 0..SIGNS {
                    hessian[a][b] += ratio * signs[i][a] * signs[i][b];
                }
            }
        }
        for a in 1..SIGNS {
            gradient[a] += PULL * weights[a];
            hessian[a][a] += PULL;
        }
        let step = solved(hessian, gradient);
        let longest = step.iter().fold(0.0_f64, |most, s| most.max(s.abs()));
        let damp = if longest > 1.0 { 1.0 / longest } else { 1.0 };
        for (weight, step) in weights.iter_mut().zip(step) {
            *weight -= damp * step;
        }
        if longest < 1e-9 {
            break;
        }
    }
    let mut scale = Scale {
        weights,
        factor: 1.0,
    };
    let mut ratios: Vec<f64> = chosen
        .iter()
        .map(|&i| residuals[i].abs() / scale.half_width(&signs[i]))
        .collect();
    ratios.sort_by(f64::total_cmp);
    let rank = (0.9 * (count + 1.0)).ceil() as usize;
    scale.factor = ratios[rank.min(ratios.len()) - 1];
    scale
}

/// The step of Newton's method; the matrix is positive definite.
fn solved(matrix: [[f64; SIGNS]; SIGNS], right: [f64; SIGNS]) -> [f64; SIGNS] {
    let matrix = Mat::from_fn(SIGNS, SIGNS, |i, j| matrix[i][j]);
    let right = Mat::from_fn(SIGNS, 1, |i, _| right[i]);
    let step = matrix.partial_piv_lu().solve(&right);
    std::array::from_fn(|i| step[(i, 0)])
}
