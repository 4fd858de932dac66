//! p-values adjusted for several tests.

/// Holm 1979: step-down Bonferroni, controls the chance of any false finding. In the order given.
pub fn holm(p: &[f64]) -> Vec<f64> {
    let order = increasing(p);
    let mut adjusted = vec![0.0; p.len()];
    let mut floor: f64 = 0.0;
    for (rank, index) in order.iter().enumerate() {
        floor = floor.max(((p.len() - rank) as f64 * p[*index]).min(1.0));
        adjusted[*index] = floor;
    }
    adjusted
}

/// Benjamini & Hochberg 1995, JRSS-B 57:289: step-up, controls the share of false findings. In the order given.
pub fn benjamini_hochberg(p: &[f64]) -> Vec<f64> {
    let order = increasing(p);
    let mut adjusted = vec![0.0; p.len()];
    let mut ceiling: f64 = 1.0;
    for (rank, index) in order.iter().enumerate().rev() {
        ceiling = ceiling.min(p.len() as f64 / (rank + 1) as f64 * p[*index]);
        adjusted[*index] = ceiling;
    }
    adjusted
}

fn increasing(p: &[f64]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..p.len()).collect();
    order.sort_by(|a, b| p[*a].total_cmp(&p[*b]));
    order
}
