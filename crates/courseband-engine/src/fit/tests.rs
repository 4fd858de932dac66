//! The criterion against a dense computation, its gradient against differences.

use super::*;
use crate::model::{Dimension, Shape, Sharing, SubjectEffects, SubjectRows};
use crate::special::Rng;

fn made_up(groups: usize, per_group: usize, visits: usize, seed: u64) -> Data {
    let mut rng = Rng::new(seed);
    let mut subjects = Vec::new();
    for group in 0..groups {
        for _ in 0..per_group {
            let (level, trend) = (rng.normal(), 0.3 * rng.normal());
            let mut times = Vec::new();
            let mut responses = Vec::new();
            for visit in 0..visits {
                if rng.uniform() < 0.2 && visit > 0 {
                    continue;
                }
                let t = visit as f64 + if visit % 3 == 1 { 0.5 } else { 0.0 };
                times.push(t);
                let mean = (t / 2.0).sin() * (1.0 + group as f64);
                responses.push(mean + level + trend * t + 0.5 * rng.normal());
            }
            subjects.push(SubjectRows { group, times, responses });
        }
    }
    Data { groups, subjects }
}

fn model(subjects: SubjectEffects, serial: Serial) -> Model {
    Model {
        shape: Shape::Smooth(Dimension::Auto),
        smoothness: Sharing::ByGroup,
        subjects,
        subjects_spread: Sharing::Common,
        serial,
        spread: Sharing::Common,
    }
}

fn all_models() -> Vec<Model> {
    let mut models = Vec::new();
    for subjects in [SubjectEffects::None, SubjectEffects::Intercept, SubjectEffects::Slope] {
        for serial in [Serial::None, Serial::Ar1, Serial::Ar1Nugget] {
            for (subjects_spread, spread) in [(Sharing::Common, Sharing::ByGroup), (Sharing::ByGroup, Sharing::Common)]
            {
                models.push(Model { subjects_spread, spread, ..model(subjects, serial) });
            }
        }
    }
    models
}

/// A parameter vector away from every optimum.
fn somewhere(layout: &Layout) -> Vec<f64> {
    layout
        .entries
        .iter()
        .enumerate()
        .map(|(k, entry)| match entry {
            Parameter::Smoothing(_) => 1.3 + 0.2 * k as f64,
            Parameter::Error(_) => -1.0 + 0.1 * k as f64,
            Parameter::Subject { part: 1, .. } => 0.25,
            Parameter::Subject { .. } => -0.6 + 0.05 * k as f64,
            Parameter::Rate => 1.1,
            Parameter::Nugget => -0.7,
        })
        .collect()
}

fn prepared(data: &Data, model: &Model) -> (Design, Layout) {
    let units = Units::of(data);
    let bases = group_bases(data, model, &units);
    let design = Design::new(data, units, bases, model.subjects.count());
    let layout = Layout::new(model, &design.bases, design.median_gap());
    (design, layout)
}

/// Minus the log restricted likelihood from N x N matrices.
fn dense_value(data: &Data, design: &Design, layout: &Layout, theta: &[f64]) -> f64 {
    let rows = data.rows();
    let units = &design.units;
    let free: usize = design.bases.iter().map(GroupBasis::unpenalised).sum();
    let mut v = DMatrix::zeros(rows, rows);
    let mut x = DMatrix::zeros(rows, free);
    let mut y = DMatrix::zeros(rows, 1);
    let mut owner = Vec::new();
    for (s, subject) in data.subjects.iter().enumerate() {
        for (t, r) in subject.times.iter().zip(&subject.responses) {
            owner.push((s, subject.group, units.inner_time(*t), (r - units.response_centre) / units.response_scale));
        }
    }
    let offset: Vec<usize> =
        (0..data.groups).map(|g| design.bases[..g].iter().map(GroupBasis::unpenalised).sum()).collect();
    let columns = |g: usize, t: f64| {
        let mut row = vec![0.0; design.bases[g].columns()];
        design.bases[g].fill(t, false, &mut row);
        row
    };
    for (i, &(si, gi, ti, yi)) in owner.iter().enumerate() {
        y[i] = yi;
        let ci = columns(gi, ti);
        let p = design.bases[gi].unpenalised();
        (0..p).for_each(|j| x[(i, offset[gi] + j)] = ci[j]);
        for (j, &(sj, gj, tj, _)) in owner.iter().enumerate() {
            if gi == gj
                && let Some(s2) = layout.smoothing_variance(theta, gi)
            {
                let cj = columns(gj, tj);
                v[(i, j)] += s2 * ci[p..].iter().zip(&cj[p..]).map(|(a, b)| a * b).sum::<f64>();
            }
            if si == sj {
                let factor = layout.subject_factor(theta, gi);
                let d = &factor * factor.transpose();
                let z = |t: f64| [1.0, t - units.subject_centre];
                for a in 0..layout.effects {
                    for b in 0..layout.effects {
                        v[(i, j)] += z(ti)[a] * d[(a, b)] * z(tj)[b];
                    }
                }
                let variance = layout.variance(theta, gi);
                v[(i, j)] += variance
                    * match layout.error_shape(theta) {
                        None => f64::from(u8::from(i == j)),
                        Some(shape) => {
                            (1.0 - shape.nugget) * (-shape.rate * (ti - tj).abs()).exp()
                                + if i == j { shape.nugget } else { 0.0 }
                        }
                    };
            }
        }
    }
    let factor = v.cholesky().unwrap();
    let vx = factor.solve(&x);
    let xvx = x.tr_mul(&vx).cholesky().unwrap();
    let b = xvx.solve(&vx.tr_mul(&y));
    let r = &y - &x * &b;
    let log_det = |l: &DMatrix<f64>| l.diagonal().iter().map(|d| 2.0 * d.ln()).sum::<f64>();
    0.5 * ((rows - free) as f64 * (2.0 * std::f64::consts::PI).ln()
        + log_det(&factor.l())
        + log_det(&xvx.l())
        + r.dot(&factor.solve(&r)))
}

#[test]
fn criterion_equals_the_dense_one() {
    let data = made_up(2, 4, 6, 11);
    for model in all_models() {
        let (design, layout) = prepared(&data, &model);
        let theta = somewhere(&layout);
        let value = Criterion::new(&design, &layout).evaluate(&theta, true).unwrap().value;
        let expected = dense_value(&data, &design, &layout, &theta);
        assert!((value - expected).abs() < 1e-9 * expected.abs().max(1.0), "{model:?}: {value} {expected}");
    }
}

#[test]
fn gradient_equals_differences() {
    let data = made_up(2, 4, 6, 12);
    for model in all_models() {
        let (design, layout) = prepared(&data, &model);
        let theta = somewhere(&layout);
        let mut criterion = Criterion::new(&design, &layout);
        let gradient = criterion.evaluate(&theta, true).unwrap().gradient;
        for k in 0..theta.len() {
            let mut at = |h: f64| {
                let mut moved = theta.clone();
                moved[k] += h;
                criterion.evaluate(&moved, false).unwrap().value
            };
            let expected = (at(1e-5) - at(-1e-5)) / 2e-5;
            let close = (gradient[k] - expected).abs() < 1e-6 * (1.0 + expected.abs());
            assert!(close, "{model:?} {:?}: {} {expected}", layout.entries[k], gradient[k]);
        }
    }
}

#[test]
fn every_model_reaches_an_optimum() {
    let data = made_up(3, 8, 8, 13);
    for model in all_models() {
        let fit = fit(&data, &model).unwrap();
        assert!(fit.log_reml().is_finite(), "{model:?}");
        let mut criterion = Criterion::new(&fit.design, &fit.layout);
        for k in &fit.free {
            let mut moved = fit.theta.clone();
            moved[*k] += 0.01;
            let up = criterion.evaluate(&moved, false).unwrap().value;
            assert!(up > fit.value, "{model:?} {:?}", fit.layout.entries[*k]);
        }
    }
}

#[test]
fn chains_and_whitening_reduce_to_the_same_products() {
    let data = made_up(2, 4, 6, 14);
    let (design, _) = prepared(&data, &model(SubjectEffects::Slope, Serial::Ar1));
    let shape = |nugget| Some(crate::whiten::ErrorShape { rate: 1.7, nugget });
    let (fast, fast_slopes) = crate::reduce::reduce(&design, shape(0.0), &[0]).unwrap();
    // A measurement error too small to matter takes the general way.
    let (slow, slow_slopes) = crate::reduce::reduce(&design, shape(1e-13), &[0]).unwrap();
    for (a, b) in [(&fast, &slow), (&fast_slopes[0], &slow_slopes[0])] {
        for (x, y) in a.groups.iter().zip(&b.groups) {
            assert!((&x.ff - &y.ff).amax() < 1e-8 * x.ff.amax() && (&x.fy - &y.fy).amax() < 1e-8);
            assert!((x.yy - y.yy).abs() < 1e-8 && (x.log_det - y.log_det).abs() < 1e-8);
        }
        for (x, y) in a.patterns.iter().zip(&b.patterns) {
            assert!((&x.fz - &y.fz).amax() < 1e-8 && (&x.zyyz - &y.zyyz).amax() < 1e-8);
            assert!((&x.zz - &y.zz).amax() < 1e-8 && (&x.zy - &y.zy).amax() < 1e-8);
        }
    }
}
