//! Repeated-measures analysis of variance: one between-subject factor (groups, unequal sizes allowed), one
//! within-subject factor (times), complete cases.
//!
//! y_i is the row of subject i at all T times, z_i = C y_i its k = T - 1 orthonormal contrasts, group sizes n_g, N
//! subjects, G groups:
//!
//! ```text
//! groups               T sum n_g (m_g - m)^2               over  T sum (m_i - m_g)^2        m: means over times
//! groups x times       sum n_g |z_g - z_w|^2               over  sum |z_i - z_g|^2          z_w: weighted mean
//! times, unweighted    |z_u|^2 G^2 / sum(1/n_g)            over  the same                   z_u: mean of the z_g
//! times, weighted      N |z_w|^2                           over  the same
//! ```
//!
//! The test of times on unweighted cell means is 'type III', that on the weighted mean 'type II'; with equal sizes they
//! agree. The other two effects are the same in both. (Winer 1971, Statistical Principles in Experimental Design,
//! ch. 7.) A design with two within-subject factors is not handled: average over one of them first.

use super::sphericity::{Sphericity, sphericity};
use super::{Panel, Undefined, largest, negligible};
use crate::special::f_sf;
use nalgebra::{DMatrix, DVector};

/// An F test of one effect.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EffectTest {
    /// Sum of squares of the effect.
    pub ss: f64,
    /// Its degrees of freedom.
    pub df: f64,
    /// Sum of squares for error.
    pub ss_error: f64,
    /// Its degrees of freedom.
    pub df_error: f64,
    /// F statistic.
    pub f: f64,
    /// p-value without correction.
    pub p: f64,
}

/// An F test of a within-subject effect, with its p-value corrected for lack of sphericity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WithinTest {
    /// The uncorrected test.
    pub effect: EffectTest,
    /// p-value with both degrees of freedom times the Greenhouse-Geisser epsilon.
    pub p_greenhouse_geisser: f64,
    /// p-value with both degrees of freedom times the Huynh-Feldt epsilon, at most 1.
    pub p_huynh_feldt: f64,
}

/// The whole analysis.
#[derive(Clone, Debug, PartialEq)]
pub struct RepeatedAnova {
    /// Subjects with a value at every time, by group of the panel.
    pub complete_by_group: Vec<usize>,
    /// All of them.
    pub complete: usize,
    /// Subjects dropped because a value is missing.
    pub dropped: usize,
    /// Groups on the mean over times.
    pub groups: Result<EffectTest, Undefined>,
    /// Times on unweighted group means (type III).
    pub times: Result<WithinTest, Undefined>,
    /// Times on weighted group means (type II); none where group sizes are equal and it is the same.
    pub times_weighted: Option<Result<WithinTest, Undefined>>,
    /// Groups by times: do the courses run parallel?
    pub groups_by_times: Result<WithinTest, Undefined>,
    /// Sphericity of the within-subject error.
    pub sphericity: Result<Sphericity, Undefined>,
}

/// Analyses the complete subjects of `panel`.
///
/// # Errors
/// Fewer than two times, no complete subject, or no degree of freedom for error. Groups without a complete subject are
/// left out; see `complete_by_group`.
pub fn repeated_anova(panel: &Panel) -> Result<RepeatedAnova, Undefined> {
    let cells = Cells::new(panel)?;
    let sizes = &cells.sizes;
    let equal_sizes = sizes.windows(2).all(|pair| pair[0] == pair[1]);
    let within = Within::new(&cells);
    Ok(RepeatedAnova {
        complete_by_group: cells.complete_by_group.clone(),
        complete: cells.total,
        dropped: panel.values.len() - cells.total,
        groups: groups_effect(&cells),
        times: within.times_unweighted(),
        times_weighted: (!equal_sizes).then(|| within.times_weighted()),
        groups_by_times: within.interaction(),
        sphericity: within.sphericity,
    })
}

/// Complete rows, sorted into the groups that have any.
struct Cells {
    rows: Vec<Vec<DVector<f64>>>,
    sizes: Vec<f64>,
    complete_by_group: Vec<usize>,
    total: usize,
    times: usize,
    df_error: usize,
    /// Largest absolute value, the yardstick for rounding.
    scale: f64,
}

impl Cells {
    fn new(panel: &Panel) -> Result<Self, Undefined> {
        let times = panel.times.len();
        if times < 2 {
            return Err(Undefined::OneTime);
        }
        let mut by_group = vec![Vec::new(); panel.groups];
        for (row, group) in panel.values.iter().zip(&panel.group_of_subject) {
            if let Some(complete) = row.iter().copied().collect::<Option<Vec<f64>>>() {
                by_group[*group].push(DVector::from_vec(complete));
            }
        }
        let complete_by_group: Vec<usize> = by_group.iter().map(Vec::len).collect();
        let rows: Vec<Vec<DVector<f64>>> = by_group.into_iter().filter(|g| !g.is_empty()).collect();
        let total: usize = complete_by_group.iter().sum();
        if total == 0 {
            return Err(Undefined::NoCompleteSubject);
        }
        let df_error = total - rows.len();
        if df_error == 0 {
            return Err(Undefined::TooFewSubjects { have: 0, need: 1 });
        }
        let scale = largest(rows.iter().flatten().flat_map(|row| row.iter().copied()));
        let sizes = rows.iter().map(|g| g.len() as f64).collect();
        Ok(Self { rows, sizes, complete_by_group, total, times, df_error, scale })
    }
}

fn groups_effect(cells: &Cells) -> Result<EffectTest, Undefined> {
    let count = cells.rows.len();
    if count < 2 {
        return Err(Undefined::OneGroup);
    }
    let subject_means: Vec<Vec<f64>> =
        cells.rows.iter().map(|group| group.iter().map(|row| row.mean()).collect()).collect();
    let grand = subject_means.iter().flatten().sum::<f64>() / cells.total as f64;
    let (mut between, mut within) = (0.0, 0.0);
    for group in &subject_means {
        let (mean, squares) = super::mean_and_squares(group);
        between += group.len() as f64 * (mean - grand) * (mean - grand);
        within += squares;
    }
    if negligible(within, cells.total, cells.scale) {
        return Err(Undefined::NoVariation);
    }
    let times = cells.times as f64;
    Ok(effect(times * between, (count - 1) as f64, times * within, cells.df_error as f64))
}

fn effect(ss: f64, df: f64, ss_error: f64, df_error: f64) -> EffectTest {
    let f = (ss / df) / (ss_error / df_error);
    EffectTest { ss, df, ss_error, df_error, f, p: f_sf(f, df, df_error) }
}

/// Group means of the contrasts and the pooled error around them.
struct Within<'a> {
    cells: &'a Cells,
    means: Vec<DVector<f64>>,
    weighted: DVector<f64>,
    ss_error: f64,
    sphericity: Result<Sphericity, Undefined>,
}

impl<'a> Within<'a> {
    fn new(cells: &'a Cells) -> Self {
        let contrasts = orthonormal_contrasts(cells.times);
        let k = cells.times - 1;
        let mut means = Vec::with_capacity(cells.rows.len());
        let mut weighted = DVector::zeros(k);
        let mut products = DMatrix::zeros(k, k);
        for group in &cells.rows {
            let coded: Vec<DVector<f64>> = group.iter().map(|row| &contrasts * row).collect();
            let sum = coded.iter().fold(DVector::zeros(k), |sum, z| sum + z);
            let mean = &sum / group.len() as f64;
            for z in &coded {
                let residual = z - &mean;
                products.ger(1.0, &residual, &residual, 1.0);
            }
            weighted += sum / cells.total as f64;
            means.push(mean);
        }
        let ss_error = products.trace();
        let flat = negligible(ss_error, cells.total * cells.times, cells.scale);
        let sphericity = if flat { Err(Undefined::NoVariation) } else { Ok(sphericity(&products, cells.df_error)) };
        Self { cells, means, weighted, ss_error, sphericity }
    }

    fn times_unweighted(&self) -> Result<WithinTest, Undefined> {
        // |z_u|^2 G^2 = |sum of the z_g|^2.
        let sum = self.means.iter().fold(DVector::zeros(self.weighted.len()), |sum, m| sum + m);
        let reciprocals: f64 = self.cells.sizes.iter().map(|n| 1.0 / n).sum();
        self.test(sum.norm_squared() / reciprocals, (self.cells.times - 1) as f64)
    }

    fn times_weighted(&self) -> Result<WithinTest, Undefined> {
        let ss = self.cells.total as f64 * self.weighted.norm_squared();
        self.test(ss, (self.cells.times - 1) as f64)
    }

    fn interaction(&self) -> Result<WithinTest, Undefined> {
        let groups = self.means.len();
        if groups < 2 {
            return Err(Undefined::OneGroup);
        }
        let sizes_and_means = self.cells.sizes.iter().zip(&self.means);
        let ss = sizes_and_means.map(|(n, mean)| n * (mean - &self.weighted).norm_squared()).sum();
        self.test(ss, ((groups - 1) * (self.cells.times - 1)) as f64)
    }

    fn test(&self, ss: f64, df: f64) -> Result<WithinTest, Undefined> {
        let sphericity = self.sphericity?;
        let df_error = (self.cells.df_error * (self.cells.times - 1)) as f64;
        let effect = effect(ss, df, self.ss_error, df_error);
        let corrected = |epsilon: f64| f_sf(effect.f, epsilon * df, epsilon * df_error);
        Ok(WithinTest {
            effect,
            p_greenhouse_geisser: corrected(sphericity.greenhouse_geisser),
            p_huynh_feldt: corrected(sphericity.huynh_feldt_used),
        })
    }
}

/// k x T orthonormal contrasts (Helmert): row j compares time j + 1 with the mean of the times before it.
fn orthonormal_contrasts(times: usize) -> DMatrix<f64> {
    DMatrix::from_fn(times - 1, times, |row, column| {
        let before = (row + 1) as f64;
        let length = libm::sqrt(before * (before + 1.0));
        match column {
            c if c <= row => -1.0 / length,
            c if c == row + 1 => before / length,
            _ => 0.0,
        }
    })
}
