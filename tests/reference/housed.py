"""Clusters, explanatory columns, a common start and subject curves by N x N matrices: writes expected/housed.csv.

Every case of cases.json on the invented table `housed`. V is the sum of every part's covariance: group splines as in
dense.py, clusters and subjects Z L L' Z', subject curves s^2 (I - P) W (I - P)' with W the integrated Wiener kernel and
P the line through a curve's values at the first and last time. The criterion is that of dense.py, minimised from
several starts with derivatives by differences. For straight lines with cluster and subject levels the log-REML of
statsmodels MixedLM (groups: clusters, variance component: subjects) must agree to 1e-4, or the script stops. Nothing
is shared with the engine. numpy 2.4.6, scipy 1.17.1, statsmodels 0.15.0.

Run: python housed.py
"""

import csv
import itertools
import warnings

import numpy as np
import statsmodels.api as sm
from scipy.linalg import cho_factor, cho_solve
from scipy.optimize import minimize

from cases import HERE, plans, write
from dense import wiener

PARTS = {"none": (), "intercept": ("level",), "slope": ("level", "loading", "trend"), "curve": ("level", "loading", "trend", "bend")}


def table(plan):
    with open(HERE / "data" / "housed.csv", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    first = min(float(r["time"]) for r in rows)
    if plan.get("response", {}).get("start") == "covariate":
        begin = {r["subject"]: float(r["y"]) for r in rows if float(r["time"]) == first}
        rows = [r | {"value at the start": begin[r["subject"]]} for r in rows if float(r["time"]) > first and r["subject"] in begin]
    return rows


def explanatory(rows, plan):
    """Columns, each with its name: numbers around their mean, categories against the most frequent."""
    names = (["value at the start"] if "value at the start" in rows[0] else []) + plan["columns"].get("covariates", [])
    for name in names:
        try:
            x = np.array([float(r[name]) for r in rows])
            yield name, x - x.mean()
        except ValueError:
            own = [r[name] for r in rows]
            levels = list(dict.fromkeys(own))
            most = max(levels, key=own.count)
            for level in levels:
                if level != most:
                    yield f"{name}={level}", np.array([float(o == level) for o in own])


class Housed:
    def __init__(self, plan):
        self.plan = plan
        rows = table(plan)
        self.t = np.array([float(r["time"]) for r in rows])
        self.y = np.array([float(r["y"]) for r in rows])
        self.group = np.array([r["group"] for r in rows])
        self.names = list(dict.fromkeys(self.group))
        self.origin, self.span = self.t.min(), np.ptp(self.t)
        self.u = (self.t - self.origin) / self.span
        self.Z = np.column_stack([np.ones_like(self.u), self.u])
        equal = lambda key: np.equal.outer(*[np.array([r[key] for r in rows])] * 2) * 1.0
        self.in_subject, self.in_cluster, self.in_group = equal("subject"), equal("cage"), equal("group")
        self.W = wiener(self.u, self.u)
        ends = wiener(self.u, np.array([0.0, 1.0])), wiener(np.array([0.0, 1.0]), np.array([0.0, 1.0]))
        line = np.column_stack([1 - self.u, self.u])
        self.bend = self.W - line @ ends[0].T - ends[0] @ line.T + line @ ends[1] @ line.T
        self.extra = list(explanatory(rows, plan))
        self.common = plan.get("response", {}).get("start") == "common"
        self.smooth = plan["curves"]["shape"] == "smooth"
        self.X = np.column_stack([self.row(g, t) for g, t in zip(self.group, self.t)]).T
        self.X = np.column_stack([self.X] + [x for _, x in self.extra]) if self.extra else self.X
        self.parameters = [("error", "")] + [("smooth", g) for g in self.names if self.smooth]
        self.parameters += [(p, "subject") for p in PARTS[plan["subjects"]]]
        self.parameters += [(p, "cluster") for p in PARTS[plan["clusters"]]]
        self.parameters += [("rate", "")] if plan["errors"]["serial"] == "ar1" else []
        self.rows = rows

    def row(self, group, t):
        own = np.array([(group == g) * x for g in self.names for x in ((t - self.origin,) if self.common else (1.0, t))])
        return np.concatenate([[1.0], own]) if self.common else own

    def block(self, theta, who):
        L = np.zeros((2, 2))
        bend = 0.0
        for (part, whose), value in zip(self.parameters, theta):
            if whose == who:
                if part == "level":
                    L[0, 0] = np.exp(value)
                elif part == "loading":
                    L[1, 0] = value
                elif part == "trend":
                    L[1, 1] = np.exp(value)
                elif part == "bend":
                    bend = np.exp(2 * value)
        return L @ L.T, bend

    def of(self, theta, part, whose=""):
        return np.exp(theta[self.parameters.index((part, whose))])

    def covariance(self, theta):
        subject, bend = self.block(theta, "subject")
        cluster, _ = self.block(theta, "cluster")
        R = np.eye(len(self.y))
        if ("rate", "") in self.parameters:
            R = self.in_subject * np.exp(-self.of(theta, "rate") * np.abs(np.subtract.outer(self.u, self.u)))
        V = self.of(theta, "error") * R
        V = V + self.in_subject * (self.Z @ subject @ self.Z.T + bend * self.bend) + self.in_cluster * (self.Z @ cluster @ self.Z.T)
        for g in self.names if self.smooth else []:
            own = (self.group == g) * 1.0
            V = V + self.of(theta, "smooth", g) * np.outer(own, own) * self.W
        return V

    def criterion(self, theta):
        try:
            factor = cho_factor(self.covariance(theta), lower=True)
        except (np.linalg.LinAlgError, ValueError):
            return 1e10
        VX, Vy = cho_solve(factor, self.X), cho_solve(factor, self.y)
        A = self.X.T @ VX
        b = np.linalg.solve(A, VX.T @ self.y)
        n, p = self.X.shape
        logs = 2 * np.log(np.diag(factor[0])).sum() + np.linalg.slogdet(A)[1]
        return 0.5 * ((n - p) * np.log(2 * np.pi) + logs + self.y @ Vy - b @ A @ b)

    def fit(self):
        v = np.log(self.y.var())
        usual = {"error": v - 1.5, "level": v / 2 - 0.7, "loading": 0.0, "trend": v / 2 - 1, "bend": v / 2, "rate": 1.5}
        found = []
        for smooth, level in itertools.product((v + 1, v - 2), (0.0, -1.0)):
            start = usual | {"smooth": smooth, "level": usual["level"] + level}
            theta = np.array([start[p] for p, _ in self.parameters])
            for _ in range(2):
                theta = minimize(self.criterion, theta, method="BFGS", options={"gtol": 1e-6}).x
            theta = minimize(self.criterion, theta, method="Nelder-Mead", options={"xatol": 1e-7, "fatol": 1e-11, "maxiter": 4000}).x
            found.append((self.criterion(theta), theta))
        self.value, self.theta = min(found, key=lambda pair: pair[0])
        return self

    def report(self):
        yield "log_reml", "", "", -self.value
        yield "residual_sd", "all", "", np.sqrt(self.of(self.theta, "error"))
        cluster, _ = self.block(self.theta, "cluster")
        if self.plan["clusters"] != "none":
            yield "sd_cluster_level", "all", "", np.sqrt(cluster[0, 0])
        if self.plan["clusters"] == "slope":
            yield "sd_cluster_trend", "all", "", np.sqrt(cluster[1, 1]) / self.span
        V = self.covariance(self.theta)
        VX = np.linalg.solve(V, self.X)
        A = np.linalg.inv(self.X.T @ VX)
        b = A @ VX.T @ self.y
        for k, (name, _) in enumerate(self.extra):
            at = self.X.shape[1] - len(self.extra) + k
            yield "adjustment", name, "", b[at]
            yield "adjustment_se", name, "", np.sqrt(A[at, at])
        Vr = np.linalg.solve(V, self.y - self.X @ b)
        for one, two in itertools.combinations(self.names, 2):
            for t in np.unique(self.t):
                x = self.row(two, t) - self.row(one, t)
                x = np.concatenate([x, np.zeros(len(self.extra))])
                k, prior = np.zeros(len(self.y)), 0.0
                if self.smooth:
                    u = np.array([(t - self.origin) / self.span])
                    for sign, g in ((1.0, two), (-1.0, one)):
                        s2 = self.of(self.theta, "smooth", g)
                        k = k + sign * s2 * (self.group == g) * wiener(u, self.u)[0]
                        prior += s2 * wiener(u, u)[0, 0]
                d = x - k @ VX
                se = np.sqrt(max(0.0, prior - k @ np.linalg.solve(V, k) + d @ A @ d))
                yield "difference", f"{two} - {one}", t, x @ b + k @ Vr
                yield "difference_se", f"{two} - {one}", t, se


def by_statsmodels(dense):
    """log-REML of the same model where MixedLM has it: straight lines, cluster levels, subject levels."""
    cages = np.array([r["cage"] for r in dense.rows])
    subjects = np.array([r["subject"] for r in dense.rows])
    parts = {c: (np.equal.outer(subjects[cages == c], np.unique(subjects[cages == c]))) * 1.0 for c in np.unique(cages)}
    names = {c: [f"s{k}" for k in range(parts[c].shape[1])] for c in parts}
    from statsmodels.regression.mixed_linear_model import VCSpec

    spec = VCSpec(["subject"], [[names[c] for c in np.unique(cages)]], [[parts[c] for c in np.unique(cages)]])
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        model = sm.MixedLM(dense.y, dense.X, cages, exog_re=np.ones((len(dense.y), 1)), exog_vc=spec)
        return max(model.fit(reml=True, method=m, maxiter=2000).llf for m in ("lbfgs", "powell"))


def main():
    rows = []
    for case, (name, plan) in plans().items():
        if name != "housed":
            continue
        dense = Housed(plan).fit()
        print(f"{case}: log-REML {-dense.value:.6f}", flush=True)
        if not dense.smooth and (plan["subjects"], plan["clusters"]) == ("intercept", "intercept") and plan["errors"]["serial"] == "none":
            other = by_statsmodels(dense)
            print(f"  statsmodels {other:.6f}")
            assert abs(other + dense.value) < 1e-4, (case, other, -dense.value)
        for quantity, group, t, value in dense.report():
            rows.append((case, quantity, group, t if t == "" else repr(float(t)), f"{value:.10g}"))
    write("housed.csv", rows)


if __name__ == "__main__":
    main()
