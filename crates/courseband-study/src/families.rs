//! Distributions other than the normal: which values they take, and what is said of them.

use crate::plan::{Distribution, Plan};
use crate::refusal::Refusal;
use courseband_table::Observations;

/// Refuses values that the plan's distribution cannot give, by row, and groups of zeros.
///
/// # Errors
/// Names the first row.
pub(crate) fn refuse_values(observations: &Observations, plan: &Plan) -> Result<(), Refusal> {
    let counts = matches!(plan.response.distribution, Distribution::Poisson | Distribution::NegativeBinomial);
    if !counts && plan.response.distribution != Distribution::Gamma {
        return Ok(());
    }
    let fits = |y: f64| if counts { y >= 0.0 && y == libm::floor(y) } else { y > 0.0 };
    if let Some(k) = observations.response.iter().position(|&y| !fits(y)) {
        let (needs, instead) = if counts {
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
    if counts {
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
    let what = match plan.response.distribution {
        Distribution::Poisson => "Poisson counts: their variance is their mean",
        Distribution::NegativeBinomial => "negative binomial counts: their variance grows with the square of the mean",
        Distribution::Gamma => "gamma values: their standard deviation grows with the mean",
        _ => return None,
    };
    Some(format!(
        "Responses are taken as {what}. Courses are those of a typical {}, gaps are ratios of these, and the likelihood is \
         Laplace's approximation, which is rough where counts per {} are near zero. Bands rest on degrees of freedom and are not calibrated.",
        plan.words.subject, plan.words.subject
    ))
}
