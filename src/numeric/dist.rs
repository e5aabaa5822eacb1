//! Distributions of an installation's unknowns: from a standard normal to a value, and their log densities.
//!
//! Every unknown is carried as a standard normal z, so that one draw serves all kinds of quantity. A clip
//! holds the value at the end: the mass beyond it gathers there.

use super::special::{LN_SQRT_2PI, exp, ln, ln_normal_pdf, normal_cdf, normal_quantile};

/// Lower and upper limit of a value; an infinite one is none.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Clip {
    /// Not below.
    pub low: f64,
    /// Not above.
    pub high: f64,
}

impl Clip {
    /// No limits.
    pub const NONE: Self = Self {
        low: f64::NEG_INFINITY,
        high: f64::INFINITY,
    };

    /// Limits, each only where given.
    pub fn new(low: Option<f64>, high: Option<f64>) -> Self {
        Self {
            low: low.unwrap_or(f64::NEG_INFINITY),
            high: high.unwrap_or(f64::INFINITY),
        }
    }

    /// `x`, held within the limits; where they contradict each other the upper one wins.
    pub fn hold(&self, x: f64) -> f64 {
        x.max(self.low).min(self.high)
    }

    fn admits(&self, x: f64) -> bool {
        self.low <= x && x <= self.high
    }
}

/// Normal: mean + sd · z.
pub fn normal(z: f64, mean: f64, sd: f64, clip: Clip) -> f64 {
    clip.hold(mean + sd * z)
}

/// Lognormal: median · gsdᶻ, where `gsd` > 1 is the geometric standard deviation.
pub fn lognormal(z: f64, median: f64, gsd: f64, clip: Clip) -> f64 {
    clip.hold(median * exp(z * ln(gsd)))
}

/// Uniform: low + (high − low) · Φ(z).
pub fn uniform(z: f64, low: f64, high: f64) -> f64 {
    low + (high - low) * normal_cdf(z)
}

/// Lognormal's z of a value; inverse of [`lognormal`] inside the clip.
pub fn lognormal_z(x: f64, median: f64, gsd: f64) -> f64 {
    ln(x / median) / ln(gsd)
}

/// Uniform's z of a value; infinite at the ends, NaN outside.
pub fn uniform_z(x: f64, low: f64, high: f64) -> f64 {
    normal_quantile((x - low) / (high - low))
}

/// Log density of the normal at `x`; −∞ beyond the clip. The mass gathered at a clip is not in it.
pub fn ln_normal(x: f64, mean: f64, sd: f64, clip: Clip) -> f64 {
    if clip.admits(x) {
        ln_normal_pdf(x, mean, sd)
    } else {
        f64::NEG_INFINITY
    }
}

/// Log density of the lognormal at `x` (per unit of x); −∞ at or below zero and beyond the clip.
pub fn ln_lognormal(x: f64, median: f64, gsd: f64, clip: Clip) -> f64 {
    if x <= 0.0 || !clip.admits(x) {
        return f64::NEG_INFINITY;
    }
    let z = lognormal_z(x, median, gsd);
    -0.5 * z * z - LN_SQRT_2PI - ln(ln(gsd)) - ln(x)
}

/// Log density of the uniform at `x`; −∞ outside.
pub fn ln_uniform(x: f64, low: f64, high: f64) -> f64 {
    if low <= x && x <= high {
        -ln(high - low)
    } else {
        f64::NEG_INFINITY
    }
}

/// Median and geometric standard deviation of the lognormal whose middle 95 % is `low`..`high` (both > 0):
/// how a site file's range is read.
pub fn lognormal_of_range(low: f64, high: f64) -> (f64, f64) {
    let half_width = 1.959_963_984_540_054;
    (
        (low * high).sqrt(),
        exp(ln(high / low) / (2.0 * half_width)),
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn values_at_known_quantiles() {
        assert!((lognormal(1.0, 2.0, 3.0, Clip::NONE) - 6.0).abs() < 1e-12);
        assert_eq!(lognormal(5.0, 2.0, 3.0, Clip::new(None, Some(10.0))), 10.0);
        assert_eq!(normal(-2.0, 1.0, 1.0, Clip::new(Some(0.0), None)), 0.0);
        assert_eq!(uniform(0.0, 2.0, 4.0), 3.0);
        let (median, gsd) = lognormal_of_range(10.0, 200.0);
        assert!((lognormal(1.959_963_984_540_054, median, gsd, Clip::NONE) - 200.0).abs() < 1e-9);
    }

    #[test]
    fn nothing_lies_outside() {
        assert_eq!(ln_lognormal(-1.0, 1.0, 2.0, Clip::NONE), f64::NEG_INFINITY);
        assert_eq!(ln_uniform(5.0, 0.0, 4.0), f64::NEG_INFINITY);
        assert_eq!(
            ln_normal(5.0, 0.0, 4.0, Clip::new(None, Some(4.0))),
            f64::NEG_INFINITY
        );
    }

    proptest! {
        #[test]
        fn z_comes_back(z in -6.0..6.0_f64, median in 1e-3..1e6_f64, gsd in 1.01..30.0_f64) {
            let there = lognormal(z, median, gsd, Clip::NONE);
            prop_assert!((lognormal_z(there, median, gsd) - z).abs() < 1e-11);
            prop_assert!((uniform_z(uniform(z.min(4.0), 1.0, 3.0), 1.0, 3.0) - z.min(4.0)).abs() < 1e-6);
        }

        #[test]
        fn density_is_the_slope_of_the_distribution(z in -4.0..4.0_f64, median in 0.1..10.0_f64, gsd in 1.2..5.0_f64) {
            let (a, b) = (z - 1e-4, z + 1e-4);
            let width = lognormal(b, median, gsd, Clip::NONE) - lognormal(a, median, gsd, Clip::NONE);
            let slope = (normal_cdf(b) - normal_cdf(a)) / width;
            let density = exp(ln_lognormal(lognormal(z, median, gsd, Clip::NONE), median, gsd, Clip::NONE));
            prop_assert!((slope / density - 1.0).abs() < 1e-5);
        }
    }
}
