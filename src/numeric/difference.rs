//! Finite differences, for checking analytic derivatives.

/// df/dx at `x` from two evaluations, error of order `step`².
pub fn central_difference(mut f: impl FnMut(f64) -> f64, x: f64, step: f64) -> f64 {
    (f(x + step) - f(x - step)) / (2.0 * step)
}
