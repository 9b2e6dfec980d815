//! How many liquids a mixture forms, and which.

use crate::mixture::{Liquid, MixtureError};
use crate::numeric::solve_dense;

use super::bubble::check_composition;

/// One liquid of a mixture that has come to equilibrium.
#[derive(Clone, Debug, PartialEq)]
pub struct LiquidPhase {
    /// Moles of this liquid for each mole of the whole.
    pub fraction: f64,
    /// Mole fractions.
    pub x: Vec<f64>,
}

/// Most liquids that are looked for.
const MOST_PHASES: usize = 3;
/// A trial phase has to lower g/RT by more than this to count.
const LEAST_GAIN: f64 = 1e-9;
/// Largest difference of ln(x γ) between phases at equilibrium.
const EQUAL_ACTIVITY: f64 = 1e-10;
/// Substitution steps of one search.
const MOST_STEPS: u32 = 20_000;
/// Substitution steps before Newton steps are tried.
const WARM_UP: u32 = 12;
/// Steps after which substitution is damped by half, and by four fifths.
const STEADY: u32 = 60;
const HESITANT: u32 = 400;

/// The liquids that a mixture of overall composition `z` forms at the liquid's temperature.
///
/// The mixture is tested for stability by the tangent-plane distance
/// (Michelsen 1982): trial phases start near each pure component and between
/// them. An unstable mixture is split, the split brought to equal activities by
/// substitution and then Newton steps on the amounts, and the result tested
/// again, up to three liquids. Ordered by descending fraction.
///
/// # Units and shapes
///
/// `z`: length n, adds up to 1. Components with z = 0 do not enter the test.
///
/// # Source
///
/// Michelsen, Fluid Phase Equilib. 9 (1982) 1–19 and 21–40 (numbers from memory).
///
/// # Validity
///
/// A search from starting points, not a proof: a liquid whose basin none of the
/// starts reaches is missed. Solids are not considered.
///
/// # Errors
///
/// A composition that is none; [`MixtureError::NotConverged`].
pub fn liquid_phases(liquid: &mut dyn Liquid, z: &[f64]) -> Result<Vec<LiquidPhase>, MixtureError> {
    let n = liquid.components();
    check_composition(z, n)?;
    let mut phases = vec![LiquidPhase {
        fraction: 1.0,
        x: z.to_vec(),
    }];
    while phases.len() < MOST_PHASES {
        let Some(trial) = unstable_trial(liquid, &phases)? else {
            break;
        };
        phases = equilibrate(liquid, z, &phases, trial)?;
    }
    phases.sort_by(|a, b| b.fraction.total_cmp(&a.fraction));
    Ok(phases)
}

/// A trial composition below the tangent plane of the phases, the lowest found.
fn unstable_trial(
    liquid: &mut dyn Liquid,
    phases: &[LiquidPhase],
) -> Result<Option<Vec<f64>>, MixtureError> {
    let n = liquid.components();
    let reference = &phases[0].x;
    let mut d = vec![0.0; n];
    liquid.ln_gamma(reference, &mut d)?;
    for (d, &x) in d.iter_mut().zip(reference) {
        // ln 0 = −∞ keeps an absent component out of every trial phase
        *d += x.ln();
    }
    let present: Vec<usize> = (0..n).filter(|&i| reference[i] > 0.0).collect();
    if present.len() < 2 {
        return Ok(None);
    }
    let mut best: Option<(f64, Vec<f64>)> = None;
    for start in starts(&present, reference, n) {
        let (distance, w) = stationary(liquid, &d, start)?;
        if distance < -LEAST_GAIN && best.as_ref().is_none_or(|(least, _)| distance < *least) {
            best = Some((distance, w));
        }
    }
    Ok(best.map(|(_, w)| w))
}

/// Starting compositions: nearly pure, dilute in the others, and half of each pair.
fn starts(present: &[usize], z: &[f64], n: usize) -> Vec<Vec<f64>> {
    let mut starts = Vec::new();
    for &i in present {
        for share in [0.999, 0.7] {
            let mut w: Vec<f64> = z.iter().map(|z| z * (1.0 - share)).collect();
            w[i] += share;
            starts.push(w);
        }
    }
    for (at, &i) in present.iter().enumerate() {
        for &j in &present[at + 1..] {
            let mut w: Vec<f64> = (0..n).map(|k| 0.02 * z[k]).collect();
            w[i] += 0.49;
            w[j] += 0.49;
            starts.push(w);
        }
    }
    starts
}

/// A stationary point of the tangent-plane distance, from a start.
///
/// Substitution W_i = exp(d_i − ln γ_i(w)), with Newton steps in 2√W once it
/// has settled (Michelsen 1982, eqs. 17 ff.). Returns the distance, −ln Σ W.
fn stationary(
    liquid: &mut dyn Liquid,
    d: &[f64],
    start: Vec<f64>,
) -> Result<(f64, Vec<f64>), MixtureError> {
    let n = d.len();
    let mut amounts = start;
    let mut w = vec![0.0; n];
    let mut ln_gamma = vec![0.0; n];
    let mut slopes = vec![0.0; n * n];
    let mut step = vec![0.0; n];
    let mut hessian = vec![0.0; n * n];
    let mut residual_before = f64::INFINITY;
    for iteration in 0..MOST_STEPS {
        let total: f64 = amounts.iter().sum();
        for (w, amount) in w.iter_mut().zip(&amounts) {
            *w = amount / total;
        }
        liquid.ln_gamma(&w, &mut ln_gamma)?;
        let mut residual = 0.0_f64;
        for i in 0..n {
            if d[i] > f64::NEG_INFINITY && amounts[i] > 0.0 {
                let g = amounts[i].ln() + ln_gamma[i] - d[i];
                // trace components count by their amount: their ln γ follows the others
                residual = residual.max((g * amounts[i].sqrt()).abs());
            }
        }
        if residual < EQUAL_ACTIVITY {
            return Ok((-total.ln(), w));
        }
        let mut newton = false;
        if iteration >= WARM_UP && residual < 0.1 && residual < residual_before {
            liquid.composition_derivatives(&w, &mut slopes)?;
            for i in 0..n {
                let root_i = amounts[i].sqrt();
                step[i] = if amounts[i] > 0.0 {
                    -root_i * (amounts[i].ln() + ln_gamma[i] - d[i])
                } else {
                    0.0
                };
                for j in 0..n {
                    hessian[i * n + j] = root_i * amounts[j].sqrt() * slopes[i * n + j] / total;
                }
                hessian[i * n + i] += 1.0;
            }
            newton = solve_dense(&mut hessian, &mut step)
                && step.iter().zip(&amounts).all(|(step, amount)| {
                    // 2√W must stay positive and not move far
                    *amount == 0.0 || (0.5 * step / amount.sqrt()).abs() < 0.5
                });
        }
        residual_before = residual;
        // undamped substitution can swing around a stationary point for ever
        let share = match iteration {
            ..STEADY => 1.0,
            STEADY..HESITANT => 0.5,
            _ => 0.2,
        };
        for i in 0..n {
            if newton {
                let root = amounts[i].sqrt() + 0.5 * step[i];
                amounts[i] = root * root;
            } else if amounts[i] > 0.0 {
                let target = d[i] - ln_gamma[i];
                amounts[i] = (amounts[i].ln() * (1.0 - share) + target * share).exp();
            }
        }
    }
    Err(MixtureError::NotConverged {
        what: "the liquid stability test",
        iterations: MOST_STEPS,
        residual: residual_before,
        last: w,
    })
}

/// Equilibrium between the phases at hand and one more.
fn equilibrate(
    liquid: &mut dyn Liquid,
    z: &[f64],
    phases: &[LiquidPhase],
    trial: Vec<f64>,
) -> Result<Vec<LiquidPhase>, MixtureError> {
    let n = z.len();
    let mut x: Vec<Vec<f64>> = phases.iter().map(|phase| phase.x.clone()).collect();
    let mut beta: Vec<f64> = phases.iter().map(|phase| phase.fraction).collect();
    // as much of the new phase as the scarcest component allows, halved
    let share = 0.5
        * z.iter()
            .zip(&trial)
            .filter(|(z, _)| **z > 0.0)
            .map(|(z, w)| z / w)
            .fold(1.0, f64::min);
    for beta in &mut beta {
        *beta *= 1.0 - share;
    }
    beta.push(share);
    x.push(trial);

    let mut ln_gamma = vec![vec![0.0; n]; x.len()];
    let mut residual = f64::INFINITY;
    for iteration in 0..MOST_STEPS {
        for (x, ln_gamma) in x.iter().zip(&mut ln_gamma) {
            liquid.ln_gamma(x, ln_gamma)?;
        }
        if iteration > 0 {
            residual = activity_difference(z, &x, &beta, &ln_gamma);
            if residual < EQUAL_ACTIVITY {
                return Ok(finish(x, beta));
            }
        }
        if iteration >= WARM_UP
            && residual < 0.1
            && newton_step(liquid, z, &mut x, &mut beta, &ln_gamma)?
        {
            continue;
        }
        share_out(z, &ln_gamma, &mut beta);
        // a phase without amount or like another is dropped
        let mut at = 0;
        while at < x.len() {
            if beta[at] <= 0.0 && x.len() > 1 {
                beta.remove(at);
                x.remove(at);
                ln_gamma.remove(at);
            } else {
                at += 1;
            }
        }
        for i in 0..n {
            let e: f64 = beta
                .iter()
                .zip(&ln_gamma)
                .map(|(beta, ln_gamma)| beta * (-ln_gamma[i]).exp())
                .sum();
            for (x, ln_gamma) in x.iter_mut().zip(&ln_gamma) {
                x[i] = z[i] * (-ln_gamma[i]).exp() / e;
            }
        }
        for x in &mut x {
            let sum: f64 = x.iter().sum();
            for x in x.iter_mut() {
                *x /= sum;
            }
        }
        if x.len() == 1 {
            return Ok(vec![LiquidPhase {
                fraction: 1.0,
                x: z.to_vec(),
            }]);
        }
    }
    Err(MixtureError::NotConverged {
        what: "the liquid split",
        iterations: MOST_STEPS,
        residual,
        last: x.concat(),
    })
}

fn finish(x: Vec<Vec<f64>>, beta: Vec<f64>) -> Vec<LiquidPhase> {
    x.into_iter()
        .zip(beta)
        .map(|(x, fraction)| LiquidPhase { fraction, x })
        .collect()
}

/// Largest difference of ln(x γ) of any component between any two phases, and of the balance.
fn activity_difference(z: &[f64], x: &[Vec<f64>], beta: &[f64], ln_gamma: &[Vec<f64>]) -> f64 {
    let mut worst = 0.0_f64;
    for (i, &z) in z.iter().enumerate().filter(|(_, z)| **z > 0.0) {
        let mut low = f64::INFINITY;
        let mut high = f64::NEG_INFINITY;
        let mut balance = -z;
        for ((x, ln_gamma), beta) in x.iter().zip(ln_gamma).zip(beta) {
            let ln_activity = x[i].ln() + ln_gamma[i];
            low = low.min(ln_activity);
            high = high.max(ln_activity);
            balance += beta * x[i];
        }
        worst = worst.max(high - low).max(balance.abs());
    }
    worst
}

/// Phase fractions for fixed γ: the minimum of Σ β − Σ z ln Σ β/γ over β ≥ 0.
///
/// Michelsen's form of the Rachford–Rice equations for any number of phases;
/// convex, so Newton steps cut at the border find it.
fn share_out(z: &[f64], ln_gamma: &[Vec<f64>], beta: &mut [f64]) {
    let phases = beta.len();
    let factor: Vec<Vec<f64>> = ln_gamma
        .iter()
        .map(|row| row.iter().map(|value| (-value).exp()).collect())
        .collect();
    let mut active: Vec<bool> = vec![true; phases];
    for _ in 0..60 {
        let e: Vec<f64> = (0..z.len())
            .map(|i| (0..phases).map(|k| beta[k] * factor[k][i]).sum())
            .collect();
        let gradient: Vec<f64> = (0..phases)
            .map(|k| {
                1.0 - (0..z.len())
                    .map(|i| z[i] * factor[k][i] / e[i])
                    .sum::<f64>()
            })
            .collect();
        for k in 0..phases {
            if !active[k] && gradient[k] < 0.0 {
                active[k] = true;
            }
        }
        let free: Vec<usize> = (0..phases).filter(|&k| active[k]).collect();
        let m = free.len();
        let mut hessian = vec![0.0; m * m];
        let mut step: Vec<f64> = free.iter().map(|&k| -gradient[k]).collect();
        for (a, &k) in free.iter().enumerate() {
            for (b, &l) in free.iter().enumerate() {
                hessian[a * m + b] = (0..z.len())
                    .map(|i| z[i] * factor[k][i] * factor[l][i] / (e[i] * e[i]))
                    .sum();
            }
            hessian[a * m + a] += 1e-14;
        }
        if !solve_dense(&mut hessian, &mut step) {
            return;
        }
        let mut length = 1.0_f64;
        let mut blocked = None;
        for (&k, &step) in free.iter().zip(&step) {
            if beta[k] + step < 0.0 && -beta[k] / step < length {
                length = -beta[k] / step;
                blocked = Some(k);
            }
        }
        let mut moved = 0.0_f64;
        for (&k, &step) in free.iter().zip(&step) {
            beta[k] = (beta[k] + length * step).max(0.0);
            moved = moved.max((length * step).abs());
        }
        if let Some(k) = blocked {
            beta[k] = 0.0;
            active[k] = false;
        } else if moved < 1e-14 {
            return;
        }
    }
}

/// One Newton step on the amounts of every component in every phase.
///
/// A component's amount in the phase that holds most of it follows from the
/// balance; the others are the unknowns. Refused (`false`, nothing changed) if
/// an amount would fall below a tenth or the equations are singular.
fn newton_step(
    liquid: &mut dyn Liquid,
    z: &[f64],
    x: &mut [Vec<f64>],
    beta: &mut [f64],
    ln_gamma: &[Vec<f64>],
) -> Result<bool, MixtureError> {
    let (n, phases) = (z.len(), x.len());
    let amount = |k: usize, i: usize| beta[k] * x[k][i];
    let holder: Vec<usize> = (0..n)
        .map(|i| {
            (0..phases)
                .max_by(|&a, &b| amount(a, i).total_cmp(&amount(b, i)))
                .unwrap_or(0)
        })
        .collect();
    let unknowns: Vec<(usize, usize)> = (0..n)
        .filter(|&i| z[i] > 0.0)
        .flat_map(|i| (0..phases).map(move |k| (i, k)))
        .filter(|&(i, k)| k != holder[i])
        .collect();
    let mut phase_hessian = vec![vec![0.0; n * n]; phases];
    for k in 0..phases {
        liquid.composition_derivatives(&x[k], &mut phase_hessian[k])?;
        for i in 0..n {
            for j in 0..n {
                let cell = &mut phase_hessian[k][i * n + j];
                let own = if i == j && x[k][i] > 0.0 {
                    1.0 / x[k][i]
                } else {
                    0.0
                };
                *cell = (own - 1.0 + *cell) / beta[k];
            }
        }
    }
    let m = unknowns.len();
    let mut matrix = vec![0.0; m * m];
    let mut step = vec![0.0; m];
    for (a, &(i, k)) in unknowns.iter().enumerate() {
        let h = holder[i];
        step[a] = (x[h][i].ln() + ln_gamma[h][i]) - (x[k][i].ln() + ln_gamma[k][i]);
        for (b, &(j, l)) in unknowns.iter().enumerate() {
            let g = holder[j];
            let mut sum = 0.0;
            for (p, hessian) in phase_hessian.iter().enumerate() {
                let sign_a = f64::from(i8::from(p == k) - i8::from(p == h));
                let sign_b = f64::from(i8::from(p == l) - i8::from(p == g));
                if sign_a != 0.0 && sign_b != 0.0 {
                    sum += sign_a * sign_b * hessian[i * n + j];
                }
            }
            matrix[a * m + b] = sum;
        }
    }
    if !solve_dense(&mut matrix, &mut step) {
        return Ok(false);
    }
    let mut amounts: Vec<Vec<f64>> = (0..phases)
        .map(|k| (0..n).map(|i| amount(k, i)).collect())
        .collect();
    for (&(i, k), &step) in unknowns.iter().zip(&step) {
        amounts[k][i] += step;
        amounts[holder[i]][i] -= step;
    }
    let too_far = (0..phases).any(|k| {
        (0..n).any(|i| {
            let before = amount(k, i);
            before > 0.0 && (amounts[k][i].is_nan() || amounts[k][i] <= 0.1 * before)
        })
    });
    if too_far {
        return Ok(false);
    }
    for k in 0..phases {
        beta[k] = amounts[k].iter().sum();
        for i in 0..n {
            x[k][i] = amounts[k][i] / beta[k];
        }
    }
    Ok(true)
}
