"""Reference moments of laws: mean, sd, skewness, excess kurtosis, E|X - mean|^3/sd^3; `-` where infinite.

Independent of the crate: tanh-sinh quadrature (mpmath.quad) of densities written down here, and plain sums.
Run: python3 laws.py > laws.txt   (Python 3, mpmath 1.3.0, 30 digits, about half a minute)
"""

from mpmath import mp, mpf, quad, exp, log, sqrt, pi, gamma, beta, ncdf, npdf, inf, nsum, binomial, power

mp.dps = 30


def continuous(density, ends, root=1):
    """`root`: x = t^root on the first stretch, for a density singular at 0. (function, breakpoints) as an expectation operator; heavy tails by x = e^u beyond the last break."""

    def expect(g, extra=()):
        points = sorted(set([mpf(e) for e in ends if abs(e) != inf] + [mpf(x) for x in extra]))
        points = [p for p in points if (ends[0] == -inf or p >= ends[0]) and (ends[-1] == inf or p <= ends[-1])]
        total = mpf(0)
        if root != 1:
            second = points[1]
            total += quad(lambda t: g(t**root) * density(t**root) * root * t ** (root - 1), [0, second ** (mpf(1) / root)])
            points = points[1:]
        if len(points) > 1:
            total += quad(lambda x: g(x) * density(x), points)
        if ends[-1] == inf:
            last = points[-1]
            steps = [0, 1, 2, 4, 8, 16, 32, 64, 128, 256, 512, 1024]
            total += quad(lambda u: g(last + exp(u) - 1) * density(last + exp(u) - 1) * exp(u), steps)
        if ends[0] == -inf:
            first = points[0]
            steps = [0, 1, 2, 4, 8, 16, 32, 64, 128, 256, 512, 1024]
            total += quad(lambda u: g(first - exp(u) + 1) * density(first - exp(u) + 1) * exp(u), steps)
        return total

    return expect


def discrete(atoms):
    atoms = [(mpf(v), mpf(p)) for v, p in atoms]
    return lambda g, extra=(): sum(p * g(v) for v, p in atoms)


def mixture(parts):
    return lambda g, extra=(): sum(w * e(g, extra) for w, e in parts)


def moments(expect, highest=5):
    """`highest` is the first order that does not exist."""
    one = expect(lambda x: mpf(1))
    assert abs(one - 1) < mpf(10) ** -20, one
    mean = expect(lambda x: x)
    out = [mean]
    centred = lambda k: expect(lambda x: (x - mean) ** k, (mean,))
    if highest > 2:
        variance = centred(2)
        sd = sqrt(variance)
        out.append(sd)
        if highest > 3:
            out.append(centred(3) / sd**3)
            if highest > 4:
                out.append(centred(4) / variance**2 - 3)
            else:
                out.append(None)
            out.append(expect(lambda x: abs(x - mean) ** 3, (mean,)) / sd**3)
    return out + [None] * (5 - len(out))


def row(name, expect, highest=5):
    values = moments(expect, highest)
    print(name, *[mp.nstr(v, 20) if v is not None else "-" for v in values])


def lognormal(m, s):
    return lambda x: exp(-((log(x) - m) ** 2) / (2 * s * s)) / (x * s * sqrt(2 * pi)) if x > 0 else mpf(0)


def gamma_density(a, scale=1):
    return lambda x: (x / scale) ** (a - 1) * exp(-x / scale) / (gamma(a) * scale) if x > 0 else mpf(0)


def weibull(k):
    return lambda x: k * x ** (k - 1) * exp(-(x**k)) if x > 0 else mpf(0)


def lomax(a, scale=1):
    return lambda x: a / mpf(scale) * (1 + x / mpf(scale)) ** (-a - 1)


def student(v):
    c = gamma((v + 1) / 2) / (gamma(v / 2) * sqrt(v * pi))
    return lambda x: c * (1 + x * x / v) ** (-(v + 1) / 2)


q = mpf
row("lognormal", continuous(lognormal(0, 1), [0, q("0.01"), q("0.1"), 1, 5, inf]))
ratio = q(31) / 48
s2 = log(1 + ratio**2)
row("lognormal-mean-sd", continuous(lognormal(log(q(48)) - s2 / 2, sqrt(s2)), [0, 5, 20, 50, 150, inf]))
row("gamma-0.3", continuous(gamma_density(q("0.3"), 2), [0, q("0.1"), 1, 5, inf], 10))
row("gamma-40", continuous(gamma_density(q(40)), [0, 20, 30, 40, 50, 70, inf]))
row("weibull-0.7", continuous(weibull(q("0.7")), [0, q("0.1"), 1, 5, inf], 10))
row("weibull-3", continuous(weibull(q(3)), [0, q("0.3"), q("0.6"), 1, q("1.5"), 2, inf]))
row("weibull-30", continuous(weibull(q(30)), [0, q("0.5"), q("0.8"), q("0.9"), 1, q("1.1"), q("1.2"), inf]))
row("lomax-2.3", continuous(lomax(q("2.3")), [0, 1, 3, inf]), 3)
row("lomax-3.2", continuous(lomax(q("3.2")), [0, 1, 3, inf]), 4)
row("lomax-4.5", continuous(lomax(q("4.5")), [0, 1, 3, inf]))
row("pareto-3.2", continuous(lambda x: q("3.2") * 2 ** q("3.2") * x ** -q("4.2"), [2, 3, 5, inf]), 4)
row(
    "inverse-gaussian",
    continuous(lambda x: sqrt(3 / (2 * pi * x**3)) * exp(-3 * (x - 2) ** 2 / (8 * x)) if x > 0 else mpf(0), [0, q("0.2"), q("0.5"), 1, 2, 4, 10, inf]),
)
row("student-3.5", continuous(student(q("3.5")), [-inf, -3, -1, 0, 1, 3, inf]), 4)
row("student-7", continuous(student(q(7)), [-inf, -3, -1, 0, 1, 3, inf]))
row("logistic", continuous(lambda x: exp(-abs(x)) / (1 + exp(-abs(x))) ** 2, [-inf, -5, 0, 5, inf]))
side = lambda a, b: (lambda x: x ** (a - 1) * (1 - x) ** (b - 1) / beta(a, b))
near_0 = continuous(side(q("0.4"), q("0.7")), [0, q("0.1"), q("0.5")], 10)
near_1 = continuous(side(q("0.7"), q("0.4")), [0, q("0.1"), q("0.5")], 10)
mirrored = lambda g, extra=(): near_1(lambda y: g(1 - y), [1 - x for x in extra])
row("beta-0.4-0.7", mixture([(1, near_0), (1, mirrored)]))
row("beta-2-5", continuous(lambda x: 30 * x * (1 - x) ** 4, [0, q("0.5"), 1]))
row("generalized-pareto-0.2", continuous(lambda x: q("0.5") * (1 + q("0.1") * (x - 1)) ** -6, [1, 3, 6, inf]))
row("generalized-pareto--0.3", continuous(lambda x: q("0.5") * (1 - q("0.15") * (x - 1)) ** (q(10) / 3 - 1), [1, 3, 1 + 1 / q("0.15")]))
row("triangular", continuous(lambda x: (x - 1) / 4 if x < 2 else (9 - x) / 28, [1, 2, 9]))
lo, hi = q("0.5"), q(5)
row(
    "lognormal-capped",
    mixture(
        [
            (1, continuous(lognormal(0, 1), [lo, 1, 2, hi])),
            (1, discrete([(lo, ncdf(log(lo))), (hi, ncdf(-log(hi)))])),
        ]
    ),
)
tail = ncdf(q(-3))
row("normal-above-3", continuous(lambda x: npdf(x) / tail, [3, q("3.3"), 4, 6, 10, inf]))
t = student(q("2.5"))
beyond = quad(lambda u: t(exp(u)) * exp(u), [log(q(10)), 3, 5, 10, 20, 40, 80])
row("student-2.5-capped", mixture([(1, continuous(t, [-10, -3, -1, 0, 1, 3, 10])), (1, discrete([(-10, beyond), (10, beyond)]))]))
row(
    "mostly-zero",
    mixture([(q("0.7"), discrete([(0, 1)])), (q("0.3"), continuous(lognormal(3, q("0.8")), [0, 2, 10, 20, 50, 100, inf]))]),
)
row("poisson-2.5", discrete([(k, exp(-q("2.5")) * q("2.5") ** k / mp.factorial(k)) for k in range(90)]))
row("binomial-20-0.3", discrete([(k, binomial(20, k) * q("0.3") ** k * q("0.7") ** (20 - k)) for k in range(21)]))
row("geometric-0.2", discrete([(k, q("0.2") * q("0.8") ** k) for k in range(600)]))
row(
    "negative-binomial-2.5-0.4",
    discrete([(k, gamma(k + q("2.5")) / (gamma(q("2.5")) * mp.factorial(k)) * q("0.4") ** q("2.5") * q("0.6") ** k) for k in range(300)]),
)
cell = lambda k: exp(-(max(k - q("0.5"), 0)) / 4) - exp(-(k + q("0.5")) / 4)
row("exponential-rounded", discrete([(k / q(2), cell(k)) for k in range(0, 700)]))
z = quad(lambda x: x * exp(-x), [0, 2, 8])
row("formula", continuous(lambda x: x * exp(-x) / z, [0, 1, 3, 8]))
poisson2 = [exp(q(-2)) * q(2) ** k / mp.factorial(k) for k in range(60)]
row(
    "compound-exponential",
    mixture(
        [(1, discrete([(0, poisson2[0])]))]
        + [(1, continuous(lambda x: sum(poisson2[k] * x ** (k - 1) * exp(-x) / mp.factorial(k - 1) for k in range(1, 60)), [0, 2, 5, 10, 20, inf]))]
    ),
)
