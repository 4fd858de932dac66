//! Distributions other than the normal: which values they take, and what is said of them.

use crate::plan::{Detection, Distribution, Plan};
use crate::refusal::Refusal;
use courseband_engine::SubjectRows;
use courseband_table::{CovariateValues, Observations};

/// Refuses values that the plan's distribution cannot give, by row, and groups of zeros.
///
/// # Errors
/// Names the first row.
pub(crate) fn refuse_values(observations: &Observations, plan: &Plan) -> Result<(), Refusal> {
    let counts = matches!(plan.response.distribution, Distribution::Poisson | Distribution::NegativeBinomial);
    let fits = |y: f64| match plan.response.distribution {
        Distribution::Normal | Distribution::Binomial => true,
        Distribution::Gamma => y > 0.0,
        Distribution::Beta => y > 0.0 && y < 1.0,
        Distribution::Tweedie => y >= 0.0,
        Distribution::Poisson | Distribution::NegativeBinomial => y >= 0.0 && y == libm::floor(y),
    };
    if let Some(k) = observations.response.iter().position(|&y| !fits(y)) {
        let (needs, instead) = if plan.response.distribution == Distribution::Beta {
            (
                "shares above 0 and below 1",
                "Divide percents by 100; for 0 and 1 themselves use \"binomial\" with columns.total, or \"normal\"",
            )
        } else if plan.response.distribution == Distribution::Tweedie {
            ("values of zero or more", "Use \"normal\"")
        } else if counts {
            (
                "whole numbers from 0 on",
                "Use \"gamma\" or the log scale for measured values above zero, \"normal\" otherwise",
            )
        } else {
            ("values above zero", "Use \"normal\", or for counts \"negative-binomial\"")
        };
        return Err(Refusal::table(format!(
            "This response.distribution needs {needs}, but row {} has {}. {instead}.",
            observations.line[k], observations.response[k]
        )));
    }
    if counts || plan.response.distribution == Distribution::Tweedie {
        for (g, name) in observations.groups.iter().enumerate() {
            let own = |k: &usize| observations.subjects[observations.subject[*k] as usize].group as usize == g;
            let rows: Vec<usize> = (0..observations.response.len()).filter(own).collect();
            if !rows.is_empty() && rows.iter().all(|&k| observations.response[k] == 0.0) {
                return Err(Refusal::table(format!(
                    "Group \"{name}\" has zeros only: under a log link its course would lie at minus infinity. Leave the group out, \
                     or compare it in words."
                )));
            }
        }
    }
    Ok(())
}

/// What must be known of the plan's distribution; `None` for the normal.
pub(crate) fn note(plan: &Plan) -> Option<String> {
    let odds = "Courses are shares of a typical {}, gaps are ratios of odds";
    let ratios = "Courses are those of a typical {}, gaps are ratios of these";
    let (what, read) = match plan.response.distribution {
        Distribution::Poisson => ("Poisson counts: their variance is their mean", ratios),
        Distribution::NegativeBinomial => {
            ("negative binomial counts: their variance grows with the square of the mean", ratios)
        }
        Distribution::Gamma => ("gamma values: their standard deviation grows with the mean", ratios),
        Distribution::Tweedie => ("Tweedie values: zeros, and positive values that scatter more when larger", ratios),
        Distribution::Binomial => ("successes among trials (binomial)", odds),
        Distribution::Beta => ("shares between 0 and 1 (beta)", odds),
        Distribution::Normal => return None,
    };
    let read = read.replace("{}", &plan.words.subject);
    Some(format!(
        "Responses are taken as {what}. {read}, and the likelihood is Laplace's approximation, which is rough where a {} tells \
         little, as with counts near zero or single yes-or-no answers. Bands rest on degrees of freedom and are not calibrated.",
        plan.words.subject
    ))
}

/// Gives rows their numbers of trials, or the side on which the value lies beyond its limit.
///
/// # Errors
/// Trials that are no whole numbers above zero, and successes that do not fit them.
pub(crate) fn give_details(
    subjects: &mut [SubjectRows],
    places: &[Vec<usize>],
    observations: &Observations,
    plan: &Plan,
) -> Result<(), Refusal> {
    if plan.response.detection == Detection::Limits && !observations.limit.is_empty() {
        for (subject, own) in subjects.iter_mut().zip(places) {
            subject.detail = own.iter().map(|&k| f64::from(observations.limit[k])).collect();
        }
    }
    if plan.response.distribution != Distribution::Binomial {
        return Ok(());
    }
    let trials = trials(observations, plan)?;
    // A share with its total is read as successes where no response is above one.
    let shares = plan.columns.total.is_some()
        && observations.response.iter().all(|&y| y <= 1.0)
        && observations.response.iter().any(|&y| y != libm::floor(y));
    for (subject, own) in subjects.iter_mut().zip(places) {
        for (y, &k) in subject.responses.iter_mut().zip(own) {
            let total = trials.as_ref().map_or(1.0, |all| all[k]);
            let successes = if shares { libm::round(*y * total) } else { *y };
            let near = !shares || (successes - *y * total).abs() < 0.02 * total.max(1.0);
            if !(successes >= 0.0 && successes <= total && successes == libm::floor(successes) && near) {
                let needs = if plan.columns.total.is_some() { "from 0 to the total of its row" } else { "0 or 1" };
                return Err(Refusal::table(format!(
                    "A binomial response is a whole number {needs}, or with columns.total the share of it; row {} has {}. Correct \
                     it, name the column of totals, or use another distribution.",
                    observations.line[k], observations.response[k]
                )));
            }
            *y = successes;
            subject.detail.push(total);
        }
    }
    for (g, name) in observations.groups.iter().enumerate() {
        let own = || subjects.iter().filter(|s| s.group == g).flat_map(|s| s.responses.iter().zip(&s.detail));
        if own().next().is_some() && (own().all(|(&y, _)| y == 0.0) || own().all(|(y, n)| y == n)) {
            return Err(Refusal::table(format!(
                "Group \"{name}\" has one outcome only: under a logit link its course would lie at infinity. Leave the group out, or \
                 compare it in words."
            )));
        }
    }
    Ok(())
}

fn trials(observations: &Observations, plan: &Plan) -> Result<Option<Vec<f64>>, Refusal> {
    let Some(column) = &plan.columns.total else { return Ok(None) };
    let found = observations.covariates.iter().find(|covariate| covariate.name == *column);
    let Some(CovariateValues::Numeric(values)) = found.map(|covariate| &covariate.values) else {
        return Err(Refusal::plan(format!(
            "columns.total is \"{column}\", which is no column of numbers. Name the column that holds the number of trials."
        )));
    };
    match values.iter().position(|&n| !(n >= 1.0 && n == libm::floor(n))) {
        Some(k) => Err(Refusal::table(format!(
            "Column \"{column}\" holds numbers of trials, but row {} has {}. Give whole numbers from 1 on.",
            observations.line[k], values[k]
        ))),
        None => Ok(Some(values.clone())),
    }
}
