//! The methods paragraphs: the model in words and as a formula, estimation, bands, software.

use crate::findings::Findings;
use crate::plan::{
    BandKind, Basis, Dimension, Distribution, MarginUnit, Pairs, Serial, Shape, Sharing, SmallSample, Smoothness,
    Spread, Start, SubjectEffects, Transform,
};
use crate::sentences::{percent, plain};

/// True where the plan's bands are meant to be calibrated.
pub(super) fn wants_calibration(findings: &Findings) -> bool {
    let c = &findings.plan.comparisons;
    matches!(c.small_sample, SmallSample::Auto | SmallSample::Calibrated) && c.band == BandKind::Simultaneous
}

/// Paragraphs, and the publications that they rest on.
pub(super) fn paragraphs(findings: &Findings, calibrated: bool) -> (Vec<String>, Vec<String>) {
    let mut references = vec![
        "Harville DA (1974). Bayesian inference for variance components using only error contrasts. Biometrika 61:383.",
        "Laird NM, Ware JH (1982). Random-effects models for longitudinal data. Biometrics 38:963.",
    ];
    let paragraphs = vec![
        mean(findings, &mut references),
        variation(findings, &mut references),
        bands(findings, calibrated, &mut references),
        software(findings),
    ];
    (paragraphs, references.into_iter().map(str::to_string).collect())
}

fn mean(findings: &Findings, references: &mut Vec<&'static str>) -> String {
    let plan = &findings.plan;
    let what = match plan.curves.shape {
        Shape::Straight => "a straight line".to_string(),
        Shape::ByTime => "a mean for each visit".to_string(),
        Shape::Smooth => {
            references
                .push("Ruppert D, Wand MP, Carroll RJ (2003). Semiparametric Regression. Cambridge University Press.");
            let basis = match plan.curves.basis {
                Basis::Cubic => "natural cubic regression spline",
                Basis::ThinPlate => "thin plate regression spline",
                Basis::PSpline => "penalised B-spline",
                Basis::GaussianProcess => "Gaussian process with Matern covariance around a line",
                Basis::Cyclic => "cyclic cubic regression spline",
            };
            let knots = match plan.curves.dimension {
                Dimension::Auto => "a knot at every distinct time, at most 20".to_string(),
                Dimension::Full => "a knot at every distinct time".to_string(),
                Dimension::Knots(count) => format!("{count} knots"),
            };
            let shared = if plan.curves.smoothness == Smoothness::PerGroup {
                "a smoothing parameter of its own"
            } else {
                "a smoothing parameter shared by the groups"
            };
            format!("a penalised {basis} ({knots}; {shared})")
        }
    };
    let family = match plan.response.distribution {
        Distribution::Poisson => Some("Poisson"),
        Distribution::NegativeBinomial => Some("negative binomial"),
        Distribution::Gamma => Some("gamma"),
        _ => None,
    };
    if let Some(family) = family {
        references.push("Wood SN (2011). Fast stable restricted maximum likelihood estimation of semiparametric models. JRSS-B 73:3.");
        return format!(
            "Responses were taken as {family} with a log link, the restricted likelihood by Laplace's approximation. The course of each \
             group, that of a typical {}, was {what} of the logarithm of the mean; gaps are ratios.",
            plan.words.subject
        );
    }
    let scale = if plan.response.transform == Transform::Log {
        " of the natural logarithm of the response, so that curves are geometric means and gaps are ratios"
    } else {
        " of the response"
    };
    let start = match plan.response.start {
        Start::AsMeasured => "",
        Start::Common => " All groups shared one mean at the first time.",
        Start::Covariate => " The value at the first time was an explanatory value and no part of the course.",
        Start::Change => " Courses were changes from each one's first value.",
        Start::Percent => " Courses were percent changes from each one's first value.",
    };
    let adjusted = if plan.columns.covariates.is_empty() {
        String::new()
    } else {
        format!(" Courses were adjusted for {}.", crate::sentences::joined(&plan.columns.covariates))
    };
    let block = plan.columns.block.as_ref().map_or(String::new(), |block| {
        format!(" The levels of {block}, and the groups in each, entered as random effects.")
    });
    format!("The mean course of each group was {what}{scale}.{start}{adjusted}{block}")
}

fn variation(findings: &Findings, references: &mut Vec<&'static str>) -> String {
    let plan = &findings.plan;
    let word = &plan.words.subject;
    let effects = match plan.subjects {
        SubjectEffects::None => format!("No {word} had a level of its own"),
        SubjectEffects::Intercept => format!("Each {word} had a random level"),
        SubjectEffects::Slope => format!("Each {word} had a random level and trend, correlated"),
        SubjectEffects::Curve => format!("Each {word} had a random level, trend and smooth deviation"),
    };
    let by_group = if plan.subjects_spread == Sharing::ByGroup { ", with a covariance per group" } else { "" };
    let clusters = match (&findings.clusters, &findings.columns.cluster) {
        (Some(clusters), Some(column)) if clusters.effects == "slope" => {
            format!(" Each of {} clusters ({column}) had a random level and trend.", clusters.count)
        }
        (Some(clusters), Some(column)) if clusters.effects == "intercept" => {
            format!(" Each of {} clusters ({column}) had a random level.", clusters.count)
        }
        _ => String::new(),
    };
    let serial = match (plan.errors.serial, plan.errors.nugget) {
        (Serial::Ar1, true) => {
            references
                .push("Diggle PJ (1988). An approach to the analysis of repeated measurements. Biometrics 44:959.");
            "followed a continuous-time AR(1) process at the real times, with measurement error beside it"
        }
        (Serial::Ar1, false) => "followed a continuous-time AR(1) process at the real times",
        _ => "were independent between visits",
    };
    let spread = match plan.errors.spread {
        Spread::ByGroup => "one standard deviation per group",
        Spread::WithMean => "a standard deviation that grows with the mean",
        Spread::ByVisit => "one standard deviation per visit",
        Spread::Common => "one standard deviation",
    };
    format!(
        "{effects}{by_group}.{clusters} Errors {serial}, with {spread}. As a formula, for {word} i of group g at time t: \
         y = f_g(t) + b_i(t) + e, b_i ~ N(0, D), e ~ N(0, \u{3c3}\u{b2}C). Variances and smoothing parameters were estimated by \
         restricted maximum likelihood."
    )
}

fn bands(findings: &Findings, calibrated: bool, references: &mut Vec<&'static str>) -> String {
    let c = &findings.plan.comparisons;
    if findings.groups.len() < 2 {
        return format!("Bands have level {}.", percent(c.level));
    }
    let pairs = findings.differences.len();
    let against = match (c.pairs, &c.control) {
        (Pairs::AgainstControl, Some(control)) => format!("each group with {control}"),
        _ if pairs == 1 => "the two groups".to_string(),
        _ => format!("all {pairs} pairs"),
    };
    let promise = match c.band {
        BandKind::Simultaneous if pairs > 1 => "over the whole course and all compared pairs at once",
        BandKind::Simultaneous => "over the whole course at once",
        BandKind::Pointwise => "at each time by itself",
    };
    let small = if calibrated {
        references.push("Kass RE, Steffey D (1989). Approximate Bayesian inference in conditionally independent hierarchical models. JASA 84:717.");
        format!(
            "The critical value was calibrated on {} simulated tables with the same design (seed {}): variance parameters from their \
             posterior, a truth from the posterior of the curves, new effects and errors, a refit, and the largest error in standard errors.",
            c.refits, findings.plan.seed
        )
    } else {
        match c.small_sample {
            SmallSample::None => "Variance parameters were taken as known and normal theory was used.".to_string(),
            _ => {
                references.push("Satterthwaite FE (1946). An approximate distribution of estimates of variance components. Biometrics 2:110.");
                "Standard errors include the uncertainty of the variance parameters; limits use t distributions with degrees of freedom \
                 by Satterthwaite's rule."
                    .to_string()
            }
        }
    };
    let kind = if findings.scale.ratio { "ratios of geometric means" } else { "differences of the courses" };
    let margin = if c.margin > 0.0 {
        let unit = if c.margin_unit == MarginUnit::Percent { " percent" } else { "" };
        format!(" The margin of {}{unit} was set in the plan.", plain(c.margin))
    } else {
        String::new()
    };
    format!(
        "Gaps were compared for {against} as {kind} with {} bands that hold {promise}. {small} Groups are called \
         apart where the band excludes zero.{margin}",
        percent(c.level)
    )
}

fn software(findings: &Findings) -> String {
    format!(
        "Computed with Courseband {}, which runs in the browser; the plan, the seed {} and the table's fingerprint reproduce the numbers \
         to the last digit.",
        findings.version, findings.plan.seed
    )
}
