"""Restricted likelihood with N x N matrices: an independent computation for small tables. Writes expected/dense.csv.

Every case of cases.json with a smooth mean and a grid of 21 points. A group's course is a line plus s_g times an
integrated Wiener process from the earliest time (kernel m^2 (3M - m) / 6, m and M the smaller and larger time since
then; Wahba 1978, JRSS-B 40:364), so that its posterior mean is the natural cubic smoothing spline. The criterion is
-1/2 [(N-p) log 2 pi + log|V| + log|X'V^-1 X| + y'Py] (Harville 1974, Biometrika 61:383), X = (1, t) per group in the
table's own time unit. Its gradient by a parameter k is -1/2 [tr(P V_k) - y'P V_k P y] (Harville 1977, JASA 72:320, from
memory). Groups share no subjects, so V has a block per group. Optimised from several starts; a largest gradient over
1e-4 stops the script, and so does a case that is less likely than a case nested in it.

Between the distinct times a course is the natural cubic spline through them. Effective degrees of freedom are
2 + tr(P V_g), V_g the spline's own part: the trace of (C + P_g)^-1 C written without coefficients. The critical value
is the 95 % quantile of the largest |z| over all pairs, grid points and visits inside the support, by 1,000,000
seeded draws. Nothing is shared with the engine. numpy 2.4.6 and scipy 1.17.1.

Run: python dense.py [CASE ...]
"""

import csv
import itertools
import sys

import numpy as np
from scipy.interpolate import CubicSpline
from scipy.linalg import cho_factor, cho_solve
from scipy.optimize import minimize

from cases import HERE, plans, read, write

DRAWS = 1_000_000
# In each pair the first model is nested in the second.
NESTED = (
    ("sitka.intercept", "sitka.slope"), ("sitka.intercept", "sitka.intercept.ar1"), ("sitka.slope", "sitka.slope.ar1"),
    ("sitka.intercept.ar1", "sitka.slope.ar1"), ("dietox.slope", "dietox.slope.spread"),
    ("dietox.slope.shared", "dietox.slope"), ("dietox.none.ar1", "dietox.slope.ar1"), ("dietox.slope", "dietox.slope.ar1"),
    ("uneven.none", "uneven.none.ar1.nugget"), ("uneven.none.ar1.nugget", "uneven.intercept.ar1.nugget"),
)


def wiener(a, b):
    m, M = np.minimum.outer(a, b), np.maximum.outer(a, b)
    return m * m * (3 * M - m) / 6


class Group:
    """One group's rows, with the matrices that do not depend on parameters. Time is counted in spans of the table."""

    def __init__(self, table, index):
        own = table["group"] == index
        origin, span = table["t"].min(), np.ptp(table["t"])
        self.t, self.y = table["t"][own], table["y"][own]
        self.X = np.column_stack([np.ones_like(self.t), self.t])
        self.u = (self.t - origin) / span
        self.same = np.equal.outer(table["subject"][own], table["subject"][own]) * 1.0
        self.gap = np.abs(np.subtract.outer(self.u, self.u))
        self.W = wiener(self.u, self.u)
        self.Z = np.column_stack([np.ones_like(self.u), self.u])


class Parameters:
    """Which entry of the parameter vector means what; every entry is a logarithm, save a slope's loading (and a logit)."""

    def __init__(self, groups, plan):
        self.names = []
        add = lambda *name: self.names.append(name)
        shared = plan["curves"]["smoothness"] == "shared"
        for g in ["all"] if shared else range(groups):
            add("smooth", g)
        for g in range(groups) if plan["errors"]["spread"] == "by-group" else ["all"]:
            add("error", g)
        self.effects = {"none": 0, "intercept": 1, "slope": 2}[plan["subjects"]]
        for g in range(groups) if plan["subjects_spread"] == "by-group" else ["all"]:
            for part in (("level",), ("level", "loading", "trend"))[self.effects - 1] if self.effects else ():
                add(part, g)
        self.serial, self.nugget = plan["errors"]["serial"] == "ar1", plan["errors"]["nugget"]
        if self.serial:
            add("rate", "all")
        if self.nugget:
            add("nugget", "all")

    def of(self, theta, g):
        """Values that hold in group `g`, with their places in the vector."""
        return {name[0]: (theta[k], k) for k, name in enumerate(self.names) if name[1] in ("all", g)}

    def starts(self, variance):
        """The criterion can be flat where a smoothing variance is small: a start on either side."""
        v = np.log(variance)
        usual = {"error": v - 1.5, "level": v / 2 - 0.5, "loading": 0.0, "trend": v / 2 - 1}
        rates = (0.5, 2.0, 3.5) if self.serial else (0.0,)
        nuggets = (-1.0, 0.5) if self.nugget else (0.0,)
        for smooth, rate, nugget in itertools.product((v + 1, v - 2), rates, nuggets):
            start = usual | {"smooth": smooth, "rate": rate, "nugget": nugget}
            yield np.array([start[name[0]] for name in self.names])


def covariance(group, own, parameters):
    """V of one group, and its derivatives by the parameters, keyed by their places."""
    spline = np.exp(own["smooth"][0]) * group.W
    variance = np.exp(own["error"][0])
    identity = np.eye(len(group.y))
    R, rest = identity, {}
    if parameters.serial:
        rate = np.exp(own["rate"][0])
        E = group.same * np.exp(-rate * group.gap)
        share = 1 / (1 + np.exp(-own["nugget"][0])) if parameters.nugget else 0.0
        R = (1 - share) * E + share * identity
        rest[own["rate"][1]] = -variance * (1 - share) * rate * group.gap * E
        if parameters.nugget:
            rest[own["nugget"][1]] = variance * share * (1 - share) * (identity - E)
    V = spline + variance * R
    rest |= {own["smooth"][1]: spline, own["error"][1]: variance * R}
    if parameters.effects:
        L, dL = loadings(own, parameters.effects)
        Z = group.Z[:, : parameters.effects]
        V = V + group.same * (Z @ L @ L.T @ Z.T)
        for place, d in dL.items():
            rest[place] = group.same * (Z @ (d @ L.T + L @ d.T) @ Z.T)
    return V, rest


def loadings(own, effects):
    """Triangular factor of the subject covariance, and its derivatives."""
    L = np.zeros((effects, effects))
    dL = {}
    for name, i, j in (("level", 0, 0), ("loading", 1, 0), ("trend", 1, 1)):
        if name in own:
            value, place = own[name]
            L[i, j] = value if name == "loading" else np.exp(value)
            dL[place] = np.zeros_like(L)
            dL[place][i, j] = 1.0 if name == "loading" else L[i, j]
    return L, dL


def projected(group, V):
    """log|V| + log|X'V^-1 X|, P and Py."""
    factor = cho_factor(V, lower=True)
    inverse = cho_solve(factor, np.eye(len(V)))
    VX = inverse @ group.X
    A = group.X.T @ VX
    P = inverse - VX @ np.linalg.solve(A, VX.T)
    return 2 * np.log(np.diag(factor[0])).sum() + np.linalg.slogdet(A)[1], P, P @ group.y


class Dense:
    def __init__(self, table, plan):
        self.table = table
        self.groups = [Group(table, g) for g in range(len(table["names"]))]
        self.parameters = Parameters(len(self.groups), plan)

    def criterion(self, theta):
        """Minus the log restricted likelihood, and its gradient."""
        total, gradient = 0.0, np.zeros(len(theta))
        for g, group in enumerate(self.groups):
            try:
                V, derivatives = covariance(group, self.parameters.of(theta, g), self.parameters)
                logs, P, Py = projected(group, V)
            except (np.linalg.LinAlgError, ValueError):
                return 1e10, gradient
            total += 0.5 * ((len(group.y) - 2) * np.log(2 * np.pi) + logs + group.y @ Py)
            for place, d in derivatives.items():
                gradient[place] += 0.5 * ((P * d).sum() - Py @ d @ Py)
        return total, gradient

    def fit(self):
        found = []
        for start in self.parameters.starts(self.table["y"].var()):
            result = minimize(self.criterion, start, jac=True, method="BFGS", options={"gtol": 1e-7, "maxiter": 500})
            found.append(result)
        best = min(found, key=lambda result: result.fun)
        self.theta, self.value = best.x, best.fun
        self.steepest = np.abs(self.criterion(best.x)[1]).max()
        assert self.steepest < 1e-4, f"largest gradient {self.steepest}"
        return self

    def courses(self, places):
        """Mean and covariance of all courses at `places`, and the effective degrees of freedom per group."""
        origin, span = self.table["t"].min(), np.ptp(self.table["t"])
        knots = np.unique(self.table["t"])
        between = CubicSpline(knots, np.eye(len(knots)), bc_type="natural")(places)
        means, covariances, dfs = [], [], []
        for g, group in enumerate(self.groups):
            own = self.parameters.of(self.theta, g)
            V, derivatives = covariance(group, own, self.parameters)
            _, P, Py = projected(group, V)
            s2, u = np.exp(own["smooth"][0]), (knots - origin) / span
            k, kk = s2 * wiener(u, group.u), s2 * wiener(u, u)
            X = np.column_stack([np.ones_like(knots), knots])
            VX = np.linalg.solve(V, group.X)
            A = np.linalg.inv(group.X.T @ VX)
            d = X - k @ VX
            mean = X @ (A @ VX.T @ group.y) + k @ Py
            cov = kk - k @ np.linalg.solve(V, k.T) + d @ A @ d.T
            means.append(between @ mean)
            covariances.append(between @ cov @ between.T)
            dfs.append(2 + (P * s2 * group.W).sum())
        return means, covariances, dfs

    def support(self, a, b):
        """Overlap of the observed ranges of two groups."""
        ends = [(self.groups[g].t.min(), self.groups[g].t.max()) for g in (a, b)]
        return max(low for low, _ in ends), min(high for _, high in ends)

    def critical(self, places, covariances):
        """Quantile of the largest |z| of all pairs. Courses of different groups are independent given the variances."""
        rng = np.random.default_rng(7)
        factors = []
        for cov in covariances:
            values, vectors = np.linalg.eigh(cov)
            keep = values > values[-1] * 1e-12
            factors.append(vectors[:, keep] * np.sqrt(values[keep]))
        largest = []
        for _ in range(DRAWS // 50_000):
            drawn = [factor @ rng.standard_normal((factor.shape[1], 50_000)) for factor in factors]
            top = np.zeros(50_000)
            for a, b in itertools.combinations(range(len(factors)), 2):
                low, high = self.support(a, b)
                inside = (places >= low - 1e-9) & (places <= high + 1e-9)
                se = np.sqrt(np.diag(covariances[a]) + np.diag(covariances[b]))[inside]
                z = np.abs(drawn[b][inside] - drawn[a][inside]) / se[:, None]
                top = np.maximum(top, z.max(axis=0))
            largest.append(top)
        return np.quantile(np.concatenate(largest), 0.95)

    def report(self):
        yield "log_reml", "", "", -self.value
        yield from self.variances()
        visits = np.unique(self.table["t"])
        grid = np.linspace(visits[0], visits[-1], 21)
        places = np.concatenate([grid, visits])
        means, covariances, dfs = self.courses(places)
        for g, name in enumerate(self.table["names"]):
            yield "effective_df", name, "", dfs[g]
            for k, t in enumerate(grid):
                yield "mean", name, t, means[g][k]
                yield "se", name, t, np.sqrt(covariances[g][k, k])
        names = self.table["names"]
        for a, b in itertools.combinations(range(len(names)), 2):
            low, high = self.support(a, b)
            for k, t in enumerate(grid):
                if low - 1e-9 <= t <= high + 1e-9:
                    yield "difference", f"{names[b]} - {names[a]}", t, means[b][k] - means[a][k]
                    yield "difference_se", f"{names[b]} - {names[a]}", t, np.sqrt(covariances[a][k, k] + covariances[b][k, k])
        if len(names) > 1:
            yield "critical", "", "", self.critical(places, covariances)

    def variances(self):
        """Standard deviations and correlations; a standard deviation at zero is left out."""
        span = np.ptp(self.table["t"])
        for g, name in enumerate(self.table["names"]):
            own = self.parameters.of(self.theta, g)
            residual = np.exp(own["error"][0] / 2)
            yield "residual_sd", name, "", residual
            if self.parameters.effects:
                L, _ = loadings(own, self.parameters.effects)
                D = L @ L.T
                for part, size in zip(("sd_level", "sd_trend"), np.sqrt(np.diag(D))):
                    if size > 1e-3 * residual:
                        yield part, name, "", size / (span if part == "sd_trend" else 1)
        own = self.parameters.of(self.theta, 0)
        if self.parameters.serial:
            yield "phi", "", "", np.exp(-np.exp(own["rate"][0]) / span)
        if self.parameters.nugget:
            yield "nugget", "", "", 1 / (1 + np.exp(-own["nugget"][0]))


def main(only):
    kept = []
    if only:
        with open(HERE / "expected" / "dense.csv", encoding="utf-8") as file:
            kept = list(csv.reader(file))[1:]
    rows, likelihood = [], {}
    for case, (name, plan) in plans().items():
        if name in ("housed", "colonies") or plan["curves"]["shape"] != "smooth" or plan["grid"]["count"] != 21:
            continue
        if only and case not in only:
            rows += [row for row in kept if row[0] == case]
            continue
        dense = Dense(read(name, plan), plan).fit()
        likelihood[case] = -dense.value
        print(f"{case}: log-REML {-dense.value:.6f}, largest gradient {dense.steepest:.1e}", flush=True)
        for quantity, group, t, value in dense.report():
            rows.append((case, quantity, group, t if t == "" else repr(float(t)), f"{value:.10g}"))
    for small, large in NESTED:
        if small in likelihood and large in likelihood:
            assert likelihood[large] > likelihood[small] - 1e-6, f"{large} is less likely than {small}, nested in it"
    write("dense.csv", rows)


if __name__ == "__main__":
    main(sys.argv[1:])
