"""Power in closed form over a grid, written to expected/power.csv. Run: python power.py

average   two groups of n, means of m visits under compound symmetry: the variance of a subject's mean is
          sd^2 (1 + (m - 1) rho) / m (Frison & Pocock 1992, Stat Med 11:1685, POST), power of the two-sample t test
          from the noncentral t with 2 n - 2 degrees of freedom.
repeated  the same by the noncentral F of the between-subject line of a balanced repeated-measures analysis of variance,
          F(1, 2 n - 2) with noncentrality n gap^2 / (2 var): both sides of the gap.
slope     difference of slopes, subjects with a level only: the variance of the difference is
          2 sd^2 (1 - rho) / (n sum (t - mean t)^2) (Diggle, Heagerty, Liang & Zeger 2002, Analysis of Longitudinal Data,
          sec 2.4.1), power from the noncentral t with 2 n (m - 1) - 2 degrees of freedom.
"""

from pathlib import Path

import numpy as np
import scipy
from scipy import stats

rows = []
for n, m, rho, gap in [(6, 3, 0.3, 1.0), (8, 5, 0.5, 1.0), (8, 8, 0.7, 1.2), (12, 3, 0.5, 0.8), (12, 8, 0.2, 0.6), (20, 5, 0.6, 0.7)]:
    df = 2 * n - 2
    variance = (1 + (m - 1) * rho) / m
    shift = gap / np.sqrt(2 * variance / n)
    rows.append(("average", n, m, rho, gap, stats.nct.sf(stats.t.ppf(0.975, df), df, shift)))
    rows.append(("repeated", n, m, rho, gap, stats.ncf.sf(stats.f.ppf(0.95, 1, df), 1, df, n * gap**2 / (2 * variance))))
for n, m, rho, gap in [(6, 5, 0.3, 0.35), (8, 5, 0.6, 0.25), (10, 8, 0.5, 0.1), (15, 4, 0.4, 0.3), (20, 6, 0.7, 0.1)]:
    df = 2 * n * (m - 1) - 2
    t = np.arange(m)
    variance = 2 * (1 - rho) / (n * ((t - t.mean()) ** 2).sum())
    rows.append(("slope", n, m, rho, gap, stats.nct.sf(stats.t.ppf(0.975, df), df, gap / np.sqrt(variance))))

out = Path(__file__).resolve().parent / "expected/power.csv"
lines = [f"# scipy {scipy.__version__}", "what,n,visits,rho,gap,power"]
lines += [f"{what},{n},{m},{rho},{gap},{float(power)!r}" for what, n, m, rho, gap, power in rows]
out.write_text("\n".join(lines) + "\n")
