"""Families without subject effects, written to expected/links.csv and data/links.csv. Run: python links.py

Straight lines in two groups. For each family the log density is computed by scipy.stats (binomial, beta, norm with logcdf and
logsf; the Tweedie density as a Poisson number of gamma summands, its definition). What is maximised over the dispersion is the
likelihood with the four coefficients integrated out by Laplace's approximation, the Hessian by differences: the restricted
likelihood. Binomial and its standard errors are statsmodels' GLM.
"""

from pathlib import Path

import numpy as np
import scipy
import statsmodels.api as sm
from scipy import optimize, stats

HERE = Path(__file__).resolve().parent
rng = np.random.default_rng(11)
group = np.repeat([0, 1], 60)
time = np.tile(np.repeat(np.arange(5), 12), 2).astype(float)
X = np.column_stack([(group == 0) * 1.0, (group == 0) * time, (group == 1) * 1.0, (group == 1) * time])
data, expected = [], []


def keep(case, y, detail):
    for g, t, value, d in zip(group, time, y, detail):
        data.append(f"{case},{g},{float(t)!r},{float(value)!r},{float(d)!r}")


def hessian(f, b):
    n, h = len(b), 1e-4
    out = np.zeros((n, n))
    for i in range(n):
        for j in range(n):
            a = np.zeros((4, n))
            a[:, i] += np.array([h, h, -h, -h])
            a[:, j] += np.array([h, -h, h, -h])
            v = [f(b + row) for row in a]
            out[i, j] = (v[0] - v[1] - v[2] + v[3]) / (4 * h * h)
    return out


def restricted(case, log_density, b0, low, high):
    def at(log_phi):
        f = lambda b: -log_density(X @ b, np.exp(log_phi)).sum()
        b = optimize.minimize(f, at.b, method="BFGS", options={"gtol": 1e-9}).x
        b = optimize.minimize(f, b, method="Nelder-Mead", options={"xatol": 1e-10, "fatol": 1e-13, "maxiter": 20000, "maxfev": 20000}).x
        at.b = b
        H = hessian(f, b)
        return f(b) + 0.5 * np.linalg.slogdet(H)[1] - 0.5 * len(b) * np.log(2 * np.pi), b, H

    at.b = np.asarray(b0, float)
    best = optimize.minimize_scalar(lambda x: at(x)[0], bounds=(low, high), method="bounded", options={"xatol": 1e-7})
    value, b, H = at(best.x)
    cov = np.linalg.inv(H)
    expected.append(f"{case},dispersion,,,{float(np.exp(best.x))!r},2e-3")
    expected.append(f"{case},log_restricted,,,{float(-value)!r},1e-3")
    lines(case, b, cov)


def lines(case, b, cov):
    for g in (0, 1):
        for t in (0.0, 4.0):
            x = np.zeros(4)
            x[2 * g], x[2 * g + 1] = 1, t
            se = float(np.sqrt(x @ cov @ x))
            expected.append(f"{case},mean,{g},{float(t)!r},{float(x @ b)!r},{0.003 * se!r}")
            expected.append(f"{case},se,{g},{t!r},{se!r},{0.005 * se!r}")


logit = lambda eta: 1 / (1 + np.exp(-eta))
eta = 0.3 * (group == 1) + 0.25 * time * np.where(group == 1, 1.4, 0.6) - 0.8

trials = rng.integers(1, 9, len(time)).astype(float)
y = rng.binomial(trials.astype(int), logit(eta))
keep("binomial", y, trials)
fit = sm.GLM(np.column_stack([y, trials - y]), X, family=sm.families.Binomial()).fit(tol=1e-13)
lines("binomial", fit.params, fit.cov_params())

m, k = logit(eta), 12.0
y = rng.beta(m * k, (1 - m) * k)
keep("beta", y, np.zeros(len(y)))
restricted("beta", lambda e, phi: stats.beta.logpdf(y, logit(e) / phi, (1 - logit(e)) / phi), [-0.8, 0.2, -0.5, 0.3], -5, 1)

true = eta + 0.5 * rng.standard_normal(len(time))
low, high = -0.9, 0.9
y = np.clip(true, low, high)
side = np.where(true < low, -1.0, np.where(true > high, 1.0, 0.0))
keep("censored", y, side)


def tobit(e, phi):
    s = np.sqrt(phi)
    return np.where(side < 0, stats.norm.logcdf((y - e) / s), np.where(side > 0, stats.norm.logsf((y - e) / s), stats.norm.logpdf(y, e, s)))


restricted("censored", tobit, [-0.8, 0.2, -0.5, 0.3], -4, 1)

p, phi = 1.4, 0.8
mu = np.exp(eta)
count = rng.poisson(mu ** (2 - p) / (phi * (2 - p)))
y2 = np.array([rng.gamma((2 - p) / (p - 1), phi * (p - 1) * m ** (p - 1), n).sum() for m, n in zip(mu, count)])
keep("tweedie", y2, np.zeros(len(y2)))


def compound(e, phi):
    mu = np.exp(e)
    rate, shape, scale = mu ** (2 - p) / (phi * (2 - p)), (2 - p) / (p - 1), phi * (p - 1) * mu ** (p - 1)
    n = np.arange(1, 120)[:, None]
    with np.errstate(divide="ignore"):
        parts = stats.poisson.logpmf(n, rate) + stats.gamma.logpdf(np.maximum(y2, 1e-300), n * shape, scale=scale)
    top = parts.max(axis=0)
    return np.where(y2 > 0, top + np.log(np.exp(parts - top).sum(axis=0)), -rate)


restricted("tweedie", compound, [-0.8, 0.2, -0.5, 0.3], -3, 2)

(HERE / "data/links.csv").write_text("# invented by links.py\ncase,group,time,y,detail\n" + "\n".join(data) + "\n")
head = f"# scipy {scipy.__version__}, statsmodels {sm.__name__ and __import__('statsmodels').__version__}\ncase,what,group,time,value,tolerance\n"
(HERE / "expected/links.csv").write_text(head + "\n".join(expected) + "\n")
