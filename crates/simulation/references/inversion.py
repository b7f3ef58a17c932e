"""Reference values for sums with a continuous part, written as a Rust table.

Independent of the program's algorithm:
- closed forms (gamma, normal, Irwin-Hall mixtures over the binomial number of non-zero summands), mpmath 50 digits;
- the capped exponential by expanding its transform 1/(1+s) + e^(-c) e^(-cs) s/(1+s), mpmath 80 digits;
- Lomax by Talbot inversion of (a e^s E_{a+1}(s))^n / s, mpmath 70 digits, two degrees compared;
- "brute": Gil-Pelaez trapezoid with the characteristic function from thousands of Gauss-Legendre nodes on the real
  axis, numpy doubles, good to about 1e-12 (period and cut-off far beyond need, doubled as a check).

Run: python3 inversion.py > inversion_table.rs   (some two minutes; mpmath and numpy versions are in the output)
"""
import sys
import mpmath as mp
import numpy as np

rows = []


def add(name, n, x, value):
    rows.append((name, n, float(x), mp.nstr(mp.mpf(value), 20)))
    print(name, n, x, rows[-1][3], file=sys.stderr, flush=True)


def phi(z):
    return mp.ncdf(z)


mp.mp.dps = 50


def gamma_below(k, x):
    return mp.gammainc(k, 0, x, regularized=True) if x > 0 else mp.mpf(0)


def irwin_hall(j, x):
    x = mp.mpf(x)
    if x <= 0:
        return mp.mpf(0)
    if x >= j:
        return mp.mpf(1)
    return sum((-1) ** k * mp.binomial(j, k) * (x - k) ** j for k in range(int(mp.floor(x)) + 1)) / mp.factorial(j)


def mostly_zero(n, p_zero, cdf, x):
    p_zero = mp.mpf(p_zero)
    total = mp.mpf(0)
    for j in range(n + 1):
        w = mp.binomial(n, j) * p_zero ** (n - j) * (1 - p_zero) ** j
        total += w * ((1 if x >= 0 else 0) if j == 0 else cdf(j, x))
    return total


# 70 % zeros, else exponential with mean 1; 90 % zeros, else normal(3, 1); 60 % zeros, else uniform(0, 1)
for n in (1, 2, 3, 5, 40, 200):
    for x in (0, mp.mpf(1) / 8, n * mp.mpf("0.2"), n * mp.mpf("0.3"), n * mp.mpf("0.45")):
        add("zero-exponential", n, x, mostly_zero(n, "0.7", gamma_below, x))
    for x in (-1, 0, n * mp.mpf("0.2"), n * mp.mpf("0.3"), n * mp.mpf("0.45")):
        add("zero-normal", n, x, mostly_zero(n, "0.9", lambda j, y: phi((y - 3 * j) / mp.sqrt(j)), x))
    if n <= 40:
        for x in (0, mp.mpf(1) / 16, n * mp.mpf("0.1875"), n * mp.mpf("0.25")):
            add("zero-uniform", n, x, mostly_zero(n, "0.6", irwin_hall, x))

# mixture 0.3 normal(0, 0.1) + 0.7 normal(2, 1)
for n in (1, 3, 10, 50):
    for z in (-2, -1, 0, 1, 2):
        mean, var = mp.mpf("1.4"), mp.mpf("0.3") * (mp.mpf("0.01")) + mp.mpf("0.7") * 5 - mp.mpf("1.96")
        x = mp.mpf(float(n * mean + z * mp.sqrt(n * var)))
        total = mp.mpf(0)
        for j in range(n + 1):
            w = mp.binomial(n, j) * mp.mpf("0.7") ** j * mp.mpf("0.3") ** (n - j)
            total += w * phi((x - 2 * j) / mp.sqrt(j + (n - j) * mp.mpf("0.01")))
        add("normal-mixture", n, x, total)

# exponential with mean 1 capped at c = 2
mp.mp.dps = 80


def capped_exponential(n, x, c=mp.mpf(2)):
    total = gamma_below(n, x)
    for j in range(1, n + 1):
        y = x - c * j
        if y < 0:
            break
        m, a = j - 1, n - j
        term = mp.factorial(m) * y ** a * mp.exp(-y) * mp.laguerre(m, a, y) / mp.factorial(n - 1)
        total += mp.binomial(n, j) * mp.exp(-c * j) * term
    return total


for n in (1, 2, 3, 4, 10, 40):
    for share in ("0.25", "0.375", "0.4375", "0.5"):
        x = mp.mpf(share) * 2 * n
        add("capped-exponential", n, x, capped_exponential(n, x))
    x = mp.mpf(2 * n) - mp.mpf(1) / 64
    add("capped-exponential", n, x, capped_exponential(n, x))

# Lomax(shape a, scale 1)
mp.mp.dps = 70


def lomax(a, n, x):
    a, x = mp.mpf(a), mp.mpf(x)
    values = []
    for degree in (100, 140):
        total = mp.mpf(0)
        # fixed Talbot contour of Abate and Valko
        r = mp.mpf(2) * degree / (5 * x)

        def f(s):
            return (a * mp.exp(s) * mp.expint(a + 1, s)) ** n / s

        total = mp.exp(r * x) * f(mp.mpc(r)).real / 2
        for k in range(1, degree):
            th = k * mp.pi / degree
            cot = mp.cot(th)
            s = r * th * mp.mpc(cot, 1)
            sigma = th + (th * cot - 1) * cot
            total += (mp.exp(x * s) * f(s) * mp.mpc(1, sigma)).real
        values.append(total * r / degree)
    assert abs(values[0] - values[1]) < mp.mpf(10) ** -15, (a, n, x, values)
    return values[1]


for a in ("2.3", "4.5"):
    for n in (3, 10, 100):
        mean = 1 / (mp.mpf(a) - 1)
        for factor in ("0.5", "0.9", "1", "1.25", "2"):
            x = mp.mpf(float(mp.mpf(factor) * n * mean))
            add("lomax-" + a, n, x, lomax(a, n, x))


def brute(nodes, weights, atoms, n, xs, sd, span, cut):
    """F(x) for the sum of n; span = period and cut = last frequency, in units of the sum's sd."""
    scale = sd * np.sqrt(n)
    step = 2 * np.pi / (span * scale)
    k = np.arange(int(cut * span / (2 * np.pi)))
    t = (k + 0.5) * step
    mean = np.dot(nodes, weights) + sum(v * p for v, p in atoms)
    cf = np.zeros(len(t), complex)
    for i, ti in enumerate(t):
        cf[i] = np.dot(weights, np.exp(1j * ti * (nodes - mean)))
    for v, p in atoms:
        cf += p * np.exp(1j * t * (v - mean))
    power = cf ** n
    return [0.5 - np.sum((power * np.exp(-1j * t * (x - n * mean))).imag / (np.pi * (k + 0.5))) for x in xs]


def panels(edges, order=32):
    u, w = np.polynomial.legendre.leggauss(order)
    nodes, weights = [], []
    for a, b in zip(edges[:-1], edges[1:]):
        nodes.append(0.5 * (a + b) + 0.5 * (b - a) * u)
        weights.append(0.5 * (b - a) * w)
    return np.concatenate(nodes), np.concatenate(weights)


def check_twice(nodes, weights, atoms, n, xs, sd, span, cut):
    one = brute(nodes, weights, atoms, n, xs, sd, span, cut)
    two = brute(nodes, weights, atoms, n, xs, sd, 1.5 * span, 1.3 * cut)
    assert max(abs(a - b) for a, b in zip(one, two)) < 1e-12, (one, two)
    return two


def moments(nodes, weights, atoms):
    mean = np.dot(nodes, weights) + sum(v * p for v, p in atoms)
    var = np.dot((nodes - mean) ** 2, weights) + sum((v - mean) ** 2 * p for v, p in atoms)
    return mean, np.sqrt(var)


# lognormal(0, 1), nodes in ln x
u, w = panels(np.linspace(-9.2, 9.2, 500))
weights = w * np.exp(-u * u / 2) / np.sqrt(2 * np.pi)
nodes = np.exp(u)
mean, sd = moments(nodes, weights, [])
for n in (40, 400):
    xs = [float(n * mean + z * sd * np.sqrt(n)) for z in (-1.5, -0.5, 0, 0.5, 1, 2, 4)]
    for x, v in zip(xs, check_twice(nodes, weights, [], n, xs, sd, 700, 30 if n == 40 else 14)):
        add("lognormal-brute", n, x, v)

# Lomax(shape 1.5, scale 1) capped at 50
u, w = panels(np.linspace(0, np.log(51.0), 200))
nodes = np.expm1(u)
weights = w * 1.5 * np.exp(-1.5 * u)
atoms = [(50.0, 51.0 ** -1.5)]
mean, sd = moments(nodes, weights, atoms)
for n in (40, 300):
    xs = [float(n * mean + z * sd * np.sqrt(n)) for z in (-1.2, -0.5, 0, 0.5, 1, 2, 4)]
    for x, v in zip(xs, check_twice(nodes, weights, atoms, n, xs, sd, 60, 130 if n == 40 else 25)):
        add("capped-lomax-brute", n, x, v)

print(f"// Generated by inversion.py with mpmath {mp.__version__}, numpy {np.__version__}: do not edit.")
print("// (law, n, x in the law's units, P(S <= x)); `brute` rows are good to about 1e-12, the others to all digits.")
print("&[")
for name, n, x, value in rows:
    print(f'    ("{name}", {n}, {x!r}, {value}),')
print("]")
