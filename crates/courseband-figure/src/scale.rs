//! From values to fractions of a strip's height.

/// How values are laid out along an axis.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// Evenly.
    Linear,
    /// By their logarithm.
    Log,
}

/// An axis with its ends; never empty, never with a bad number.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Scale {
    kind: Kind,
    low: f64,
    high: f64,
}

impl Scale {
    /// An axis that holds `low` to `high`. Ends that do not exist or coincide are pulled apart;
    /// a log axis without positive ends becomes linear.
    #[must_use]
    pub fn new(kind: Kind, low: f64, high: f64) -> Self {
        let (low, high) = if low.is_finite() && high.is_finite() { (low.min(high), low.max(high)) } else { (0.0, 1.0) };
        if kind == Kind::Log && low > 0.0 {
            let (low, high) = if high / low < 1.0 + 1e-6 { (low / 1.25, high * 1.25) } else { (low, high) };
            return Scale { kind, low, high };
        }
        let least = 1e-9 * low.abs().max(high.abs()).max(1e-30);
        let pull = if high - low > least { 0.0 } else { 0.5 * low.abs().max(1e-6) };
        Scale { kind: Kind::Linear, low: low - pull, high: high + pull }
    }

    /// The axis with a share of its length added at both ends.
    #[must_use]
    pub fn widened(self, share: f64) -> Self {
        match self.kind {
            Kind::Linear => {
                let more = share * (self.high - self.low);
                Scale { low: self.low - more, high: self.high + more, ..self }
            }
            Kind::Log => {
                let more = libm::pow(self.high / self.low, share);
                Scale { low: self.low / more, high: self.high * more, ..self }
            }
        }
    }

    /// How values are laid out.
    #[must_use]
    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// Value at the bottom.
    #[must_use]
    pub fn low(&self) -> f64 {
        self.low
    }

    /// Value at the top.
    #[must_use]
    pub fn high(&self) -> f64 {
        self.high
    }

    /// 0 at the bottom, 1 at the top, beyond them outside; values that a log axis cannot show lie far below.
    #[must_use]
    pub fn fraction(&self, value: f64) -> f64 {
        let part = match self.kind {
            Kind::Linear => (value - self.low) / (self.high - self.low),
            Kind::Log if value > 0.0 => libm::log(value / self.low) / libm::log(self.high / self.low),
            Kind::Log => -1e6,
        };
        part.clamp(-1e6, 1e6)
    }

    /// True where the value lies on the axis.
    #[must_use]
    pub fn holds(&self, value: f64) -> bool {
        let part = self.fraction(value);
        (-1e-9..=1.0 + 1e-9).contains(&part)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_kinds_reach_from_end_to_end() {
        let linear = Scale::new(Kind::Linear, 10.0, 30.0);
        assert_eq!([linear.fraction(10.0), linear.fraction(15.0), linear.fraction(30.0)], [0.0, 0.25, 1.0]);
        let log = Scale::new(Kind::Log, 1.0, 100.0);
        assert_eq!([log.fraction(1.0), log.fraction(10.0), log.fraction(100.0)], [0.0, 0.5, 1.0]);
    }

    #[test]
    fn no_axis_is_empty() {
        for (low, high) in [(5.0, 5.0), (0.0, 0.0), (f64::NAN, 1.0), (f64::INFINITY, f64::NEG_INFINITY), (1e300, 1e300)]
        {
            for kind in [Kind::Linear, Kind::Log] {
                let scale = Scale::new(kind, low, high);
                assert!(scale.high() > scale.low(), "{low} to {high}: {scale:?}");
                assert!(scale.fraction(scale.high()).is_finite());
            }
        }
    }

    #[test]
    fn a_log_axis_needs_positive_ends() {
        assert_eq!(Scale::new(Kind::Log, 0.0, 10.0).kind(), Kind::Linear);
        let log = Scale::new(Kind::Log, 1.0, 10.0);
        assert!(log.fraction(0.0) < -100.0 && log.fraction(-3.0) < -100.0);
        assert!(!log.holds(0.0));
    }

    #[test]
    fn widening_is_even_on_both_sides() {
        let log = Scale::new(Kind::Log, 1.0, 100.0).widened(0.5);
        assert!((log.low() - 0.1).abs() < 1e-12 && (log.high() - 1000.0).abs() < 1e-9);
    }
}
