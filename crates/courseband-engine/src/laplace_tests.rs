//! Exact where the response is normal; held to quadrature and closed forms elsewhere.

use super::*;
use crate::basis::{Units, group_bases};
use crate::criterion::Criterion;
use crate::fit::fit;
use crate::model::{Data, Model, Shape, SubjectEffects, SubjectRows};
use crate::special::Rng;

fn counts(seed: u64, subjects: usize, sd: f64) -> Data {
    let mut rng = Rng::new(seed);
    let subjects = (0..subjects).map(|k| {
        let level = sd * rng.normal();
        let times: Vec<f64> = (0..6).map(f64::from).collect();
        let responses = times.iter().map(|t| {
            let mean = libm::exp(1.0 + 0.15 * t * (k % 2) as f64 + level);
            // Poisson by multiplying uniforms (Knuth 1969).
            let (mut product, mut count) = (rng.uniform(), 0.0);
            while product > libm::exp(-mean) {
                product *= rng.uniform();
                count += 1.0;
            }
            count
        });
        SubjectRows { group: k % 2, responses: responses.collect(), times, ..SubjectRows::default() }
    });
    Data { groups: 2, subjects: subjects.collect(), ..Data::default() }
}

fn poisson(y: f64, eta: f64) -> [f64; 3] {
    let row = Row { y, detail: f64::NAN, dispersion: 1.0 };
    let [value, slope, weight] = density(Family::Poisson, row, eta);
    [value + constant(Family::Poisson, row), slope, weight]
}

/// First and second derivatives of every family against differences of its value.
#[test]
fn derivatives_of_all_families_are_those_of_their_values() {
    let families = [
        (Family::Normal, 0.7, f64::NAN),
        (Family::Censored, 0.7, -1.0),
        (Family::Censored, 0.7, 1.0),
        (Family::Censored, 0.7, 0.0),
        (Family::Poisson, 3.0, f64::NAN),
        (Family::NegativeBinomial, 3.0, f64::NAN),
        (Family::Gamma, 1.3, f64::NAN),
        (Family::Binomial, 3.0, 7.0),
        (Family::Beta, 0.3, f64::NAN),
        (Family::Tweedie(1500), 1.2, f64::NAN),
        (Family::Tweedie(1300), 0.0, f64::NAN),
    ];
    for (family, y, detail) in families {
        for eta in [-0.8, 0.1, 0.9] {
            let row = Row { y, detail, dispersion: 0.4 };
            let h = 1e-4;
            let at = |eta: f64| density(family, row, eta)[0];
            let [_, slope, weight] = density(family, row, eta);
            let first = (at(eta + h) - at(eta - h)) / (2.0 * h);
            let second = -(at(eta + h) - 2.0 * at(eta) + at(eta - h)) / (h * h);
            assert!((slope - first).abs() < 1e-6 * (1.0 + first.abs()), "{family:?} {eta}: {slope} {first}");
            assert!((weight - second).abs() < 2e-5 * (1.0 + second.abs()), "{family:?} {eta}: {weight} {second}");
        }
    }
    // Far beyond a limit the chance is tiny, and still has its derivatives.
    let far = density(Family::Censored, Row { y: 0.0, detail: -1.0, dispersion: 1.0 }, 40.0);
    assert!((far[0] + 804.6).abs() < 0.1 && (far[1] + 40.02).abs() < 0.01 && (far[2] - 1.0).abs() < 0.01, "{far:?}");
}

fn model(family: Family, subjects: SubjectEffects, shape: Shape) -> Model {
    Model { family, subjects, shape, ..Model::default() }
}

#[test]
fn a_normal_response_gives_the_restricted_likelihood_itself() {
    let data = counts(3, 10, 0.4);
    for subjects in [SubjectEffects::None, SubjectEffects::Intercept, SubjectEffects::Slope] {
        let asked = Model { subjects, ..Model::default() };
        let units = Units::of(&data);
        let design = Design::new(&data, units, group_bases(&data, &asked, &units), &asked);
        let layout = Layout::new(&asked, &design);
        let theta: Vec<f64> = (0..layout.len()).map(|k| 0.3 - 0.2 * k as f64).collect();
        let exact = Criterion::new(&design, &layout).evaluate(&theta, false).unwrap();
        let here = Laplace::new(&design, &layout).at(&theta, None).unwrap();
        assert!((here.value - exact.value).abs() < 1e-8, "{subjects:?}: {} {}", here.value, exact.value);
        let (a, b) = (&here.solved[1], &exact.solved[1]);
        assert!((&a.coefficients - &b.coefficients).amax() < 1e-7);
        assert!((a.factor.l() - b.factor.l()).amax() < 1e-6);
    }
}

/// Without subject effects a mean by time is the log of the mean count, with variance 1 over the sum (Poisson).
#[test]
fn means_by_time_have_their_closed_form() {
    let data = counts(4, 24, 0.0);
    let fitted = fit(&data, &model(Family::Poisson, SubjectEffects::None, Shape::ByTime)).unwrap();
    let posterior = fitted.plug_in();
    for t in [0.0, 3.0, 5.0] {
        let own = data.subjects.iter().filter(|s| s.group == 1);
        let sum: f64 = own.map(|s| s.responses[t as usize]).sum();
        let e = posterior.estimate(&fitted.course(1, t));
        assert!((e.mean - libm::log(sum / 12.0)).abs() < 1e-7 && (e.se - libm::sqrt(1.0 / sum)).abs() < 1e-7, "{e:?}");
    }
}

/// One subject's likelihood over its level, by the midpoint rule, against the approximation.
#[test]
fn the_approximation_is_near_the_integral() {
    let data = counts(5, 30, 0.5);
    let asked = model(Family::Poisson, SubjectEffects::Intercept, Shape::Straight);
    let fitted = fit(&data, &asked).unwrap();
    let sd = libm::sqrt(fitted.subject_covariance(0)[0][0]);
    let posterior = fitted.plug_in();
    let (mut integral, mut laplace) = (0.0, 0.0);
    for s in &data.subjects {
        let mean: Vec<f64> = s.times.iter().map(|&t| posterior.estimate(&fitted.course(s.group, t)).mean).collect();
        let log = |u: f64| {
            let rows = mean.iter().zip(&s.responses).map(|(m, y)| poisson(*y, m + sd * u)[0]);
            rows.sum::<f64>() - 0.5 * u * u - 0.5 * LN_TWO_PI
        };
        let steps: i32 = 4000;
        let sum: f64 = (0..steps).map(|k| libm::exp(log(-8.0 + 16.0 * (f64::from(k) + 0.5) / f64::from(steps)))).sum();
        integral += libm::log(sum * 16.0 / f64::from(steps));
        let mut u = 0.0;
        for _ in 0..50 {
            let rows = mean.iter().zip(&s.responses).map(|(m, y)| poisson(*y, m + sd * u));
            let (score, weight) = rows.fold((-u, 1.0), |(a, b), d| (a + sd * d[1], b + sd * sd * d[2]));
            u += score / weight;
        }
        let rows = mean.iter().zip(&s.responses).map(|(m, y)| poisson(*y, m + sd * u)[2]);
        laplace += log(u) + 0.5 * LN_TWO_PI - 0.5 * libm::log(1.0 + sd * sd * rows.sum::<f64>());
    }
    assert!((integral - laplace).abs() < 0.15, "{integral} {laplace}");
}

#[test]
fn parameters_come_back() {
    let data = counts(6, 120, 0.5);
    let fitted = fit(&data, &model(Family::Poisson, SubjectEffects::Intercept, Shape::Straight)).unwrap();
    let slope = fitted.corrected().estimate(&fitted.rate(1, 2.0));
    assert!((slope.mean - 0.15).abs() < 3.0 * slope.se && slope.se < 0.02, "{slope:?}");
    assert!((libm::sqrt(fitted.subject_covariance(0)[0][0]) - 0.5).abs() < 0.12);
    // Counts without further spread: the negative binomial finds none.
    let wider = fit(&data, &model(Family::NegativeBinomial, SubjectEffects::Intercept, Shape::Straight)).unwrap();
    assert!(wider.residual_sd(0) < 0.15, "{}", wider.residual_sd(0));
}

#[test]
fn gamma_and_yes_or_no_are_fitted() {
    let mut data = counts(7, 60, 0.4);
    let mut rng = Rng::new(1);
    let mut yes = data.clone();
    for s in &mut data.subjects {
        // Sum of four exponentials: shape 4.
        s.responses.iter_mut().for_each(|y| {
            let mean = libm::exp(0.2 * *y);
            *y = (0..4).map(|_| -libm::log(rng.uniform())).sum::<f64>() * mean / 4.0;
        });
    }
    let gamma = fit(&data, &model(Family::Gamma, SubjectEffects::Intercept, Shape::Straight)).unwrap();
    assert!(gamma.residual_sd(0) > 0.4 && gamma.residual_sd(0) < 0.9, "{}", gamma.residual_sd(0));
    yes.subjects.iter_mut().for_each(|s| s.responses.iter_mut().for_each(|y| *y = f64::from(u8::from(*y > 3.0))));
    let logit = fit(&yes, &model(Family::Binomial, SubjectEffects::Intercept, Shape::Straight)).unwrap();
    let slope = logit.corrected().estimate(&logit.rate(1, 2.0));
    assert!(slope.mean > 0.1 && slope.se > 0.0 && slope.se < 0.5, "{slope:?}");
}

#[test]
fn a_group_of_zeros_has_no_fit() {
    let mut data = counts(8, 12, 0.3);
    data.subjects.iter_mut().filter(|s| s.group == 0).for_each(|s| s.responses.fill(0.0));
    assert!(fit(&data, &model(Family::Poisson, SubjectEffects::Intercept, Shape::Straight)).is_err());
}
