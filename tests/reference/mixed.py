"""Straight-line mixed models by statsmodels MixedLM (REML): writes expected/mixed.csv.

Every case of cases.json with a straight mean, common spreads and independent errors. The best of three optimisers is
kept, since each of them stops early now and then.
"""

import itertools
import warnings

import numpy as np
import statsmodels.api as sm

from cases import plans, read, write


def wanted(plan):
    common = plan["errors"] == {"serial": "none", "spread": "common", "nugget": False}
    return plan["curves"]["shape"] == "straight" and common and plan["subjects"] != "none" and plan["grid"]["count"] == 21


def fitted(table, slope):
    """Design with (1, t) per group, and MixedLM's best fit; subject effects count from the first time."""
    groups = range(len(table["names"]))
    design = np.column_stack([column for g in groups for column in (table["group"] == g, (table["group"] == g) * table["t"])])
    since = table["t"] - table["t"].min()
    random = np.column_stack([np.ones_like(since), since] if slope else [np.ones_like(since)])
    model = sm.MixedLM(table["y"], design * 1.0, table["subject"], random)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        fits = [model.fit(reml=True, method=method, maxiter=2000) for method in ("lbfgs", "powell", "bfgs")]
    return max(fits, key=lambda fit: fit.llf)


def at(table, g, t):
    """The row of the design for group `g` at time `t`."""
    x = np.zeros(2 * len(table["names"]))
    x[2 * g], x[2 * g + 1] = 1, t
    return x


def report(table, fit):
    names, ends = table["names"], (table["t"].min(), table["t"].max())
    yield "log_reml", "", "", fit.llf
    yield "residual_sd", "all", "", np.sqrt(fit.scale)
    subjects = np.asarray(fit.cov_re)
    yield "sd_level", "all", "", np.sqrt(subjects[0, 0])
    if len(subjects) > 1:
        yield "sd_trend", "all", "", np.sqrt(subjects[1, 1])
    covariance = np.asarray(fit.cov_params())[: 2 * len(names), : 2 * len(names)]
    for g, t in itertools.product(range(len(names)), ends):
        x = at(table, g, t)
        yield "mean", names[g], t, x @ fit.fe_params
        yield "se", names[g], t, np.sqrt(x @ covariance @ x)
    for (a, b), t in itertools.product(itertools.combinations(range(len(names)), 2), ends):
        x = at(table, b, t) - at(table, a, t)
        yield "difference", f"{names[b]} - {names[a]}", t, x @ fit.fe_params
        yield "difference_se", f"{names[b]} - {names[a]}", t, np.sqrt(x @ covariance @ x)


def main():
    rows = []
    for case, (name, plan) in plans().items():
        if name not in ("housed", "colonies") and wanted(plan):
            table = read(name, plan)
            for quantity, group, t, value in report(table, fitted(table, plan["subjects"] == "slope")):
                rows.append((case, quantity, group, t if t == "" else repr(float(t)), f"{value:.10g}"))
    write("mixed.csv", rows)


if __name__ == "__main__":
    main()
