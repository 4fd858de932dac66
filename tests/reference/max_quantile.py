"""Quantiles of max |z| and max |t| by quadrature, written to crates/courseband-engine/tests/data/max_quantile.csv.

Equal correlation rho: given the common part w, the m values are independent, so
P(max |Z_j| <= c) = E_w [ Phi((c - sqrt(rho) w)/sqrt(1-rho)) - Phi((-c - sqrt(rho) w)/sqrt(1-rho)) ]^m,
and for t the same at c s, averaged over s = sqrt(chi2_nu / nu). Gauss-Legendre in both (numpy, scipy 1.17.1).

rho = 0.5: two-sided many-to-one comparisons, Dunnett 1964, Biometrics 20:482-491; the printed two-decimal entries in
PRINTED are recalled from memory, and the script stops if a computed value does not round to them.
rho = 0: studentized maximum modulus (Stoline & Ury 1979, Technometrics 21:87).
Run: python max_quantile.py > ../../crates/courseband-engine/tests/data/max_quantile.csv
"""

import numpy as np
import scipy
from scipy.optimize import brentq
from scipy.special import gammaln, ndtr

# (df, number of comparisons k = 1..): printed 5 % points, recalled from memory.
PRINTED = {
    10: [2.23, 2.57, 2.76, 2.89, 2.99, 3.07, 3.14, 3.19, 3.24],
    20: [2.09, 2.38, 2.54, 2.65, 2.73, 2.80, 2.86, 2.90, 2.95],
    np.inf: [1.96, 2.21, 2.35, 2.44, 2.51, 2.57, 2.61, 2.65, 2.69],
}

NODES, WEIGHTS = np.polynomial.legendre.leggauss(400)


def inside_normal(c, m, rho):
    w = 10.0 * NODES
    density = 10.0 * WEIGHTS * np.exp(-w * w / 2) / np.sqrt(2 * np.pi)
    c = np.asarray(c)[..., None]
    shift, scale = np.sqrt(rho) * w, np.sqrt(1 - rho)
    return ((ndtr((c - shift) / scale) - ndtr((-c - shift) / scale)) ** m * density).sum(-1)


def inside(c, m, rho, df):
    if np.isinf(df):
        return float(inside_normal(c, m, rho))
    low, high = max(1e-9, 1 - 14 / np.sqrt(2 * df)), 1 + 14 / np.sqrt(2 * df)
    s = low + (high - low) * (NODES + 1) / 2
    log_density = np.log(2) + df / 2 * np.log(df / 2) - gammaln(df / 2) + (df - 1) * np.log(s) - df * s * s / 2
    return float((inside_normal(c * s, m, rho) * np.exp(log_density) * WEIGHTS).sum() * (high - low) / 2)


def quantile(level, m, rho, df):
    return brentq(lambda c: inside(c, m, rho, df) - level, 0.5, 60, xtol=1e-12)


if __name__ == "__main__":
    print(f"# numpy {np.__version__}, scipy {scipy.__version__}; by tests/reference/max_quantile.py")
    print("rho,m,df,level,value")
    for rho in (0.0, 0.5, 0.9):
        for m in (1, 2, 3, 5, 9, 20):
            for df in (5, 10, 20, 60, np.inf):
                for level in (0.9, 0.95, 0.99):
                    c = quantile(level, m, rho, df)
                    if rho == 0.5 and level == 0.95 and df in PRINTED and m <= 9:
                        assert abs(c - PRINTED[df][m - 1]) < 0.0055, (m, df, c)
                    print(f"{rho},{m},{df},{level},{c:.9f}")
