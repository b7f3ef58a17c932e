"""Reference values for the claims: SciPy and mpmath, written as Rust tuples.

Run: python3 crates/conclusions/references/claims.py   (a few seconds; SciPy 1.17.1, mpmath 1.3.0)
Writes references/noncentral.in beside this file.
"""

import pathlib

import mpmath as mp

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
