//! Checks of the quantile of the largest joint z or t against values from outside.

use super::*;

/// Quadrature values and their generator: tests/reference/max_quantile.py (it reproduces the two-sided table of Dunnett
/// 1964 at the entries recalled from memory, and covers the studentized maximum modulus as rho = 0).
const REFERENCE: &str = include_str!("../../tests/data/max_quantile.csv");

/// Unit rows with correlation `rho` between any two: sqrt(rho) on a shared axis, the rest on an own axis.
fn equicorrelated(m: usize, rho: f64) -> Vec<f64> {
    let r = m + 1;
    let mut rows = vec![0.0; m * r];
    for j in 0..m {
        rows[j * r] = rho.sqrt();
        rows[j * r + j + 1] = (1.0 - rho).sqrt();
    }
    rows
}

/// A smooth curve's factor: row j is (cos, sin) of r/2 frequencies with falling weights, scaled to length one.
fn smooth_curve(m: usize, r: usize) -> Vec<f64> {
    let mut rows = vec![0.0; m * r];
    for (j, row) in rows.chunks_exact_mut(r).enumerate() {
        let t = j as f64 / m as f64;
        for k in 0..r {
            let angle = (k / 2 + 1) as f64 * 3.0 * t;
            row[k] = if k % 2 == 0 { angle.cos() } else { angle.sin() } / (1.0 + k as f64 / 2.0);
        }
        let length = row.iter().map(|x| x * x).sum::<f64>().sqrt();
        row.iter_mut().for_each(|x| *x /= length);
    }
    rows
}

#[test]
fn equally_correlated_maxima_agree_with_quadrature() {
    let mut worst = 0.0_f64;
    let mut rows_seen = 0;
    for rho in [0.0, 0.5, 0.9] {
        for m in [1, 2, 3, 5, 9, 20] {
            let maxima = DirectionMaxima::new(&equicorrelated(m, rho), m, m + 1, 65_536, 5);
            for line in REFERENCE.lines().skip(2) {
                let cells: Vec<f64> = line.split(',').map(|x| x.parse().unwrap()).collect();
                if cells[0] != rho || cells[1] != m as f64 {
                    continue;
                }
                let got = maxima.quantile(cells[3], Some(cells[2]));
                let miss = (got.value - cells[4]).abs();
                // Four standard errors, and a floor for the averaging in bins.
                assert!(miss < 4.0 * got.mc_error + 5e-4, "{line}: {got:?}");
                worst = worst.max(miss / cells[4]);
                rows_seen += 1;
            }
        }
    }
    assert_eq!(rows_seen, 270);
    assert!(worst < 0.006, "largest relative miss {worst}");
}

#[test]
fn one_dimension_is_exact() {
    // Copies and opposites of one variable are one variable.
    let rows = [1.0, -1.0, 1.0, 0.0];
    for level in [0.5, 0.9, 0.95, 0.999] {
        let z = max_abs_quantile(&rows, 4, 1, level, None, 1000, 3);
        assert!((z.value / normal_quantile(0.5 + 0.5 * level) - 1.0).abs() < 1e-12, "{z:?}");
        assert_eq!(z.mc_error, 0.0);
        let t = max_abs_quantile(&rows, 4, 1, level, Some(7.5), 1000, 3);
        assert!((t.value / t_quantile(0.5 + 0.5 * level, 7.5) - 1.0).abs() < 1e-11, "{t:?}");
    }
}

#[test]
fn independent_maxima_have_the_closed_form() {
    // (2 Phi(c) - 1)^m = level.
    for m in [2_usize, 4, 12, 40] {
        let mut rows = vec![0.0; m * m];
        (0..m).for_each(|j| rows[j * m + j] = 1.0);
        let maxima = DirectionMaxima::new(&rows, m, m, 40_000, 1);
        for level in [0.8_f64, 0.95, 0.99] {
            let exact = normal_quantile(0.5 + 0.5 * libm::pow(level, 1.0 / m as f64));
            let got = maxima.quantile(level, None);
            assert!((got.value - exact).abs() < 4.0 * got.mc_error + 5e-4, "{m} {exact} {got:?}");
        }
    }
}

#[test]
fn error_is_what_other_seeds_show() {
    let rows = smooth_curve(60, 6);
    let runs: Vec<Quantile> = (0..60).map(|s| max_abs_quantile(&rows, 60, 6, 0.95, Some(12.0), 4096, s)).collect();
    let mean = runs.iter().map(|q| q.value).sum::<f64>() / 60.0;
    let spread = (runs.iter().map(|q| (q.value - mean).powi(2)).sum::<f64>() / 59.0).sqrt();
    let stated = runs.iter().map(|q| q.mc_error).sum::<f64>() / 60.0;
    // The spread of 60 runs is itself known to about 9 %.
    assert!(spread / stated > 0.7 && spread / stated < 1.35, "spread {spread} stated {stated}");
}

#[test]
fn repeats_and_inverts_its_tail() {
    let rows = smooth_curve(350, 10);
    let maxima = DirectionMaxima::new(&rows, 350, 10, 16_384, 42);
    let again = DirectionMaxima::new(&rows, 350, 10, 16_384, 42);
    for df in [None, Some(6.3), Some(f64::INFINITY)] {
        let q = maxima.quantile(0.95, df);
        assert_eq!(q, again.quantile(0.95, df));
        assert!((maxima.tail(q.value, df) - 0.05).abs() < 1e-12);
        assert!(q.mc_error > 0.0 && q.mc_error < 0.01, "{q:?}");
    }
    assert_eq!(maxima.quantile(0.95, None), maxima.quantile(0.95, Some(f64::INFINITY)));
}

#[test]
fn nothing_to_maximise_is_not_a_number() {
    assert!(max_abs_quantile(&[], 0, 3, 0.95, None, 100, 1).value.is_nan());
    assert!(max_abs_quantile(&[0.0; 4], 2, 2, 0.95, None, 100, 1).value.is_nan());
    assert!(max_abs_quantile(&[1.0], 1, 1, 1.0, None, 100, 1).value.is_nan());
}

#[test]
fn directions_come_in_orthonormal_sets() {
    let mut rng = Rng::new(2);
    for r in [1, 2, 7, 25] {
        let mut set = vec![0.0; r * r];
        super::quantile::orthonormal_set(&mut rng, &mut set, r);
        for i in 0..r {
            for j in 0..=i {
                let product: f64 = (0..r).map(|k| set[i * r + k] * set[j * r + k]).sum();
                let expected = if i == j { 1.0 } else { 0.0 };
                assert!((product - expected).abs() < 1e-10, "{r} {i} {j} {product}");
            }
        }
    }
}
