# SPDX-License-Identifier: GPL-3.0-or-later
"""Reference points of fade timing and of the error floor of differential detection.

    python3 make_fade_timing.py timing|ray|seen|floor > fade_NAME.tsv

mpmath in 30-digit arithmetic, from definitions. timing: crossings are the density of the
amplitude times the mean positive slope, over a lognormal local mean integrated over it. ray: density of amplitude and slope from the joint Gaussian law of
scatter and its derivative, in polar coordinates. seen: Rice's law of the lengths of fades and
Rayleigh's of gaps, integrated. floor: P(Re(x* y) < 0) by integrating over |x + y| the
probability that |x - y| exceeds it.
"""
import random
import sys

import mpmath
from mpmath import (besseli, besselj, cos, erf, exp, gamma, gammainc, inf, log, mp, mpf, nstr, pi,
                    quad, sin, sqrt)

mp.dps = 30
PER_DB = log(mpf(10)) / 10


def show(*fields):
    print("\t".join(f if isinstance(f, str) else
                    (repr(f) if isinstance(f, float) else nstr(f, 20)) for f in fields))


def log_crossings(model, par, u_db):
    y = exp(PER_DB * u_db)
    r = sqrt(y)
    if model == "nakagami":
        m = mpf(par)
        log_density = log(2) + m * log(m) + (2 * m - 1) * log(r) - m * y - mpmath.loggamma(m)
        steady = m
    else:
        k = mpf(par)
        z = 2 * r * sqrt(k * (1 + k))
        bessel = log(besseli(0, z)) if z < 300 else z + log(
            mpmath.quad(lambda t: exp(z * (cos(t) - 1)), [0, 6 / sqrt(z), 12 / sqrt(z)]) / pi)
        log_density = log(2 * r * (1 + k)) - k - (1 + k) * y + bessel
        steady = 1 + k
    return log_density + log(pi / sqrt(steady) / sqrt(2 * pi))


def below(model, par, u_db):
    y = exp(PER_DB * u_db)
    if model == "nakagami":
        m = mpf(par)
        return gammainc(m, 0, m * y, regularized=True), gammainc(m, m * y, inf, regularized=True)
    k = mpf(par)
    def density(v):
        return (1 + k) * exp(-k - (1 + k) * v) * besseli(0, 2 * sqrt(k * (1 + k) * v))
    parts = [y * mpf(i) / 60 for i in range(61)]
    lower = quad(density, parts)
    spread = sqrt(1 + 2 * k) / (1 + k)
    start = max(y, mpf(1))
    upper = quad(density, [y, start] + [start + i * 4 * spread for i in range(1, 16)])
    return lower, upper


def over_local_mean(function, x_db, sigma_db):
    s = mpf(sigma_db)
    parts = [x_db + s * mpf(i) / 2 for i in range(-40, 41)]
    total = mpf(0)
    for low, high in zip(parts, parts[1:]):
        total += quad(lambda u: function(u) * exp(-(u - x_db) ** 2 / (2 * s * s)), [low, high],
                      maxdegree=6)
    return total / (s * sqrt(2 * pi))


def timing():
    show("model", "parameter", "shadowing_db", "x_db", "log_crossings", "mean_fade", "mean_gap")
    rng = random.Random(20261201)
    for model, parameters in (("rice", (0.0, 0.3, 2.0, 7.0, 40.0, 150.0)),
                              ("nakagami", (0.5, 1.3, 6.0, 80.0, 1000.0))):
        for par in parameters:
            for _ in range(4):
                x = round(rng.uniform(-40.0, 6.0), 2)
                lower, upper = below(model, par, mpf(x))
                n = log_crossings(model, par, mpf(x))
                show(model, par, 0.0, x, n, lower / exp(n), upper / exp(n))
    for model, par, sigma, x in (("rice", 0.0, 4.0, -12.0), ("rice", 3.0, 6.0, -20.0),
                                 ("rice", 3.0, 1.0, 1.0), ("rice", 12.0, 8.0, -3.0),
                                 ("nakagami", 0.7, 5.0, -15.0), ("nakagami", 4.0, 8.0, 3.0),
                                 ("nakagami", 4.0, 0.5, -8.0)):
        n = over_local_mean(lambda u: exp(log_crossings(model, par, u)), mpf(x), sigma)
        show(model, par, sigma, x, log(n), "-", "-")
    for model, par, x in (("rice", 1e5, -40.0), ("rice", 1e5, -0.05), ("rice", 1e4, -10.0),
                          ("nakagami", 1e4, -40.0), ("nakagami", 1e4, 0.1)):
        show(model, par, 0.0, x, log_crossings(model, par, mpf(x)), "-", "-")


def ray():
    show("k", "ray_cosine", "x_db", "factor")
    for k in (0.0, 0.5, 4.0, 10.0, 30.0, 1000.0):
        for c in (0.25, 0.7071, 1.0):
            for x in (-20.0, -10.0, -3.0, 0.0, 3.0):
                kk, cc = mpf(k), mpf(c)
                r = exp(PER_DB * x / 2)
                s = 1 / (1 + kk)
                a = sqrt(kk * s)
                sigma = pi * sqrt(s)

                def slope(phi):
                    mean = 2 * pi * cc * a * sin(phi)
                    # E max(mean + sigma n, 0), n normal
                    t = mean / sigma
                    return sigma * exp(-t * t / 2) / sqrt(2 * pi) + mean * (1 + erf(
                        t / sqrt(2))) / 2

                def density(phi):
                    return exp(2 * a * r * (cos(phi) - 1) / s)

                cut = min(pi, 14 / sqrt(1 + 2 * a * r / s))
                parts = [cut * mpf(i) / 40 for i in range(-40, 41)]
                show(k, c, x, quad(lambda p: density(p) * slope(p), parts) /
                     quad(density, parts) / (sigma / sqrt(2 * pi)))


def seen():
    show("spacing", "mean_fade", "mean_gap", "share")
    for spacing, fade, gap in ((0.1, 0.0401, 4.0), (0.05, 0.1327, 1.26), (0.1, 0.2639, 0.709),
                               (0.02, 0.5, 0.9), (0.5, 0.3, 0.2), (3.0, 0.1, 50.0)):
        u, v = mpf(spacing) / mpf(fade), mpf(spacing) / mpf(gap)
        fades = quad(lambda t: 2 / t * besseli(1, 2 / (pi * t * t)) * exp(-2 / (pi * t * t)),
                     [u * mpf(10) ** -i for i in range(7, 0, -1)] + [u / 4, u / 2, u])
        fades += u * mpf(10) ** -7  # hardly shorter than that
        gaps = quad(lambda t: exp(-pi * t * t / 4), [0, v])
        show(spacing, fade, gap, fades / u * gaps / v)


def floor():
    show("k", "ray_cosine", "doppler_symbols", "floor")
    for k in (0.0, 1.0, 5.0, 20.0):
        for c in (0.0, 0.6, 1.0):
            for fdt in (1e-4, 0.003, 0.02, 0.1, 0.3):
                kk = mpf(k)
                s, a2 = 1 / (1 + kk), kk / (1 + kk)
                rho = besselj(0, 2 * pi * mpf(fdt))
                theta = 2 * pi * mpf(fdt) * mpf(c)
                vs, vd = 2 * s * (1 + rho), 2 * s * (1 - rho)
                ms, md = 2 * sqrt(a2) * abs(cos(theta / 2)), 2 * sqrt(a2) * abs(sin(theta / 2))

                # over the difference's modulus d: P(sum's modulus < d) by its own series
                def less(d):
                    lam, x = ms * ms / vs, d * d / vs
                    # noncentral chi-square of 2 degrees: Poisson mixture of gamma laws
                    total, weight, n = mpf(0), exp(-lam), 0
                    while True:
                        term = weight * gammainc(n + 1, 0, x, regularized=True)
                        total += term
                        n += 1
                        weight *= lam / n
                        if n > lam + 5 and term < mpf(10) ** -24 * total:
                            return total
                wd = sqrt(vd)

                def integrand(d):
                    return 2 * d / vd * exp(-(d - md) ** 2 / vd) * (
                        besseli(0, 2 * d * md / vd) * exp(-2 * d * md / vd)) * less(d)
                parts = [md + wd * mpf(i) / 2 for i in range(-16, 17) if md + wd * i / 2 > 0]
                show(k, c, fdt, quad(integrand, [mpf(0)] + parts, maxdegree=4))


print("# python3 make_fade_timing.py %s; what it is stands in that script" % sys.argv[1])
{"timing": timing, "ray": ray, "seen": seen, "floor": floor}[sys.argv[1]]()
