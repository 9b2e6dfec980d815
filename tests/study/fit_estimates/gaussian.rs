//! Gaussian-process regression with a covariance that is a sum of a linear
//! part and a part of compact support.

use std::error::Error;

use faer::prelude::*;
use faer::{Mat, Side};
use rayon::prelude::*;

/// Rows of sparse terms: number and value.
pub(crate) type Rows = Vec<Vec<(u32, f64)>>;

/// Terms brought to one scale: value less mean over spread, times a weight.
pub(crate) struct Standard {
    pub(crate) mean: Vec<f64>,
    /// Weight over spread.
    pub(crate) factor: Vec<f64>,
}

impl Standard {
    /// Spread of every term over the rows, those of inputs apart: `inputs` is the
    /// range of their numbers, `linear` and `input` the prior variances of the two kinds.
    pub(crate) fn of(
        rows: &Rows,
        terms: usize,
        inputs: (u32, u32),
        linear: f64,
        input: f64,
    ) -> Self {
        let mut sum = vec![0.0; terms];
        let mut square = vec![0.0; terms];
        for &(term, value) in rows.iter().flatten() {
            sum[term as usize] += value;
            square[term as usize] += value * value;
        }
        let count = rows.len() as f64;
        let is_input = |term: usize| (inputs.0..inputs.1).contains(&(term as u32));
        let used = |inputs: bool| {
            let of_kind = (0..terms).filter(|&term| is_input(term) == inputs);
            of_kind.filter(|&term| square[term] > 0.0).count().max(1) as f64
        };
        let (weights, input_weights) = ((linear / used(false)).sqrt(), (input / used(true)).sqrt());
        let mean: Vec<f64> = sum.iter().map(|sum| sum / count).collect();
        let factor = (0..terms)
            .map(|term| {
                if square[term] == 0.0 {
                    return 0.0;
                }
                let spread = (square[term] / count - mean[term] * mean[term])
                    .max(0.0)
                    .sqrt();
                if is_input(term) {
                    input_weights / spread.max(1e-9)
                } else {
                    // rare terms keep a small weight, or one molecule would set them
                    weights / spread.max(0.1)
                }
            })
            .collect();
        Self { mean, factor }
    }

    /// Adds the linear part of the covariance of all rows.
    pub(crate) fn add_covariance(&self, rows: &Rows, matrix: &mut [Vec<f64>]) {
        let terms = self.mean.len();
        let mut lists: Vec<Vec<(u32, f64)>> = vec![Vec::new(); terms];
        for (number, row) in rows.iter().enumerate() {
            for &(term, value) in row {
                lists[term as usize].push((number as u32, value * self.factor[term as usize]));
            }
        }
        let center: Vec<f64> = self
            .mean
            .iter()
            .zip(&self.factor)
            .map(|(m, f)| m * f)
            .collect();
        let constant: f64 = center.iter().map(|c| c * c).sum();
        let shift: Vec<f64> = rows
            .iter()
            .map(|row| {
                row.iter()
                    .map(|&(term, value)| {
                        value * self.factor[term as usize] * center[term as usize]
                    })
                    .sum()
            })
            .collect();
        matrix
            .par_iter_mut()
            .enumerate()
            .for_each(|(number, line)| {
                for &(term, value) in &rows[number] {
                    let value = value * self.factor[term as usize];
                    for &(other, theirs) in &lists[term as usize] {
                        line[other as usize] += value * theirs;
                    }
                }
                for (entry, shift_of_other) in line.iter_mut().zip(&shift) {
                    *entry += constant - shift[number] - shift_of_other;
                }
            });
    }

    /// Weights of the raw terms and the constant that go with the parts of the rows.
    pub(crate) fn weights(&self, rows: &Rows, parts: &[f64]) -> (Vec<f64>, f64) {
        let mut weights = vec![0.0; self.mean.len()];
        for (row, part) in rows.iter().zip(parts) {
            for &(term, value) in row {
                weights[term as usize] += part * value * self.factor[term as usize];
            }
        }
        let total: f64 = parts.iter().sum();
        let mut constant = 0.0;
        for ((weight, mean), factor) in weights.iter_mut().zip(&self.mean).zip(&self.factor) {
            *weight = (*weight - total * mean * factor) * factor;
            constant -= *weight * mean;
        }
        (weights, constant)
    }
}

/// The parts of the chosen rows: covariance plus the noise of each, solved for the targets
/// (which are those of the chosen rows alone).
pub(crate) fn solve(
    covariance: &[Vec<f64>],
    chosen: &[usize],
    noise: &[f64],
    targets: &[f64],
) -> Result<Vec<f64>, Box<dyn Error>> {
    let size = chosen.len();
    let matrix = Mat::from_fn(size, size, |i, j| {
        covariance[chosen[i]][chosen[j]] + if i == j { noise[chosen[i]] } else { 0.0 }
    });
    let right = Mat::from_fn(size, 1, |i, _| targets[i]);
    let factor = matrix
        .llt(Side::Lower)
        .map_err(|_| "the covariance is not positive definite")?;
    let solution = factor.solve(&right);
    Ok((0..size).map(|i| solution[(i, 0)]).collect())
}
