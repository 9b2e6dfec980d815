//! The normal distribution, and integrals over a stretch of it.

/// Half the width of a 90 % interval of the standard normal distribution: 5 %
/// lie above it. Rounded as tables print it.
pub const NORMAL_90: f64 = 1.645;

/// Beyond this many standard deviations a tail is smaller than rounding of 1.
const LAST_DEVIATE: f64 = 8.3;

/// Integrals leave out what lies farther off: 3e-12 of the distribution.
const LAST_INTEGRATED: f64 = 7.0;

/// Standard deviations that one set of nodes spans.
const PANEL: f64 = 2.5;

/// Share of the standard normal distribution below a deviate, infinite ends included.
///
/// Φ(z) = 1/2 + φ(z)·(z + z³/3 + z⁵/(3·5) + …), summed until a term no longer
/// changes the sum. Right to about 1e-15 in absolute terms: a far tail has few
/// right digits of its own.
///
/// # Source
///
/// G. Marsaglia, Journal of Statistical Software 11 (2004), issue 4, 1–11,
/// doi:10.18637/jss.v011.i04.
///
/// # Example
///
/// ```
/// use groupsmith::numeric::normal_cdf;
/// assert!((normal_cdf(1.96) - 0.9750021).abs() < 1e-7);
/// ```
pub fn normal_cdf(z: f64) -> f64 {
    if z <= -LAST_DEVIATE {
        return 0.0;
    }
    if z >= LAST_DEVIATE {
        return 1.0;
    }
    let square = z * z;
    let (mut sum, mut before, mut term, mut odd) = (z, f64::NAN, z, 1.0);
    while sum != before {
        before = sum;
        odd += 2.0;
        term *= square / odd;
        sum += term;
    }
    sum.mul_add(normal_density(z), 0.5).clamp(0.0, 1.0)
}

/// Density of the standard normal distribution, φ(z) = exp(−z²/2)/√(2π).
pub fn normal_density(z: f64) -> f64 {
    /// 1/√(2π).
    const PEAK: f64 = 0.398_942_280_401_432_7;
    PEAK * (-0.5 * z * z).exp()
}

/// Integrals of g and of g² over the standard normal distribution from `from`
/// to `to`, which may be infinite.
///
/// Gauss–Legendre with eight nodes on panels of at most 2.5 standard deviations;
/// `g` should be smooth between the ends.
pub fn normal_moments(from: f64, to: f64, g: impl Fn(f64) -> f64) -> [f64; 2] {
    /// Nodes on one side of the middle and their weights, n = 8: table 25.4 of
    /// Abramowitz and Stegun 1964, from memory, checked against polynomials.
    const NODES: [[f64; 2]; 4] = [
        [0.183_434_642_495_650, 0.362_683_783_378_362],
        [0.525_532_409_916_329, 0.313_706_645_877_887],
        [0.796_666_477_413_627, 0.222_381_034_453_374],
        [0.960_289_856_497_536, 0.101_228_536_290_376],
    ];
    let from = from.clamp(-LAST_INTEGRATED, LAST_INTEGRATED);
    let to = to.clamp(-LAST_INTEGRATED, LAST_INTEGRATED);
    let mut moments = [0.0; 2];
    if to <= from {
        return moments;
    }
    let panels = ((to - from) / PANEL).ceil();
    let half = 0.5 * (to - from) / panels;
    for panel in 0..panels as u32 {
        let middle = half.mul_add(2.0 * f64::from(panel) + 1.0, from);
        for [node, weight] in NODES {
            for z in [middle - half * node, middle + half * node] {
                let value = g(z);
                let share = half * weight * normal_density(z);
                moments[0] += share * value;
                moments[1] += share * value * value;
            }
        }
    }
    moments
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Values as printed in table 26.1 of M. Abramowitz, I. A. Stegun, Handbook
    /// of Mathematical Functions (1964), P(x) to ten digits, from memory.
    #[test]
    fn the_distribution_is_that_of_printed_tables() {
        for (z, printed) in [
            (0.0, 0.5),
            (0.5, 0.691_462_461_3),
            (1.0, 0.841_344_746_1),
            (1.5, 0.933_192_798_7),
            (2.0, 0.977_249_868_1),
            (2.5, 0.993_790_334_7),
            (3.0, 0.998_650_102_0),
        ] {
            assert!((normal_cdf(z) - printed).abs() < 1e-10, "{z}");
            assert!((normal_cdf(-z) - (1.0 - printed)).abs() < 1e-10, "-{z}");
        }
        assert!((normal_cdf(NORMAL_90) - 0.95).abs() < 2e-5);
        assert_eq!(normal_cdf(f64::INFINITY), 1.0);
        assert_eq!(normal_cdf(f64::NEG_INFINITY), 0.0);
    }

    #[test]
    fn it_rises_everywhere() {
        let shares: Vec<f64> = (-900..=900)
            .map(|i| normal_cdf(f64::from(i) / 100.0))
            .collect();
        assert!(shares.windows(2).all(|pair| pair[0] <= pair[1] + 1e-15));
    }

    /// The moments of the distribution: 1, 0, 1, 0, 3.
    #[test]
    fn integrals_have_the_moments_of_the_distribution() {
        let whole =
            |power: i32| normal_moments(f64::NEG_INFINITY, f64::INFINITY, |z| z.powi(power));
        for (power, [first, second]) in [(0, [1.0, 1.0]), (1, [0.0, 1.0]), (2, [1.0, 3.0])] {
            let found = whole(power);
            assert!((found[0] - first).abs() < 1e-8, "{power}: {found:?}");
            assert!((found[1] - second).abs() < 1e-8, "{power}: {found:?}");
        }
        let [stretch, _] = normal_moments(-0.3, 1.9, |_| 1.0);
        assert!((stretch - (normal_cdf(1.9) - normal_cdf(-0.3))).abs() < 1e-10);
        assert_eq!(normal_moments(2.0, 1.0, |_| 1.0), [0.0; 2]);
    }
}
