"""Reference probabilities of standardized sums of one-sided laws.

Writes contour.txt: `law n z P(Z <= z) P(Z > z)` and `law n kolmogorov distance`, arguments as exact doubles, values
with 20 digits from mpmath 1.3.0, of which at least 14 are right (asserted below) and for few summands 18. Transforms
are closed forms (Lomax, Pareto: an exponential integral; exponential) or trapezoidal sums along rays (lognormal); they
are inverted over Talbot's cotangent contour (Talbot 1979; Abate & Valko 2004), another contour than the program's, in
45 digits, and another size of the contour must agree. n = 1 comes from the distribution function, sums of 2 and 3
Weibull quantities from real convolution integrals, which also check the other sums of 2. The arguments are rounded to
doubles first; mean and sd are those of the law in 45 digits.

    python3 contour.py LAW... > part      (about five minutes for all laws)
"""
import sys
from mpmath import mp, mpf, mpc

mp.dps = 45


def ray_transform(log_density, angle_limit, spread):
    """E e^{-sX} as an integral over u = ln r along y = r e^{-i angle}."""
    cache = {}

    def transform(s):
        s = mpc(s)
        if s in cache:
            return cache[s]
        angle = max(mpf(0), min(mp.arg(s) - mpf("0.7"), angle_limit))
        turn = mp.expj(-angle)
        h = mpf(1) / spread
        total = mpc(0)
        start = round(float(-mp.log(abs(s)) / h))
        for direction in (1, -1):
            k = start if direction == 1 else start - 1
            quiet = 0
            seen = mpf(0)
            while quiet < 12 or seen == 0:
                log_y = k * h - 1j * angle
                y = mp.exp(log_y)
                term = mp.exp(log_density(log_y, y) - s * y + log_y)
                total += term
                seen = max(seen, abs(term))
                quiet = quiet + 1 if abs(term) < mpf(10) ** -32 * max(abs(total), mpf(10) ** -30) else 0
                k += direction
                if abs(k - start) > 40000:
                    raise ValueError("no decay")
        cache[s] = total * h
        return cache[s]

    return transform


def weibull(k):
    k = mpf(k)
    mean = mp.gamma(1 + 1 / k)
    sd = mp.sqrt(mp.gamma(1 + 2 / k) - mean**2)
    return dict(mean=mean, sd=sd, low=mpf(0), slow=True, plain=True, above=lambda x: mp.exp(-(x**k)),
                density=lambda x: k * x ** (k - 1) * mp.exp(-(x**k)))


def lognormal(log_mean, v):
    """ln X normal with mean log_mean and variance v."""
    log_mean, v = mpf(log_mean), mpf(v)
    mean = mp.exp(log_mean + v / 2)
    sd = mean * mp.sqrt(mp.expm1(v))
    norm = -mp.log(2 * mp.pi * v) / 2
    transform = ray_transform(lambda ly, y: norm - ly - (ly - log_mean) ** 2 / (2 * v), mpf("2.5"), 14)
    return dict(slow=True, mean=mean, sd=sd, low=mpf(0), transform=transform,
                above=lambda x: mp.erfc((mp.log(x) - log_mean) / mp.sqrt(2 * v)) / 2,
                density=lambda x: mp.exp(norm - mp.log(x) - (mp.log(x) - log_mean) ** 2 / (2 * v)))


def lomax(a, low=0):
    """Scale 1; `low` shifts (1 for the Pareto law with minimum 1)."""
    a = mpf(a)
    return dict(mean=1 / (a - 1) + low, sd=mp.sqrt(a / (a - 2)) / (a - 1), low=mpf(low),
                transform=lambda s: a * mp.exp(s) * mp.expint(a + 1, s),
                above=lambda x: (1 + x) ** -a, density=lambda x: a * (1 + x) ** (-a - 1))


def exponential():
    return dict(mean=mpf(1), sd=mpf(1), low=mpf(0), transform=lambda s: 1 / (1 + s), above=lambda x: mp.exp(-x),
                density=lambda x: mp.exp(-x))


def with_zeros(zeros, inner):
    zeros = mpf(zeros)
    rest = 1 - zeros
    mean = rest * inner["mean"]
    second = rest * (inner["sd"] ** 2 + inner["mean"] ** 2)
    return dict(mean=mean, sd=mp.sqrt(second - mean**2), low=mpf(0), zeros=zeros, slow=True,
                transform=lambda s: zeros + rest * inner["transform"](s), above=lambda x: rest * inner["above"](x),
                inner=inner)


LAWS = {
    "lomax2.3": lambda: lomax(2.3),
    "lomax4.5": lambda: lomax(4.5),
    "pareto3.2": lambda: lomax(3.2, 1),
    "weibull0.7": lambda: weibull(0.7),
    "weibull1.5": lambda: weibull(1.5),
    "lognormal": lambda: lognormal(0, 1),
    "boarding": lambda: lognormal(0, mp.log1p(mpf(0.65) ** 2)),
    "exponential": exponential,
    "spending": lambda: with_zeros(mpf(7) / 10, lognormal(0, 1)),
}


def talbot(transform, x, count, tune):
    """(1/2 pi i) int e^{sx} transform(s) ds over s = r theta (cot theta + i)."""
    r = tune * count / x
    total = (mp.exp(r * x) * transform(r)).real / 2
    for k in range(1, count):
        theta = k * mp.pi / count
        cot = mp.cot(theta)
        s = r * theta * (cot + 1j)
        sigma = theta + (theta * cot - 1) * cot
        total += (mp.exp(s * x) * transform(s) * (1 + 1j * sigma)).real
    return total * r / count


def above_sum(law, n, x, count=60, tune=mpf(2) / 5):
    """P(S - n low > x)."""
    if n == 1:
        return law["above"](x)
    return talbot(lambda s: (1 - law["transform"](s) ** n) / s, x, count, tune)


def convolution_check(law, x):
    """P(X1 + X2 - 2 low > x) on the real axis."""
    inner = law.get("inner", law)
    zeros = law.get("zeros", mpf(0))
    f, up = inner["density"], inner["above"]
    points = [mpf(0)] + [x * mpf(2) ** -k for k in range(40, -1, -1)]
    both = up(x) + mp.quad(lambda y: f(y) * up(x - y), points[:-1] + [x - x * mpf(2) ** -k for k in range(2, 40)] + [x])
    return 2 * zeros * (1 - zeros) * up(x) + (1 - zeros) ** 2 * both


def nested_convolution(law, x):
    """P(X1 + X2 + X3 > x) on the real axis, to about 18 digits."""
    mp.dps = 24
    f, up = law["density"], law["above"]
    pair = lambda t: up(t) + mp.quad(lambda y: f(y) * up(t - y), [0, t / 2, t], maxdegree=6)
    value = up(x) + mp.quad(lambda y: f(y) * pair(x - y), [0, x / 2, x], maxdegree=6)
    mp.dps = 45
    return value


def exponential_distance(n):
    """sup |gamma cdf - Phi| from derivative sign changes on a fine grid."""
    n = mpf(n)
    root = mp.sqrt(n)
    cdf = lambda z: mp.gammainc(n, 0, n + root * z, regularized=True) if n + root * z > 0 else mpf(0)
    pdf = lambda z: mp.exp((n - 1) * mp.log(n + root * z) - n - root * z - mp.loggamma(n)) * root
    phi = lambda z: mp.npdf(z)
    best = mp.ncdf(-root)
    grid = [-root + (6 + root) * mpf(k) / 300 for k in range(1, 301)]
    for a, b in zip(grid, grid[1:]):
        if (pdf(a) - phi(a)) * (pdf(b) - phi(b)) < 0:
            z = mp.findroot(lambda t: pdf(t) - phi(t), (a, b), solver="anderson", tol=1e-50)
            best = max(best, abs(cdf(z) - mp.ncdf(z)))
    return best


def lomax_distance(a, n):
    law = lomax(a)
    sd, mean = law["sd"] * mp.sqrt(n), law["mean"] * n
    lower = lambda z: 1 - above_sum(law, n, mean + sd * z)
    difference = lambda z: abs(lower(z) - mp.ncdf(z))
    end = -mean / sd
    best = max(((difference(end + (3 - end) * mpf(k) / 60), end + (3 - end) * mpf(k) / 60) for k in range(1, 61)))
    low, high = best[1] - (3 - end) / 60, best[1] + (3 - end) / 60
    golden = (mp.sqrt(5) - 1) / 2
    for _ in range(70):
        a1, b1 = high - golden * (high - low), low + golden * (high - low)
        if difference(a1) > difference(b1):
            high = b1
        else:
            low = a1
    return max(difference((low + high) / 2), mp.ncdf(end))


if __name__ == "__main__":
    for name in sys.argv[1:] or list(LAWS):
        law = LAWS[name]()
        for n in [1, 2, 3] if law.get("plain") else [1, 2, 3, 5, 10, 40]:
            sd, shift = law["sd"] * mp.sqrt(n), (law["mean"] - law["low"]) * n
            for position, z in enumerate([-0.97, -0.4, 0.1, 1.3, 4.5, 7.9]):
                if law.get("slow") and (n == 5 or n > 1 and position in (0, 4)):
                    continue
                x = shift + sd * mpf(z)
                if x <= 0:
                    continue
                if law.get("plain") and n == 2:
                    up = convolution_check(law, x)
                elif law.get("plain") and n == 3:
                    up = nested_convolution(law, x)
                elif law.get("plain") and position == 5:
                    continue
                else:
                    up = above_sum(law, n, x)
                if n == 2 and position in (2, 3) and not law.get("plain"):
                    assert abs(up - convolution_check(law, x)) < 1e-18, (name, n, z)
                if n > 2 and position == 2 and (n > 3 or not law.get("plain")):
                    other = above_sum(law, n, x, 70, mpf("0.37"))
                    assert abs(up - other) < 1e-14, (name, n, z, mp.nstr(up - other, 5))
                print(name, n, repr(z), mp.nstr(1 - up, 20), mp.nstr(up, 20), flush=True)
        if name == "exponential":
            for n in [1, 2, 3, 5, 10, 40]:
                print(name, n, "kolmogorov", mp.nstr(exponential_distance(n), 20), flush=True)
        if name == "lomax2.3":
            for n in [2, 3]:
                print(name, n, "kolmogorov", mp.nstr(lomax_distance(2.3, n), 20), flush=True)
