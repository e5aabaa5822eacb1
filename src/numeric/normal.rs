//! The normal and Student's t distributions: densities, tails that do not underflow, quantiles.

use super::special::{LN_SQRT_2PI, erfc, exp, exp_m1, ln, ln_1p, ln_gamma};

/// Density of the standard normal at `z`.
pub fn normal_pdf(z: f64) -> f64 {
    exp(-0.5 * z * z - LN_SQRT_2PI)
}

/// Natural logarithm of the density of Normal(`mean`, `sd`) at `x`; `sd` > 0.
pub fn ln_normal_pdf(x: f64, mean: f64, sd: f64) -> f64 {
    let z = (x - mean) / sd;
    -0.5 * z * z - ln(sd) - LN_SQRT_2PI
}

/// Probability that a standard normal is below `z`.
pub fn normal_cdf(z: f64) -> f64 {
    0.5 * erfc(-z * std::f64::consts::FRAC_1_SQRT_2)
}

/// ln Φ(`z`), finite far into the lower tail, where Φ itself underflows.
///
/// Below −12 by the asymptotic series of Mills' ratio to the eighth term (Abramowitz & Stegun 26.2.12),
/// relative error of Φ under 1e-12 there.
pub fn ln_normal_cdf(z: f64) -> f64 {
    if z > -12.0 {
        // Towards +∞ the upper tail keeps the digits that 1 − p would lose.
        return if z > 0.0 {
            ln_1p(-normal_cdf(-z))
        } else {
            ln(normal_cdf(z))
        };
    }
    let r = 1.0 / (z * z);
    let mut term = 1.0;
    let mut series = 1.0;
    for k in 0..8 {
        term *= -f64::from(2 * k + 1) * r;
        series += term;
    }
    -0.5 * z * z - LN_SQRT_2PI - ln(-z) + ln(series)
}

/// ln(Φ(`b`) − Φ(`a`)) for `a` ≤ `b`, without cancellation in either tail; −∞ where they meet.
pub fn ln_normal_interval(a: f64, b: f64) -> f64 {
    if a >= b {
        return f64::NEG_INFINITY;
    }
    // Mirror to the lower tail, where ln Φ is exact.
    let (lo, hi) = if a + b > 0.0 { (-b, -a) } else { (a, b) };
    let top = ln_normal_cdf(hi);
    let bottom = ln_normal_cdf(lo);
    if bottom == f64::NEG_INFINITY {
        return top;
    }
    top + ln(-exp_m1(bottom - top))
}

/// The standard normal's quantile: the z with Φ(z) = `p`.
///
/// Algorithm AS 241 (PPND16, Wichura 1988, Applied Statistics 37:477), relative error about 1e-16.
/// ±∞ at 0 and 1, NaN outside.
pub fn normal_quantile(p: f64) -> f64 {
    if !(0.0..=1.0).contains(&p) {
        return f64::NAN;
    }
    let q = p - 0.5;
    if q.abs() <= 0.425 {
        let r = 0.180_625 - q * q;
        return q * ratio(r, &CENTRE.0, &CENTRE.1);
    }
    let tail = if q < 0.0 { p } else { 1.0 - p };
    if tail <= 0.0 {
        return if q < 0.0 {
            f64::NEG_INFINITY
        } else {
            f64::INFINITY
        };
    }
    let r = (-ln(tail)).sqrt();
    let z = if r <= 5.0 {
        ratio(r - 1.6, &MIDDLE.0, &MIDDLE.1)
    } else {
        ratio(r - 5.0, &FAR.0, &FAR.1)
    };
    if q < 0.0 { -z } else { z }
}

/// Value of a rational function, coefficients from the constant up.
fn ratio(x: f64, above: &[f64; 8], below: &[f64; 8]) -> f64 {
    let value = |c: &[f64; 8]| c.iter().rev().fold(0.0, |sum, &a| sum * x + a);
    value(above) / value(below)
}

/// Numerator and denominator of one range of AS 241.
type Rational = ([f64; 8], [f64; 8]);

const CENTRE: Rational = (
    [
        3.387_132_872_796_366_5,
        1.331_416_678_917_843_8e2,
        1.971_590_950_306_551_3e3,
        1.373_169_376_550_946e4,
        4.592_195_393_154_987e4,
        6.726_577_092_700_87e4,
        3.343_057_558_358_813e4,
        2.509_080_928_730_122_7e3,
    ],
    [
        1.0,
        4.231_333_070_160_091e1,
        6.871_870_074_920_579e2,
        5.394_196_021_424_751e3,
        2.121_379_430_158_659_7e4,
        3.930_789_580_009_271e4,
        2.872_908_573_572_194_3e4,
        5.226_495_278_852_854e3,
    ],
);

const MIDDLE: Rational = (
    [
        1.423_437_110_749_683_5,
        4.630_337_846_156_546,
        5.769_497_221_460_691,
        3.647_848_324_763_204_5,
        1.270_458_252_452_368_4,
        2.417_807_251_774_506e-1,
        2.272_384_498_926_918_4e-2,
        7.745_450_142_783_414e-4,
    ],
    [
        1.0,
        2.053_191_626_637_759,
        1.676_384_830_183_803_8,
        6.897_673_349_851e-1,
        1.481_039_764_274_800_8e-1,
        1.519_866_656_361_645_7e-2,
        5.475_938_084_995_345e-4,
        1.050_750_071_644_416_9e-9,
    ],
);

const FAR: Rational = (
    [
        6.657_904_643_501_103,
        5.463_784_911_164_114,
        1.784_826_539_917_291_3,
        2.965_605_718_285_048_7e-1,
        2.653_218_952_657_612_4e-2,
        1.242_660_947_388_078_4e-3,
        2.711_555_568_743_487_6e-5,
        2.010_334_399_292_288_1e-7,
    ],
    [
        1.0,
        5.998_322_065_558_88e-1,
        1.369_298_809_227_358e-1,
        1.487_536_129_085_061_5e-2,
        7.868_691_311_456_133e-4,
        1.846_318_317_510_054_8e-5,
        1.421_511_758_316_446e-7,
        2.044_263_103_389_939_8e-15,
    ],
);

/// Logarithm of the density of Student's t with `dof` degrees of freedom, centre 0, scale 1, at `t`.
///
/// One call evaluates two ln Γ; in a loop take [`StudentT`].
pub fn ln_student_t(t: f64, dof: f64) -> f64 {
    StudentT::new(dof).ln_pdf(t)
}

/// Student's t with its normalising constant worked out once.
#[derive(Clone, Copy, Debug)]
pub struct StudentT {
    dof: f64,
    constant: f64,
}

impl StudentT {
    /// The density with `dof` > 0 degrees of freedom, centre 0, scale 1.
    pub fn new(dof: f64) -> Self {
        let half = 0.5 * dof;
        let constant = ln_gamma(half + 0.5) - ln_gamma(half) - 0.5 * ln(dof * std::f64::consts::PI);
        Self { dof, constant }
    }

    /// Log density at `t`.
    pub fn ln_pdf(&self, t: f64) -> f64 {
        self.constant - 0.5 * (self.dof + 1.0) * ln_1p(t * t / self.dof)
    }

    /// Log density of the spherical `dims`-variate t at a point whose squared distance from the centre is `r2`.
    ///
    /// One mixing variable for all coordinates, unlike a product of single t's.
    pub fn ln_pdf_multi(&self, r2: f64, dims: usize) -> f64 {
        let d = dims as f64;
        ln_gamma(0.5 * (self.dof + d))
            - ln_gamma(0.5 * self.dof)
            - 0.5 * d * ln(self.dof * std::f64::consts::PI)
            - 0.5 * (self.dof + d) * ln_1p(r2 / self.dof)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn close(a: f64, b: f64, tolerance: f64) {
        assert!(
            (a - b).abs() <= tolerance * b.abs().max(1.0),
            "{a} is not {b}"
        );
    }

    #[test]
    fn normal_tables() {
        // Abramowitz & Stegun, tables 26.1 and 26.5, and the reference table of two hypotheses at d = 2
        // (minimum error Φ(−1) = 0.158655253931).
        close(normal_cdf(-1.0), 0.158_655_253_931_457, 1e-14);
        close(normal_cdf(1.959_963_984_540_054), 0.975, 1e-14);
        close(normal_quantile(0.975), 1.959_963_984_540_054, 1e-14);
        close(normal_quantile(1e-12), -7.034_483_825_301_131, 1e-13);
        assert_eq!(normal_quantile(0.0), f64::NEG_INFINITY);
        assert_eq!(normal_quantile(1.0), f64::INFINITY);
        assert!(normal_quantile(1.5).is_nan() && normal_quantile(f64::NAN).is_nan());
    }

    #[test]
    fn far_tails_stay_finite() {
        // ln Φ(−40) = −804.608442… (asymptotic, independently by a continued fraction).
        close(ln_normal_cdf(-40.0), -804.608_442_013_754, 1e-12);
        // Both forms agree where they meet.
        close(ln_normal_cdf(-12.0), ln(normal_cdf(-12.0)), 1e-13);
        close(ln_normal_interval(40.0, 41.0), ln_normal_cdf(-40.0), 1e-12);
        close(
            exp(ln_normal_interval(-1.0, 1.0)),
            0.682_689_492_137_086,
            1e-14,
        );
        assert_eq!(ln_normal_interval(1.0, 1.0), f64::NEG_INFINITY);
        close(
            ln_normal_interval(f64::NEG_INFINITY, 0.0),
            -std::f64::consts::LN_2,
            1e-14,
        );
    }

    #[test]
    fn student_t_is_cauchy_at_one_and_normal_at_infinity() {
        close(
            ln_student_t(2.0, 1.0),
            -ln(5.0 * std::f64::consts::PI),
            1e-14,
        );
        close(ln_student_t(1.3, 1e8), ln_normal_pdf(1.3, 0.0, 1.0), 1e-7);
        close(
            StudentT::new(7.0).ln_pdf_multi(1.69, 1),
            ln_student_t(1.3, 7.0),
            1e-14,
        );
    }

    proptest! {
        #[test]
        fn quantile_inverts_cdf(z in -8.0..8.0_f64) {
            // Above 0 the rounding of p near 1 alone costs ε/φ(z).
            let allowed = 1e-13 * z.abs().max(1.0) + 4e-16 / normal_pdf(z.max(0.0));
            prop_assert!((normal_quantile(normal_cdf(z)) - z).abs() <= allowed);
        }
    }
}
