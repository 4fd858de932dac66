//! Checks of the special functions against values from outside.

use super::*;

/// Reference values and their generator: tests/reference/special.py.
const REFERENCE: &str = include_str!("../../tests/data/special.csv");

fn rows() -> impl Iterator<Item = Vec<&'static str>> {
    REFERENCE.lines().skip(2).map(|line| line.split(',').collect())
}

fn compute(name: &str, a: f64, b: f64, c: f64) -> Option<f64> {
    Some(match name {
        "normal_cdf" => normal_cdf(a),
        "normal_sf" => normal_sf(a),
        "normal_quantile" => normal_quantile(a),
        "ln_gamma" => ln_gamma(a),
        "regularised_gamma" => regularised_gamma(a, b),
        "regularised_gamma_upper" => regularised_gamma_upper(a, b),
        "regularised_beta" => regularised_beta(a, b, c),
        "regularised_beta_upper" => regularised_beta_upper(a, b, c),
        "t_cdf" => t_cdf(a, b),
        "t_sf" => t_sf(a, b),
        "t_quantile" => t_quantile(a, b),
        "f_cdf" => f_cdf(a, b, c),
        "f_sf" => f_sf(a, b, c),
        "f_quantile" => f_quantile(a, b, c),
        "chi2_cdf" => chi2_cdf(a, b),
        "chi2_sf" => chi2_sf(a, b),
        "chi2_quantile" => chi2_quantile(a, b),
        _ => return None,
    })
}

/// Every row of the table to a relative error of 2e-13, tails included.
#[test]
fn functions_agree_with_fifty_digit_values() {
    let number = |text: &str| text.parse().unwrap_or(f64::NAN);
    let mut checked = 0;
    let mut failures = Vec::new();
    for row in rows() {
        let (a, b, c) = (number(row[1]), number(row[2]), number(row[3]));
        let Some(value) = compute(row[0], a, b, c) else { continue };
        let expected: f64 = number(row[4]);
        let error = (value - expected).abs() / expected.abs().max(f64::MIN_POSITIVE);
        let fine = if expected == 0.0 { value == 0.0 } else { error < 2e-13 };
        if !fine {
            failures.push(format!("{} got {value} error {error:e}", row.join(",")));
        }
        checked += 1;
    }
    assert!(checked > 1000, "only {checked} rows");
    assert!(failures.is_empty(), "{} of {checked}:\n{}", failures.len(), failures.join("\n"));
}

#[test]
fn quantile_undoes_the_distribution_function_far_out() {
    for df in [0.5, 1.0, 3.3, 29.0, 1e9, f64::INFINITY] {
        // At half a degree of freedom, 1e-100 would lie where t squared overflows.
        let far = if df < 1.0 { 1e-20 } else { 1e-100 };
        for p in [far, 1e-20, 1e-3, 0.3, 0.49, 0.77, 0.99] {
            let back = t_cdf(t_quantile(p, df), df);
            assert!((back / p - 1.0).abs() < 1e-11, "t {df} {p} {back}");
        }
    }
    for p in [1e-100, 1e-3, 0.3, 0.77, 0.99] {
        let back = f_cdf(f_quantile(p, 3.0, f64::INFINITY), 3.0, f64::INFINITY);
        assert!((back / p - 1.0).abs() < 1e-11, "F {p} {back}");
    }
}

#[test]
fn outside_the_domain_is_not_a_number() {
    for value in [
        normal_quantile(-0.1),
        normal_quantile(f64::NAN),
        t_cdf(1.0, 0.0),
        t_quantile(1.5, 3.0),
        f_sf(1.0, -1.0, 2.0),
        f_sf(f64::NAN, 1.0, 2.0),
        chi2_quantile(0.5, f64::NAN),
        regularised_beta(0.0, 1.0, 0.5),
        regularised_gamma(1.0, -1.0),
    ] {
        assert!(value.is_nan(), "{value}");
    }
    assert_eq!(t_quantile(0.0, 3.0), f64::NEG_INFINITY);
    assert_eq!(f_quantile(1.0, 3.0, 4.0), f64::INFINITY);
}

#[test]
fn generator_gives_the_published_sequence_and_jump() {
    let mut seen = 0;
    for row in rows().filter(|row| row[0].starts_with("rng")) {
        let mut rng = Rng::new(row[1].parse().unwrap());
        if row[0] == "rng_jump" {
            rng.jump();
        }
        for expected in row[4].split(';') {
            assert_eq!(rng.next_u64(), expected.parse::<u64>().unwrap(), "{}", row.join(","));
            seen += 1;
        }
    }
    assert_eq!(seen, 16);
}

/// Mean and variance of `n` draws.
fn moments(n: usize, mut draw: impl FnMut() -> f64) -> (f64, f64) {
    let values: Vec<f64> = (0..n).map(|_| draw()).collect();
    let mean = values.iter().sum::<f64>() / n as f64;
    (mean, values.iter().map(|v| (v - mean) * (v - mean)).sum::<f64>() / (n - 1) as f64)
}

#[test]
fn variates_have_their_moments() {
    // Tolerances are five standard errors at 200,000 draws.
    let n = 200_000;
    let root = (n as f64).sqrt();
    let mut rng = Rng::new(7);
    let (mean, variance) = moments(n, || rng.uniform());
    assert!((mean - 0.5).abs() < 5.0 * 0.2887 / root && (variance - 1.0 / 12.0).abs() < 0.001);
    let (mean, variance) = moments(n, || rng.normal());
    assert!(mean.abs() < 5.0 / root && (variance - 1.0).abs() < 5.0 * 1.415 / root);
    for shape in [0.3, 1.0, 4.5, 60.0] {
        let (mean, variance) = moments(n, || rng.gamma(shape));
        assert!((mean - shape).abs() < 5.0 * shape.sqrt() / root, "{shape} {mean}");
        let fourth = 3.0 + 6.0 / shape;
        assert!((variance / shape - 1.0).abs() < 5.0 * fourth.sqrt() / root, "{shape} {variance}");
    }
    let (mean, variance) = moments(n, || rng.chi2(5.0));
    assert!((mean - 5.0).abs() < 5.0 * 10f64.sqrt() / root && (variance - 10.0).abs() < 0.3);
    let (mean, _) = moments(n, || rng.below(10) as f64);
    assert!((mean - 4.5).abs() < 5.0 * 2.87 / root);
}

#[test]
fn streams_repeat_and_are_uncorrelated() {
    let draw = |index: u64| -> Vec<f64> {
        let mut rng = Rng::stream(11, index);
        (0..10_000).map(|_| rng.normal()).collect()
    };
    assert_eq!(draw(3), draw(3));
    for (i, j) in [(0, 1), (1, 2), (0, 1 << 32), (5, 4)] {
        let (x, y) = (draw(i), draw(j));
        let product: f64 = x.iter().zip(&y).map(|(a, b)| a * b).sum::<f64>() / 100.0;
        assert!(product.abs() < 5.0, "streams {i} and {j}: z = {product}");
    }
}
