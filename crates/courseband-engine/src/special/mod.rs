//! Special functions, the distributions built on them, and seeded random numbers.
//!
//! Everything here is a pure function of `f64` and uses `libm` for `exp`, `ln`, `erfc` and the like, so a native build
//! and a WebAssembly build return the same bits. Arguments outside a function's domain give NaN, never a panic.
//!
//! | module | what | after |
//! |---|---|---|
//! | [`normal`] | normal distribution and its quantile | Wichura 1988, Applied Statistics 37:477 (AS 241) |
//! | [`gamma`] | log gamma, regularised incomplete gamma | DLMF 5.11, 8.9, 8.11; Loader 2000 (saddle-point prefactor) |
//! | [`beta`] | regularised incomplete beta | DiDonato & Morris 1992, ACM TOMS 18:360, eq. 9 (from memory) |
//! | [`distributions`] | Student t, F, chi-squared | DLMF 8.17; Johnson, Kotz & Balakrishnan 1995 |
//! | [`quantile`] | quantile of the largest of many joint z or t | Deak 1980, Numer. Math. 35:369 |
//! | [`rng`] | xoshiro256++ and variates | Blackman & Vigna 2021, ACM TOMS 47:36; Marsaglia & Tsang 2000 |

pub mod beta;
pub mod distributions;
pub mod gamma;
mod invert;
pub mod normal;
pub mod quantile;
pub mod rng;

pub use beta::{regularised_beta, regularised_beta_upper};
pub use distributions::{chi2_cdf, chi2_quantile, chi2_sf, f_cdf, f_quantile, f_sf, t_cdf, t_quantile, t_sf};
pub use gamma::{digamma, ln_gamma, regularised_gamma, regularised_gamma_upper, trigamma};
pub use normal::{normal_cdf, normal_pdf, normal_quantile, normal_sf};
pub use quantile::{DirectionMaxima, Quantile, max_abs_quantile};
pub use rng::Rng;

#[cfg(test)]
mod quantile_tests;
#[cfg(test)]
mod tests;
