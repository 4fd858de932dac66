//! The criterion against a dense computation, its gradient against differences.

use super::*;
use crate::basis::GroupBasis;
use crate::model::{
    Basis, ClusterEffects, Dimension, Family, Likelihood, Shape, Shared, Sharing, SubjectEffects, SubjectRows,
};
use crate::special::Rng;
use crate::spline::Roughness;

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
            subjects.push(SubjectRows { group, times, responses, ..SubjectRows::default() });
        }
    }
    Data { groups, subjects, ..Data::default() }
}

fn model(subjects: SubjectEffects, serial: Serial) -> Model {
    Model {
        shape: Shape::Smooth(Basis::Cubic, Dimension::Auto),
        common_start: false,
        smoothness: Sharing::ByGroup,
        subjects,
        subjects_spread: Sharing::Common,
        clusters: ClusterEffects::None,
        serial,
        spread: Sharing::Common,
        likelihood: Likelihood::Restricted,
        family: Family::Normal,
    }
}

/// The same table with subjects in clusters of one group or of several.
fn housed(mut data: Data, crossed: bool) -> Data {
    for (k, subject) in data.subjects.iter_mut().enumerate() {
        subject.cluster = Some(if crossed { k % 3 } else { subject.group * 10 + k % 2 });
    }
    data.subjects[1].cluster = None;
    data
}

/// The same table with two free shared columns and a run of three penalised ones.
fn adjusted(mut data: Data) -> Data {
    for (k, subject) in data.subjects.iter_mut().enumerate() {
        let own = [f64::from(u8::from(k % 3 == 1)), 0.0, 0.0, 0.0, 0.0];
        for (j, &t) in subject.times.iter().enumerate() {
            let mut row = own;
            row[1] = (t * 1.7 + k as f64).sin();
            row[2 + (k / 2) % 3] = 1.0;
            subject.responses[j] += 0.4 * row[0] - 0.3 * row[1] + 0.5 * row[3];
            subject.shared.extend(row);
        }
    }
    data.shared = Shared { free: 2, penalised: vec![3], reference: vec![0.0; 5] };
    data
}

/// Tables and models beyond groups and subjects.
fn wider() -> Vec<(Data, Model)> {
    let plain = || made_up(2, 5, 6, 11);
    let mut all = Vec::new();
    for serial in [Serial::None, Serial::Ar1, Serial::Ar1Nugget] {
        for subjects in [SubjectEffects::None, SubjectEffects::Intercept, SubjectEffects::Slope] {
            for clusters in [ClusterEffects::Intercept, ClusterEffects::Slope] {
                let model = Model { clusters, spread: Sharing::ByGroup, ..model(subjects, serial) };
                all.push((housed(plain(), false), model));
                all.push((housed(adjusted(plain()), true), model));
            }
            all.push((adjusted(plain()), model(subjects, serial)));
        }
        let full = Model { likelihood: Likelihood::Full, ..model(SubjectEffects::Slope, serial) };
        all.push((plain(), full));
        all.push((housed(adjusted(plain()), true), Model { clusters: ClusterEffects::Slope, ..full }));
        let curve = Model { subjects_spread: Sharing::ByGroup, ..model(SubjectEffects::Curve, serial) };
        all.push((plain(), curve));
        all.push((housed(plain(), true), Model { clusters: ClusterEffects::Slope, ..curve }));
    }
    all
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
            Parameter::Cluster { part: 1 } => -0.15,
            Parameter::Cluster { .. } => -0.8 + 0.1 * k as f64,
            Parameter::Shared(_) => -0.4,
            Parameter::Rate => 1.1,
            Parameter::Nugget => -0.7,
        })
        .collect()
}

fn prepared(data: &Data, model: &Model) -> (Design, Layout) {
    let units = Units::of(data);
    let bases = group_bases(data, model, &units);
    let design = Design::new(data, units, bases, model);
    let layout = Layout::new(model, &design);
    (design, layout)
}

/// Minus the log restricted likelihood from N x N matrices.
fn dense_value(data: &Data, design: &Design, layout: &Layout, theta: &[f64]) -> f64 {
    let rows = data.rows();
    let units = &design.units;
    let free = design.unpenalised();
    let columns_shared = data.shared.columns();
    let mut v = DMatrix::zeros(rows, rows);
    let mut x = DMatrix::zeros(rows, free);
    let mut y = DMatrix::zeros(rows, 1);
    let (mut owner, mut shared) = (Vec::new(), Vec::new());
    for (s, subject) in data.subjects.iter().enumerate() {
        for (j, (t, r)) in subject.times.iter().zip(&subject.responses).enumerate() {
            shared.push(&subject.shared[j * columns_shared..(j + 1) * columns_shared]);
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
        (0..data.shared.free).for_each(|j| x[(i, free - data.shared.free + j)] = shared[i][j]);
        for (j, &(sj, gj, tj, _)) in owner.iter().enumerate() {
            if gi == gj
                && let Some(s2) = layout.smoothing_variance(theta, gi)
            {
                let cj = columns(gj, tj);
                v[(i, j)] += s2 * ci[p..].iter().zip(&cj[p..]).map(|(a, b)| a * b).sum::<f64>();
            }
            let mut from = data.shared.free;
            for (run, &length) in data.shared.penalised.iter().enumerate() {
                let at = layout.entries.iter().position(|e| *e == Parameter::Shared(run)).unwrap();
                let product: f64 = (from..from + length).map(|c| shared[i][c] * shared[j][c]).sum();
                v[(i, j)] += theta[at].exp() * product;
                from += length;
            }
            let mut z = [vec![0.0; design.effects.width()], vec![0.0; design.effects.width()]];
            design.effects.fill(ti, &mut z[0]);
            design.effects.fill(tj, &mut z[1]);
            let effect = |factor: DMatrix<f64>| {
                let d = &factor * factor.transpose();
                let pairs = (0..z[0].len()).flat_map(|a| (0..z[0].len()).map(move |b| (a, b)));
                pairs.map(|(a, b)| z[0][a] * d[(a, b)] * z[1][b]).sum::<f64>()
            };
            let (ki, kj) = (data.subjects[si].cluster, data.subjects[sj].cluster);
            if layout.clusters != ClusterEffects::None && (si == sj || (ki.is_some() && ki == kj)) {
                v[(i, j)] += effect(layout.cluster_factor(theta));
            }
            if si == sj {
                v[(i, j)] += effect(layout.subject_factor(theta, gi));
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
    let (counted, integrated) = if layout.full { (rows, 0.0) } else { (rows - free, log_det(&xvx.l())) };
    0.5 * (counted as f64 * (2.0 * std::f64::consts::PI).ln()
        + log_det(&factor.l())
        + integrated
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
fn wider_criteria_equal_the_dense_ones() {
    for (data, model) in wider() {
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
    for (data, model) in all_models().into_iter().map(|model| (data.clone(), model)).chain(wider()) {
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
fn wider_models_reach_an_optimum() {
    for (data, model) in wider() {
        let fit = fit(&data, &model).unwrap();
        assert!(fit.log_reml().is_finite(), "{model:?}");
        let influence = fit.influence(&[fit.gap(0, 1, 2.0)], &[3]);
        assert_eq!(influence[0].values.len(), 1, "{model:?}");
    }
}

#[test]
fn a_shared_column_that_tells_groups_apart_is_refused() {
    let mut data = adjusted(made_up(2, 4, 6, 15));
    for subject in &mut data.subjects {
        subject.shared.chunks_exact_mut(5).for_each(|row| row[1] = 3.0 - subject.group as f64);
    }
    let refused = fit(&data, &model(SubjectEffects::Intercept, Serial::None)).unwrap_err();
    assert_eq!(refused, FitError::Inseparable { column: 1 });
}

#[test]
fn every_basis_is_fitted_and_the_full_thin_plate_is_the_cubic_one() {
    let data = made_up(2, 8, 9, 17);
    let with = |basis, dimension| {
        let asked = Model { shape: Shape::Smooth(basis, dimension), ..model(SubjectEffects::Intercept, Serial::None) };
        fit(&data, &asked).unwrap()
    };
    let cubic = with(Basis::Cubic, Dimension::Full);
    let plate = with(Basis::ThinPlate, Dimension::Full);
    assert!((cubic.log_reml() - plate.log_reml()).abs() < 1e-6);
    let process = |range, roughness| Basis::Process { range, roughness };
    for basis in [
        Basis::ThinPlate,
        Basis::Pieces,
        process(4.0, Roughness::ThreeHalves),
        process(4.0, Roughness::FiveHalves),
        Basis::Cyclic { period: 12.0 },
    ] {
        let fit = with(basis, Dimension::Auto);
        let (posterior, reference) = (fit.corrected(), cubic.corrected());
        for t in [0.5, 2.5, 5.0, 7.5] {
            let (got, want) = (posterior.estimate(&fit.gap(0, 1, t)), reference.estimate(&cubic.gap(0, 1, t)));
            assert!((got.mean - want.mean).abs() < 1.5 * want.se, "{basis:?} at {t}: {got:?} {want:?}");
        }
        assert!(fit.effective_df(0) > 2.0, "{basis:?}");
    }
}

#[test]
fn a_common_start_is_one_mean_at_the_first_time() {
    let data = made_up(3, 6, 7, 16);
    for shape in [Shape::Smooth(Basis::Cubic, Dimension::Auto), Shape::Straight, Shape::ByTime] {
        let asked = Model { shape, common_start: true, ..model(SubjectEffects::Intercept, Serial::None) };
        let fit = fit(&data, &asked).unwrap();
        let posterior = fit.corrected();
        let at = |g: usize, t: f64| posterior.estimate(&fit.course(g, t));
        assert!((at(0, 0.0).mean - at(2, 0.0).mean).abs() < 1e-9 && at(0, 0.0).se > 0.0);
        assert!(posterior.estimate(&fit.gap(0, 1, 0.0)).se < 1e-9);
        assert!(posterior.estimate(&fit.gap(0, 1, 5.0)).se > 0.1);
        // The rate is the slope of the course, its shared part included.
        let rate = posterior.estimate(&fit.rate(1, 0.7)).mean;
        let slope = (at(1, 0.7005).mean - at(1, 0.6995).mean) / 1e-3;
        assert!((rate - slope).abs() < 1e-5 * (1.0 + slope.abs()), "{shape:?}: {rate} {slope}");
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
