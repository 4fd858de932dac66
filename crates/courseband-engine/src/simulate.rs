//! New responses on a design, from chosen parameters and curves.

use crate::params::Layout;
use crate::reduce::{Design, Pattern};
use crate::special::Rng;
use crate::whiten::ErrorShape;
use nalgebra::{DMatrix, DVector};

/// The design with new responses: curves from `coefficients` (one K x 1 per group, internal unit),
/// subject effects and errors from `theta`. Units stay those of the original.
pub(crate) fn simulate_responses(
    design: &Design,
    layout: &Layout,
    theta: &[f64],
    coefficients: &[DMatrix<f64>],
    rng: &mut Rng,
) -> Design {
    let mut copy = design.clone();
    let shape = layout.error_shape(theta);
    for pattern in &mut copy.patterns {
        let g = pattern.group;
        let mean = curve_at(design, pattern, &coefficients[g]);
        let factor = layout.subject_factor(theta, g);
        let sd = libm::sqrt(layout.variance(theta, g));
        let m = pattern.subjects.len();
        for s in 0..m {
            let effects = &factor * DVector::from_fn(layout.effects, |_, _| rng.normal());
            let errors = correlated(&pattern.times, shape, rng);
            for (j, (mu, e)) in mean.iter().zip(&errors).enumerate() {
                let mut y = mu + sd * e;
                if layout.effects > 0 {
                    y += effects[0];
                }
                if layout.effects > 1 {
                    y += effects[1] * (pattern.times[j] - design.units.subject_centre);
                }
                pattern.responses[j * m + s] = y;
            }
        }
    }
    copy
}

fn curve_at(design: &Design, pattern: &Pattern, coefficients: &DMatrix<f64>) -> Vec<f64> {
    let k = design.bases[pattern.group].columns();
    let table = &design.tables[pattern.group];
    (pattern.table_row.iter())
        .map(|&row| table[row * k..(row + 1) * k].iter().zip(coefficients.iter()).map(|(f, b)| f * b).sum())
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
