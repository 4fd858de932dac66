//! Inverting a distribution function.

/// The logarithm of a probability and its slope, both as functions of u = ln x.
pub(super) struct LogProbability {
    pub(super) value: f64,
    pub(super) slope: f64,
}

impl LogProbability {
    /// From a probability and its derivative in u, d probability / d ln x.
    pub(super) fn new(probability: f64, derivative: f64) -> Self {
        Self { value: libm::log(probability), slope: derivative / probability }
    }
}

/// Solves `log_probability(u).value = ln(target)` for x = e^u by Newton's method, kept inside a shrinking bracket.
///
/// Both tails of the t, F and chi-squared distributions are close to straight lines in these coordinates, which is why
/// they are used. `rising` says whether the probability grows with x.
pub(super) fn solve_log_probability(
    target: f64,
    start: f64,
    rising: bool,
    log_probability: impl Fn(f64) -> LogProbability,
) -> f64 {
    let goal = libm::log(target);
    let (mut low, mut high) = (-745.0_f64, 709.0_f64);
    let mut u = start.clamp(low, high);
    for _ in 0..300 {
        let here = log_probability(libm::exp(u));
        let miss = here.value - goal;
        if miss == 0.0 {
            break;
        }
        if (miss > 0.0) == rising {
            high = u;
        } else {
            low = u;
        }
        let newton = u - miss / here.slope;
        let inside = newton > low && newton < high;
        let next = if inside { newton } else { 0.5 * (low + high) };
        let moved = libm::fabs(next - u);
        u = next;
        if moved <= 4e-16 * (1.0 + 0.01 * libm::fabs(u)) || high - low <= 4e-16 {
            break;
        }
    }
    libm::exp(u)
}
