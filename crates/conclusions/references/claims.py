"""Reference values for the claims: SciPy and mpmath, written as Rust tuples.

Run: python3 crates/conclusions/references/claims.py   (a few seconds; SciPy 1.17.1, mpmath 1.3.0)
Writes noncentral.in, proportion.in and claims.in beside this file.
"""

import pathlib

import mpmath as mp
import numpy as np
from scipy import stats

mp.mp.dps = 30
here = pathlib.Path(__file__).parent


def noncentral_above(df, t, delta):
    """P(T > t), T = (Z + delta)/S with S^2 ~ chi2(df)/df, by adaptive quadrature over S at 30 digits."""
    df, t, delta = mp.mpf(df), mp.mpf(t), mp.mpf(delta)
    log_constant = df / 2 * mp.log(df / 2) - mp.loggamma(df / 2) + mp.log(2)

    def integrand(s):
        if s <= 0:
            return mp.mpf(0)
        weight = mp.exp(log_constant + (df - 1) * mp.log(s) - df * s * s / 2)
        return weight * mp.erfc((t * s - delta) / mp.sqrt(2)) / 2

    width = 1 / mp.sqrt(2 * df)
    high = 1 + 14 * width
    points = [mp.mpf(0)] + [x for x in (1 - 6 * width, 1 - 2 * width, 1, 1 + 2 * width, 1 + 6 * width) if x > 0] + [high]
    return mp.quad(integrand, points)


rows = []
for df, t, delta in [(1, 2.5, 0.7), (2, 4.3, -1.2), (9, 2.262, 1.5), (29, 1.699, 2.5), (99, 1.984, 3.0), (1e4, 1.96, 2.8), (39, -2.02, 0.5)]:
    rows.append(f"({float(df)!r}, {t!r}, {float(delta)!r}, {mp.nstr(noncentral_above(df, t, delta), 18)})")
(here / "noncentral.in").write_text("&[\n    " + ",\n    ".join(rows) + ",\n]\n")


# Exact coverage of intervals for a proportion: Wilson, Agresti-Coull, Jeffreys, Clopper-Pearson, nominal 95 %.
def coverage(n, p):
    k = np.arange(n + 1)
    mass = stats.binom.pmf(k, n, p)
    z = stats.norm.isf(0.025)
    wilson = [stats.binomtest(int(i), n).proportion_ci(method="wilson") for i in k]
    exact = [stats.binomtest(int(i), n).proportion_ci(method="exact") for i in k]
    size = n + z * z
    centre = (k + z * z / 2) / size
    half = z * np.sqrt(centre * (1 - centre) / size)
    low = np.where(k == 0, 0, stats.beta.ppf(0.025, k + 0.5, n - k + 0.5))
    high = np.where(k == n, 1, stats.beta.isf(0.025, k + 0.5, n - k + 0.5))
    inside = [
        np.array([ci.low <= p <= ci.high for ci in wilson]),
        (centre - half <= p) & (p <= centre + half),
        (low <= p) & (p <= high),
        np.array([ci.low <= p <= ci.high for ci in exact]),
    ]
    return [float(mass[which].sum()) for which in inside]


rows = []
for n, p in [(17, 0.5), (30, 0.2), (98, 0.2), (100, 0.106), (591, 0.005), (5, 0.02), (40, 0.5)]:
    rows.append(f"({n}, {p!r}, [{', '.join(repr(value) for value in coverage(n, p))}])")
(here / "proportion.in").write_text("&[\n    " + ",\n    ".join(rows) + ",\n]\n")


# The claims of tests/claims.rs: name, document fields, nominal, actual (closed forms through SciPy).
z975 = stats.norm.isf(0.025)
cases = []


def case(name, law, n, fields, nominal, actual):
    cases.append(f'("{name}", r#"{{"format": "gaussgap-scenario/1", "law": {law}, "n": {n}, {fields}}}"#, {float(nominal)!r}, {float(actual)!r})')


def interval(level, sides, spread="known"):
    return f'"claim": {{"kind": "interval", "level": {level}, "sides": "{sides}", "spread": "{spread}"}}'


for n, p in [(40, 0.5), (120, 0.06), (17, 0.3)]:
    sd = np.sqrt(n * p * (1 - p))
    law = f'{{"kind": "bernoulli", "p": {p}}}'
    low, high = n * p - z975 * sd, n * p + z975 * sd
    inside = stats.binom.cdf(np.floor(high), n, p) - stats.binom.cdf(np.ceil(low) - 1, n, p)
    case(f"two-sided interval, binomial {n} {p}", law, n, interval(0.95, "two"), 0.95, inside)
    c = stats.norm.ppf(0.95)
    # A lower limit misses when it lies above the mean: S - c sd > np.
    case(f"lower limit, binomial {n} {p}", law, n, interval(0.95, "lower"), 0.95, stats.binom.cdf(np.floor(n * p + c * sd), n, p))
    case(f"upper limit, binomial {n} {p}", law, n, interval(0.95, "upper"), 0.95, stats.binom.sf(np.ceil(n * p - c * sd) - 1, n, p))
law = '{"kind": "bernoulli", "p": 0.2}'
claim = '"statistic": "sum", "claim": {"kind": "threshold", "at": 14, "direction": "at-most"}'
case("threshold at most", law, 100, claim, stats.norm.cdf(-1.5), stats.binom.cdf(14, 100, 0.2))
claim = '"claim": {"kind": "threshold", "at": 0.26, "direction": "at-least"}'
case("threshold at least", law, 100, claim, stats.norm.sf(1.5), stats.binom.sf(25, 100, 0.2))
claim = '"claim": {"kind": "deviation", "epsilon": 0.1}'
case("deviation", '{"kind": "bernoulli", "p": 0.5}', 100, claim, 2 * stats.norm.sf(2), stats.binom.cdf(39, 100, 0.5) + stats.binom.sf(60, 100, 0.5))
law = '{"kind": "exponential", "mean": 1}'
claim = '"statistic": "sum", "claim": {"kind": "quantile", "p": 0.99}'
case("quantile", law, 10, claim, stats.norm.ppf(0.99), (stats.gamma.ppf(0.99, 10) - 10) / np.sqrt(10))
case("two-sided interval, gamma", law, 30, interval(0.95, "two"), 0.95, stats.gamma.cdf(30 + z975 * np.sqrt(30), 30) - stats.gamma.cdf(30 - z975 * np.sqrt(30), 30))
test = '"claim": {"kind": "test", "significance": 0.05, "sides": "upper", "spread": "known"}'
case("size of an upper test, gamma", law, 30, test, 0.05, stats.gamma.sf(30 + stats.norm.isf(0.05) * np.sqrt(30), 30))
test = '"claim": {"kind": "test", "significance": 0.05, "sides": "lower", "spread": "known", "shift": -0.4}'
c, d = stats.norm.isf(0.05), -0.4 * np.sqrt(30)
case("power of a lower test, gamma", law, 30, test, stats.norm.cdf(-c - d), stats.gamma.cdf(30 + (-c - d) * np.sqrt(30), 30))
test = '"claim": {"kind": "test", "significance": 0.05, "sides": "two", "spread": "estimated", "shift": 0.5}'
case("power of a t-test, normal", '{"kind": "normal", "mean": 3, "sd": 2}', 20, test, *[stats.nct.sf(stats.t.isf(0.025, 19), 19, 0.5 * np.sqrt(20)) + stats.nct.cdf(-stats.t.isf(0.025, 19), 19, 0.5 * np.sqrt(20))] * 2)
case("curve, exponential", law, 30, '"claim": {"kind": "curve"}', 0.0, 0.024291)
(here / "claims.in").write_text("&[\n    " + ",\n    ".join(cases) + ",\n]\n")
