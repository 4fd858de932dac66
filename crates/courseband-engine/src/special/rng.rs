//! Seeded random numbers: the same seed gives the same digits on every machine.

use super::normal::normal_quantile_rational;

/// xoshiro256++ (Blackman & Vigna 2021, ACM TOMS 47:36), its state filled from a 64-bit seed by splitmix64.
///
/// Normal variates are made by inversion, so one variate always uses one draw and the sequence stays aligned.
#[derive(Clone, Debug)]
pub struct Rng {
    state: [u64; 4],
}

impl Rng {
    /// A generator started from `seed`; every seed is good, zero included.
    pub fn new(seed: u64) -> Self {
        let mut counter = seed;
        Self { state: core::array::from_fn(|_| splitmix64(&mut counter)) }
    }

    /// Stream number `index` of `seed`: as good as independent of every other stream and of [`Rng::new`].
    ///
    /// Both numbers pass through splitmix64 before they meet, so neighbouring indices share nothing. Streams begin at
    /// unrelated points of a cycle of length 2^256 - 1.
    pub fn stream(seed: u64, index: u64) -> Self {
        let mut a = seed;
        let mut b = index ^ 0x5bf0_3635_dcf1_7a2d;
        let start = splitmix64(&mut a) ^ splitmix64(&mut b).rotate_left(32);
        Self::new(start)
    }

    /// The next 64 random bits.
    pub fn next_u64(&mut self) -> u64 {
        let s = &mut self.state;
        let out = s[0].wrapping_add(s[3]).rotate_left(23).wrapping_add(s[0]);
        let t = s[1] << 17;
        s[2] ^= s[0];
        s[3] ^= s[1];
        s[1] ^= s[2];
        s[0] ^= s[3];
        s[2] ^= t;
        s[3] = s[3].rotate_left(45);
        out
    }

    /// Moves on by 2^128 draws, as if that many numbers had been taken.
    pub fn jump(&mut self) {
        const POLYNOMIAL: [u64; 4] =
            [0x180e_c6d3_3cfd_0aba, 0xd5a6_1266_f0c9_392c, 0xa958_2618_e03f_c9aa, 0x39ab_dc45_29b1_661c];
        let mut sum = [0u64; 4];
        for word in POLYNOMIAL {
            for bit in 0..64 {
                if word >> bit & 1 == 1 {
                    for k in 0..4 {
                        sum[k] ^= self.state[k];
                    }
                }
                self.next_u64();
            }
        }
        self.state = sum;
    }

    /// Uniform on the open interval (0, 1): the middles of 2^52 equal cells.
    pub fn uniform(&mut self) -> f64 {
        ((self.next_u64() >> 12) as f64 + 0.5) * (1.0 / (1u64 << 52) as f64)
    }

    /// A whole number from 0 to `n` - 1, without bias (Lemire 2019, ACM TOMACS 29:3). `n` must be above zero.
    pub fn below(&mut self, n: u64) -> u64 {
        loop {
            let product = u128::from(self.next_u64()) * u128::from(n);
            if product as u64 >= n.wrapping_neg() % n {
                return (product >> 64) as u64;
            }
        }
    }

    /// Standard normal, by inversion (AS 241).
    pub fn normal(&mut self) -> f64 {
        normal_quantile_rational(self.uniform())
    }

    /// Gamma with the given shape (above zero) and scale 1.
    ///
    /// Marsaglia & Tsang 2000, ACM TOMS 26:363; shapes below one are raised by one and multiplied by U^(1/shape).
    pub fn gamma(&mut self, shape: f64) -> f64 {
        if shape.is_nan() || shape <= 0.0 {
            return f64::NAN;
        }
        if shape < 1.0 {
            let raised = self.gamma(shape + 1.0);
            return raised * libm::pow(self.uniform(), 1.0 / shape);
        }
        let d = shape - 1.0 / 3.0;
        let c = 1.0 / libm::sqrt(9.0 * d);
        loop {
            let z = self.normal();
            let root = 1.0 + c * z;
            if root <= 0.0 {
                continue;
            }
            let v = root * root * root;
            if libm::log(self.uniform()) < 0.5 * z * z + d - d * v + d * libm::log(v) {
                return d * v;
            }
        }
    }

    /// Chi-squared with `df` degrees of freedom (real, above zero).
    pub fn chi2(&mut self, df: f64) -> f64 {
        2.0 * self.gamma(0.5 * df)
    }

    /// Poisson with this mean: small means by multiplication, larger ones by a gamma waiting time
    /// (Ahrens & Dieter 1974, Computing 12:223); above a million the normal approximation, rounded.
    pub fn poisson(&mut self, mean: f64) -> f64 {
        if mean > 1e6 {
            return libm::round(mean + libm::sqrt(mean) * self.normal()).max(0.0);
        }
        let (mut left, mut count) = (mean, 0.0);
        while left > 12.0 {
            let waits = libm::floor(0.875 * left);
            let waited = self.gamma(waits);
            if waited > left {
                let share = left / waited;
                // What fell before the end among `waits - 1` uniform times.
                let events = (1..waits as u64).filter(|_| self.uniform() < share).count();
                return count + events as f64;
            }
            count += waits;
            left -= waited;
        }
        let (limit, mut product) = (libm::exp(-left), self.uniform());
        while product > limit {
            product *= self.uniform();
            count += 1.0;
        }
        count
    }
}

/// Steele, Lea & Flood 2014; the constants are those of the published generator.
fn splitmix64(counter: &mut u64) -> u64 {
    *counter = counter.wrapping_add(0x9e37_79b9_7f4a_7c15);
    let mut z = *counter;
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}
