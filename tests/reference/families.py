"""Counts and positive values without subject effects by statsmodels GLM: writes expected/families.csv.

Straight lines with a log link on the invented table `colonies`. Poisson: means and their standard errors. Gamma: means
alone, since the dispersion is estimated otherwise here (restricted likelihood) than there (Pearson). statsmodels 0.15.0.

Run: python families.py
"""

import numpy as np
import statsmodels.api as sm

from cases import plans, read, write


def main():
    rows = []
    for case, (name, plan) in plans().items():
        if name != "colonies" or plan["subjects"] != "none":
            continue
        table = read(name, plan)
        groups = range(len(table["names"]))
        design = np.column_stack([c for g in groups for c in (table["group"] == g, (table["group"] == g) * table["t"])]) * 1.0
        poisson = plan["response"]["distribution"] == "poisson"
        family = sm.families.Poisson() if poisson else sm.families.Gamma(sm.families.links.Log())
        fit = sm.GLM(table["y"], design, family=family).fit(tol=1e-12)
        for g in groups:
            for t in (table["t"].min(), table["t"].max()):
                x = np.zeros(2 * len(table["names"]))
                x[2 * g], x[2 * g + 1] = 1, t
                rows.append((case, "mean", table["names"][g], repr(float(t)), f"{x @ fit.params:.10g}"))
                if poisson:
                    rows.append((case, "se", table["names"][g], repr(float(t)), f"{np.sqrt(x @ fit.cov_params() @ x):.10g}"))
    write("families.csv", rows)


if __name__ == "__main__":
    main()
