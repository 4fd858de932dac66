//! What refits gave, chunk by chunk.

use crate::refused::Refused;
use courseband_study as study;
use serde::{Deserialize, Serialize};

/// A chunk of refits; `null` stands for one that failed, since JSON has no infinity.
#[derive(Debug, Serialize, Deserialize)]
pub(crate) struct Refits {
    curves: Vec<Option<f64>>,
    differences: Vec<Option<f64>>,
}

impl From<&study::Refits> for Refits {
    fn from(refits: &study::Refits) -> Self {
        let finite = |values: &[f64]| values.iter().map(|&v| v.is_finite().then_some(v)).collect();
        Refits { curves: finite(&refits.curves), differences: finite(&refits.differences) }
    }
}

impl From<Refits> for study::Refits {
    fn from(refits: Refits) -> Self {
        let whole = |values: Vec<Option<f64>>| values.into_iter().map(|v| v.unwrap_or(f64::INFINITY)).collect();
        study::Refits { curves: whole(refits.curves), differences: whole(refits.differences) }
    }
}

/// All chunks of a JSON list together.
pub(crate) fn all_refits(text: &str) -> Result<study::Refits, Refused> {
    let chunks: Vec<Refits> = super::parsed(text, "refits")?;
    let mut all = study::Refits::default();
    chunks.into_iter().for_each(|chunk| all.add(&chunk.into()));
    Ok(all)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_failed_refit_survives_the_way_through_json() {
        let refits = study::Refits { curves: vec![2.5, f64::INFINITY], differences: vec![2.25, f64::INFINITY] };
        let text = serde_json::to_string(&Refits::from(&refits)).expect("plain numbers");
        let back: Refits = serde_json::from_str(&text).expect("as written");
        assert_eq!(study::Refits::from(back), refits);
    }
}
