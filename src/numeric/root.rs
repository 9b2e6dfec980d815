//! Roots of one equation in one unknown.

use thiserror::Error;

/// A root and how it was reached.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Root {
    /// The unknown.
    pub x: f64,
    /// The function there.
    pub residual: f64,
    /// Evaluations of the function.
    pub evaluations: u32,
}

/// When a root is good enough: either bound ends the search.
#[derive(Clone, Copy, Debug)]
pub struct RootTolerance {
    /// Largest |f|.
    pub residual: f64,
    /// Largest width of the interval that holds the root.
    pub width: f64,
    /// Most evaluations.
    pub evaluations: u32,
}

/// Why there is no root.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum RootError<E> {
    /// The function itself failed.
    #[error(transparent)]
    Function(#[from] E),
    /// The function has no change of sign between the ends.
    #[error("no change of sign between {low} and {high}")]
    NotBracketed {
        /// Lower end.
        low: f64,
        /// Upper end.
        high: f64,
    },
    /// The evaluations were used up.
    #[error("no convergence in {evaluations} evaluations: residual {residual} at {last}")]
    NotConverged {
        /// Evaluations of the function.
        evaluations: u32,
        /// The function at the last iterate.
        residual: f64,
        /// The last iterate.
        last: f64,
    },
}

/// A root between `low` and `high`, where the function has opposite signs.
///
/// Brent's method (Algorithms for Minimization without Derivatives, 1973,
/// chapter 4): inverse quadratic steps, secants, and bisection as the fallback.
/// The signs at the ends are evaluated first.
///
/// # Errors
///
/// [`RootError`]; a function that fails ends the search with its error.
pub fn bracketed_root<E>(
    mut f: impl FnMut(f64) -> Result<f64, E>,
    low: f64,
    high: f64,
    tolerance: RootTolerance,
) -> Result<Root, RootError<E>> {
    let (mut a, mut b) = (low, high);
    let (mut fa, mut fb) = (f(a)?, f(b)?);
    let mut evaluations = 2;
    if fa == 0.0 {
        return Ok(root(a, fa, evaluations));
    }
    if fb != 0.0 && (fa > 0.0) == (fb > 0.0) {
        return Err(RootError::NotBracketed { low, high });
    }
    // b is the best iterate, c the last point of the other sign, d and e the last two steps
    let (mut c, mut fc) = (a, fa);
    let mut d = b - a;
    let mut e = d;
    loop {
        if fc.abs() < fb.abs() {
            (a, b, c) = (b, c, b);
            (fa, fb, fc) = (fb, fc, fb);
        }
        let least_step = 2.0 * f64::EPSILON * b.abs() + 0.5 * tolerance.width;
        let half = 0.5 * (c - b);
        if fb.abs() <= tolerance.residual || half.abs() <= least_step {
            return Ok(root(b, fb, evaluations));
        }
        if evaluations >= tolerance.evaluations {
            return Err(RootError::NotConverged {
                evaluations,
                residual: fb,
                last: b,
            });
        }
        if e.abs() >= least_step && fa.abs() > fb.abs() {
            let s = fb / fa;
            let (mut p, mut q) = if a == c {
                (2.0 * half * s, 1.0 - s)
            } else {
                let (q, r) = (fa / fc, fb / fc);
                (
                    s * (2.0 * half * q * (q - r) - (b - a) * (r - 1.0)),
                    (q - 1.0) * (r - 1.0) * (s - 1.0),
                )
            };
            if p > 0.0 {
                q = -q;
            } else {
                p = -p;
            }
            if 2.0 * p < (3.0 * half * q - (least_step * q).abs()).min((e * q).abs()) {
                e = d;
                d = p / q;
            } else {
                d = half;
                e = half;
            }
        } else {
            d = half;
            e = half;
        }
        (a, fa) = (b, fb);
        b += if d.abs() > least_step {
            d
        } else {
            least_step.copysign(half)
        };
        fb = f(b)?;
        evaluations += 1;
        if (fb > 0.0) == (fc > 0.0) {
            (c, fc) = (a, fa);
            d = b - a;
            e = d;
        }
    }
}

/// The root of a rising function between `low` and `high`, from a first guess.
///
/// Secant steps kept inside the interval; the ends are evaluated only if the
/// search runs into them, so a good guess costs a few evaluations and the
/// function need not be cheap, or even defined, far away. `slope` is a guess of
/// df/dx for the first step.
///
/// # Errors
///
/// [`RootError`]; `NotBracketed` if the function does not change sign between the ends.
pub fn rising_root<E>(
    mut f: impl FnMut(f64) -> Result<f64, E>,
    (low, high): (f64, f64),
    guess: f64,
    slope: f64,
    tolerance: RootTolerance,
) -> Result<Root, RootError<E>> {
    let (mut a, mut b) = (low, high);
    let (mut a_tried, mut b_tried) = (false, false);
    let mut x = guess.clamp(low, high);
    let mut slope = slope;
    let mut last: Option<(f64, f64)> = None;
    let mut width_before = f64::INFINITY;
    let mut evaluations = 0;
    loop {
        let fx = f(x)?;
        evaluations += 1;
        if fx.abs() <= tolerance.residual {
            return Ok(root(x, fx, evaluations));
        }
        if fx > 0.0 {
            if x <= low {
                return Err(RootError::NotBracketed { low, high });
            }
            (b, b_tried) = (x, true);
        } else {
            if x >= high {
                return Err(RootError::NotBracketed { low, high });
            }
            (a, a_tried) = (x, true);
        }
        if a_tried && b_tried && b - a <= tolerance.width {
            return Ok(root(x, fx, evaluations));
        }
        if evaluations >= tolerance.evaluations {
            return Err(RootError::NotConverged {
                evaluations,
                residual: fx,
                last: x,
            });
        }
        if let Some((x0, f0)) = last {
            let secant = (fx - f0) / (x - x0);
            if secant > 0.0 && secant.is_finite() {
                slope = secant;
            }
        }
        last = Some((x, fx));
        let mut next = x - fx / slope;
        // every fourth step has to halve the interval, once there is one
        let stalls = a_tried && b_tried && evaluations % 4 == 0 && {
            let stalls = b - a > 0.5 * width_before;
            width_before = b - a;
            stalls
        };
        if !(next > a && next < b) || stalls {
            next = match (a_tried, b_tried) {
                (true, true) => 0.5 * (a + b),
                _ if next >= b && !b_tried => b,
                _ if next <= a && !a_tried => a,
                _ => 0.5 * (a + b),
            };
        }
        x = next;
    }
}

fn root(x: f64, residual: f64, evaluations: u32) -> Root {
    Root {
        x,
        residual,
        evaluations,
    }
}

#[cfg(test)]
mod tests {
    use std::convert::Infallible;

    use super::*;

    const TIGHT: RootTolerance = RootTolerance {
        residual: 0.0,
        width: 1e-14,
        evaluations: 100,
    };

    #[test]
    fn brent_finds_the_root_of_a_cubic() {
        let found = bracketed_root(
            |x| Ok::<_, Infallible>(x * x * x - 2.0 * x - 5.0),
            2.0,
            3.0,
            TIGHT,
        )
        .unwrap();
        // Wallis's example; root to 15 digits from memory
        assert!((found.x - 2.094_551_481_542_327).abs() < 1e-14);
        assert!(found.evaluations < 15);
    }

    #[test]
    fn brent_survives_a_step_function() {
        let found = bracketed_root(
            |x| Ok::<_, Infallible>(if x < 0.3 { -1.0 } else { 1.0 }),
            0.0,
            1.0,
            TIGHT,
        )
        .unwrap();
        assert!((found.x - 0.3).abs() < 1e-13);
    }

    #[test]
    fn without_a_change_of_sign_there_is_no_root() {
        let found = bracketed_root(|x| Ok::<_, Infallible>(x * x + 1.0), -1.0, 1.0, TIGHT);
        assert!(matches!(found, Err(RootError::NotBracketed { .. })));
        let found = rising_root(
            |x| Ok::<_, Infallible>(x.exp()),
            (-5.0, 5.0),
            1.0,
            1.0,
            TIGHT,
        );
        assert!(matches!(found, Err(RootError::NotBracketed { .. })));
    }

    #[test]
    fn rising_root_converges_from_a_poor_guess() {
        let tolerance = RootTolerance {
            residual: 1e-12,
            ..TIGHT
        };
        for guess in [-8.0, 0.0, 9.0] {
            let found = rising_root(
                |x| Ok::<_, Infallible>(x.exp() - 3.0),
                (-10.0, 10.0),
                guess,
                1.0,
                tolerance,
            )
            .unwrap();
            assert!((found.x - 3.0_f64.ln()).abs() < 1e-12, "from {guess}");
        }
    }

    #[test]
    fn a_failing_function_ends_the_search() {
        let found = rising_root(|_| Err("no value"), (0.0, 1.0), 0.5, 1.0, TIGHT);
        assert_eq!(found, Err(RootError::Function("no value")));
    }

    #[test]
    fn running_out_of_steps_is_an_error_with_the_last_iterate() {
        let tolerance = RootTolerance {
            evaluations: 3,
            ..TIGHT
        };
        let found = rising_root(
            |x| Ok::<_, Infallible>(x.powi(9) - 0.5),
            (-2.0, 2.0),
            -1.9,
            1.0,
            tolerance,
        );
        assert!(matches!(
            found,
            Err(RootError::NotConverged { evaluations: 3, .. })
        ));
    }
}
