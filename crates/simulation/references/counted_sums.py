"""Reference probabilities of sums of counts, for the closed-form and lattice routes.

Method (shares nothing with the crate's): masses by log-gamma at 60 digits and sums of ratios for the named
laws; for tables the recursion for powers of a polynomial (Euler; De Pril 1985) at 150 (or 900) digits and again at twice as many,
both agreeing to 30 digits or the script stops. Kolmogorov distances by looking at every lattice point.

Run: python3 counted_sums.py > counted_sums.csv   (about a minute of CPU; mpmath 1.3.0, Python 3)
Columns: case, k, P(K <= k), P(K >= k); or case, kolmogorov, value, where; 20 digits.
Probabilities such as 0.3 are the doubles nearest to them, weights of tables are integers.
"""
import sys
from mpmath import mp, mpf, loggamma, exp, log, sqrt, erfc, floor, ceil

mp.dps = 60


def phi(z):
    return erfc(-z / sqrt(mpf(2))) / 2


def show(x):
    return mp.nstr(x, 20, min_fixed=0, max_fixed=0)


class Binomial:
    def __init__(self, n, p):
        self.n, self.p = n, mpf(p)
        self.mean, self.sd = n * self.p, sqrt(n * self.p * (1 - self.p))
        self.low, self.high = 0, n

    def mass(self, k):
        n, p = self.n, self.p
        return exp(loggamma(n + 1) - loggamma(k + 1) - loggamma(n - k + 1) + k * log(p) + (n - k) * log(1 - p))

    def up(self, k):
        return mpf(self.n - k) / (k + 1) * self.p / (1 - self.p)


class Poisson:
    def __init__(self, rate, n=1):
        self.rate = mpf(rate) * n
        self.mean, self.sd = self.rate, sqrt(self.rate)
        self.low, self.high = 0, 10**18

    def mass(self, k):
        return exp(k * log(self.rate) - self.rate - loggamma(k + 1))

    def up(self, k):
        return self.rate / (k + 1)


class NegativeBinomial:
    def __init__(self, size, p):
        self.size, self.p = mpf(size), mpf(p)
        q = 1 - self.p
        self.mean, self.sd = self.size * q / self.p, sqrt(self.size * q) / self.p
        self.low, self.high = 0, 10**18

    def mass(self, k):
        r = self.size
        return exp(loggamma(k + r) - loggamma(r) - loggamma(k + 1) + r * log(self.p) + k * log(1 - self.p))

    def up(self, k):
        return (k + self.size) / (k + 1) * (1 - self.p)


def both(law, k):
    """P(K <= k), P(K >= k), each summed outwards or by complement, whichever is the tail."""
    mass = law.mass(k)
    if k < law.mean:
        term, total, j = mass, mass, k
        while j > law.low and term > total * mpf(10) ** -40:
            term /= law.up(j - 1)
            total += term
            j -= 1
        return total, 1 - total + mass
    term, total, j = mass, mass, k
    while j < law.high and term > total * mpf(10) ** -40:
        term *= law.up(j)
        total += term
        j += 1
    return 1 - total + mass, total


def distance(mean, sd, points):
    """points: (k, P(K <= k)) ascending, contiguous, wide enough."""
    best = (mpf(-1), None)
    before = mpf(0)
    for k, after in points:
        normal = phi((k - mean) / sd)
        for gap in (abs(after - normal), abs(before - normal)):
            if gap > best[0]:
                best = (gap, k)
        before = after
    return best


def named(case, law, zs, every=True):
    ks = sorted({int(max(law.low, min(law.high, floor(law.mean + z * law.sd)))) for z in zs})
    for k in ks:
        lower, upper = both(law, k)
        print(f"{case},{k},{show(lower)},{show(upper)}")
    if every:
        mp.dps = 30
        low = int(max(law.low, floor(law.mean - 5 * law.sd)))
        high = int(min(law.high, ceil(law.mean + 5 * law.sd)))
        mass, total, points = law.mass(low), both(law, low)[0], []
        points.append((low, total))
        for k in range(low, high):
            mass *= law.up(k)
            total += mass
            points.append((k + 1, total))
        # The first difference "before" is P(K < low), not 0.
        first = points[0]
        best = distance(law.mean, law.sd, points[1:]) if low > law.low else distance(law.mean, law.sd, points)
        if low > law.low:
            best = max(best, distance_after(law, points))
        print(f"{case},kolmogorov,{show(best[0])},{best[1]}")
        mp.dps = 60


def distance_after(law, points):
    best, before = (mpf(-1), None), None
    for k, after in points:
        normal = phi((k - law.mean) / law.sd)
        for value in (after, before):
            if value is not None and abs(value - normal) > best[0]:
                best = (abs(value - normal), k)
        before = after
    return best


def power(values, weights, n, digits):
    """Masses of the n-fold sum: s*p0*f(s) = sum_j ((n+1)*v_j - s) p_j f(s - v_j), values from 0."""
    mp.dps = digits
    total = sum(weights)
    p = [mpf(w) / total for w in weights]
    f = [p[0] ** n]
    for s in range(1, n * values[-1] + 1):
        acc = mpf(0)
        for v, q in zip(values[1:], p[1:]):
            if v <= s:
                other = f[s - v]
                if other:
                    acc += ((n + 1) * v - s) * q * other
        f.append(acc / (s * p[0]))
    mp.dps = 60
    return f


def table(case, values, weights, n, zs, digits=150):
    coarse = power(values, weights, n, digits)
    f = power(values, weights, n, 2 * digits)
    for a, b in zip(coarse[:: max(1, len(f) // 500)], f[:: max(1, len(f) // 500)]):
        assert b == 0 or abs(a - b) <= abs(b) * mpf(10) ** -30 or b < mpf(10) ** -320, case
    total = sum(weights)
    mean = mpf(sum(v * w for v, w in zip(values, weights))) / total
    variance = mpf(sum(v * v * w for v, w in zip(values, weights))) / total - mean**2
    mean, sd = mean * n, sqrt(variance * n)
    lower, upper, sum_ = [], [], mpf(0)
    for x in f:
        sum_ += x
        lower.append(sum_)
    sum_ = mpf(0)
    for x in reversed(f):
        sum_ += x
        upper.append(sum_)
    upper.reverse()
    assert abs(sum_ - 1) < mpf(10) ** -40
    for k in sorted({int(max(0, min(len(f) - 1, floor(mean + z * sd)))) for z in zs}):
        print(f"{case},{k},{show(lower[k])},{show(upper[k])}")
    mp.dps = 30
    low, high = int(max(0, floor(mean - 5 * sd))), int(min(len(f) - 1, ceil(mean + 5 * sd)))
    points = [(k, lower[k]) for k in range(low, high + 1)]
    before = lower[low - 1] if low > 0 else mpf(0)
    best = (mpf(-1), None)
    for k, after in points:
        normal = phi((k - mean) / sd)
        for value in (after, before):
            if abs(value - normal) > best[0]:
                best = (abs(value - normal), k)
        before = after
    print(f"{case},kolmogorov,{show(best[0])},{best[1]}")
    mp.dps = 60


WIDE = [-37, -30, -21, -15, -10, -7, -5, -4, -3, -2, -1, -0.4, 0, 0.3, 1, 2, 3, 4, 5, 7, 10, 15, 21, 30, 37]

named("binomial 10 0.2", Binomial(10, 0.2), WIDE)
named("binomial 100 0.3", Binomial(100, 0.3), WIDE)
named("binomial 3000 0.001", Binomial(3000, 0.001), WIDE)
named("binomial 1000 0.9", Binomial(1000, 0.9), WIDE)
named("binomial 1000000 0.5", Binomial(10**6, 0.5), WIDE)
named("binomial 1000000000 0.3", Binomial(10**9, 0.3), [-21, -10, -4, -1, 0, 2, 5, 10, 21], every=False)
named("poisson 0.3 1", Poisson(0.3), WIDE)
named("poisson 7.3 5", Poisson(7.3, 5), WIDE)
named("poisson 0.1 1000000", Poisson(0.1, 10**6), WIDE)
named("negative-binomial 2.5 0.3", NegativeBinomial(2.5, 0.3), WIDE + [60, 100])
named("negative-binomial 0.5 0.01", NegativeBinomial(0.5, 0.01), WIDE)
named("negative-binomial 40 0.05", NegativeBinomial(40, 0.05), WIDE)
named("negative-binomial 100000 0.7", NegativeBinomial(10**5, 0.7), WIDE)

table("table lumpy 1", [0, 1, 2, 5], [10, 6, 3, 1], 1, WIDE)
table("table lumpy 40", [0, 1, 2, 5], [10, 6, 3, 1], 40, WIDE)
table("table lumpy 300", [0, 1, 2, 5], [10, 6, 3, 1], 300, WIDE)
table("table lumpy 3000", [0, 1, 2, 5], [10, 6, 3, 1], 3000, WIDE)
table("table die 500", [0, 1, 2, 3, 4, 5], [1, 1, 1, 1, 1, 1], 500, WIDE, digits=900)
table("table rare 200", [0, 1, 250], [900, 99, 1], 200, WIDE)
table("table rare 2000", [0, 1, 250], [900, 99, 1], 2000, WIDE)
table("table sparse 40", [0, 97, 250], [50, 30, 20], 40, WIDE, digits=900)
table("table lumpy 100000", [0, 1, 2, 5], [10, 6, 3, 1], 100000, WIDE)
sys.stdout.flush()
