"""References for the Monte Carlo room that share nothing with its code.

Prints Rust literals. Run: python3 monte_carlo.py [intervals|coverage|noncentral]
- intervals: Clopper-Pearson ends by scipy.stats.beta.ppf.
- noncentral: the noncentral t law by mpmath.
- coverage: exact misses of the t interval for laws on few points, all multinomial cells in rational arithmetic
  (fractions), the t quantile by scipy.stats.t.isf; for lattice laws with many values by enumerating all multisets.
"""
import itertools, math, sys
from fractions import Fraction
import numpy, scipy
from scipy import stats


def intervals():
    for count, draws, risk in [(3, 50, 0.01), (17, 4_000_000, 1e-4), (90_000, 1_000_000, 1e-3), (999, 1000, 1e-6)]:
        low = stats.beta.ppf(risk / 2, count, draws - count + 1)
        high = stats.beta.isf(risk / 2, count + 1, draws - count)
        print(f"        ({count}, {draws}, {risk:e}, {low:.12e}, {high:.12e}),")


def cells(values, weights, n):
    """All samples as multisets: (probability, exact mean, exact s^2)."""
    total = sum(weights)
    p = [Fraction(w, total) for w in weights]
    size = len(values)
    for bars in itertools.combinations(range(n + size - 1), size - 1):
        counts, last = [], -1
        for bar in bars + (n + size - 1,):
            counts.append(bar - last - 1)
            last = bar
        ways = math.factorial(n)
        probability = Fraction(1)
        for k, q in zip(counts, p):
            ways //= math.factorial(k)
            probability *= q ** k
        mean = sum(Fraction(k) * v for k, v in zip(counts, values)) / n
        s2 = sum(k * (v - mean) ** 2 for k, v in zip(counts, values)) / (n - 1)
        yield ways * probability, mean, s2


def moments(values, weights):
    total = sum(weights)
    mu = sum(Fraction(w, total) * v for w, v in zip(weights, values))
    return mu, sum(Fraction(w, total) * (v - mu) ** 2 for w, v in zip(weights, values))


def misses_mean(values, weights, n, tail, shift=0.0):
    mu, variance = moments(values, weights)
    t = stats.t.isf(tail, n - 1)
    low = high = Fraction(0)
    for probability, mean, s2 in cells(values, weights, n):
        if shift == 0.0 and s2 == 0:
            low += probability if mean < mu else 0
            high += probability if mean > mu else 0
            continue
        difference = float(mean - mu) + shift * math.sqrt(variance)
        margin = t * math.sqrt(s2 / n)
        low += probability if difference < -margin else 0
        high += probability if difference > margin else 0
    return float(low), float(high)


def misses_difference(first, second, n1, n2, tail, shift=0.0):
    mu1, v1 = moments(*first)
    mu2, v2 = moments(*second)
    low = high = Fraction(0)
    one, two = list(cells(*first, n1)), list(cells(*second, n2))
    scale = math.sqrt(v1 / n1 + v2 / n2)
    for (p1, m1, s1) in one:
        for (p2, m2, s2) in two:
            difference = float((m2 - m1) - (mu2 - mu1)) + shift * scale
            a, b = float(s1 / n1), float(s2 / n2)
            if a + b == 0.0:
                exact = (m2 - m1) - (mu2 - mu1) if shift == 0.0 else difference
                low += p1 * p2 if exact < 0 else 0
                high += p1 * p2 if exact > 0 else 0
                continue
            df = (a + b) ** 2 / (a * a / (n1 - 1) + b * b / (n2 - 1))
            margin = stats.t.isf(tail, df) * math.sqrt(a + b)
            low += p1 * p2 if difference < -margin else 0
            high += p1 * p2 if difference > margin else 0
    return float(low), float(high)


def coverage():
    print(f"// numpy {numpy.__version__}, scipy {scipy.__version__}, python {sys.version.split()[0]}")
    for values, weights, n, tail, shift in [
        ([0, 1], [7, 3], 10, 0.025, 0.0),
        ([0, 1], [9, 1], 40, 0.025, 0.0),
        ([0, 1], [7, 3], 17, 0.05, 0.4),
        ([0, 1, 5], [6, 3, 1], 12, 0.025, 0.0),
        ([-1, 0, 1], [1, 2, 1], 6, 0.025, 0.0),
        ([0, 1, 2, 10], [4, 3, 2, 1], 9, 0.005, 0.0),
        ([0, 1, 2, 3, 4, 5], [1, 1, 1, 1, 1, 1], 8, 0.025, 0.0),
    ]:
        low, high = misses_mean(values, weights, n, tail, shift)
        print(f"        (&{[float(v) for v in values]}, &{[float(w) for w in weights]}, {n}, {tail}, {shift}, {low:.15e}, {high:.15e}),")
    for first, second, n1, n2, tail, shift in [
        (([0, 1], [8, 2]), ([0, 1], [7, 3]), 15, 12, 0.025, 0.0),
        (([0, 1], [9, 1]), ([0, 1, 4], [6, 3, 1]), 20, 7, 0.025, 0.5),
    ]:
        low, high = misses_difference(first, second, n1, n2, tail, shift)
        print(f"        difference {first} {second} {n1} {n2} {tail} {shift}: {low:.15e}, {high:.15e}")


def noncentral():
    """P(T < -t) and P(T > t) for normal samples, true mean shift*sd above the hypothesised: mpmath at 30 digits."""
    import mpmath as mp

    mp.mp.dps = 30
    for n, tail, shift in [(12, 0.025, 0.5), (2, 0.025, 1.0), (30, 0.05, -0.2), (200, 0.005, 0.25)]:
        df, d = mp.mpf(n - 1), mp.sqrt(n) * shift
        beyond = lambda x: mp.betainc(df / 2, mp.mpf(1) / 2, 0, df / (df + x * x), regularized=True) / 2 - tail
        t = mp.findroot(beyond, mp.mpf(stats.t.isf(tail, n - 1)))
        constant = 2 * (df / 2) ** (df / 2) / mp.gamma(df / 2)
        density = lambda w: constant * w ** (df - 1) * mp.exp(-df * w * w / 2)
        points = [0, 0.25, 0.5, 0.75, 1, 1.25, 1.5, 2, 3, 5, 8, 12]
        low = mp.quad(lambda w: mp.ncdf(-t * w - d) * density(w), points)
        high = mp.quad(lambda w: mp.ncdf(d - t * w) * density(w), points)
        print(f"    ({n}, {tail}, {shift}, {mp.nstr(low, 15)}, {mp.nstr(high, 15)}),")


if __name__ == "__main__":
    chosen = sys.argv[1] if len(sys.argv) > 1 else "coverage"
    {"intervals": intervals, "coverage": coverage, "noncentral": noncentral}[chosen]()
