//! Small dense systems.

/// Solves A x = b in place: `a` (n × n by rows) is overwritten, `b` becomes x.
///
/// Gaussian elimination with partial pivoting. Returns `false`, with `a` and
/// `b` in an intermediate state, if a pivot is not larger than `n` times the
/// rounding error of the largest element, so that x has no correct digits.
///
/// # Panics
///
/// If `a` is not n × n for n = `b.len()`.
///
/// # Complexity
///
/// n³/3 multiplications.
pub fn solve_dense(a: &mut [f64], b: &mut [f64]) -> bool {
    let n = b.len();
    assert_eq!(a.len(), n * n, "the matrix has to be n by n");
    let largest = a.iter().fold(0.0_f64, |most, value| most.max(value.abs()));
    let least_pivot = largest * f64::EPSILON * n as f64;
    for column in 0..n {
        let pivot_row = (column..n)
            .max_by(|&i, &j| a[i * n + column].abs().total_cmp(&a[j * n + column].abs()))
            .unwrap_or(column);
        let pivot = a[pivot_row * n + column];
        if !(pivot.abs() > least_pivot && pivot.is_finite()) {
            return false;
        }
        if pivot_row != column {
            for k in 0..n {
                a.swap(column * n + k, pivot_row * n + k);
            }
            b.swap(column, pivot_row);
        }
        for row in column + 1..n {
            let factor = a[row * n + column] / pivot;
            if factor != 0.0 {
                for k in column..n {
                    a[row * n + k] -= factor * a[column * n + k];
                }
                b[row] -= factor * b[column];
            }
        }
    }
    for row in (0..n).rev() {
        let known: f64 = (row + 1..n).map(|k| a[row * n + k] * b[k]).sum();
        b[row] = (b[row] - known) / a[row * n + row];
    }
    true
}

#[cfg(test)]
mod tests {
    use super::solve_dense;

    #[test]
    fn a_system_that_needs_pivoting_is_solved() {
        let mut a = [0.0, 2.0, 1.0, 1.0, -1.0, 0.0, 3.0, 0.0, -2.0];
        let mut b = [7.0, -1.0, -3.0];
        assert!(solve_dense(&mut a, &mut b));
        for (x, expected) in b.iter().zip([1.0, 2.0, 3.0]) {
            assert!((x - expected).abs() < 1e-14, "{x} for {expected}");
        }
    }

    #[test]
    fn a_singular_system_is_refused() {
        let mut a = [1.0, 2.0, 2.0, 4.0];
        assert!(!solve_dense(&mut a, &mut [1.0, 1.0]));
    }
}
