"""Restricted likelihood with N x N matrices: an independent computation for small tables.

For each case: groups' curves are a line plus s_g times an integrated Wiener process from the
earliest time (kernel m^2 (3M - m) / 6; Wahba 1978, JRSS-B 40:364), so their posterior mean is the
natural cubic smoothing spline. Subject effects and errors as named. The criterion is
-1/2 [(N-p) log 2 pi + log|V| + log|X'V^-1 X| + r'V^-1 r] (Harville 1974), X = (1, t) per group in
the table's own time unit. Optimised from several starts with numpy and scipy; nothing is shared
with the engine. Between the distinct times the curve is the natural spline through them.

Writes expected/dense.csv: case, quantity, group, time, value.
"""

import csv
import itertools
import pathlib
import sys

import numpy as np
from scipy.interpolate import CubicSpline
from scipy.linalg import cho_factor, cho_solve
from scipy.optimize import minimize

HERE = pathlib.Path(__file__).resolve().parent


def read(name):
    rows = list(csv.DictReader(open(HERE / "data" / f"{name}.csv", encoding="utf-8")))
    group = [row.get("group", "all") for row in rows]
    names = list(dict.fromkeys(group))
    return {
        "subject": np.array([row["subject"] for row in rows]),
        "group": np.array([names.index(g) for g in group]),
        "names": names,
        "t": np.array([float(row["time"]) for row in rows]),
        "y": np.array([float(row["y"]) for row in rows]),
    }


def wiener(a, b, origin):
    a, b = a[:, None] - origin, b[None, :] - origin
    m, M = np.minimum(a, b), np.maximum(a, b)
    return m * m * (3 * M - m) / 6


class Dense:
    def __init__(self, data, subjects, serial, subjects_by_group, spread_by_group):
        self.__dict__.update(data)
        self.subjects, self.serial = subjects, serial
        self.by_group, self.spread_by_group = subjects_by_group, spread_by_group
        G, N = len(self.names), len(self.y)
        self.X = np.zeros((N, 2 * G))
        for g in range(G):
            self.X[self.group == g, 2 * g] = 1
            self.X[self.group == g, 2 * g + 1] = self.t[self.group == g]
        self.same = self.subject[:, None] == self.subject[None, :]
        self.gap = np.abs(self.t[:, None] - self.t[None, :])
        self.origin, self.span = self.t.min(), np.ptp(self.t)
        self.W = wiener(self.t, self.t, self.origin) / self.span**3
        self.centre = self.t.mean()

    def unpack(self, theta):
        G, it = len(self.names), iter(theta)
        p = {"s2": np.exp([next(it) for _ in range(G)])}
        p["var"] = np.exp([next(it) for _ in range(G if self.spread_by_group else 1)])
        p["var"] = p["var"] if self.spread_by_group else np.repeat(p["var"], G)
        p["D"] = []
        for _ in range(G if self.by_group else 1):
            if self.subjects == "intercept":
                p["D"].append(np.array([[np.exp(2 * next(it))]]))
            elif self.subjects == "slope":
                L = np.array([[np.exp(next(it)), 0], [next(it), np.exp(next(it))]])
                p["D"].append(L @ L.T)
        if not self.by_group:
            p["D"] = p["D"] * G
        p["rate"] = np.exp(next(it)) / self.span if self.serial else None
        p["nugget"] = 1 / (1 + np.exp(-next(it))) if self.serial == "ar1+nugget" else 0.0
        return p

    def starts(self):
        G = len(self.names)
        v = np.log(self.y.var())
        # The criterion can be flat where a smoothing variance is small: a start on either side.
        return [start for smooth in (v + 1, v - 2) for start in self.starts_from(smooth, v, G)]

    def starts_from(self, smooth, v, G):
        base = [smooth] * G + [v - 1.5] * (G if self.spread_by_group else 1)
        effects = {"none": [], "intercept": [v / 2 - 0.5], "slope": [v / 2 - 0.5, 0.0, v / 2 - 1]}[self.subjects]
        base += effects * (G if self.by_group and effects else 1)
        if not self.serial:
            return [base]
        tails = [[r] for r in (0.5, 2.0, 3.5)]
        if self.serial == "ar1+nugget":
            tails = [[r, n] for r, n in itertools.product((1.0, 3.0), (-1.0, 0.5))]
        return [base + tail for tail in tails]

    def covariance(self, p):
        V = np.zeros((len(self.y),) * 2)
        for g in range(len(self.names)):
            m = np.outer(self.group == g, self.group == g)
            V += m * (p["s2"][g] * self.W)
            if self.subjects != "none":
                z = np.ones((len(self.y), 1)) if self.subjects == "intercept" else np.column_stack(
                    [np.ones_like(self.t), (self.t - self.centre) / self.span])
                V += m * self.same * (z @ p["D"][g] @ z.T)
            if self.serial:
                R = (1 - p["nugget"]) * self.same * np.exp(-p["rate"] * self.gap) + p["nugget"] * np.eye(len(self.y))
            else:
                R = np.eye(len(self.y))
            V += m * p["var"][g] * R
        return V

    def criterion(self, theta):
        try:
            V = cho_factor(self.covariance(self.unpack(theta)), lower=True)
            VX = cho_solve(V, self.X)
            A = cho_factor(self.X.T @ VX, lower=True)
        except (np.linalg.LinAlgError, ValueError):
            return 1e10
        b = cho_solve(A, VX.T @ self.y)
        r = self.y - self.X @ b
        N, p = self.X.shape
        logdet = 2 * np.log(np.diag(V[0])).sum() + 2 * np.log(np.diag(A[0])).sum()
        return 0.5 * ((N - p) * np.log(2 * np.pi) + logdet + r @ cho_solve(V, r))

    def fit(self):
        best = None
        for start in self.starts():
            found = minimize(self.criterion, start, method="BFGS", options={"gtol": 1e-4})
            if best is None or found.fun < best.fun - 1e-7:
                best = found
        polished = minimize(self.criterion, best.x, method="Nelder-Mead",
                            options={"xatol": 1e-6, "fatol": 1e-10, "maxiter": 4000, "maxfev": 4000})
        self.theta = polished.x if polished.fun < best.fun else best.x
        self.value = min(polished.fun, best.fun)
        return self

    def report(self):
        p = self.unpack(self.theta)
        yield "log_reml", "", "", -self.value
        for g, name in enumerate(self.names):
            yield "residual_sd", name, "", np.sqrt(p["var"][g])
            if self.subjects == "slope":
                T = np.array([[1, (self.origin - self.centre) / self.span], [0, 1 / self.span]])
                D = T @ p["D"][g] @ T.T
                yield "sd_level", name, "", np.sqrt(D[0, 0])
                yield "sd_trend", name, "", np.sqrt(D[1, 1])
            elif self.subjects == "intercept":
                yield "sd_level", name, "", np.sqrt(p["D"][g][0, 0])
        if self.serial:
            yield "phi", "", "", np.exp(-p["rate"])
        if self.serial == "ar1+nugget":
            yield "nugget", "", "", p["nugget"]
        V = cho_factor(self.covariance(p), lower=True)
        A = np.linalg.inv(self.X.T @ cho_solve(V, self.X))
        b = A @ (self.X.T @ cho_solve(V, self.y))
        residual = cho_solve(V, self.y - self.X @ b)
        knots = np.unique(self.t)
        grid = np.linspace(knots[0], knots[-1], 21)
        between = CubicSpline(knots, np.eye(len(knots)), bc_type="natural")(grid)
        for g, name in enumerate(self.names):
            x = np.zeros((len(knots), self.X.shape[1]))
            x[:, 2 * g], x[:, 2 * g + 1] = 1, knots
            own = self.group == g
            k = p["s2"][g] * wiener(knots, self.t, self.origin) / self.span**3 * own
            kk = p["s2"][g] * wiener(knots, knots, self.origin) / self.span**3
            mean = x @ b + k @ residual
            d = x - k @ cho_solve(V, self.X)
            cov = kk - k @ cho_solve(V, k.T) + d @ A @ d.T
            m, c = between @ mean, np.sqrt(np.diag(between @ cov @ between.T))
            for t, mu, se in zip(grid, m, c):
                yield "mean", name, repr(float(t)), mu
                yield "se", name, repr(float(t)), se


CASES = {
    "sleepstudy.intercept": ("sleepstudy", "intercept", None, False, False),
    "sleepstudy.slope": ("sleepstudy", "slope", None, False, False),
    "sitka.intercept": ("sitka1988", "intercept", None, False, False),
    "sitka.slope": ("sitka1988", "slope", None, False, False),
    "dietox.slope": ("dietox", "slope", None, False, False),
    "dietox.slope.spread": ("dietox", "slope", None, False, True),
    "dietox.slope.ar1": ("dietox", "slope", "ar1", False, False),
    "uneven.ar1.nugget": ("uneven", "intercept", "ar1+nugget", False, False),
    "uneven.none": ("uneven", "none", None, False, False),
    "spread.by-group": ("spread", "intercept", None, True, True),
    "spread.slope.by-group": ("spread", "slope", None, True, False),
}


def main(only):
    target = HERE / "expected" / "dense.csv"
    kept = list(csv.reader(open(target, encoding="utf-8")))[1:] if only and target.exists() else []
    rows = []
    for case, (name, subjects, serial, by_group, spread) in CASES.items():
        if only and case not in only:
            rows += [row for row in kept if row[0] == case]
            continue
        print(case, flush=True)
        dense = Dense(read(name), subjects, serial, by_group, spread).fit()
        rows += [(case, *row[:3], repr(float(row[3]))) for row in dense.report()]
    with open(target, "w", encoding="utf-8", newline="\n") as file:
        csv.writer(file, lineterminator="\n").writerows([("case", "quantity", "group", "time", "value"), *rows])


if __name__ == "__main__":
    main(sys.argv[1:])
