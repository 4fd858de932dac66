//! New responses on a design, from chosen parameters and curves.

use crate::params::Layout;
use crate::reduce::{Design, Pattern};
use crate::special::Rng;
use crate::whiten::ErrorShape;
use nalgebra::{DMatrix, DVector};

/// The design with new responses: curves from `coefficients` (one column per block, internal unit),
/// cluster effects, subject effects and errors from `theta`. Units stay those of the original.
pub(crate) fn simulate_responses(
    design: &Design,
    layout: &Layout,
    theta: &[f64],
    coefficients: &[DMatrix<f64>],
    rng: &mut Rng,
) -> Design {
    let mut copy = design.clone();
    let shape = layout.error_shape(theta);
    let w = design.effects.width();
    let clusters = cluster_effects(design, layout, theta, rng);
    for (index, pattern) in copy.patterns.iter_mut().enumerate() {
        let g = pattern.group;
        let mean = curve_at(design, pattern, coefficients);
        let factor = layout.subject_factor(theta, g);
        let sd = libm::sqrt(layout.variance(theta, g));
        let m = pattern.subjects.len();
        for s in 0..m {
            let mut effects = &factor * DVector::from_fn(w, |_, _| rng.normal());
            if let Some(cluster) = clusters.get(index) {
                effects += cluster;
            }
            let errors = correlated(&pattern.times, shape, rng);
            for (j, (mu, e)) in mean.iter().zip(&errors).enumerate() {
                let own = &pattern.effects[j * w..(j + 1) * w];
                let effect: f64 = own.iter().zip(effects.iter()).map(|(z, u)| z * u).sum();
                pattern.responses[j * m + s] = mu + sd * e + effect;
            }
        }
    }
    copy
}

/// New effects of each pattern's cluster; empty without clusters.
fn cluster_effects(design: &Design, layout: &Layout, theta: &[f64], rng: &mut Rng) -> Vec<DVector<f64>> {
    if design.clusters.is_empty() {
        return Vec::new();
    }
    let factor = layout.cluster_factor(theta);
    let mut effects = vec![DVector::zeros(factor.nrows()); design.patterns.len()];
    for members in &design.clusters {
        let drawn = &factor * DVector::from_fn(factor.nrows(), |_, _| rng.normal());
        members.iter().for_each(|&p| effects[p] = drawn.clone());
    }
    effects
}

/// Mean of a pattern's rows, internal unit.
pub(crate) fn curve_at(design: &Design, pattern: &Pattern, coefficients: &[DMatrix<f64>]) -> Vec<f64> {
    let (g, placement) = (pattern.group, &design.placement);
    let (k, shared) = (placement.own(g), placement.shared());
    let own = &coefficients[placement.block(g)];
    let table = &design.tables[g];
    (pattern.table_row.iter().enumerate())
        .map(|(j, &row)| {
            let columns = table[row * k..(row + 1) * k].iter().chain(&pattern.shared[j * shared..(j + 1) * shared]);
            columns.enumerate().map(|(c, f)| f * own[placement.position(g, c)]).sum()
        })
        .collect()
}

/// Unit-variance errors at these times.
fn correlated(times: &[f64], shape: Option<ErrorShape>, rng: &mut Rng) -> Vec<f64> {
    let Some(shape) = shape else {
        return times.iter().map(|_| rng.normal()).collect();
    };
    let (process_sd, noise_sd) = (libm::sqrt(1.0 - shape.nugget), libm::sqrt(shape.nugget));
    let mut state = rng.normal();
    let mut previous = times[0];
    (times.iter())
        .map(|&t| {
            let x = shape.rate * (t - previous);
            previous = t;
            if x > 0.0 {
                state = libm::exp(-x) * state + libm::sqrt(-libm::expm1(-2.0 * x)) * rng.normal();
            }
            let noise = if noise_sd > 0.0 { noise_sd * rng.normal() } else { 0.0 };
            process_sd * state + noise
        })
        .collect()
}
