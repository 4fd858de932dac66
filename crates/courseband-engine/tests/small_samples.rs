//! Degrees of freedom and calibrated values where the exact answer is known.

use courseband_engine::special::{Rng, t_quantile};
use courseband_engine::{
    Calibration, Contrast, Data, Fit, Model, Shape, SubjectEffects, SubjectRows, calibrated_quantile, fit,
};

/// Two groups of `subjects`, `visits` each, level SD 1.5, error SD 1.
fn balanced(subjects: usize, visits: usize, seed: u64) -> Data {
    let mut rng = Rng::new(seed);
    let mut rows = Vec::new();
    for group in 0..2 {
        for _ in 0..subjects {
            let level = 1.5 * rng.normal();
            let times: Vec<f64> = (0..visits).map(|v| v as f64).collect();
            let responses = times.iter().map(|t| 0.3 * t + level + rng.normal()).collect();
            rows.push(SubjectRows { group, times, responses, ..SubjectRows::default() });
        }
    }
    Data { groups: 2, subjects: rows, ..Data::default() }
}

fn means(subjects: SubjectEffects) -> Model {
    Model { shape: Shape::ByTime, subjects, ..Model::default() }
}

/// Gap averaged over the visits.
fn mean_gap(fit: &Fit, visits: usize) -> Contrast {
    let weight = 1.0 / visits as f64;
    (1..visits).fold(fit.gap(0, 1, 0.0).times(weight), |sum, v| sum.plus(weight, &fit.gap(0, 1, v as f64)))
}

/// Source: the two-sample t test; rows minus means, exactly.
#[test]
fn independent_rows_have_residual_degrees_of_freedom() {
    let data = balanced(4, 3, 5);
    let fitted = fit(&data, &means(SubjectEffects::None)).unwrap();
    let e = fitted.corrected().estimate(&fitted.gap(0, 1, 1.0));
    assert!((e.df - 18.0).abs() < 1e-3, "{}", e.df);
}

/// Source: in a balanced design with compound symmetry the mean of a subject's visits is one
/// number per subject (Frison & Pocock 1992, Stat Med 11:1685), so the gap has 2n - 2.
#[test]
fn between_subject_gap_has_subject_degrees_of_freedom() {
    let data = balanced(6, 4, 6);
    let fitted = fit(&data, &means(SubjectEffects::Intercept)).unwrap();
    let e = fitted.corrected().estimate(&mean_gap(&fitted, 4));
    assert!((e.df - 10.0).abs() < 0.01, "{}", e.df);
    let subject_mean = |s: &SubjectRows| s.responses.iter().sum::<f64>() / 4.0;
    let of = |g: usize| data.subjects.iter().filter(|s| s.group == g).map(subject_mean).collect::<Vec<f64>>();
    let centre = |x: &[f64]| x.iter().sum::<f64>() / x.len() as f64;
    let square = |x: &[f64]| x.iter().map(|v| (v - centre(x)).powi(2)).sum::<f64>();
    let (a, b) = (of(0), of(1));
    let pooled = (square(&a) + square(&b)) / 10.0;
    assert!((e.mean - (centre(&b) - centre(&a))).abs() < 1e-9);
    assert!((e.se - (pooled * 2.0 / 6.0).sqrt()).abs() < 1e-6, "{} {}", e.se, (pooled / 3.0).sqrt());
}

/// Source: Student's t; |error| / SE of one contrast on rows minus means.
#[test]
fn calibrated_value_of_one_contrast_is_a_t_quantile() {
    let data = balanced(3, 3, 7);
    let fitted = fit(&data, &means(SubjectEffects::None)).unwrap();
    let family = vec![vec![fitted.gap(0, 1, 1.0)]];
    let calibration = Calibration::new(fitted, family, 3).unwrap();
    let kept: Vec<f64> = (0..4000).map(|k| calibration.refit(k)[0]).collect();
    let (value, range) = calibrated_quantile(&kept, 0.95);
    let exact = t_quantile(0.975, 12.0);
    assert!(range[0] < exact && exact < range[1], "{value} {range:?} {exact}");
    assert!(range[1] - range[0] < 0.2);
}

#[test]
fn refits_depend_on_seed_and_number_alone() {
    let data = balanced(5, 5, 8);
    let fitted = fit(&data, &Model::default()).unwrap();
    let family = |f: &Fit| vec![(0..5).map(|v| f.gap(0, 1, v as f64)).collect::<Vec<Contrast>>()];
    let new = |seed| Calibration::new(fitted.clone(), family(&fitted), seed).unwrap();
    let (one, two, other) = (new(1), new(1), new(2));
    let forwards: Vec<f64> = (0..20).map(|k| one.refit(k)[0]).collect();
    let backwards: Vec<f64> = (0..20).rev().map(|k| two.refit(k)[0]).collect();
    assert!(forwards.iter().eq(backwards.iter().rev()));
    assert_ne!(forwards[0], other.refit(0)[0]);
    assert!(forwards.iter().all(|x| x.is_finite()));
}

#[test]
fn quantiles_of_few_refits_are_honest() {
    let values: Vec<f64> = (1..=199).map(f64::from).collect();
    assert_eq!(calibrated_quantile(&values, 0.95).0, 190.0);
    assert_eq!(calibrated_quantile(&values[..10], 0.95).0, f64::INFINITY);
}
