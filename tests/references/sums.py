"""Reference distributions of standardized sums, by methods that share nothing with the crates under test.

    python3 sums.py LAW...      writes LAW.json beside this file, for each law named (all of them without arguments)

Made with Python 3.11, mpmath 1.3.0. Values are written with 22 digits. A dozen laws take seconds, the capped and
lognormal ones minutes each (run times are in the files). Parameters such as 0.3 are the doubles nearest to them.

Methods, by law (stated per case in the output):
  exact       counts by log-gamma and sums of ratios; tables by the recursion for powers of polynomials at 400
              digits; gamma, inverse Gaussian and normal sums by mpmath's functions; uniform sums by Irwin and
              Hall's alternating sum at n + 60 digits; capped exponentials by conditioning on how many summands
              sit on an atom, and gamma distributions; mixtures by conditioning on the counts.
  series      Weibull sums of few summands by their power series (the Laplace transform term by term), with as many
              digits as its cancellation eats.
  talbot      inverse Laplace transform by the fixed Talbot contour (Abate and Valko 2004) with M nodes at M + 40
              digits; M = 50 and 66 agree to 20 digits at three points of each case, or the script stops.
  line        inverse Laplace transform on a vertical line by the trapezoid rule (Abate and Whitt 1992); the
              discretisation error is below e^-60 (1e-20 in that case) for a sum that cannot be negative; truncated where the
              transform leaves less than 1e-32 (1e-22 for one slowly decaying case).
The Kolmogorov distance is located on a grid of steps 0.02 in z (and at every jump), and refined by parabolas at
full precision until it moves by less than 1e-20.
"""
import json
import os
import sys
import time
from math import comb

import mpmath
from mpmath import mp, mpf, mpc, exp, log, sqrt, erfc, floor, pi, gamma, loggamma, gammainc, binomial, expj

ZS = [-3, -2, -1, -0.5, 0, 0.5, 1, 2, 3, 4]
NS = [1, 2, 3, 5, 40, 1000]
mp.dps = 60


def phi(z):
    return erfc(-z / sqrt(mpf(2))) / 2


def show(x):
    x = mpf(x)
    return "0" if x == 0 else mp.nstr(x, 22, min_fixed=0, max_fixed=0)


# ---------------------------------------------------------------- distances

def refine(g, a, b, c):
    """Largest g near b, a < b < c with g(b) the largest: golden sections first, then successive parabolas."""
    ga, gb, gc = g(a), g(b), g(c)
    section = (3 - sqrt(mpf(5))) / 2

    def take(x):
        nonlocal a, b, c, ga, gb, gc
        gx = g(x)
        if gx > gb:
            if x > b:
                a, ga = b, gb
            else:
                c, gc = b, gb
            b, gb = x, gx
        elif x > b:
            c, gc = x, gx
        else:
            a, ga = x, gx
    for _ in range(16):
        take(b + section * (c - b) if c - b > b - a else b - section * (b - a))
    for _ in range(40):
        denominator = (b - a) * (gb - gc) - (b - c) * (gb - ga)
        if denominator == 0:
            break
        x = b - ((b - a) ** 2 * (gb - gc) - (b - c) ** 2 * (gb - ga)) / (2 * denominator)
        if not a < x < c or x == b:
            break
        before = gb
        gap = abs(x - b)
        take(x)
        # Quadratic: a point moved by d changes the value by about d^2.
        if abs(gb - before) < mpf(10) ** -22 and gap < mpf(10) ** -8:
            break
    return gb, b


def continuous_distance(cdf, special=(), low=-6, high=6, coarse=None, step=mpf("0.02")):
    """sup |F − Φ|; cdf(z) continuous at grid points; special: (z, F below, F at) at jumps and kinks."""
    coarse = coarse or cdf
    best = (mpf(-1), None)
    for z, below, at in special:
        for value in (below, at):
            gap = abs(value - phi(z))
            if gap > best[0]:
                best = (gap, z)
    kinks = sorted([mpf(low)] + [z for z, _, _ in special if low < z < high] + [mpf(high)])
    peaks = []
    for left, right in zip(kinks, kinks[1:]):
        if right - left < mpf(10) ** -15:
            continue
        count = max(4, int((right - left) / step) + 1)
        margin = (right - left) * mpf(10) ** -12
        zs = [left + margin + (right - left - 2 * margin) * i / count for i in range(count + 1)]
        # Closer and closer to the ends, where a density that starts at 0 or at infinity may turn quickly.
        graded = [(zs[1] - zs[0]) / 2**i for i in range(24, 0, -1)]
        zs = zs[:1] + [zs[0] + d for d in graded] + zs[1:-1] + [zs[-1] - d for d in reversed(graded)] + zs[-1:]
        count = len(zs) - 1
        gaps = [abs(coarse(z) - phi(z)) for z in zs]
        for i in range(1, count):
            if gaps[i] >= gaps[i - 1] and gaps[i] >= gaps[i + 1]:
                peaks.append((gaps[i], zs[i - 1 : i + 2]))
    highest = max([best[0]] + [gap for gap, _ in peaks])
    for gap, (a, b, c) in peaks:
        # A peak between grid points stands less than this above them.
        if gap > highest - mpf("1e-4") and (gap > best[0] - mpf("1e-4") or best[0] < 0):
            sign = 1 if coarse(b) > phi(b) else -1
            value, z = refine(lambda z: sign * (cdf(z) - phi(z)), a, b, c)
            if value > best[0]:
                best = (value, z)
    return best


# ---------------------------------------------------------------- lattice laws

class Counted:
    """A law on integers given by masses of the whole sum: list f of masses from `first` on."""

    def __init__(self, first, masses, offset=0, span=1):
        self.first, self.f = first, masses
        self.offset, self.span = offset, span


def power(values, weights, n):
    mp.dps = 400
    total = sum(weights)
    p = [mpf(w) / total for w in weights]
    f = [p[0] ** n]
    for s in range(1, n * values[-1] + 1):
        acc = mpf(0)
        for v, q in zip(values[1:], p[1:]):
            if v <= s and f[s - v]:
                acc += ((n + 1) * v - s) * q * f[s - v]
        f.append(acc / (s * p[0]))
    assert abs(sum(f) - 1) < mpf(10) ** -60
    mp.dps = 60
    return [+x for x in f]


def named(mass0, up, stop):
    """Masses from 0 by ratios; mass0 at high precision, `stop` the last index or None."""
    mp.dps = 120
    f, k, mass = [], 0, mass0()
    while True:
        f.append(mass)
        if stop is not None and k == stop:
            break
        if stop is None and mass < mpf(10) ** -40 and up(k) < mpf("0.999"):
            break
        mass = mass * up(k)
        k += 1
    mp.dps = 60
    return [+x for x in f]


def lattice_case(f, first=0):
    """f: masses of the sum at first, first+1, …: the answers in standard units."""
    mp.dps = 60
    total = sum(f)
    mean = sum(k * x for k, x in enumerate(f)) / total
    sd = sqrt(sum((k - mean) ** 2 * x for k, x in enumerate(f)) / total)
    lower, acc = [], mpf(0)
    for x in f:
        acc += x
        lower.append(acc)
    upper, acc = [], mpf(0)
    for x in reversed(f):
        acc += x
        upper.append(acc)
    upper.reverse()
    upper.append(mpf(0))
    rows = []
    for z in ZS:
        x = mean + mpf(z) * sd
        k = int(floor(x))
        on = False
        if abs(x - mp.nint(x)) < mpf(10) ** -11:
            k, on = int(mp.nint(x)), True
        at = mpf(0) if k < 0 else (lower[k] if k < len(f) else mpf(1))
        above = mpf(1) if k < 0 else (upper[k + 1] if k < len(f) else mpf(0))
        below = at
        if on and 0 <= k < len(f):
            below = lower[k - 1] if k > 0 else mpf(0)
        rows.append((z, at, below, above))
    mp.dps = 30
    best, before = (mpf(-1), None), mpf(0)
    for k, at in enumerate(lower):
        z = (k - mean) / sd
        if abs(z) < 8:
            normal = phi(z)
            for value in (at, before):
                if abs(value - normal) > best[0]:
                    best = (abs(value - normal), z)
        before = at
    mp.dps = 60
    return rows, best, "exact"


# ---------------------------------------------------------------- continuous machinery

def line_inverse(transform, x_most, a=60, mass=mpf(1), most_nodes=6000):
    """P(S <= x) for 0 < x <= x_most by the trapezoid rule on Re s = a/T, T slightly above x_most.

    transform(s) is that of the whole sum (its atoms at single points taken out by the caller, who gives the `mass`
    left). The discretisation adds sum_k e^(-ka) P(S <= x + kT); with P taken as `mass` and subtracted, what is
    left of it is below e^(-a) P(S > T): under 1e-20 where a smaller a than 60 is given.
    """
    period = x_most * mpf("1.01")
    c, h = a / period, 2 * pi / period
    limit = mpf(10) ** (-32 if a == 60 else -22)
    nodes = []
    quiet = 0
    for k in range(most_nodes):
        s = mpc(c, k * h)
        value = transform(s) / s
        nodes.append(value)
        quiet = quiet + 1 if abs(value) * h * exp(a) < limit else 0
        if quiet > 6:
            break
    else:
        raise RuntimeError("too many nodes")

    def cdf(x):
        if x <= 0:
            return mpf(0)
        turn, spin = expj(h * x), mpc(1)
        total = nodes[0].real / 2
        for value in nodes[1:]:
            spin *= turn
            total += (value * spin).real
        return exp(c * x) * total * h / pi - mass * exp(-a) / (1 - exp(-a))
    cdf.nodes = len(nodes)
    return cdf


def talbot(transform, t, m=50):
    """Inverse Laplace transform of `transform`(s) at t > 0: fixed Talbot."""
    r = mpf(2) * m / (5 * t)
    total = transform(mpc(r)).real * exp(r * t) / 2
    for k in range(1, m):
        theta = k * pi / m
        cot = 1 / mp.tan(theta)
        s = r * theta * mpc(cot, 1)
        sigma = theta + (theta * cot - 1) * cot
        total += (exp(t * s) * transform(s) * mpc(1, sigma)).real
    return total * r / m


def gauss_panels(a, b, panels, nodes=40):
    """Nodes and weights of composite Gauss–Legendre."""
    xs = legendre(nodes)
    out = []
    for i in range(panels):
        left, right = a + (b - a) * i / panels, a + (b - a) * (i + 1) / panels
        for x, w in xs:
            out.append(((left + right) / 2 + (right - left) / 2 * x, (right - left) / 2 * w))
    return out


_legendre = {}


def legendre(n):
    if (n, mp.dps) not in _legendre:
        rule = []
        for i in range(n):
            x = mp.cos(pi * (i + mpf("0.75")) / (n + mpf("0.5")))
            for _ in range(12):
                p0, p1 = mpf(1), x
                for k in range(2, n + 1):
                    p0, p1 = p1, ((2 * k - 1) * x * p1 - (k - 1) * p0) / k
                slope = n * (x * p1 - p0) / (x * x - 1)
                x -= p1 / slope
            rule.append((x, 2 / ((1 - x * x) * slope * slope)))
        _legendre[(n, mp.dps)] = rule
    return _legendre[(n, mp.dps)]


def answers(cdf, mean, sd, atoms=(), coarse=None, low=None, kinks=(), method="", high=6):
    """cdf(x, inclusive=True) of the sum; atoms: positions with mass; low: lower end of the support."""
    rows = []
    for z in ZS:
        x = mean + mpf(z) * sd
        at = cdf(x)
        rows.append((z, at, at, 1 - at))
    special = []
    for x, mass in atoms:
        at = cdf(x)
        special.append(((x - mean) / sd, at - mass, at))
    for x in kinks:
        at = cdf(x)
        special.append(((x - mean) / sd, at, at))
    start = -6 if low is None else max(mpf(-6), (low - mean) / sd)
    if low is not None and not any(abs(x - low) < mpf(10) ** -20 for x, _ in atoms):
        special.append(((low - mean) / sd, mpf(0), mpf(0)))
    rough = (lambda z: coarse(mean + z * sd)) if coarse else None
    best = continuous_distance(lambda z: cdf(mean + z * sd), special, low=start, high=high, coarse=rough)
    return rows, best, method


# ---------------------------------------------------------------- the laws

def bernoulli(n):
    p = mpf(0.3)
    return lattice_case(named(lambda: (1 - p) ** n, lambda k: mpf(n - k) / (k + 1) * p / (1 - p), n))


def binomial_law(n):
    p, m = mpf(0.2), 7 * n
    return lattice_case(named(lambda: (1 - p) ** m, lambda k: mpf(m - k) / (k + 1) * p / (1 - p), m))


def poisson(n):
    rate = mpf(2.5) * n
    return lattice_case(named(lambda: exp(-rate), lambda k: rate / (k + 1), None))


def negative(size, p, n):
    r, p = mpf(size) * n, mpf(p)
    return lattice_case(named(lambda: p**r, lambda k: (k + r) / (k + 1) * (1 - p), None))


def normal_law(n):
    rows = [(z, phi(mpf(z)), phi(mpf(z)), phi(-mpf(z))) for z in ZS]
    return rows, (mpf(0), mpf(0)), "exact"


def gamma_sum(shape, n):
    a = mpf(shape) * n
    mp.dps = 45
    def cdf(x):
        return gammainc(a, 0, x, regularized=True) if x > 0 else mpf(0)
    answer = answers(cdf, a, sqrt(a), low=mpf(0), method="exact")
    rows = []
    for z, at, below, above in answer[0]:
        x = a + mpf(z) * sqrt(a)
        above = gammainc(a, x, mp.inf, regularized=True) if x > 0 else mpf(1)
        rows.append((z, at, below, above))
    mp.dps = 60
    return rows, answer[1], answer[2]


def inverse_gaussian(mean, shape, n):
    r = mpf(shape) / mpf(mean) * n
    mp.dps = 60
    def cdf(w):
        if w <= 0:
            return mpf(0)
        a, b = sqrt(r / w) * (w - 1), sqrt(r / w) * (w + 1)
        return phi(a) + exp(2 * r) * phi(-b)
    return answers(cdf, mpf(1), 1 / sqrt(r), low=mpf(0), method="exact")


def irwin_hall(n, x):
    """P(sum of n unit uniforms <= x)."""
    if x <= 0:
        return mpf(0)
    if x >= n:
        return mpf(1)
    if 2 * x > n:
        return 1 - irwin_hall(n, n - x)
    before, mp.dps = mp.dps, n + 70
    total = mpf(0)
    c = 1
    for k in range(int(floor(x)) + 1):
        total += (-1) ** k * c * (x - k) ** n
        c = c * (n - k) // (k + 1)
    total /= mp.factorial(n)
    mp.dps = before
    return +total


def uniform(n):
    kinks = [mpf(k) for k in range(n + 1)] if n <= 5 else []
    step = mpf("0.02") if n < 1000 else mpf("0.1")
    mean, sd = mpf(n) / 2, sqrt(mpf(n) / 12)
    rows = []
    for z in ZS:
        x = mean + mpf(z) * sd
        rows.append((z, irwin_hall(n, x), irwin_hall(n, x), irwin_hall(n, n - x)))
    special = [((x - mean) / sd, irwin_hall(n, x), irwin_hall(n, x)) for x in kinks]
    best = continuous_distance(
        lambda z: irwin_hall(n, mean + z * sd), special, low=max(mpf(-4), -mean / sd), high=mpf("0.1"), step=step)
    return rows, best, "exact"


# Weibull: F_n(x) = sum_m b_m x^(k(m+n))/Gamma(k(m+n)+1), where sum b_m u^m = (sum_j a_j u^j)^n and
# a_j = (-1)^j Gamma(k(j+1)+1)/j!/(j+1) * ... (k Gamma(k(j+1))/j!).
def weibull(shape, n):
    k = mpf(shape)
    mean, second = gamma(1 + 1 / k), gamma(1 + 2 / k)
    mean, sd = n * mean, sqrt(n * (second - mean**2))
    if n <= 5:
        x_most = mean + mpf("4.7") * sd
        # The largest terms are about e^(x^k); the alternating sum may be as small as 1e-30.
        length = int(mpf("3.6") * x_most**k + 250)
        mp.dps = 100 + int(mpf("0.9") * x_most**k)
        a = [(-1) ** j * k * gamma(k * (j + 1)) / mp.factorial(j) for j in range(length)]
        b = a
        for _ in range(n - 1):
            b = [mp.fdot(a[: m + 1], b[m::-1]) for m in range(length)]
        coefficients = [b[m] / gamma(k * (m + n) + 1) for m in range(length)]
        tail = abs(coefficients[-1]) * (x_most**k) ** (length - 1 + n)
        assert tail < mpf(10) ** -26, (shape, n, tail)

        def cdf(x):
            if x <= 0:
                return mpf(0)
            u = x**k
            total = mpf(0)
            for c in reversed(coefficients):
                total = total * u + c
            return total * u**n
        answer = answers(cdf, mean, sd, low=mpf(0), method=f"series of {length} terms", high=mpf("4.6"))
        mp.dps = 60
        return answer
    # Re s > 0: L(s) = ∫ e^(-s u^(1/k)) e^-u du, u = exp(y - e^-y), trapezoid rule.
    step = mpf(1) / 40
    points = []
    y = mpf(-5)
    while y < mpf("5.2"):
        u = exp(y - exp(-y))
        weight = step * u * (1 + exp(-y)) * exp(-u)
        if weight > mpf(10) ** -62:
            points.append((u ** (1 / k), weight))
        y += step
    total = sum(w for _, w in points)
    assert abs(total - 1) < mpf(10) ** -45, total

    def transform(s):
        return sum(w * exp(-s * x) for x, w in points) ** n
    cdf = line_inverse(transform, mean + 6 * sd)
    return answers(cdf, mean, sd, low=mpf(0), method=f"line, {cdf.nodes} nodes")


# Lognormal with log-mean 0: L(s) = ∫ phi(y) exp(-s e^(sigma y)) dy along y = real − i·theta/sigma, theta = arg s.
class Lognormal:
    def __init__(self, sigma, step=mpf("0.17"), reach=14):
        self.sigma = mpf(sigma)
        self.step = step
        self.ys = [step * i for i in range(-int(reach / step), int(reach / step) + 1)]
        self.mean = exp(self.sigma**2 / 2)
        self.second = exp(2 * self.sigma**2)
        # phi(y) and e^(sigma y) on the grid.
        self.grid = [(y, exp(-y * y / 2) * step / sqrt(2 * pi), exp(self.sigma * y)) for y in self.ys]

    def transform(self, s):
        theta = mp.arg(s)
        modulus = abs(s)
        shift = theta / self.sigma
        # phi(y − i shift) = phi(y) e^(shift²/2) e^(i y shift); s e^(sigma(y − i shift)) = |s| e^(sigma y).
        total = mpc(0)
        turn = expj(self.step * shift)
        spin = expj(self.ys[0] * shift)
        for y, weight, x in self.grid:
            if modulus * x < 160:
                total += weight * exp(-modulus * x) * spin
            spin *= turn
        return total * exp(shift**2 / 2)

    def cdf(self, x):
        return phi(log(x) / self.sigma) if x > 0 else mpf(0)

    def beyond(self, c):
        """P(X > c) − ∫_0^∞ e^(-su) f(c+u) du as a function of s, by a rotated ray."""
        points = []
        step = mpf(1) / 24
        y = mpf("-4.6")
        while y < mpf("5.5"):
            r = exp(y - exp(-y))
            points.append((r, step * r * (1 + exp(-y))))
            y += step
        q = phi(-log(c) / self.sigma)
        norm = 1 / (self.sigma * sqrt(2 * pi))

        def transform(s):
            theta = mp.arg(s)
            turn, modulus = expj(-theta), abs(s)
            total = mpc(0)
            for r, weight in points:
                # u = (r/|s|) e^(-i theta), s u = r
                if r > 150:
                    break
                x = c + r / modulus * turn
                l = log(x)
                total += weight * exp(-r - (l / self.sigma) ** 2 / 2) / x
            return q - total * norm * turn / modulus
        return transform, q


def lognormal(sigma, n, zero=mpf(0), cap=None):
    """(zero at 0) + (1 − zero)·lognormal(0, sigma), capped at `cap`: φ = zero + (1−zero)·(L + e^(−cs) R)."""
    law = Lognormal(sigma)
    keep = 1 - zero
    if cap is None:
        mean, second, q, beyond = law.mean, law.second, mpf(0), None
    else:
        beyond, q = law.beyond(cap)
        s2 = law.sigma**2
        l = log(cap)
        mean = law.mean * phi((l - s2) / law.sigma) + cap * q
        second = law.second * phi((l - 2 * s2) / law.sigma) + cap**2 * q
    mean, second = keep * mean, keep * second
    total_mean, sd = n * mean, sqrt(n * (second - mean**2))
    if n == 1:
        def cdf(x):
            if x < 0:
                return mpf(0)
            if cap is not None and x >= cap:
                return mpf(1)
            return zero + keep * law.cdf(x)
        atoms = ([(mpf(0), zero)] if zero else []) + ([(cap, keep * q)] if cap is not None else [])
        return answers(cdf, total_mean, sd, atoms=atoms, low=mpf(0), method="exact")
    if n >= 40:
        cache_power = zero**n
        if cap is not None:
            # Atoms of the sum off 0 need powers of keep·q, below 1e-25 from n = 40 on only if q is small.
            assert (zero + keep * q) ** n < mpf(10) ** -25

        def transform(s):
            one = zero + keep * law.transform(s)
            if cap is not None:
                one += keep * exp(-cap * s) * beyond(s)
            return one**n - cache_power
        # The lognormal's own transform decays slowly where zeros are many: fewer digits there.
        inner = line_inverse(transform, total_mean + 6 * sd, a=28 if zero and n == 40 else 60,
                             mass=1 - cache_power, most_nodes=30000)

        def cdf(x):
            return mpf(0) if x < 0 else inner(x) + cache_power if x > 0 else cache_power
        atoms = [(mpf(0), cache_power)] if zero else []
        return answers(cdf, total_mean, sd, atoms=atoms, low=mpf(0), method=f"line, {inner.nodes} nodes")
    return talbot_case(
        n, lambda s: zero + keep * law.transform(s), zero, None if cap is None else (cap, lambda s: keep * beyond(s), keep * q),
        total_mean, sd)


def talbot_case(n, one, zero, capped, mean, sd):
    """n ≤ 5 copies with transform one(s) + e^(−cs)·capped(s)."""
    mp.dps = 90

    def whole(x, m, cached):
        if x < 0:
            return mpf(0)
        if x == 0:
            return zero**n
        total = mpf(0)
        most = 0 if capped is None else min(n, int(floor(x / capped[0] + mpf(10) ** -25)))
        for j in range(most + 1):
            t = x if j == 0 else x - j * capped[0]
            if j and t <= mpf(10) ** -25:
                # Nothing but an atom arrives at once: all others must be at 0.
                total += comb(n, j) * zero ** (n - j) * capped[2] ** j
                continue
            def f(s):
                value = one(s) ** (n - j)
                if j:
                    value *= capped[1](s) ** j
                return value / s
            total += comb(n, j) * talbot(f, t, m)
        return total

    def cdf(x):
        return whole(x, 50, None)

    def coarse(x):
        before, mp.dps = mp.dps, 30
        value = whole(x, 14, None)
        mp.dps = before
        return value

    for z in (mpf(-0.5), mpf(1), mpf(3)):
        x = mean + z * sd
        a, b = cdf(x), whole(x, 66, None)
        assert abs(a - b) < mpf(10) ** -20, (n, z, a - b)
    atoms = [(mpf(0), zero**n)] if zero else []
    if capped is not None:
        for j in range(1, n + 1):
            x = j * capped[0]
            if x < mean + 6 * sd:
                atoms.append((x, comb(n, j) * zero ** (n - j) * capped[2] ** j))
    answer = answers(cdf, mean, sd, atoms=atoms, low=mpf(0), coarse=coarse, method="talbot, 50 nodes", high=5)
    mp.dps = 60
    return answer


def lomax(shape, n, cap=None):
    a = mpf(shape)

    def ray(s):
        """E e^(-sX) = a e^s E_{a+1}(s)."""
        return a * exp(s) * mp.expint(a + 1, s)

    if cap is None:
        mean, second = 1 / (a - 1), 2 / ((a - 1) * (a - 2))
        q = mpf(0)
    else:
        q = (1 + cap) ** -a
        # E min(X, c) = ∫_0^c S; E min² = ∫_0^c 2x S.
        mean = (1 - (1 + cap) ** (1 - a)) / (a - 1)
        second = 2 * ((1 - (1 + cap) ** (2 - a)) / (a - 2) - (1 - (1 + cap) ** (1 - a)) / (a - 1))
    total_mean, sd = n * mean, sqrt(n * (second - mean**2))
    if n == 1:
        def cdf(x):
            if x <= 0:
                return mpf(0)
            return mpf(1) if cap is not None and x >= cap else 1 - (1 + x) ** -a
        atoms = [(cap, q)] if cap is not None else []
        return answers(cdf, total_mean, sd, atoms=atoms, low=mpf(0), method="exact")

    def beyond(s):
        return q * (1 - ray(s * (1 + cap)))
    if n >= 40:
        def transform(s):
            one = ray(s)
            if cap is not None:
                one += exp(-cap * s) * beyond(s)
            return one**n
        cdf = line_inverse(transform, total_mean + 6 * sd)
        return answers(cdf, total_mean, sd, low=mpf(0), method=f"line, {cdf.nodes} nodes")
    return talbot_case(n, ray, mpf(0), None if cap is None else (cap, beyond, q), total_mean, sd)


def capped_exponential(n, zero, cap):
    """zero at 0, else a unit exponential capped at c.

    With m summands strictly between and j on the cap: P(all m sum <= x − jc) by inclusion and exclusion,
    sum_i (−1)^i C(m,i) e^(−ic) G_m(x − (j+i)c), G_m the gamma distribution."""
    zero, cap = mpf(zero), mpf(cap)
    keep = 1 - zero
    q = exp(-cap)
    mean = keep * (1 - q)
    second = keep * 2 * (1 - q - cap * q)
    total_mean, sd = n * mean, sqrt(n * (second - mean**2))
    if n <= 40:
        mp.dps = 70
        # weight[m][i + j]
        weight = [[mpf(0)] * (n + 1) for _ in range(n + 1)]
        for m in range(n + 1):
            for j in range(n - m + 1):
                zeros = n - m - j
                base = mpf(comb(n, m) * comb(n - m, j)) * zero**zeros * keep ** (m + j) * q**j
                for i in range(m + 1):
                    weight[m][i + j] += base * (-1) ** i * comb(m, i) * q**i

        def cdf(x):
            if x < 0:
                return mpf(0)
            if x >= n * cap:
                return mpf(1)
            total = mpf(0)
            for k in range(n + 1):
                y = x - k * cap
                if y < -mpf(10) ** -40:
                    break
                y = max(y, mpf(0))
                # G_m(y) = 1 − e^−y sum_{l<m} y^l/l!
                term, left = exp(-y), mpf(1)
                total += weight[0][k]
                for m in range(1, n + 1):
                    left -= term
                    term *= y / m
                    total += weight[m][k] * left
            return total
        atoms = []
        for j in range(n + 1):
            mass = comb(n, j) * zero ** (n - j) * (keep * q) ** j
            x = j * cap
            if (mass > mpf(10) ** -22 or j <= 5) and x < total_mean + 6 * sd:
                atoms.append((x, mass))
        answer = answers(cdf, total_mean, sd, atoms=atoms, low=mpf(0), method="exact")
        mp.dps = 60
        return answer

    def transform(s):
        return (zero + keep * ((1 - q * exp(-s * cap)) / (1 + s) + q * exp(-s * cap))) ** n
    cdf = line_inverse(transform, total_mean + 6 * sd)
    return answers(cdf, total_mean, sd, low=mpf(0), method=f"line, {cdf.nodes} nodes")


def two_normals_and_uniform(n):
    """0.5 N(0,1) + 0.3 N(4, 0.5) + 0.2 U(−2, 6): all-uniform part by Irwin–Hall, the rest by Gil-Pelaez."""
    weights = [mpf(5) / 10, mpf(3) / 10, mpf(2) / 10]
    mean = weights[1] * 4 + weights[2] * 2
    second = weights[0] + weights[1] * (16 + mpf("0.25")) + weights[2] * (4 + mpf(64) / 12)
    total_mean, sd = n * mean, sqrt(n * (second - mean**2))
    flat = weights[2] ** n

    def flat_part(x):
        return flat * irwin_hall(n, (x + 2 * n) / 8) if n <= 40 else mpf(0)
    # Davies: period long enough for Gaussian tails and uniform ends to be below 1e-28.
    reach = n * 0 + max(16 * sd, mpf(16) + 6 * n if n <= 5 else 0)
    step = 2 * pi / (2 * reach)
    nodes = []
    k = 0
    while True:
        t = (k + mpf(1) / 2) * step
        first = weights[0] * exp(-t * t / 2)
        second_ = weights[1] * exp(-t * t / 8 + mpc(0, 4) * t)
        third = weights[2] * expj(2 * t) * mp.sin(4 * t) / (4 * t)
        one = first + second_ + third
        value = (one**n - third**n) / (pi * (k + mpf(1) / 2))
        nodes.append((t, value))
        if abs(value) < mpf(10) ** -30 and t * sd > 5 and (n > 5 or exp(-t * t / 8) < mpf(10) ** -31):
            break
        k += 1

    def rest(x):
        total = (1 - flat) / 2
        turn = expj(-step * x)
        spin = expj(-step * x / 2)
        for _, value in nodes:
            total -= (value * spin).imag
            spin *= turn
        return total

    def cdf(x):
        return flat_part(x) + rest(x)
    if n == 1:
        def cdf(x):
            return (weights[0] * phi(x) + weights[1] * phi(2 * (x - 4))
                    + weights[2] * min(max((x + 2) / 8, mpf(0)), mpf(1)))
    kinks = [mpf(-2 * n + 8 * k) for k in range(n + 1)] if n <= 3 else []
    return answers(cdf, total_mean, sd, kinks=kinks, method="exact" if n == 1 else f"Gil-Pelaez, {len(nodes)} nodes")


def different_ends(n):
    """0.6 exponential(mean 2) + 0.4 uniform(3, 7)."""
    w, u = mpf(6) / 10, mpf(4) / 10
    mean = w * 2 + u * 5
    second = w * 8 + u * (25 + mpf(16) / 12)
    total_mean, sd = n * mean, sqrt(n * (second - mean**2))
    if n <= 5:
        mp.dps = 60

        def ramp(m, k, y):
            """E (y − 2·Gamma_m)_+^k / k!, or y_+^k/k! for m = 0."""
            if y <= 0:
                return mpf(0)
            if m == 0:
                return y**k / mp.factorial(k)
            total = mpf(0)
            for i in range(k + 1):
                moment = mpf(2) ** i * mp.factorial(m + i - 1) / mp.factorial(m - 1)
                moment *= gammainc(m + i, 0, y / 2, regularized=True)
                total += comb(k, i) * y ** (k - i) * (-1) ** i * moment
            return total / mp.factorial(k)

        def cdf(x):
            if x <= 0:
                return mpf(0)
            total = mpf(0)
            for k in range(n + 1):
                m = n - k
                for j in range(k + 1):
                    y = x - 3 * k - 4 * j
                    total += comb(n, k) * w**m * u**k * comb(k, j) * (-1) ** j * ramp(m, k, y) / mpf(4) ** k
            return total
        kinks = sorted({mpf(3 * k + 4 * j) for k in range(1, n + 1) for j in range(k + 1)
                        if 3 * k + 4 * j < total_mean + 6 * sd}) if n <= 3 else []
        return answers(cdf, total_mean, sd, low=mpf(0), kinks=kinks, method="exact")

    def transform(s):
        return (w / (1 + 2 * s) + u * exp(-3 * s) * (1 - exp(-4 * s)) / (4 * s)) ** n
    cdf = line_inverse(transform, total_mean + 6 * sd)
    return answers(cdf, total_mean, sd, low=mpf(0), method=f"line, {cdf.nodes} nodes")


DATA = [3, 0, 1, 1, 0, 7, 2, 0, 0, 12, 1, 4, 0, 2, 1, 0, 3, 1, 0, 5]
SIGMA = 0.6
MEAN_SD = sqrt(log(1 + (mpf(31) / 48) ** 2))
LAWS = {
    "bernoulli": ({"kind": "bernoulli", "p": 0.3}, bernoulli),
    "binomial": ({"kind": "binomial", "trials": 7, "p": 0.2}, binomial_law),
    "poisson": ({"kind": "poisson", "rate": 2.5}, poisson),
    "geometric": ({"kind": "geometric", "p": 0.15}, lambda n: negative(1, 0.15, n)),
    "negative-binomial": ({"kind": "negative-binomial", "size": 2.5, "p": 0.4}, lambda n: negative(2.5, 0.4, n)),
    "discrete-uniform": ({"kind": "discrete-uniform", "low": -2, "high": 3},
                         lambda n: lattice_case(power([0, 1, 2, 3, 4, 5], [1] * 6, n))),
    "table": ({"kind": "table", "values": [0, 250, 500, 1250], "weights": [10, 6, 3, 1]},
              lambda n: lattice_case(power([0, 1, 2, 5], [10, 6, 3, 1], n))),
    "data": ({"kind": "data", "values": DATA},
             lambda n: lattice_case(power(sorted(set(DATA)), [DATA.count(v) for v in sorted(set(DATA))], n))),
    "normal": ({"kind": "normal", "mean": 5, "sd": 2}, normal_law),
    "uniform": ({"kind": "uniform", "low": -1, "high": 5}, uniform),
    "exponential": ({"kind": "exponential", "mean": 3}, lambda n: gamma_sum(1, n)),
    "gamma": ({"kind": "gamma", "shape": 0.4, "scale": 7}, lambda n: gamma_sum(0.4, n)),
    "weibull-0.7": ({"kind": "weibull", "shape": 0.7, "scale": 2}, lambda n: weibull(0.7, n)),
    "weibull-1.5": ({"kind": "weibull", "shape": 1.5, "scale": 2}, lambda n: weibull(1.5, n)),
    "weibull-3": ({"kind": "weibull", "shape": 3, "scale": 2}, lambda n: weibull(3, n)),
    "lognormal": ({"kind": "lognormal", "log_mean": 1.5, "log_sd": SIGMA}, lambda n: lognormal(SIGMA, n)),
    "lognormal-mean-sd": ({"kind": "lognormal", "mean": 48, "sd": 31}, lambda n: lognormal(MEAN_SD, n)),
    "lomax-2.3": ({"kind": "lomax", "shape": 2.3, "scale": 4}, lambda n: lomax(2.3, n)),
    "lomax-4.5": ({"kind": "lomax", "shape": 4.5, "scale": 4}, lambda n: lomax(4.5, n)),
    "pareto": ({"kind": "pareto", "shape": 3.2, "minimum": 2}, lambda n: lomax(3.2, n)),
    "inverse-gaussian": ({"kind": "inverse-gaussian", "mean": 3, "shape": 2}, lambda n: inverse_gaussian(3, 2, n)),
    "mostly-zero-lognormal": (
        {"kind": "mixture", "parts": [
            {"weight": 3, "law": {"kind": "constant", "value": 0}},
            {"weight": 1, "law": {"kind": "lognormal", "log_mean": 1.5, "log_sd": SIGMA}}]},
        lambda n: lognormal(SIGMA, n, zero=mpf(3) / 4)),
    "capped-lomax": ({"kind": "cap", "law": {"kind": "lomax", "shape": 2.3, "scale": 4}, "high": 12},
                     lambda n: lomax(2.3, n, cap=mpf(3))),
    "capped-lognormal": ({"kind": "cap", "law": {"kind": "lognormal", "log_mean": 0, "log_sd": SIGMA}, "high": 3},
                         lambda n: lognormal(SIGMA, n, cap=mpf(3))),
    "capped-exponential": ({"kind": "cap", "law": {"kind": "exponential", "mean": 5}, "high": 10},
                           lambda n: capped_exponential(n, 0, 2)),
    "normals-and-uniform": (
        {"kind": "mixture", "parts": [
            {"weight": 5, "law": {"kind": "normal", "mean": 0, "sd": 1}},
            {"weight": 3, "law": {"kind": "normal", "mean": 4, "sd": 0.5}},
            {"weight": 2, "law": {"kind": "uniform", "low": -2, "high": 6}}]},
        two_normals_and_uniform),
    "different-ends": (
        {"kind": "mixture", "parts": [
            {"weight": 6, "law": {"kind": "exponential", "mean": 2}},
            {"weight": 4, "law": {"kind": "uniform", "low": 3, "high": 7}}]},
        different_ends),
    "nested": (
        {"kind": "affine", "add": -1, "multiply": 2, "law": {
            "kind": "cap", "high": 12, "law": {
                "kind": "mixture", "parts": [
                    {"weight": 7, "law": {"kind": "constant", "value": 0}},
                    {"weight": 3, "law": {"kind": "exponential", "mean": 5}}]}}},
        lambda n: capped_exponential(n, mpf(7) / 10, mpf(12) / 5)),
}


def make(name):
    spec, law = LAWS[name]
    cases = []
    begin = time.process_time()
    for n in NS:
        mp.dps = 60
        start = time.process_time()
        rows, (distance, at_z), method = law(n)
        cases.append({
            "n": n,
            "method": method,
            "kolmogorov": show(distance),
            "at_z": show(at_z),
            "points": [{"z": z, "at_or_below": show(a), "below": show(b), "above": show(c)} for z, a, b, c in rows],
        })
        print(name, n, method, mp.nstr(distance, 18), f"{time.process_time() - start:.1f} s", flush=True)
    out = {"law": spec, "tools": f"mpmath {mpmath.__version__}, Python {sys.version.split()[0]}",
           "cpu_seconds": round(time.process_time() - begin, 1), "cases": cases}
    path = os.path.join(os.path.dirname(os.path.abspath(__file__)), name + ".json")
    with open(path, "w") as f:
        json.dump(out, f, indent=0)
        f.write("\n")


if __name__ == "__main__":
    for name in sys.argv[1:] or LAWS:
        make(name)
