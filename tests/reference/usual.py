"""Reference values of the usual analyses, written to crates/courseband-engine/tests/data/usual.csv.

Data read from crates/courseband-engine/tests/data:
  obrienkaiser.csv  O'Brien & Kaiser 1985, Psychol. Bull. 97:316-333 (16 subjects, treatment x gender, 3 phases x 5 hours)
  reacttime.csv     Maxwell & Delaney 1990, Designing Experiments and Analyzing Data, p. 497 (10 subjects, 6 conditions)
  invented_panel.csv  invented, written by this script (3 groups of 9, 6 and 12, 6 uneven days, gaps)

Parts of the O'Brien-Kaiser design that fit one between and one within factor:
  cells_by_phase, cells_by_hour        six treatment x gender cells; mean over hours, or over phases
  treatment_by_phase, ..._by_hour      three treatments of unequal size
  treatment_by_condition               all 15 occasions: more contrasts than error degrees of freedom

Repeated measures are computed another way than in the engine: sums of squares as differences of residual sums of
squares of ordinary regressions with subject indicators, epsilon from the double-centred covariance of the times.
Everything else: scipy and statsmodels. Run: python usual.py (writes the files itself).
"""

from fractions import Fraction
from pathlib import Path

import numpy as np
import pandas as pd
import scipy
import statsmodels
from scipy import stats
from statsmodels.duration.survfunc import SurvfuncRight, survdiff
from statsmodels.stats.multitest import multipletests
from statsmodels.stats.oneway import anova_oneway

DATA = Path(__file__).resolve().parents[2] / "crates/courseband-engine/tests/data"
OUT = []


def put(case, quantity, value):
    OUT.append((case, quantity, repr(float(value))))


def rss(X, y):
    """Residual sum of squares, whatever the rank of X."""
    b = np.linalg.lstsq(X, y, rcond=None)[0]
    return float(((y - X @ b) ** 2).sum())


def indicators(codes):
    return (np.asarray(codes)[:, None] == np.unique(codes)[None, :]).astype(float)


def rm_anova(case, group, Y):
    n, T = Y.shape
    labels, group = np.unique(group, return_inverse=True)
    G, k, nu = len(labels), T - 1, n - len(labels)
    subject, time = np.repeat(np.arange(n), T), np.tile(np.arange(T), n)
    y, g = Y.ravel(), group[subject]
    S, D, GD = indicators(subject), indicators(time), indicators(g * T + time)
    full = rss(np.hstack([S, GD]), y)
    put(case, "complete", n)
    # Error covariance of the times and epsilon (Box 1954).
    R = Y - np.array([Y[group == h].mean(0) for h in range(G)])[group]
    H = np.eye(T) - 1 / T
    V = H @ (R.T @ R / nu) @ H
    gg = np.trace(V) ** 2 / (k * np.trace(V @ V))
    hf = ((nu + 1) * k * gg - 2) / (k * (nu - k * gg)) if nu - k * gg > 1e-9 else np.inf
    put(case, "gg", gg)
    put(case, "hf", hf)
    if nu >= k > 1:
        C = np.linalg.qr(np.hstack([np.ones((T, 1)), np.vander(np.arange(T), T, increasing=True)[:, 1:]]))[0][:, 1:].T
        E = C @ (R.T @ R / nu) @ C.T
        W = np.linalg.det(E) / (np.trace(E) / k) ** k
        f = k * (k + 1) / 2 - 1
        rho = 1 - (2 * k * k + k + 2) / (6 * k * nu)
        w2 = (k + 2) * (k - 1) * (k - 2) * (2 * k**3 + 6 * k * k + 3 * k + 2) / (288 * (nu * k * rho) ** 2)
        x = -nu * rho * np.log(W)
        put(case, "mauchly_w", W)
        put(case, "mauchly_p", stats.chi2.sf(x, f) + w2 * (stats.chi2.sf(x, f + 4) - stats.chi2.sf(x, f)))

    def within(name, ss, df):
        F = (ss / df) / (full / (nu * k))
        put(case, name + ".ss", ss)
        put(case, name + ".ss_error", full)
        put(case, name + ".df", df)
        put(case, name + ".df_error", nu * k)
        put(case, name + ".f", F)
        put(case, name + ".p", stats.f.sf(F, df, nu * k))
        put(case, name + ".p_gg", stats.f.sf(F, gg * df, gg * nu * k))
        e = min(1, hf)
        put(case, name + ".p_hf", stats.f.sf(F, e * df, e * nu * k))

    # Type II: times after subjects; interaction after both. Type III: times removed from a sum-to-zero coding.
    within("times_weighted", rss(S, y) - rss(np.hstack([S, D]), y), k)
    coding = lambda m: np.vstack([np.eye(m - 1), -np.ones(m - 1)])
    dt = coding(T)[time]
    inter = np.hstack([dt * coding(G)[g][:, [j]] for j in range(G - 1)]) if G > 1 else np.zeros((len(y), 0))
    within("times", rss(np.hstack([S, inter]), y) - rss(np.hstack([S, inter, dt]), y), k)
    if G > 1:
        within("interaction", rss(np.hstack([S, D]), y) - full, (G - 1) * k)
        F, p = stats.f_oneway(*[Y[group == h].mean(1) for h in range(G)])
        put(case, "groups.f", F)
        put(case, "groups.p", p)
        put(case, "groups.ss_error", T * sum(((Y[group == h].mean(1) - Y[group == h].mean()) ** 2).sum() for h in range(G)))


def repeated():
    ok = pd.read_csv(DATA / "obrienkaiser.csv")
    cube = ok.iloc[:, 3:].to_numpy(float).reshape(16, 3, 5)
    cells = (ok.treatment + ok.gender).to_numpy()
    rm_anova("cells_by_phase", cells, cube.mean(2))
    rm_anova("cells_by_hour", cells, cube.mean(1))
    rm_anova("treatment_by_phase", ok.treatment.to_numpy(), cube.mean(2))
    rm_anova("treatment_by_hour", ok.treatment.to_numpy(), cube.mean(1))
    rm_anova("treatment_by_condition", ok.treatment.to_numpy(), cube.reshape(16, 15))
    rt = pd.read_csv(DATA / "reacttime.csv")
    rm_anova("reaction_conditions", np.zeros(10, int), rt.iloc[:, 1:].to_numpy(float))


def invented():
    rng = np.random.default_rng(20)
    days = np.array([0, 1, 3, 7, 10, 14])
    rows = []
    for g, n in enumerate([9, 6, 12]):
        for _ in range(n):
            level, slope = rng.normal(0, 1.2), rng.normal(0, 0.05)
            for d in days:
                y = 10 + 0.3 * d * (1 + 0.5 * g) + level + slope * d + rng.normal(0, 0.6 + 0.3 * g)
                rows.append((len(rows) // 6, g, d, round(y, 3) if rng.uniform() > 0.05 else np.nan))
    frame = pd.DataFrame(rows, columns=["subject", "group", "time", "y"])
    frame.to_csv(DATA / "invented_panel.csv", index=False)
    return frame


def panel_cases(frame):
    wide = frame.pivot(index="subject", columns="time", values="y")
    group = frame.groupby("subject").group.first().to_numpy()
    whole = wide.notna().all(axis=1).to_numpy()
    rm_anova("invented", group[whole], wide.to_numpy()[whole])
    p = []
    for a, b in [(0, 1), (0, 2)]:
        for d in wide.columns:
            x, z = (wide.loc[group == h, d].dropna() for h in (a, b))
            for name, equal in (("welch", False), ("student", True)):
                t = stats.ttest_ind(z, x, equal_var=equal)
                ci = t.confidence_interval(0.95)
                for quantity, value in (("t", t.statistic), ("p", t.pvalue), ("df", t.df), ("low", ci.low), ("high", ci.high), ("difference", z.mean() - x.mean())):
                    put(f"{name}_{a}_{b}_{d}", quantity, value)
                if name == "welch":
                    p.append(t.pvalue)
    for i, q in enumerate(multipletests(p, method="holm")[1]):
        put("welch_holm", i, q)
    measures = {
        "area": lambda t, y: np.trapezoid(y, t),
        "level": lambda t, y: np.trapezoid(y, t) / (t[-1] - t[0]),
        "slope": lambda t, y: np.polynomial.polynomial.polyfit(t, y, 1)[1],
    }
    for name, measure in measures.items():
        values = []
        for i in wide.index:
            seen = wide.loc[i].dropna()
            values.append(measure(seen.index.to_numpy(float), seen.to_numpy()))
            put(f"summary_{name}", i, values[-1])
        groups = [np.array(values)[group == h] for h in range(3)]
        w = anova_oneway(groups, use_var="unequal", welch_correction=True)
        put(f"summary_{name}_overall", "f", w.statistic)
        put(f"summary_{name}_overall", "p", w.pvalue)
        put(f"summary_{name}_overall", "df_error", w.df[1])
        F, q = stats.f_oneway(*groups)
        put(f"summary_{name}_one_way", "f", F)
        put(f"summary_{name}_one_way", "p", q)
        p = [stats.ttest_ind(groups[b], groups[a], equal_var=False).pvalue for a, b in [(0, 1), (0, 2), (1, 2)]]
        for i, (raw, q) in enumerate(zip(p, multipletests(p, method="holm")[1])):
            put(f"summary_{name}_pair_{i}", "p", raw)
            put(f"summary_{name}_pair_{i}", "p_holm", q)


# Weeks in remission, Freireich et al. 1963, Blood 21:699-716, as tabulated by Cox 1972, JRSS-B 34:187 (from memory).
DRUG = [6, 6, 6, 6, 7, 9, 10, 10, 11, 13, 16, 17, 19, 20, 22, 23, 25, 32, 32, 34, 35]
DRUG_EVENT = [1, 1, 1, 0, 1, 0, 1, 0, 0, 1, 1, 0, 0, 0, 1, 1, 0, 0, 0, 0, 0]
CONTROL = [1, 1, 2, 2, 3, 4, 4, 5, 5, 8, 8, 8, 8, 11, 11, 12, 12, 15, 17, 22, 23]


def survival():
    for name, t, e in (("km_drug", DRUG, DRUG_EVENT), ("km_control", CONTROL, [1] * 21)):
        curve = SurvfuncRight(t, e)
        for row in zip(curve.surv_times, curve.surv_prob, curve.surv_prob_se):
            put(name, f"survival {row[0]:g}", row[1])
            if row[1] > 0:
                put(name, f"se {row[0]:g}", row[2])
        if name == "km_drug":
            low, high = curve.quantile_ci(0.5, alpha=0.05, method="cloglog")
            put(name, "median_low", low)
    time, event = DRUG + CONTROL, DRUG_EVENT + [1] * 21
    two = [0] * 21 + [1] * 21
    three = [i % 3 for i in range(42)]
    for name, group in (("logrank_two", two), ("logrank_three", three)):
        chi2, p = survdiff(np.array(time), np.array(event), np.array(group))
        put(name, "chi2", chi2)
        put(name, "p", p)


def adjusted():
    # The 15 p-values of Benjamini & Hochberg 1995, sec. 3.2 (from memory).
    p = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.0]
    p = p[::2] + p[1::2]
    for name, method in (("holm", "holm"), ("benjamini_hochberg", "fdr_bh")):
        for i, q in enumerate(multipletests(p, method=method)[1]):
            put(name, i, q)
            if name == "holm":
                put("p_values", i, p[i])


def pooled():
    # By hand, in exact fractions: five estimates, five variances, 30 degrees of freedom in the complete table.
    q = [Fraction(x, 10) for x in (12, 15, 9, 14, 10)]
    u = [Fraction(x, 100) for x in (20, 22, 18, 25, 15)]
    M, nu = 5, Fraction(30)
    Q, W = sum(q) / M, sum(u) / M
    B = sum((x - Q) ** 2 for x in q) / (M - 1)
    T = W + (1 + Fraction(1, M)) * B
    lam = (1 + Fraction(1, M)) * B / T
    nu_m = (M - 1) / lam**2
    nu_obs = (nu + 1) / (nu + 3) * nu * (1 - lam)
    for name, value in (("estimate", Q), ("within", W), ("between", B), ("total", T), ("missing_share", lam), ("df", 1 / (1 / nu_m + 1 / nu_obs)), ("df_infinite", nu_m)):
        put("pool", name, value)


if __name__ == "__main__":
    repeated()
    panel_cases(invented())
    survival()
    adjusted()
    pooled()
    with open(DATA / "usual.csv", "w") as out:
        out.write(f"# numpy {np.__version__}, scipy {scipy.__version__}, statsmodels {statsmodels.__version__}; by tests/reference/usual.py\n")
        out.write("case,quantity,value\n")
        out.writelines(",".join(map(str, row)) + "\n" for row in OUT)
