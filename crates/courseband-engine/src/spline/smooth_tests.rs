//! Each basis against its definition.

use super::*;

fn row(smooth: &Smooth, t: f64, derivative: bool) -> Vec<f64> {
    let mut out = vec![0.0; smooth.len()];
    smooth.fill(t, derivative, &mut out);
    out
}

fn all() -> Vec<Smooth> {
    let times: Vec<f64> = (0..9).map(|k| (f64::from(k) / 8.0).powi(2)).collect();
    vec![
        Smooth::thin_plate(&times, 9).unwrap(),
        Smooth::thin_plate(&times, 6).unwrap(),
        Smooth::pieces(&times, 12).unwrap(),
        Smooth::process(times.clone(), 0.4, Roughness::ThreeHalves).unwrap(),
        Smooth::process(times, 0.4, Roughness::FiveHalves).unwrap(),
        Smooth::cyclic(0.5, 7).unwrap(),
    ]
}

/// Covariance of the columns' values at some times: what a basis says of a course.
fn covariance(smooth: &Smooth, times: &[f64]) -> DMatrix<f64> {
    let z: Vec<Vec<f64>> = times.iter().map(|&t| row(smooth, t, false)).collect();
    DMatrix::from_fn(times.len(), times.len(), |i, j| z[i].iter().zip(&z[j]).map(|(a, b)| a * b).sum())
}

/// The same with level and trend taken out, which are free elsewhere, in its own scale.
fn shape(smooth: &Smooth, times: &[f64]) -> DMatrix<f64> {
    let n = times.len();
    let line = DMatrix::from_fn(n, 2, |i, j| if j == 0 { 1.0 } else { times[i] });
    let out = DMatrix::identity(n, n) - &line * (line.tr_mul(&line)).try_inverse().unwrap() * line.transpose();
    let c = &out * covariance(smooth, times) * &out;
    let trace = c.trace();
    c / trace
}

#[test]
fn derivatives_equal_differences() {
    for smooth in all() {
        for t in [-0.1, 0.03, 0.31, 0.77, 1.2] {
            let (up, down) = (row(&smooth, t + 1e-6, false), row(&smooth, t - 1e-6, false));
            for (k, slope) in row(&smooth, t, true).iter().enumerate() {
                let expected = (up[k] - down[k]) / 2e-6;
                assert!((slope - expected).abs() < 1e-6 * (1.0 + expected.abs()), "{k} at {t}: {slope} {expected}");
            }
        }
        assert!(row(&smooth, 0.0, false).iter().all(|z| z.abs() < 1e-12));
    }
}

#[test]
fn full_thin_plate_is_the_natural_spline() {
    let times = [0.0, 0.1, 0.15, 0.4, 0.7, 1.0];
    let natural = Smooth::Natural(NaturalSpline::new(times.to_vec()));
    let plate = Smooth::thin_plate(&times, 6).unwrap();
    assert_eq!(plate.len(), natural.len());
    let at = [0.0, 0.05, 0.3, 0.55, 0.9, 1.0];
    assert!((shape(&plate, &at) - shape(&natural, &at)).amax() < 1e-9);
}

#[test]
fn second_differences_of_b_spline_coefficients_are_independent() {
    // At the joints of equal pieces a cubic B-spline curve is (a + 4 b + c) / 6 of its coefficients; a course with
    // independent second differences of coefficients has second differences of these values with that covariance.
    let smooth = Smooth::pieces(&[0.0, 0.5, 1.0], 9).unwrap();
    let joints: Vec<f64> = (0..7).map(|k| f64::from(k) / 6.0).collect();
    let c = covariance(&smooth, &joints);
    let second = DMatrix::from_fn(5, 7, |i, j| [1.0, -2.0, 1.0].get(j.wrapping_sub(i)).copied().unwrap_or(0.0));
    let got = &second * c * second.transpose();
    let scale = got[(0, 0)] / (18.0 / 36.0);
    for i in 0..5usize {
        for j in 0..5usize {
            let expected = [18.0, 8.0, 1.0].get(i.abs_diff(j)).copied().unwrap_or(0.0) / 36.0;
            assert!((got[(i, j)] / scale - expected).abs() < 1e-9, "{i} {j}: {}", got[(i, j)] / scale);
        }
    }
}

#[test]
fn a_process_has_the_matern_covariance_at_its_knots() {
    let knots = [0.0, 0.2, 0.5, 0.6, 1.0];
    for (roughness, of) in [
        (Roughness::ThreeHalves, (|x: f64| (1.0 + 3f64.sqrt() * x) * (-(3f64.sqrt()) * x).exp()) as fn(f64) -> f64),
        (Roughness::FiveHalves, |x| (1.0 + 5f64.sqrt() * x + 5.0 / 3.0 * x * x) * (-(5f64.sqrt()) * x).exp()),
    ] {
        let smooth = Smooth::process(knots.to_vec(), 0.3, roughness).unwrap();
        // Values less the one at 0: C(s, t) - C(s, 0) - C(0, t) + C(0, 0).
        let c = |s: f64, t: f64| of((s - t).abs() / 0.3);
        let got = covariance(&smooth, &knots);
        let at = |i: usize, j: usize| c(knots[i], knots[j]) - c(knots[i], 0.0) - c(0.0, knots[j]) + 1.0;
        let scale = got[(4, 4)] / at(4, 4);
        for i in 0..5 {
            for j in 0..5 {
                assert!((got[(i, j)] / scale - at(i, j)).abs() < 1e-6, "{roughness:?} {i} {j}");
            }
        }
    }
}

#[test]
fn a_cyclic_course_closes_smoothly() {
    let smooth = Smooth::cyclic(0.5, 7).unwrap();
    assert!(smooth.is_cyclic());
    for derivative in [false, true] {
        for (a, b) in [(0.0, 0.5), (0.13, 0.63), (0.2, 1.2)] {
            let (one, other) = (row(&smooth, a, derivative), row(&smooth, b, derivative));
            assert!(one.iter().zip(&other).all(|(x, y)| (x - y).abs() < 1e-9));
        }
    }
    // Nothing around the circle is special: the spread of a step does not depend on where it is.
    let h = 0.5 / 7.0;
    let spread = |t: f64| {
        let (a, b) = (row(&smooth, t, false), row(&smooth, t + h, false));
        a.iter().zip(&b).map(|(x, y)| (x - y) * (x - y)).sum::<f64>()
    };
    assert!((spread(0.0) - spread(3.0 * h)).abs() < 1e-9 * spread(0.0));
}
