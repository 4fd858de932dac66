"""Reference values of the usual analyses of whole tables, written to expected/usual_tables.csv, and the two O'Brien-Kaiser
tables in long form, data/obrien_treatments.csv and data/obrien_cells.csv.

Tables
  obrien_treatments  O'Brien & Kaiser 1985, Psychol. Bull. 97:316-333: three treatments of 5, 4 and 7 subjects, phases pre,
                     post and follow-up as times 1, 2, 3, each the mean over its five hours; gender left out
  obrien_cells       the same with the six treatment x gender cells as groups
  sitka1988          79 trees, 5 days, complete (source beside data/)
  uneven             invented: 16 subjects, all times different

Computed with
  analysis of variance    usual.py: residual sums of squares of ordinary regressions, epsilon from double-centred covariance
  Welch, Student, Holm    scipy ttest_ind, statsmodels multipletests
  day as category         closed forms on complete data: Student's comparison on N - G degrees of freedom; Hotelling's T^2
                          from the pooled covariance over q for the overall tests (numpy)
  straight lines          N x N matrices as in visits.py with a level per subject: restricted likelihood, Satterthwaite from
                          the observed information, standard errors with the term for estimated variances
                          (Kass & Steffey 1989, JASA 84:717); log-likelihood checked against statsmodels MixedLM
  area, slope, mean level numpy trapezoid and polyfit per subject, then Welch

Versions: requirements.txt. Run: python usual_tables.py
"""

import csv
import warnings
from pathlib import Path

import numpy as np
import statsmodels.api as sm
from scipy import stats
from scipy.linalg import helmert
from statsmodels.stats.multitest import multipletests

import usual
from visits import Dense, read

HERE = Path(__file__).resolve().parent
ENGINE = HERE.parents[1] / "crates/courseband-engine/tests/data"
OUT = []


def put(case, kind, table, labels, head, value, tolerance=1e-8):
    OUT.append((case, kind, table, "|".join(labels), head, repr(float(value)), tolerance))


def obrien():
    rows = list(csv.DictReader(open(ENGINE / "obrienkaiser.csv", encoding="utf-8")))
    Y = np.array([[np.mean([float(r[f"{p}_{h}"]) for h in range(1, 6)]) for p in ("pre", "post", "fup")] for r in rows])
    parts = {"obrien_treatments": [r["treatment"] for r in rows], "obrien_cells": [f"{r['treatment']}-{r['gender']}" for r in rows]}
    for case, groups in parts.items():
        with open(HERE / "data" / f"{case}.csv", "w", encoding="utf-8") as file:
            file.write("subject,group,time,y\n")
            for row, group, values in zip(rows, groups, Y):
                file.writelines(f"{row['subject']},{group},{t + 1},{float(y)!r}\n" for t, y in enumerate(values))
        usual.OUT.clear()
        usual.rm_anova(case, np.array(groups), Y)
        got = {name: float(value) for _, name, value in usual.OUT}
        anova(case, got)


def anova(case, got):
    kind, title = "repeated-anova", "Analysis of variance"
    effects = {"interaction": "Groups by visits"}
    if "times_weighted.f" in got:
        effects["times"] = "Visits, groups weighted alike (type III)"
        effects["times_weighted"] = "Visits, groups weighted by size (type II)"
    else:
        effects["times"] = "Visits"
    heads = {"ss": "SS", "df": "df", "ss_error": "SS error", "df_error": "df error", "f": "F", "p": "p", "p_gg": "p, Greenhouse-Geisser", "p_hf": "p, Huynh-Feldt"}
    for name, label in effects.items():
        for part, head in heads.items():
            put(case, kind, title, [label], head, got[f"{name}.{part}"])
    put(case, kind, title, ["Groups"], "F", got["groups.f"])
    put(case, kind, title, ["Groups"], "p", got["groups.p"])
    row = ["Differences between visits"]
    put(case, kind, "Sphericity", row, "Mauchly's W", got["mauchly_w"])
    put(case, kind, "Sphericity", row, "p", got["mauchly_p"])
    put(case, kind, "Sphericity", row, "Greenhouse-Geisser epsilon", got["gg"])
    put(case, kind, "Sphericity", row, "Huynh-Feldt epsilon (Lecoutre)", got["hf"])


def panel(rows):
    groups = list(dict.fromkeys(r[1] for r in rows))
    subjects = list(dict.fromkeys(r[0] for r in rows))
    courses = {s: sorted((r[2], r[3]) for r in rows if r[0] == s) for s in subjects}
    group = np.array([groups.index(next(r[1] for r in rows if r[0] == s)) for s in subjects])
    return groups, group, [np.array(courses[s]) for s in subjects]


def difference(case, kind, table, labels, a, b, equal, holm=None, tolerance=1e-8):
    """b less a with SE, df, t, p and 95 % limits."""
    test = stats.ttest_ind(b, a, equal_var=equal)
    low, high = test.confidence_interval(0.95)
    d = np.mean(b) - np.mean(a)
    values = {"Difference": d, "Lower": low, "Upper": high, "SE": d / test.statistic, "df": test.df, "t": test.statistic, "p": test.pvalue}
    for head, value in values.items():
        put(case, kind, table, labels, head, value, tolerance)
    if holm is not None:
        put(case, kind, table, labels, "p, Holm", holm, tolerance)


def complete(case, rows):
    groups, group, courses = panel(rows)
    Y, times = np.array([c[:, 1] for c in courses]), courses[0][:, 0]
    A, B = Y[group == 0], Y[group == 1]
    for kind, table, equal in (("day-by-day", "Welch tests by visit", False), ("day-as-category", "Differences by visit", True)):
        p = [stats.ttest_ind(B[:, k], A[:, k], equal_var=equal).pvalue for k in range(len(times))]
        holm = multipletests(p, method="holm")[1]
        for k, t in enumerate(times):
            difference(case, kind, table, [groups[0], groups[1], f"time {t:g}"], A[:, k], B[:, k], equal, holm[k], 1e-6)
    n, m, T = len(A), len(B), len(times)
    S = ((n - 1) * np.cov(A.T) + (m - 1) * np.cov(B.T)) / (n + m - 2)
    means = {0: A.mean(0), 1: B.mean(0)}
    C = helmert(T)
    even = np.ones((1, T)) / T
    wald = {
        "Groups": (even, means[1] - means[0], 1 / n + 1 / m),
        "Groups by visits": (C, means[1] - means[0], 1 / n + 1 / m),
        "Visits": (C, (means[0] + means[1]) / 2, (1 / n + 1 / m) / 4),
    }
    for name, (C, d, scale) in wald.items():
        q, nu = len(C), n + m - 2
        f = (C @ d) @ np.linalg.solve(scale * C @ S @ C.T, C @ d) / q
        for head, value in (("df", q), ("df error", nu), ("F", f), ("p", stats.f.sf(f, q, nu))):
            put(case, "day-as-category", "Overall tests", [name], head, value, 1e-6)


def summaries(case, rows, level):
    groups, group, courses = panel(rows)
    courses = [np.array([(t, c[c[:, 0] == t, 1].mean()) for t in np.unique(c[:, 0])]) for c in courses]
    area = np.array([np.trapezoid(c[:, 1], c[:, 0]) for c in courses])
    if level == "Mean level":
        area = area / np.array([np.ptp(c[:, 0]) for c in courses])
    slope = np.array([np.polyfit(c[:, 0], c[:, 1], 1)[0] for c in courses])
    for table, values in ((level, area), ("Slope per unit of time", slope)):
        difference(case, "one-per-subject", table, groups, values[group == 0], values[group == 1], False)


class Lines(Dense):
    """A line per group, a level per subject."""

    def __init__(self, rows):
        self.groups = list(dict.fromkeys(r[1] for r in rows))
        subject = np.array([r[0] for r in rows])
        g = np.array([self.groups.index(r[1]) for r in rows])
        t = np.array([r[2] for r in rows])
        self.y = np.array([r[3] for r in rows])
        member = (g[:, None] == np.arange(len(self.groups))).astype(float)
        self.X = np.hstack([member, member * t[:, None]])
        self.Vk = [(subject[:, None] == subject[None, :]).astype(float), np.eye(len(t))]
        self.s = np.array([0.5, 0.5]) * np.var(self.y - self.X @ np.linalg.lstsq(self.X, self.y, rcond=None)[0])
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            self.library = sm.MixedLM(self.y, self.X, subject).fit(reml=True).llf

    def report(self, case):
        self.fit()
        assert abs(self.value - self.library) < 1e-3, (self.value, self.library)
        *_, inverse, cov = self.at(self.s)
        P = inverse - inverse @ self.X @ cov @ self.X.T @ inverse
        moves = np.array([-cov @ self.X.T @ inverse @ V @ P @ self.y for V in self.Vk])
        G = len(self.groups)
        unit = np.eye(2 * G)
        rows = {("Slopes", (name,)): unit[G + g] for g, name in enumerate(self.groups)}
        rows[("Differences of slopes", tuple(self.groups[:2]))] = unit[G + 1] - unit[G]
        for (table, labels), c in rows.items():
            se = np.sqrt(c @ cov @ c + (moves @ c) @ self.W @ (moves @ c))
            df, b = self.df(c), c @ self.b
            head = "Slope per unit of time" if table == "Slopes" else "Slope difference per unit of time"
            values = {head: b, "Lower": b - stats.t.ppf(0.975, df) * se, "SE": se, "df": df, "t": b / se, "p": 2 * stats.t.sf(abs(b / se), df)}
            for name, value in values.items():
                put(case, "straight-lines", table, labels, name, value, 2e-4 if name == "p" else 2e-5)


if __name__ == "__main__":
    obrien()
    sitka, uneven = read("sitka1988"), read("uneven")
    complete("sitka1988", sitka)
    summaries("sitka1988", sitka, "Area under the course")
    Lines(sitka).report("sitka1988")
    summaries("uneven", uneven, "Mean level")
    Lines(uneven).report("uneven")
    with open(HERE / "expected" / "usual_tables.csv", "w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["case", "kind", "table", "labels", "head", "value", "tolerance"])
        writer.writerows(OUT)
