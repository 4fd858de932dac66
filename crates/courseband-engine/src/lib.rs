//! Penalised-spline mixed models for groups followed over time: mathematics only.
