//! Quantile of the largest of many joint |z| or |t|: the critical value of a simultaneous band.
//!
//! Let Z_j = a_j' X with X standard normal in r dimensions and unit vectors a_j (the rows of a factor of the correlation
//! matrix). X splits into an independent radius R and direction u on the unit sphere, so max_j |Z_j| = R h(u) with
//! h(u) = max_j |a_j' u|, and
//!
//! ```text
//! P(max_j |Z_j| > c) = E_u P(R > c / h(u)),     R^2 ~ chi-squared(r)
//! ```
//!
//! For a joint t with nu degrees of freedom (one chi-squared denominator shared by all Z_j), R^2 / r ~ F(r, nu) instead.
//! Only the direction is drawn; the radius is integrated exactly, so one set of directions serves every level and every
//! nu, and the tail is smooth in c. Directions come in orthonormal sets of r, which lowers the error further: Deak 1980,
//! "Three digit accurate multiple normal probabilities", Numer. Math. 35:369.
//!
//! | symbol | code name | shape |
//! |---|---|---|
//! | a_j | `rows` | m x r, one row after the other |
//! | h(u) | `maxima` | one per direction, sorted and averaged in at most 512 bins |
//! | c | `value` | the quantile |

use super::distributions::{chi2_sf, f_sf, f_slope};
use super::gamma::gamma_prefactor;
use super::invert::{LogProbability, solve_log_probability};
use super::normal::normal_quantile;
use super::rng::Rng;

/// Directions handled side by side in the inner loop, in single precision: its rounding, 1e-7, is far below the
/// sampling error, and twice as many lanes fit a register.
const LANES: usize = 16;
/// Bins of h(u) on which the tail is evaluated.
const MOST_BINS: usize = 512;
/// Independent parts of the sample, for the Monte-Carlo error.
const BATCHES: usize = 32;

/// A quantile with its Monte-Carlo standard error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quantile {
    /// The value c with P(max |Z_j| <= c) = level.
    pub value: f64,
    /// Standard error of `value` from the random directions; zero when r = 1, where the value is exact.
    pub mc_error: f64,
}

/// The sampled maxima h(u) of one factor, ready for any level and degrees of freedom.
#[derive(Clone, Debug)]
pub struct DirectionMaxima {
    dimension: f64,
    bins: Vec<Bin>,
}

/// A run of neighbouring sorted maxima.
#[derive(Clone, Debug)]
struct Bin {
    /// Mean of h in the bin.
    mean: f64,
    /// Share of all directions.
    share: f64,
    /// Directions of each batch that fall in the bin.
    of_batch: [u32; BATCHES],
}

impl DirectionMaxima {
    /// Draws `directions` directions (rounded up to whole orthonormal sets) and keeps the largest |a_j' u| of each.
    ///
    /// `rows` holds `m` unit vectors of length `r`, one after the other; rows of zeros are allowed and never the largest.
    /// The same arguments give the same bits.
    ///
    /// # Panics
    /// If `rows` is not `m` times `r` long.
    pub fn new(rows: &[f64], m: usize, r: usize, directions: usize, seed: u64) -> Self {
        assert_eq!(rows.len(), m * r, "the factor must be m x r");
        if m == 0 || r == 0 {
            return Self { dimension: r as f64, bins: Vec::new() };
        }
        let sets = if r == 1 { 1 } else { directions.max(1).div_ceil(r).max(BATCHES) };
        let maxima = sample_maxima(rows, r, sets, seed);
        Self { dimension: r as f64, bins: into_bins(maxima, r, sets) }
    }

    /// The value c with P(max |Z_j| <= c) = `level`, for joint normal (`df` none or infinite) or joint t.
    ///
    /// NaN when there are no rows, when every row is zero, or when `level` is outside (0, 1).
    pub fn quantile(&self, level: f64, df: Option<f64>) -> Quantile {
        let largest = self.bins.last().map_or(0.0, |bin| bin.mean);
        let proper = level > 0.0 && level < 1.0 && largest > 0.0;
        if !proper {
            return Quantile { value: f64::NAN, mc_error: f64::NAN };
        }
        let radius = Radius::new(self.dimension, df);
        let start = libm::log(normal_quantile(0.5 + 0.5 * level) + 0.5);
        let value = solve_log_probability(1.0 - level, start, false, |c| {
            let (mut tail, mut slope) = (0.0, 0.0);
            for bin in &self.bins {
                let (beyond, change) = radius.beyond(c / bin.mean);
                tail += bin.share * beyond;
                slope += bin.share * change;
            }
            LogProbability::new(tail, slope)
        });
        Quantile { value, mc_error: self.error_at(value, &radius) }
    }

    /// P(max |Z_j| > c), the p-value of an observed largest |z| (or |t| on `df`).
    pub fn tail(&self, c: f64, df: Option<f64>) -> f64 {
        let radius = Radius::new(self.dimension, df);
        self.bins.iter().map(|bin| bin.share * radius.beyond(c / bin.mean).0).sum()
    }

    /// Standard error of the solution c: that of the tail over batches, divided by the tail's slope in c.
    fn error_at(&self, c: f64, radius: &Radius) -> f64 {
        let mut sums = [0.0; BATCHES];
        let mut sizes = [0.0; BATCHES];
        let mut slope = 0.0;
        for bin in &self.bins {
            let (beyond, change) = radius.beyond(c / bin.mean);
            slope += bin.share * change / c;
            for k in 0..BATCHES {
                sums[k] += beyond * f64::from(bin.of_batch[k]);
                sizes[k] += f64::from(bin.of_batch[k]);
            }
        }
        let used = sizes.iter().filter(|size| **size > 0.0).count();
        if used < 2 {
            return 0.0;
        }
        let (total, size) = (sums.iter().sum::<f64>(), sizes.iter().sum::<f64>());
        let mean = total / size;
        let spread: f64 = (0..BATCHES).map(|k| (sums[k] - mean * sizes[k]) * (sums[k] - mean * sizes[k])).sum();
        let standard_error = libm::sqrt(spread * used as f64 / (used - 1) as f64) / size;
        libm::fabs(standard_error / slope)
    }
}

/// The quantile of max |a_j' X| at `level`, drawing the directions anew; see [`DirectionMaxima`].
pub fn max_abs_quantile(
    rows: &[f64],
    m: usize,
    r: usize,
    level: f64,
    df: Option<f64>,
    directions: usize,
    seed: u64,
) -> Quantile {
    DirectionMaxima::new(rows, m, r, directions, seed).quantile(level, df)
}

/// Distribution of the radius R.
struct Radius {
    dimension: f64,
    df: Option<f64>,
}

impl Radius {
    fn new(dimension: f64, df: Option<f64>) -> Self {
        Self { dimension, df: df.filter(|df| df.is_finite()) }
    }

    /// (P(R > x), d P(R > x) / d ln x).
    fn beyond(&self, x: f64) -> (f64, f64) {
        let r = self.dimension;
        if x.is_nan() || x * x >= f64::MAX {
            return (0.0, 0.0);
        }
        match self.df {
            None => (chi2_sf(x * x, r), -2.0 * gamma_prefactor(0.5 * r, 0.5 * x * x)),
            Some(df) => (f_sf(x * x / r, r, df), -2.0 * f_slope(x * x / r, r, df)),
        }
    }
}

/// h(u) for `sets` orthonormal sets of r directions, in the order drawn.
fn sample_maxima(rows: &[f64], r: usize, sets: usize, seed: u64) -> Vec<f64> {
    let mut rng = Rng::new(seed);
    let directions = sets * r;
    let mut maxima = Vec::with_capacity(directions + LANES);
    let mut set = vec![0.0; r * r];
    let mut block = vec![[0.0_f32; LANES]; r];
    let rows: Vec<f32> = rows.iter().map(|&x| x as f32).collect();
    let mut lane = 0;
    for _ in 0..sets {
        orthonormal_set(&mut rng, &mut set, r);
        for direction in set.chunks_exact(r) {
            for (slot, coordinate) in block.iter_mut().zip(direction) {
                slot[lane] = *coordinate as f32;
            }
            lane += 1;
            if lane == LANES {
                maxima.extend(block_maxima(&rows, r, &block));
                lane = 0;
            }
        }
    }
    if lane > 0 {
        maxima.extend(block_maxima(&rows, r, &block));
        maxima.truncate(directions);
    }
    maxima
}

/// r orthonormal vectors, uniform under rotation: Gaussian vectors by modified Gram-Schmidt.
pub(super) fn orthonormal_set(rng: &mut Rng, set: &mut [f64], r: usize) {
    for k in 0..r {
        let (before, rest) = set.split_at_mut(k * r);
        let vector = &mut rest[..r];
        loop {
            vector.iter_mut().for_each(|x| *x = rng.normal());
            for other in before.chunks_exact(r) {
                let along: f64 = other.iter().zip(&*vector).map(|(a, b)| a * b).sum();
                vector.iter_mut().zip(other).for_each(|(x, o)| *x -= along * o);
            }
            let length = libm::sqrt(vector.iter().map(|x| x * x).sum());
            // Nearly dependent draws (chance about 1e-6 for the last vector) are drawn again.
            if length > 1e-6 {
                vector.iter_mut().for_each(|x| *x /= length);
                break;
            }
        }
    }
}

/// The largest |a_j' u| for each of the directions in `block` (r coordinates x lanes).
fn block_maxima(rows: &[f32], r: usize, block: &[[f32; LANES]]) -> [f64; LANES] {
    let mut largest = [0.0_f32; LANES];
    for row in rows.chunks_exact(r) {
        let mut sum = [0.0_f32; LANES];
        for (a, coordinates) in row.iter().zip(block) {
            for lane in 0..LANES {
                sum[lane] += a * coordinates[lane];
            }
        }
        for lane in 0..LANES {
            let square = sum[lane] * sum[lane];
            largest[lane] = if square > largest[lane] { square } else { largest[lane] };
        }
    }
    largest.map(|square| libm::sqrt(f64::from(square)))
}

/// Sorts the maxima and averages them in bins of equal count, remembering which batch each came from.
fn into_bins(maxima: Vec<f64>, r: usize, sets: usize) -> Vec<Bin> {
    let total = maxima.len();
    let batches = BATCHES.min(sets);
    let batch_of = |index: usize| (index / r) * batches / sets;
    let mut sorted: Vec<(f64, u32)> = maxima.into_iter().enumerate().map(|(i, h)| (h, batch_of(i) as u32)).collect();
    sorted.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let count = MOST_BINS.min(total);
    (0..count)
        .map(|k| {
            let members = &sorted[k * total / count..(k + 1) * total / count];
            let mut of_batch = [0; BATCHES];
            for (_, batch) in members {
                of_batch[*batch as usize] += 1;
            }
            let sum: f64 = members.iter().map(|(h, _)| h).sum();
            Bin { mean: sum / members.len() as f64, share: members.len() as f64 / total as f64, of_batch }
        })
        .collect()
}
