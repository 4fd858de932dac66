//! The standard normal distribution.

use core::f64::consts::{FRAC_1_SQRT_2, PI};

/// Density of the standard normal at `z`.
pub fn normal_pdf(z: f64) -> f64 {
    libm::exp(-0.5 * z * z) / libm::sqrt(2.0 * PI)
}

/// P(Z <= z) for standard normal Z, with full relative accuracy in the lower tail.
pub fn normal_cdf(z: f64) -> f64 {
    0.5 * libm::erfc(-z * FRAC_1_SQRT_2)
}

/// P(Z > z) for standard normal Z, with full relative accuracy in the upper tail.
pub fn normal_sf(z: f64) -> f64 {
    normal_cdf(-z)
}

/// The z with P(Z <= z) = `p`. Minus and plus infinity at 0 and 1; NaN outside \[0, 1\].
///
/// Wichura 1988 (AS 241, routine PPND16), then one Newton step on the smaller tail.
pub fn normal_quantile(p: f64) -> f64 {
    if !(0.0..=1.0).contains(&p) {
        return f64::NAN;
    }
    if p == 0.0 || p == 1.0 {
        return if p == 0.0 { f64::NEG_INFINITY } else { f64::INFINITY };
    }
    let z = normal_quantile_rational(p);
    let centre = p - 0.5;
    if libm::fabs(centre) <= 0.425 {
        // Measured from the centre, so that values near zero keep their relative accuracy.
        let excess = 0.5 * libm::erf(z * FRAC_1_SQRT_2) - centre;
        return z - excess / normal_pdf(z);
    }
    let (tail, side) = if p < 0.5 { (p, -1.0) } else { (1.0 - p, 1.0) };
    let distance = libm::fabs(z);
    let density = normal_pdf(distance);
    if density < 1e-290 {
        return z;
    }
    side * (distance + (normal_sf(distance) - tail) / density)
}

/// AS 241 without the Newton step: relative error about 1e-16, and cheap. For 0 < `p` < 1.
pub(super) fn normal_quantile_rational(p: f64) -> f64 {
    let q = p - 0.5;
    if libm::fabs(q) <= 0.425 {
        let r = 0.180625 - q * q;
        return q * horner(&CENTRE_TOP, r) / horner(&CENTRE_BOTTOM, r);
    }
    let tail = if q < 0.0 { p } else { 1.0 - p };
    let r = libm::sqrt(-libm::log(tail));
    let distance = if r <= 5.0 {
        horner(&MIDDLE_TOP, r - 1.6) / horner(&MIDDLE_BOTTOM, r - 1.6)
    } else {
        horner(&FAR_TOP, r - 5.0) / horner(&FAR_BOTTOM, r - 5.0)
    };
    if q < 0.0 { -distance } else { distance }
}

/// Polynomial with the constant term first.
fn horner(coefficients: &[f64; 8], x: f64) -> f64 {
    let mut sum = coefficients[7];
    for k in (0..7).rev() {
        sum = sum * x + coefficients[k];
    }
    sum
}

// Coefficients of AS 241 (from memory; the tests hold the result to 1e-14).
const CENTRE_TOP: [f64; 8] = [
    3.387_132_872_796_366_5,
    1.331_416_678_917_843_8e2,
    1.971_590_950_306_551_3e3,
    1.373_169_376_550_946e4,
    4.592_195_393_154_987e4,
    6.726_577_092_700_87e4,
    3.343_057_558_358_813e4,
    2.509_080_928_730_122_7e3,
];
const CENTRE_BOTTOM: [f64; 8] = [
    1.0,
    4.231_333_070_160_091e1,
    6.871_870_074_920_579e2,
    5.394_196_021_424_751e3,
    2.121_379_430_158_659_7e4,
    3.930_789_580_009_271e4,
    2.872_908_573_572_194_3e4,
    5.226_495_278_852_854e3,
];
const MIDDLE_TOP: [f64; 8] = [
    1.423_437_110_749_683_5,
    4.630_337_846_156_546,
    5.769_497_221_460_691,
    3.647_848_324_763_204_5,
    1.270_458_252_452_368_4,
    2.417_807_251_774_506e-1,
    2.272_384_498_926_918_4e-2,
    7.745_450_142_783_414e-4,
];
const MIDDLE_BOTTOM: [f64; 8] = [
    1.0,
    2.053_191_626_637_759,
    1.676_384_830_183_803_8,
    6.897_673_349_851e-1,
    1.481_039_764_274_800_8e-1,
    1.519_866_656_361_645_7e-2,
    5.475_938_084_995_345e-4,
    1.050_750_071_644_416_9e-9,
];
const FAR_TOP: [f64; 8] = [
    6.657_904_643_501_103,
    5.463_784_911_164_114,
    1.784_826_539_917_291_3,
    2.965_605_718_285_048_7e-1,
    2.653_218_952_657_612_4e-2,
    1.242_660_947_388_078_4e-3,
    2.711_555_568_743_487_6e-5,
    2.010_334_399_292_288_1e-7,
];
const FAR_BOTTOM: [f64; 8] = [
    1.0,
    5.998_322_065_558_88e-1,
    1.369_298_809_227_358e-1,
    1.487_536_129_085_061_5e-2,
    7.868_691_311_456_133e-4,
    1.846_318_317_510_054_8e-5,
    1.421_511_758_316_446e-7,
    2.044_263_103_389_939_8e-15,
];
