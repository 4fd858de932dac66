"""Reference values of the day-as-category model, written to crates/courseband-engine/tests/data/visits.csv, with the
tables they belong to in visits_tables.csv.

One mean per group and visit, one unstructured covariance between visits, restricted likelihood from all values. Computed
with N x N matrices: V = sum s_k V_k over the entries s_k of the covariance, P = V^-1 - V^-1 X (X'V^-1 X)^-1 X'V^-1 and

  score_k        = -1/2 [tr(P V_k) - y'P V_k P y]
  information_kl = -1/2 tr(P V_k P V_l) + y'P V_k P V_l P y      (observed)      1/2 tr(P V_k P V_l)   (expected)

(Harville 1977, JASA 72:320; Searle, Casella & McCulloch 1992, Variance Components, sec. 6.6; from memory.) Fisher scoring
with step halving, then Newton to the last digits. Degrees of freedom by Satterthwaite with the inverse of the observed
information; those of F by Fai & Cornelius 1996 on orthonormal contrasts. Nothing is shared with the engine, which works
by patterns of gaps, on the entries of a factor, with differences of gradients. numpy 2.4.6 and scipy 1.17.1.

Tables, all cut from data/ (sources there): sleep is sleepstudy, days 0 to 4, with made gaps; sitka is sitka1988 with made
gaps; diet is dietox, weeks 1 to 6, ten pigs per group, with made dropout. Run: python visits.py
"""

import csv
from pathlib import Path

import numpy as np
import scipy
from scipy.linalg import cho_factor, cho_solve, eigh, helmert
from scipy import stats

HERE = Path(__file__).resolve().parent
DATA = HERE.parents[1] / "crates/courseband-engine/tests/data"


def read(name, column="group"):
    rows = list(csv.DictReader(open(HERE / "data" / f"{name}.csv", encoding="utf-8")))
    return [(r["subject"], r.get(column, "all"), float(r["time"]), float(r["y"])) for r in rows]


def tables():
    sleep = [r for r in read("sleepstudy") if r[2] <= 4]
    ids = list(dict.fromkeys(r[0] for r in sleep))
    sleep = [r for r in sleep if (7 * ids.index(r[0]) + 3 * int(r[2])) % 5 != 0]
    sitka = [r for k, r in enumerate(read("sitka1988")) if (k * k + k // 7) % 11 != 3]
    diet, taken = [], {}
    for subject, group, time, y in read("dietox"):
        members = taken.setdefault(group, [])
        if subject not in members:
            members.append(subject)
        rank = members.index(subject)
        last = 6 - (rank % 4 if rank % 3 == 0 else 0)
        if rank < 10 and time <= last:
            diet.append((subject, group, time, y))
    return {"sleep": sleep, "sitka": sitka, "diet": diet}


class Dense:
    def __init__(self, rows):
        self.groups = list(dict.fromkeys(r[1] for r in rows))
        self.times = sorted({r[2] for r in rows})
        G, T = len(self.groups), len(self.times)
        subject = np.array([r[0] for r in rows])
        g = np.array([self.groups.index(r[1]) for r in rows])
        self.v = np.array([self.times.index(r[2]) for r in rows])
        self.y = np.array([r[3] for r in rows])
        self.X = np.eye(G * T)[g * T + self.v]
        same = subject[:, None] == subject[None, :]
        self.entries = [(i, j) for i in range(T) for j in range(i + 1)]
        self.Vk = []
        for i, j in self.entries:
            hit = (self.v[:, None] == i) & (self.v[None, :] == j)
            self.Vk.append((same & (hit | hit.T)).astype(float))
        variances = [np.var([y for y, v in zip(self.y, self.v) if v == t]) for t in range(T)]
        self.s = np.array([variances[i] if i == j else 0.5 * np.sqrt(variances[i] * variances[j]) for i, j in self.entries])

    def at(self, s):
        V = sum(a * B for a, B in zip(s, self.Vk))
        factor = cho_factor(V, lower=True)
        inverse = cho_solve(factor, np.eye(len(self.y)))
        A = self.X.T @ inverse @ self.X
        cov = np.linalg.inv(A)
        P = inverse - inverse @ self.X @ cov @ self.X.T @ inverse
        n, p = self.X.shape
        value = -0.5 * ((n - p) * np.log(2 * np.pi) + 2 * np.log(np.diag(factor[0])).sum() + np.linalg.slogdet(A)[1] + self.y @ P @ self.y)
        Py = P @ self.y
        PV = [P @ B for B in self.Vk]
        score = np.array([-0.5 * (np.trace(B) - Py @ C @ Py) for B, C in zip(PV, self.Vk)])
        expected = np.array([[0.5 * (B * C.T).sum() for C in PV] for B in PV])
        pulled = [C @ Py for C in self.Vk]
        observed = np.array([[a @ P @ b for b in pulled] for a in pulled]) - expected
        return value, score, expected, observed, inverse, cov

    def fit(self):
        value, score, expected, observed, *_ = self.at(self.s)
        for round in range(200):
            fine = np.abs(np.linalg.solve(expected, score) @ score) < 1e-6
            step = np.linalg.solve(observed if fine else expected, score)
            length = 1.0
            while True:
                try:
                    tried = self.at(self.s + length * step)
                    if tried[0] >= value - 1e-9:
                        break
                except np.linalg.LinAlgError:
                    pass
                length /= 2
            self.s = self.s + length * step
            value, score, expected, observed, inverse, self.cov = tried
            if np.abs(np.linalg.solve(expected, score) @ score) < 1e-20:
                break
        self.value, self.W = value, np.linalg.inv(observed)
        self.slopes = [self.cov @ self.X.T @ inverse @ B @ inverse @ self.X @ self.cov for B in self.Vk]
        self.b = self.cov @ self.X.T @ inverse @ self.y
        assert np.abs(score @ np.linalg.solve(expected, score)) < 1e-16
        return self

    def df(self, c):
        g = np.array([c @ S @ c for S in self.slopes])
        return 2 * (c @ self.cov @ c) ** 2 / (g @ self.W @ g)

    def wald(self, C):
        values, vectors = eigh(C @ self.cov @ C.T)
        rotated = vectors.T @ C
        q = len(C)
        f = (((rotated @ self.b) ** 2) / values).sum() / q
        nu = np.array([self.df(c) for c in rotated])
        assert nu.min() > 2, nu
        total = (nu / (nu - 2)).sum()
        return f, q, 2 * total / (total - q), stats.f.sf(f, q, 2 * total / (total - q))


def values(case, rows, put):
    fit = Dense(rows).fit()
    G, T = len(fit.groups), len(fit.times)
    put(case, "log_reml", fit.value)
    for (i, j), s in zip(fit.entries, fit.s):
        put(case, f"sigma.{i}.{j}", s)
    unit = np.eye(G * T)
    contrasts = {f"mean.{g}.{t}": unit[g * T + t] for g in range(G) for t in range(T)}
    contrasts |= {f"gap.{g}.{t}": unit[g * T + t] - unit[t] for g in range(1, G) for t in range(T)}
    for name, c in contrasts.items():
        se, df = np.sqrt(c @ fit.cov @ c), fit.df(c)
        half = stats.t.ppf(0.975, df) * se
        put(case, f"{name}.estimate", c @ fit.b)
        put(case, f"{name}.se", se)
        put(case, f"{name}.df", df)
        put(case, f"{name}.p", 2 * stats.t.sf(abs(c @ fit.b) / se, df))
        put(case, f"{name}.lower", c @ fit.b - half)
    between, within = helmert(G), helmert(T)
    tests = {"visits": np.kron(np.ones((1, G)) / G, within)}
    if G > 1:
        tests["groups"] = np.kron(between, np.ones((1, T)) / T)
        tests["groups_by_visits"] = np.kron(between, within)
    for name, C in tests.items():
        for part, value in zip(("f", "df", "df_error", "p"), fit.wald(C)):
            put(case, f"{name}.{part}", value)


if __name__ == "__main__":
    out = []
    with open(DATA / "visits_tables.csv", "w", encoding="utf-8") as file:
        file.write("case,subject,group,time,y\n")
        for case, rows in tables().items():
            values(case, rows, lambda *row: out.append(row))
            file.writelines(f"{case},{s},{g},{t:g},{y!r}\n" for s, g, t, y in rows)
    with open(DATA / "visits.csv", "w", encoding="utf-8") as file:
        file.write(f"# numpy {np.__version__}, scipy {scipy.__version__}; by tests/reference/visits.py\ncase,quantity,value\n")
        file.writelines(f"{case},{name},{float(value)!r}\n" for case, name, value in out)
