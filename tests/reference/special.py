"""Reference values of the special functions, written to crates/courseband-engine/tests/data/special.csv.

Values: mpmath at 50 digits. Beside each stands scipy's answer where scipy has the function; the script prints the
rows where the two differ by more than 1e-11 (relative), so that the reference itself is checked by a second hand.
Those rows are subnormal numbers, or F with degrees of freedom of a million and more, or quantiles near the centre of
t, where scipy itself is coarser (back substitution at 50 digits confirms the values here).
Run: python special.py > ../../crates/courseband-engine/tests/data/special.csv

The script also derives the jump of xoshiro256++ from its transition matrix over GF(2), raised to the power 2^128.
"""

import sys
from itertools import product

import mpmath as mp
import scipy
import scipy.special as sp
import scipy.stats as st

mp.mp.dps = 50


def beta_pair(a, b, x, y):
    """(lower, upper) regularised incomplete beta; x + y = 1 to 50 digits."""
    a, b = mp.mpf(a), mp.mpf(b)
    log_b = mp.loggamma(a) + mp.loggamma(b) - mp.loggamma(a + b)

    def series(a, b, x, y):
        # DLMF 8.17.8: I = x^a y^b / (a B) * sum (a+b)_n / (a+1)_n x^n; all terms positive.
        total, term, n = mp.mpf(1), mp.mpf(1), 0
        while True:
            term *= (a + b + n) / (a + 1 + n) * x
            total += term
            n += 1
            if term < total * mp.mpf(10) ** -(mp.mp.dps - 2):
                break
        return mp.exp(a * mp.log(x) + b * mp.log(y) - log_b) / a * total

    if x == 0:
        return mp.mpf(0), mp.mpf(1)
    if x <= (a / (a + b)) or (x < 0.9 and y > 1e-3):
        low = series(a, b, x, y)
        return low, 1 - low
    up = series(b, a, y, x)
    return 1 - up, up


def gamma_pair(a, x):
    a, x = mp.mpf(a), mp.mpf(x)
    low = mp.gammainc(a, 0, x, regularized=True)
    up = mp.gammainc(a, x, mp.inf, regularized=True)
    return low, up


def t_tails(t, df):
    t, df = mp.mpf(t), mp.mpf(df)
    w = df + t * t
    inside, beyond = beta_pair(0.5, df / 2, t * t / w, df / w)
    if beyond < mp.mpf(10) ** -10 and mp.mp.dps == 50:
        # 1 - inside has lost digits: once more with 300.
        mp.mp.dps = 300
        _, _, inside = t_tails(t, df)
        beyond = 1 - inside
        mp.mp.dps = 50
    return beyond / 2, 1 - beyond / 2, inside


rows, bad = [], []


def emit(name, args, value, scipy_value=None):
    v = float(value)
    rows.append((name, *args, *[""] * (3 - len(args)), repr(v)))
    if scipy_value is not None and v != 0 and abs(float(scipy_value) / v - 1) > 1e-11:
        bad.append((name, args, v, float(scipy_value)))


def normal():
    for z in [-38.0, -30.0, -20.0, -8.5, -5.0, -3.0, -1.96, -1.0, -0.3, -1e-8, 0.0, 1e-5, 0.5, 1.0, 2.5, 5.0, 8.0]:
        emit("normal_cdf", (z,), mp.ncdf(mp.mpf(z)), sp.ndtr(z))
        emit("normal_sf", (z,), mp.ncdf(-mp.mpf(z)), sp.ndtr(-z))
    for p in [1e-300, 1e-200, 1e-100, 1e-30, 1e-12, 1e-5, 0.001, 0.025, 0.05, 0.074, 0.076, 0.2, 0.4, 0.49999999,
              0.5, 0.5000001, 0.6, 0.8, 0.9, 0.95, 0.975, 0.995, 0.9999, 0.999999999]:
        guess = mp.mpf(float(sp.ndtri(p)))
        root = mp.mpf(0) if p == 0.5 else mp.findroot(lambda z: mp.log(mp.ncdf(z)) - mp.log(mp.mpf(p)), guess)
        emit("normal_quantile", (p,), root, sp.ndtri(p))


def gammas():
    for x in [1e-8, 0.1, 0.5, 1.5, 3.25, 10.0, 100.5, 1e6, 5e8]:
        emit("ln_gamma", (x,), mp.loggamma(mp.mpf(x)), sp.gammaln(x))
    for a in [0.25, 0.5, 1.0, 2.5, 10.0, 50.0, 500.0]:
        for f in [1e-6, 0.05, 0.5, 0.9, 1.0, 1.1, 1.5, 3.0, 8.0]:
            x = a * f
            low, up = gamma_pair(a, x)
            if low > mp.mpf(10) ** -290:
                emit("regularised_gamma", (a, x), low, sp.gammainc(a, x))
            if up > mp.mpf(10) ** -290:
                emit("regularised_gamma_upper", (a, x), up, sp.gammaincc(a, x))


def betas():
    shapes = [0.25, 0.5, 1.0, 2.0, 3.5, 10.0, 60.0, 500.0, 1e4]
    for a, b in product(shapes, shapes):
        if a * b > 1e7:
            continue
        for f in [1e-3, 0.3, 0.9, 1.0, 1.05, 1.5]:
            x = f * a / (a + b)
            if not 0 < x < 1:
                continue
            low, up = beta_pair(a, b, mp.mpf(x), 1 - mp.mpf(x))
            if low > mp.mpf(10) ** -290:
                emit("regularised_beta", (a, b, x), low, sp.betainc(a, b, x))
            if up > mp.mpf(10) ** -35:
                emit("regularised_beta_upper", (a, b, x), up, sp.betaincc(a, b, x))


def students():
    dfs = [0.5, 1.0, 2.0, 2.7, 5.0, 10.5, 30.0, 100.0, 1000.0, 1e6, 1e9]
    for df in dfs:
        for t in [1e-9, 0.01, 0.7, 1.5, 2.0, 2.5, 4.0, 8.0, 30.0]:
            sf, cdf, _ = t_tails(t, df)
            if sf > mp.mpf(10) ** -290:
                emit("t_sf", (t, df), sf, st.t.sf(t, df))
            emit("t_cdf", (t, df), cdf, st.t.cdf(t, df))
        for p in [1e-12, 1e-6, 0.001, 0.025, 0.05, 0.2, 0.3, 0.45, 0.499999, 0.5, 0.501, 0.7, 0.9, 0.975, 0.9995]:
            if p == 0.5:
                root = mp.mpf(0)
            else:
                tail = min(mp.mpf(p), 1 - mp.mpf(p))
                guess = abs(mp.mpf(float(st.t.ppf(p, df))))
                root = mp.findroot(lambda u: mp.log(t_tails(mp.exp(u), df)[0]) - mp.log(tail), mp.log(guess), tol=1e-40)
                root = mp.exp(root) * (1 if p > 0.5 else -1)
            emit("t_quantile", (p, df), root, st.t.ppf(p, df))


def fs():
    for d1, d2 in [(1.0, 1.0), (1.0, 10.0), (2.0, 13.0), (3.7, 5.2), (0.5, 4.0), (7.0, 300.0), (30.0, 30.0), (10.0, 1e6), (4.0, 1e9)]:
        for x in [1e-6, 0.1, 0.8, 1.0, 1.5, 3.0, 10.0, 60.0]:
            w = mp.mpf(d1) * mp.mpf(x) + mp.mpf(d2)
            low, up = beta_pair(d1 / 2, d2 / 2, mp.mpf(d1) * mp.mpf(x) / w, mp.mpf(d2) / w)
            emit("f_cdf", (x, d1, d2), low, st.f.cdf(x, d1, d2))
            if up > mp.mpf(10) ** -35:
                emit("f_sf", (x, d1, d2), up, st.f.sf(x, d1, d2))
        for p in [1e-8, 0.01, 0.05, 0.5, 0.9, 0.95, 0.999]:
            def lower(u):
                x = mp.exp(u)
                w = mp.mpf(d1) * x + mp.mpf(d2)
                return beta_pair(d1 / 2, d2 / 2, mp.mpf(d1) * x / w, mp.mpf(d2) / w)[0]
            guess = mp.log(mp.mpf(float(st.f.ppf(p, d1, d2))))
            root = mp.exp(mp.findroot(lambda u: mp.log(lower(u)) - mp.log(mp.mpf(p)), guess, tol=1e-38))
            emit("f_quantile", (p, d1, d2), root, st.f.ppf(p, d1, d2))


def chi2s():
    for df in [0.5, 1.0, 2.0, 3.3, 10.0, 60.0, 1000.0]:
        for x in [1e-4, 0.3, 1.0, 3.84, 12.0, 80.0, 700.0]:
            low, up = gamma_pair(df / 2, x / 2)
            if low > mp.mpf(10) ** -290:
                emit("chi2_cdf", (x, df), low, st.chi2.cdf(x, df))
            emit("chi2_sf", (x, df), up, st.chi2.sf(x, df))
        for p in [1e-8, 0.01, 0.05, 0.5, 0.9, 0.95, 0.9999]:
            guess = mp.log(mp.mpf(float(st.chi2.ppf(p, df))))
            root = mp.exp(mp.findroot(lambda u: mp.log(gamma_pair(df / 2, mp.exp(u) / 2)[0]) - mp.log(mp.mpf(p)), guess, tol=1e-38))
            emit("chi2_quantile", (p, df), root, st.chi2.ppf(p, df))


MASK = (1 << 64) - 1


def splitmix(seed):
    while True:
        seed = (seed + 0x9E3779B97F4A7C15) & MASK
        z = seed
        z = ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & MASK
        z = ((z ^ (z >> 27)) * 0x94D049BB133111EB) & MASK
        yield z ^ (z >> 31)


def rotl(x, k):
    return ((x << k) | (x >> (64 - k))) & MASK


def step(s):
    """One xoshiro256 transition; linear over GF(2)."""
    a, b, c, d = s
    t = (b << 17) & MASK
    c ^= a
    d ^= b
    b ^= c
    a ^= d
    c ^= t
    return [a, b, c, rotl(d, 45)]


def xoshiro(s):
    return (rotl((s[0] + s[3]) & MASK, 23) + s[0]) & MASK


def jumped(state):
    """The state 2^128 transitions later: the transition matrix squared 128 times, columns as 256-bit numbers."""
    pack = lambda s: s[0] | s[1] << 64 | s[2] << 128 | s[3] << 192
    unpack = lambda v: [(v >> (64 * k)) & MASK for k in range(4)]
    columns = [pack(step(unpack(1 << bit))) for bit in range(256)]

    def apply(columns, vector):
        out = 0
        while vector:
            low = vector & -vector
            out ^= columns[low.bit_length() - 1]
            vector ^= low
        return out

    for _ in range(128):
        columns = [apply(columns, c) for c in columns]
    return unpack(apply(columns, pack(state)))


def generator():
    for seed in (0, 42):
        mixer = splitmix(seed)
        state = [next(mixer) for _ in range(4)]
        for label, s in (("rng", state), ("rng_jump", jumped(state))):
            out = []
            for _ in range(4):
                out.append(xoshiro(s))
                s = step(s)
            rows.append((label, seed, "", "", ";".join(map(str, out))))


if __name__ == "__main__":
    for part in (normal, gammas, betas, students, fs, chi2s, generator):
        part()
    print(f"# mpmath {mp.__version__} at 50 digits; scipy {scipy.__version__} compared; by tests/reference/special.py")
    print("function,a,b,c,value")
    for row in rows:
        print(",".join(map(str, row)))
    for item in bad:
        print("scipy differs:", item, file=sys.stderr)
