"""Reference values for the special functions.

Writes special.txt: one line per value, `function argument... value`, arguments as exact doubles (shortest
repr), values with 25 digits from mpmath 1.3.0 at 60 digits or more. Oracles: mpmath's own functions where they
are trustworthy, tanh-sinh quadrature of the density elsewhere (large parameters), root finding on these for
quantiles. None of it shares an algorithm with the Rust code. Runs in about two minutes:

    python3 special.py > special.txt
"""
import sys
from mpmath import mp, mpf, mpc
from scipy.stats import norm

mp.dps = 60


def put(name, args, value):
    if isinstance(value, mpc):
        shown = mp.nstr(value.real, 25) + " " + mp.nstr(value.imag, 25)
    else:
        shown = mp.nstr(value, 25)
    print(name, *[repr(float(a)) for a in args], shown)


def integral(f, a, b, pieces=24):
    """Quadrature on equal pieces: for integrands smooth on the scale of (b - a)/pieces.

    mpmath stops at an absolute error, so the integrand is scaled by its larger end value first.
    """
    points = [a + (b - a) * k / pieces for k in range(pieces + 1)]
    scale = max(f(a), f(b))
    return scale * mp.quad(lambda t: f(t) / scale, points, maxdegree=8)


def temme_coefficients(count):
    """f_m of eta/(lambda - 1) = sum f_m eta^m, lambda - 1 - ln lambda = eta^2/2 (the table in gamma.rs)."""
    a = [mpf(0), mpf(1)]
    for k in range(2, count + 2):
        a.append((a[k - 1] - sum(i * a[i] * a[k + 1 - i] for i in range(2, k))) / (k + 1))
    f = [mpf(1)]
    for m in range(1, count):
        f.append(-sum(a[j + 1] * f[m - j] for j in range(1, m + 1)))
    return f


# --- normal ---------------------------------------------------------------------------------------------------
def normal_values():
    for z in [-37.2, -20.5, -8.3, -3.7, -1.1, -0.3, 1e-9, 0.1, 0.45, 0.7, 1.0, 1.3, 2.2, 3.3, 5.1, 7.9, 12.3, 20.7,
              25.123, 30.9, 33.3, 36.77, 37.04]:
        x = mpf(z)
        put("normal_density", [z], mp.exp(-x * x / 2) / mp.sqrt(2 * mp.pi))
        put("normal_above", [z], mp.erfc(x / mp.sqrt(2)) / 2)
    for q in [1e-300, 1e-250, 3e-200, 1e-100, 1e-50, 1e-20, 1e-10, 1e-5, 1e-3, 0.02, 0.1, 0.2499, 0.2501, 0.3, 0.45,
              0.4999999999, 0.5, 0.500000001, 0.6, 0.75, 0.8, 0.99, 1 - 1e-12]:
        f = lambda z: mp.log(mp.erfc(z / mp.sqrt(2)) / 2 / mpf(q))
        start = mpf(norm.isf(q))  # SciPy 1.17.1 starts the root finding
        root = mpf(0) if q == 0.5 else mp.findroot(f, (start, start * (1 + mpf("1e-12"))))
        put("normal_quantile_above", [q], root)


# --- error functions ------------------------------------------------------------------------------------------
def error_values():
    for x in [-20, -3.3, -0.4, 0, 0.2, 0.9, 2.5, 5.0, 7.99, 8.01, 11.3, 26, 60.5, 1e5, 1e12]:
        v = mpf(x)
        mp.dps = 400 if abs(x) < 100 else 60
        value = mp.exp(v * v) * mp.erfc(v) if abs(x) < 100 else 1 / v / mp.sqrt(mp.pi) * (1 - 1 / (2 * v * v) + 3 / (4 * v**4))
        put("erfcx", [x], value)
        mp.dps = 60
    for re in [0, 1e-8, 0.13, -0.3, 0.5117, 0.77, -1.6, 3.01, 5.7, 9.2, 14.6, 40]:
        for im in [0, 1e-12, 1e-3, 0.2, 1.4, 5.9, 6.3, 11, 27.3]:
            z = mpc(re, im)
            mp.dps = 800
            put("faddeeva", [re, im], +(mp.exp(-z * z) * mp.erfc(-1j * z)))
            mp.dps = 60
    for re, im in [(0.3, -0.4), (2.5, -1.2), (-1.3, -2.5), (4.0, -0.1)]:
        z = mpc(re, im)
        put("faddeeva", [re, im], mp.exp(-z * z) * mp.erfc(-1j * z))


# --- elementary -----------------------------------------------------------------------------------------------
def elementary_values():
    for x in [-0.999999, -0.9, -0.6, -0.3, -0.01, -1e-9, 1e-150, 1e-7, 0.003, 0.4, 0.99, 1.9, 2.1, 50, 1e10]:
        put("ln_1p_minus_x", [x], mp.log1p(mpf(x)) - mpf(x))
    for x in [-800, -30, -2, -0.6, -0.4, -1e-5, 1e-12, 0.01, 0.49, 0.51, 3, 200, 700]:
        put("exp_minus_1_minus_real", [x], mp.expm1(mpf(x)) - mpf(x))
    for re, im in [(1e-9, 2e-9), (-1e-4, 3e-5), (0.1, 0.2), (-0.5, 0.7), (0.7, 0.6), (-0.9, 0.9), (3, 4), (-20, 5),
                   (1e-12, 0.3), (-3e-5, 0.0077), (650, 1), (0.0, 6.0)]:
        w = mpc(re, im)
        put("complex_exp_m1", [re, im], mp.exp(w) - 1)
        put("exp_minus_1_minus", [re, im], mp.exp(w) - 1 - w)
    for re, im in [(1e-9, 2e-9), (-1e-4, 3e-5), (0.1, 0.2), (-0.5, 0.7), (0.7, -0.6), (-0.9, 0.02), (3, 4), (-20, 5),
                   (-0.02, 0.2), (-0.0001, 0.01414), (-1.5, 0.9), (1e200, 1e200), (-0.5, 0.8660254037844386)]:
        put("complex_ln_1p", [re, im], mp.log(1 + mpc(re, im)))


# --- gamma ----------------------------------------------------------------------------------------------------
def gamma_density(a, x):
    return mp.exp((a - 1) * mp.log(x) - x - mp.loggamma(a))


def gamma_tails(a, x):
    """(P, Q), each to full relative accuracy."""
    a, x = mpf(a), mpf(x)
    if a < 500:
        mp.dps = 60
        q = mp.gammainc(a, x, mp.inf, regularized=True)
        mp.dps = 400
        p = mp.gammainc(a, 0, x, regularized=True)
        mp.dps = 60
        if x < a:
            return +p, 1 - p
        return 1 - q, q
    sd = mp.sqrt(a)
    f = lambda t: gamma_density(a, t)
    # Distance over which the density falls by 1e-40 from x on, away from the mode.
    if x >= a:
        rate = 1 - (a - 1) / x
        q = integral(f, x, x + min(100 / max(rate, 1e-30), 14 * sd))
        return 1 - q, q
    rate = (a - 1) / x - 1
    p = integral(f, max(x - min(100 / max(rate, 1e-30), 14 * sd), 0), x)
    return p, 1 - p


def gamma_values():
    for x in [1e-8, 0.01, 0.3, 0.9, 1, 1.5, 3.7, 9.5, 10.5, 37.2, 1e3, 1e12]:
        v = mpf(x)
        put("stirling_error", [x], mp.loggamma(v + 1) - ((v + 0.5) * mp.log(v) - v + mp.log(2 * mp.pi) / 2))
    for x, m in [(3, 3.0000001), (10, 12.5), (1e9, 1.00001e9), (2.5, 7), (7, 2.5), (100, 31), (100, 29), (1e-3, 40),
                 (1e5, 3e-5), (1e15, 1.00000001e15), (50.0, 149.0), (50.0, 151.0)]:
        x, mm = mpf(x), mpf(m)
        put("deviance", [x, m], x * mp.log(x / mm) + mm - x)
    cases = []
    for a in [1e-6, 1e-3, 0.1, 0.5, 0.97, 1, 1.5, 3.3, 12, 60, 300]:
        for x in [1e-280, 1e-20, 1e-3, 0.2, 0.8, 1.09, 1.2, 2.9, 8, 13.3, 45, 61, 100, 280, 320, 650]:
            cases.append((a, x))
    for a in [500, 999, 1001, 1e4, 1e6, 1e9, 1e12]:
        for k in [-30, -12, -5, -1, -0.01, 0, 0.02, 1, 4, 9, 20, 35]:
            x = float(a + k * a**0.5)
            if x > 0:
                cases.append((a, x))
    cases += [(1001, 1000 * r) for r in (0.15, 0.25, 0.45, 0.7, 1.5, 2.0, 2.2)]
    for a, x in cases:
        a, x = float(a), float(x)
        p, q = gamma_tails(a, x)
        if 1e-300 < p:
            put("gamma_below", [a, x], p)
        if 1e-300 < q:
            put("gamma_above", [a, x], q)
        d = gamma_density(mpf(a), mpf(x))
        if 1e-300 < d < 1e300:
            put("gamma_density", [a, x], d)


# --- beta -----------------------------------------------------------------------------------------------------
def beta_ln(a, b):
    return mp.loggamma(a) + mp.loggamma(b) - mp.loggamma(a + b)


def beta_density(a, b, x, y):
    return mp.exp((a - 1) * mp.log(x) + (b - 1) * mp.log(y) - beta_ln(a, b))


def beta_series(a, b, x, y):
    """I_x(a, b) = x^a y^b/(a B) sum (a+b)_j/(a+1)_j x^j: all terms positive."""
    term = total = mpf(1)
    j = 0
    while term > total * mpf(10) ** -45:
        term *= (a + b + j) / (a + 1 + j) * x
        total += term
        j += 1
        if j > 400000:
            raise ValueError("slow")
    return total * mp.exp(a * mp.log(x) + b * mp.log(y) - mp.log(a) - beta_ln(a, b))


def beta_lower(a, b, x, y):
    """I_x(a, b), x at or below the mean or a small."""
    if max(a, b) < 3000:
        return beta_series(a, b, x, y)
    slope = (a - 1) / x - (b - 1) / y
    curvature = (a - 1) / x**2 + (b - 1) / y**2
    length = min(x, 240 / (abs(slope) + mp.sqrt(slope**2 + 240 * curvature)) * mpf("1.3"))
    if min(a, b) < 100:  # one large parameter: gamma-like, a power at the end; split geometrically
        f = lambda h: beta_density(a, b, x - h, y + h)
        scale = f(mpf(0))
        points = [mpf(0)] + [length * mpf(2) ** (-k) for k in range(24, -1, -1)]
        return scale * mp.quad(lambda h: f(h) / scale, points, maxdegree=8)
    return integral(lambda t: beta_density(a, b, t, 1 - t), x - length, x)


def beta_tails(a, b, x):
    a, b, x = mpf(a), mpf(b), mpf(x)
    y = 1 - x
    if b * x <= a * y:
        p = beta_lower(a, b, x, y)
        return p, 1 - p
    q = beta_lower(b, a, y, x)
    return 1 - q, q


def beta_values():
    cases = []
    for a, b in [(1e-3, 1e-3), (1e-3, 0.7), (1e-3, 5), (1e-3, 1e3), (0.4, 0.9), (0.5, 40), (0.5, 2000), (1, 1), (1, 7), (1.2, 3.4), (8, 2),
                 (30, 55), (300, 1.5), (999, 1001), (2000, 150)]:
        for x in [1e-250, 1e-30, 1e-6, 1e-3, 0.02, 0.3, 0.499, 0.501, 0.65, 0.72, 0.9, 0.99, 1 - 1e-6, 1 - 1e-12]:
            cases.append((a, b, x))
    for a, b in [(1e4, 1e4), (1e6, 3e5), (1e9, 1e9), (1e9, 2e3), (12, 1e9), (1e9, 1.5)]:
        mean, sd = a / (a + b), (a * b / (a + b) ** 3) ** 0.5
        for k in [-32, -11, -4, -1, -0.01, 0, 0.3, 2, 7, 20, 33]:
            x = mean + k * sd
            if 0 < x < 1:
                cases.append((a, b, x))
    for a, b, x in cases:
        try:
            p, q = beta_tails(a, b, x)
        except ValueError:
            print("skipped", a, b, x, file=sys.stderr)
            continue
        if p > 1e-300:
            put("beta_below", [a, b, x], p)
        if q > 1e-300:
            put("beta_above", [a, b, x], q)
        d = beta_density(mpf(a), mpf(b), mpf(x), 1 - mpf(x))
        if 1e-300 < d < 1e300:
            put("beta_density", [a, b, x], d)


# --- student --------------------------------------------------------------------------------------------------
def student_density(v, t):
    return mp.exp(mp.loggamma((v + 1) / 2) - mp.loggamma(v / 2) - (v + 1) / 2 * mp.log1p(t * t / v)) / mp.sqrt(mp.pi * v)


def student_above(v, t):
    """Incomplete beta function; quadrature where the law is as good as normal and mpmath's series fail."""
    v, t = mpf(v), mpf(t)
    if v <= 1e5:
        return mp.betainc(v / 2, mpf(1) / 2, 0, v / (v + t * t), regularized=True) / 2
    return integral(lambda u: student_density(v, u), t, t + min(24, 150 / max(t, mpf(1))), 48)


def student_values():
    for v in [0.5, 1, 2.7, 5, 30, 400, 999, 1001, 1e5, 1e8, 1e12]:
        for t in [1e-8, 0.01, 0.6, 1.4, 3, 9, 25, 33, 1e3, 1e8]:
            d = student_density(mpf(v), mpf(t))
            if d < 1e-300:
                continue
            put("student_density", [v, t], d)
            q = student_above(v, t)
            if q > 1e-300:
                put("student_above", [v, t], q)


# --- discrete -------------------------------------------------------------------------------------------------
def discrete_values():
    for n, p, ks in [(10, 0.2, [0, 2, 5, 10]), (3000, 0.001, [0, 3, 17, 60]), (500, 0.97, [300, 470, 485, 499, 500]), (40, 1e-12, [0, 1, 3]),
                     (30, 1 - 1e-9, [28, 29, 30]), (2000, 0.5, [500, 999, 1000, 1300])]:
        p = mpf(p)
        masses = [mp.binomial(n, k) * p**k * (1 - p) ** (n - k) for k in range(n + 1)]
        for k in ks:
            put("binomial_mass", [n, p, k], masses[k])
            put("binomial_at_or_below", [n, p, k], mp.fsum(masses[: k + 1]))
            if k < n:
                put("binomial_above", [n, p, k], mp.fsum(masses[k + 1 :]))
    for rate, ks in [(0.003, [0, 1, 4]), (3.5, [0, 2, 9, 60]), (200, [60, 180, 200, 290, 600])]:
        m = mpf(rate)
        mass = lambda k: mp.exp(-m + k * mp.log(m) - mp.loggamma(k + 1))
        for k in ks:
            put("poisson_mass", [rate, k], mass(k))
            put("poisson_at_or_below", [rate, k], mp.fsum(mass(j) for j in range(k + 1)))
            put("poisson_above", [rate, k], mp.fsum(mass(j) for j in range(k + 1, k + 900)))
    for size, p, ks in [(0.25, 0.4, [0, 1, 20, 300]), (1, 0.05, [0, 13, 200, 4000]), (37.5, 0.3, [0, 20, 85, 300]), (3, 0.999999, [0, 1, 4]),
                        (800, 0.7, [150, 340, 500])]:
        s, pp = mpf(size), mpf(p)
        mass = lambda k: mp.exp(mp.loggamma(s + k) - mp.loggamma(s) - mp.loggamma(k + 1) + s * mp.log(pp) + k * mp.log1p(-pp))
        for k in ks:
            put("negative_binomial_mass", [size, p, k], mass(k))
            put("negative_binomial_at_or_below", [size, p, k], mp.fsum(mass(j) for j in range(k + 1)))
            put("negative_binomial_above", [size, p, k], mp.fsum(mass(j) for j in range(k + 1, k + 3000)))


# --- inverse Gaussian -----------------------------------------------------------------------------------------
def inverse_gaussian_values():
    mp.dps = 900
    for mean, shape in [(1, 1), (2.5, 0.01), (3, 40), (1, 1e4), (0.7, 1e9), (1, 1e15), (50, 0.2)]:
        m, s = mpf(mean), mpf(shape)
        sd = (mean / shape) ** 0.5
        xs = [float(mean * r) for r in (3e-4, 0.01, 0.1, 0.5, 0.98, 1, 1.3, 3, 20, 300)]
        xs += [float(mean * (1 + k * sd)) for k in (-20, -6, -1.3, -0.01, 0.02, 1, 5, 12, 30)]
        for x in xs:
            if x <= 0:
                continue
            t = mpf(x)
            r = mp.sqrt(s / t)
            tail = lambda z: mp.erfc(z / mp.sqrt(2)) / 2
            al, be = r * (t / m - 1), r * (t / m + 1)
            if al * al > 1400:
                continue
            second = mp.exp(2 * s / m) * tail(be)
            p, q = tail(-al) + second, tail(al) - second
            if p > 1e-300:
                put("inverse_gaussian_at_or_below", [mean, shape, x], p)
            if q > 1e-300:
                put("inverse_gaussian_above", [mean, shape, x], q)
            put("inverse_gaussian_density", [mean, shape, x], mp.sqrt(s / (2 * mp.pi * t**3)) * mp.exp(-al * al / 2))
    mp.dps = 60


if __name__ == "__main__":
    wanted = sys.argv[1:]
    for part in [normal_values, error_values, elementary_values, gamma_values, beta_values, student_values, discrete_values, inverse_gaussian_values]:
        if not wanted or part.__name__ in wanted:
            part()
