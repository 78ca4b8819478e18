# SPDX-License-Identifier: GPL-3.0-or-later
"""Random reference points for error rates, packets and outage of combined branches.

    python3 make_error_rates.py rate|selection|packet|outage > NAME_branches_random.tsv
    python3 make_error_rates.py shadowed|shadowed_outage > NAME_random.tsv

The definitions, averaged over the density of the combined SNR with mpmath in 30-digit arithmetic:
Gauss-Legendre panels of 20 nodes in ln SNR, over which the integrand changes by no more than
exp(8), as far as it counts. Conditional rates are worked out from constellations: rails of PAM with
a reflected Gray code, the phase of M-PSK by Craig's integral. Nothing is shared with the program: no moment
generating function, no trapezoidal rule. With shadowing, panels over the normal variable of what has a closed
form for a given local mean. 17 digits of each value; arguments read back exactly.
"""
import math
import random
import sys

import mpmath
from mpmath import erfc, exp, gammainc, log, loggamma, mp, mpf, nstr, pi, sqrt

from legendre import gauss_legendre

mp.dps = 30
NODE_COUNT = 20
NODES = gauss_legendre(NODE_COUNT)


def q(x):
    return erfc(x / sqrt(mpf(2))) / 2


def rail_weights(levels):
    """Bit and symbol errors of one PAM rail as sums over Q at 1, 3, 5 ... half distances."""
    bits, symbols = [0] * levels, [0] * levels
    for sent in range(levels):
        for got in range(levels):
            gap = abs(got - sent)
            if gap == 0:
                continue
            wrong = bin((sent ^ sent >> 1) ^ (got ^ got >> 1)).count("1")
            bits[gap - 1] += wrong  # beyond the near threshold ...
            symbols[gap - 1] += 1
            if got not in (0, levels - 1):  # ... but not beyond the far one
                bits[gap] -= wrong
                symbols[gap] -= 1
    return bits, symbols


def qam(points):
    levels = int(round(math.sqrt(points)))
    bits, symbols = rail_weights(levels)
    wanted = [j for j in range(levels) if bits[j] or symbols[j]]

    def rates(g):
        d = sqrt(3 * g / (points - 1))
        tails = {j: q((2 * j + 1) * d) for j in wanted}
        symbol = sum(symbols[j] * tails[j] for j in wanted) / levels
        bit = sum(bits[j] * tails[j] for j in wanted) / (levels * (levels.bit_length() - 1))
        return bit, symbol * (2 - symbol)
    return rates


def beyond(psi, g):
    """P(|phase error| > psi): exp(-g sin^2 psi/sin^2 t)/pi over t from 0 to pi - psi."""
    total = mpf(0)
    s = g * mpmath.sin(psi) ** 2
    edges = [psi / 8, psi / 4, psi / 2, psi, pi / 4, 3 * pi / 8, pi / 2]
    edge = sqrt(s) / 4  # at low SNR all happens within sin t near sqrt(s)
    while edge < pi / 4:
        edges.append(edge)
        edge *= 2
    edges += [pi - e for e in edges]
    edges = sorted(e for e in set(edges) if 0 < e < pi - psi)
    width = 1 / sqrt(1 + s)
    for k in range(1, 9):
        edges += [pi / 2 - k * width, pi / 2 + k * width]
    edges = [mpf(0)] + sorted(e for e in edges if 0 < e < pi - psi) + [pi - psi]
    for low, high in zip(edges, edges[1:]):
        half, middle = (high - low) / 2, (high + low) / 2
        if middle < pi / 2 and s / mpmath.sin(high) ** 2 - s > 75:
            continue
        total += sum(half * w * exp(-s / mpmath.sin(middle + half * t) ** 2)
                     for t, w in NODES)
    return total / pi


def psk8(g):
    near, far = beyond(pi / 8, g), beyond(3 * pi / 8, g)
    return (near + far) / 3, near


def bpsk(g):
    return erfc(sqrt(g)) / 2, erfc(sqrt(g)) / 2


def qpsk(g):
    p = erfc(sqrt(g / 2)) / 2
    return p, p * (2 - p)


RATES = {"bpsk": bpsk, "qpsk": qpsk, "8psk": psk8, "16qam": qam(16), "64qam": qam(64),
         "256qam": qam(256), "dbpsk": lambda g: (exp(-g) / 2,) * 2,
         "ncfsk2": lambda g: (exp(-g / 2) / 2,) * 2}
# exponent of the rate over Es/N0, to find out where the integrand counts
DECAY = {"bpsk": 1, "qpsk": 0.5, "8psk": math.sin(math.pi / 8) ** 2, "16qam": 0.1,
         "64qam": 1.5 / 63, "256qam": 1.5 / 255, "dbpsk": 1, "ncfsk2": 0.5}


def bessels(top, z):
    """exp(-z) I_n(z), n = 0 ... top, by the backward recurrence (AMS 55, 9.6.26 and 9.6.37)."""
    if z < mpf(10) ** -12:
        return [exp(-z) * (z / 2) ** n / mpmath.factorial(n) for n in range(top + 1)]
    start = top + 30 + int(2 * math.sqrt(float(z) * 40 + 400))
    above, here = mpf(0), mpf(10) ** -40
    values = []
    for n in range(start, 0, -1):
        above, here = here, above + 2 * n / z * here
        values.append(here)
    values.reverse()  # I_0 ...
    scale = 1 / (values[0] + 2 * sum(values[1:]))
    return [v * scale for v in values[:top + 1]]


class Gamma:
    def __init__(self, shape, mean):
        self.shape, self.mean = mpf(shape), mpf(mean)

    def density(self, y):  # per neper of SNR
        x = self.shape * exp(y) / self.mean
        return exp(self.shape * log(x) - x - loggamma(self.shape))

    def rough_log(self, y):
        x = float(self.shape) * math.exp(y) / float(self.mean)
        return float(self.shape) * math.log(x) - x - math.lgamma(float(self.shape))

    def lower(self, y):
        return gammainc(self.shape, 0, self.shape * exp(y) / self.mean, regularized=True)

    def upper(self, y):
        return gammainc(self.shape, self.shape * exp(y) / self.mean, regularized=True)


class RiceSum:
    """Of L branches of unit mean."""

    def __init__(self, k, branches):
        self.k, self.n = mpf(k), branches
        self.a = sqrt(2 * branches * self.k)
        self.mean = branches

    def density(self, y):
        b = sqrt(2 * (1 + self.k) * exp(y))
        z = self.a * b
        if z > 300:
            bessel = mpmath.besseli(self.n - 1, z) * exp(-z)
        else:
            bessel = bessels(self.n - 1, z)[self.n - 1]
        return (b * b / 2 * (b / self.a) ** (self.n - 1) * exp(-(b - self.a) ** 2 / 2) * bessel)

    def rough_log(self, y):
        a = float(self.a)
        b = math.sqrt(2 * (1 + float(self.k)) * math.exp(y))
        z = a * b
        # between the small and the large argument of the Bessel function
        power = (self.n - 1) * math.log(b / 2) - math.lgamma(self.n)
        bessel = (self.n - 1) * math.log(b / a) - 0.5 * math.log(2 * math.pi * z) if z > self.n ** 2 + 1 \
            else power + (self.n - 1) * math.log(b) - z
        return 2 * math.log(b) - math.log(2) - (b - a) ** 2 / 2 + bessel

    def tail(self, y, upper):
        b = sqrt(2 * (1 + self.k) * exp(y))
        z = self.a * b
        total = mpf(0)
        ratio = self.a / b if upper else b / self.a
        first = 1 - self.n if upper else self.n
        top = 40 + self.n + int(12 * math.sqrt(float(z) + 1))
        values = bessels(top, z)
        for m in range(first, top):
            part = ratio ** m * values[abs(m)]
            total += part
            if m > self.n and part < total * mpf(10) ** -28:
                break
        return total * exp(-(b - self.a) ** 2 / 2)

    def lower(self, y):
        b = sqrt(2 * (1 + self.k) * exp(y))
        if b > self.a + 30 + self.n:
            return mpf(1)
        return self.tail(y, False) if b < self.a + self.n else 1 - self.tail(y, True)

    def upper(self, y):
        b = sqrt(2 * (1 + self.k) * exp(y))
        return 1 - self.tail(y, False) if b < self.a + mpf(1) / 2 else self.tail(y, True)


class Greatest:
    def __init__(self, one, branches):
        self.one, self.branches, self.mean = one, branches, one.mean

    def density(self, y):
        return self.branches * self.one.lower(y) ** (self.branches - 1) * self.one.density(y)

    def rough_log(self, y):
        """F is at most the density's left slope's worth: F near f left of the mean."""
        left = min(0.0, self.one.rough_log(y)) if y < 0 else 0.0
        return self.one.rough_log(y) + (self.branches - 1) * left


def law_of(model, parameter, branches, combining):
    count = branches if combining == "mrc" else 1
    if model == "rice" and parameter > 0:
        one = RiceSum(parameter, count)
    else:
        m = parameter if model == "nakagami" else 1.0
        one = Gamma(mpf(m) * count, count)
    return one if combining == "mrc" or branches == 1 else Greatest(one, branches)


def integrate(law, function, decay, bits, snr):
    """Of law times function(SNR), vectors; SNR is snr exp(y)."""
    def rough(y):
        g = snr * math.exp(y)
        log_p = -decay * g - math.log(2) - 0.5 * math.log1p(decay * g)
        return law.rough_log(y) + min(0.0, math.log(bits) + log_p)

    grid = [-120 + 0.05 * i for i in range(2600)]
    spread = 0.05
    values = [rough(y) for y in grid]
    peak = max(values)
    best = grid[values.index(peak)]
    for scale in (0.05, 0.005, 0.0005, 0.00005):  # a narrow law between the grid's points
        near = [best + scale * (i / 10 - 1) for i in range(21)]
        peak, best = max((rough(y), y) for y in near)
    counts = [y for y, v in zip(grid, values) if v > peak - 80] or [best]
    y, end = min(counts) - spread, max(counts) + spread
    y, end = min(y, best - spread), max(end, best + spread)
    total = None
    while y < end:
        h = 1e-4
        middle, low, high = rough(y), rough(y - h), rough(y + h)
        slope = abs(high - low) / (2 * h)
        bend = abs(high - 2 * middle + low) / (h * h)
        step = min(1.0, 8 / (slope + 1), 4 / math.sqrt(bend + 1), 4 / math.log(bits + 20))
        if middle > peak - 80 or rough(y + step) > peak - 80:
            half, centre = mpf(step) / 2, mpf(y) + mpf(step) / 2
            for t, w in NODES:
                at = centre + half * t
                weight = half * w * law.density(at)
                parts = [weight * v for v in function(snr * exp(at))]
                total = parts if total is None else [a + b for a, b in zip(total, parts)]
        y += step
    return total


def over_shadowing(function, sigma):
    """Mean of a vector function of the local mean in nepers, normal with deviation sigma."""
    width = min(mpf(1) / 2, 1 / (4 * mpf(sigma)))
    count = int(math.ceil(37 / float(width)))
    centres = [width * k for k in range(-count, int(math.ceil(13 / float(width))))]
    rough = [exp(-z * z / 2) * function(sigma * z)[0] for z in centres]
    peak = max(rough)
    total = None
    for i, z in enumerate(centres):
        if max(rough[max(0, i - 2):i + 3]) < peak * mpf(10) ** -24:
            continue
        for t, w in NODES:
            at = z + width / 2 * t
            weight = width / 2 * w * exp(-at * at / 2) / sqrt(2 * pi)
            parts = [weight * v for v in function(sigma * at)]
            total = parts if total is None else [a + b for a, b in zip(total, parts)]
    return total


def shadowed_function(model, parameter, branches, modulation):
    """Rates for a local mean SNR."""
    if model == "unfaded":
        return lambda g: RATES[modulation](branches * g)
    factor = mpf(1) if modulation == "dbpsk" else mpf(1) / 2
    if model == "rice":
        k = mpf(parameter)

        def rate(g):
            d = 1 + k + factor * g
            return ((1 + k) / d * exp(-k * factor * g / d)) ** branches / 2
    else:
        m = mpf(parameter) if model == "nakagami" else mpf(1)

        def rate(g):
            return (1 + factor * g / m) ** (-m * branches) / 2
    return lambda g: (rate(g), rate(g))


def shadowed_rows(kind, count, seed):
    generator = random.Random(seed)
    made = 0
    per_db = log(mpf(10)) / 10
    while made < count:
        model, parameter = draw(generator, k_high=3.0, m_high=3.0)
        branches = generator.randint(1, 4)
        sigma_db = float(f"{10 ** generator.uniform(-1, 1.4):.3g}")
        sigma = mpf(sigma_db) * per_db
        snr_db = round(generator.uniform(-20, 50), 2)
        median = mpf(snr_db) * per_db - sigma * sigma / 2
        if kind == "shadowed":
            modulation = generator.choice(("dbpsk", "ncfsk2"))
            if generator.random() < 0.4:
                model, parameter = "unfaded", 0.0
                modulation = generator.choice(list(RATES))
            function = shadowed_function(model, parameter, branches, modulation)
            values = over_shadowing(lambda x: function(exp(median + x)), sigma)
            head = [modulation, model, parameter, branches, "mrc", sigma_db, snr_db]
        else:
            branches = generator.randint(2, 4)
            combining = generator.choice(("mrc", "selection"))
            parameter = min(parameter, 100.0)
            law = law_of(model, parameter, branches, combining)
            threshold = round(snr_db + generator.uniform(-30, 15), 2)
            x = mpf(threshold) * per_db - median

            def function(s, law=law, x=x, n=branches):
                if isinstance(law, Greatest):
                    return (law.one.lower(x - s) ** n,)
                return (law.lower(x - s),)
            values = over_shadowing(function, sigma)
            head = [model, parameter, branches, combining, sigma_db, snr_db, threshold]
        if values[0] < mpf(10) ** (-295 if kind == "shadowed" else -60):
            continue
        yield head, values
        made += 1


def draw(generator, models=("rayleigh", "rice", "nakagami"), k_high=5.0, m_high=4.0):
    model = generator.choice(models)
    parameter = 0.0
    if model == "rice":
        parameter = float(f"{10 ** generator.uniform(-2, k_high):.4g}")
    elif model == "nakagami":
        parameter = float(f"{0.5 * 10 ** generator.uniform(0, m_high):.4g}")
    return model, parameter


def rows(kind, count, seed):
    generator = random.Random(seed)
    made = 0
    while made < count:
        k_high, m_high = (5.0, 4.0) if kind in ("rate", "outage") else (2.0, 2.0)
        model, parameter = draw(generator, k_high=k_high, m_high=m_high)
        combining = "mrc" if kind == "rate" else generator.choice(("mrc", "selection"))
        branches = generator.randint(1, 8)
        if kind == "selection":
            combining, branches = "selection", generator.randint(2, 8)
        law = law_of(model, parameter, branches, combining)
        snr_db = round(generator.choice((generator.uniform(-100, 100), generator.uniform(-10, 40),
                                         generator.uniform(-10, 40))), 2)
        snr = mpf(10) ** (mpf(snr_db) / 10)
        head = [model, parameter, branches, combining, snr_db]
        if kind == "outage":
            threshold = round(snr_db + generator.uniform(-30, 15), 2)
            y = (mpf(threshold) - mpf(snr_db)) * log(mpf(10)) / 10
            if isinstance(law, Greatest):
                lower = law.one.lower(y) ** branches
                upper = -mpmath.expm1(branches * mpmath.log1p(-law.one.upper(y))) \
                    if law.one.upper(y) < 0.5 else 1 - lower
            else:
                lower, upper = law.lower(y), law.upper(y)
            if not (lower > mpf(10) ** -300 and upper > mpf(10) ** -300):
                continue
            if min(lower, upper) < mpf(10) ** -24:  # the other one has lost its digits
                lower, upper = (lower, 1 - lower) if lower < upper else (1 - upper, upper)
                if (lower if lower < upper else upper) <= 0:
                    continue
            yield head + [threshold], [lower, upper]
            made += 1
            continue
        modulation = generator.choice(list(RATES))
        decay = DECAY[modulation]
        bits = float(round(10 ** generator.uniform(0, 6))) if kind == "packet" else 1.0
        rates = RATES[modulation]
        if kind == "packet":
            def function(g, rates=rates, bits=bits):
                return (-mpmath.expm1(bits * mpmath.log1p(-rates(g)[0])),)
        else:
            function = rates
        values = integrate(law, function, decay, bits, snr)
        if values is None or values[0] < mpf(10) ** -295:
            continue
        yield [modulation] + head + ([bits] if kind == "packet" else []), values
        made += 1


COLUMNS = {"rate": "modulation model parameter branches combining mean_snr_db bit symbol",
           "selection": "modulation model parameter branches combining mean_snr_db bit symbol",
           "packet": "modulation model parameter branches combining mean_snr_db bits block",
           "outage": "model parameter branches combining mean_snr_db threshold_db outage coverage"}
COLUMNS["shadowed"] = ("modulation model parameter branches combining shadowing_db mean_snr_db "
                       "bit symbol")
COLUMNS["shadowed_outage"] = ("model parameter branches combining shadowing_db mean_snr_db "
                              "threshold_db outage")
COUNTS = {"rate": 78, "selection": 24, "packet": 28, "outage": 200, "shadowed": 70,
          "shadowed_outage": 20}


def main():
    kind = sys.argv[1]
    count = int(sys.argv[2]) if len(sys.argv) > 2 else COUNTS[kind]
    print(f"# Made by make_error_rates.py {kind} with mpmath {mpmath.__version__}; "
          "how, see there.")
    print(COLUMNS[kind].replace(" ", "\t"))
    make = shadowed_rows if kind.startswith("shadowed") else rows
    for arguments, values in make(kind, count, f"routefade {kind}"):
        texts = [a if isinstance(a, str) else repr(a) for a in arguments]
        print("\t".join(texts + [nstr(v, 17, min_fixed=0, max_fixed=0) for v in values]),
              flush=True)


if __name__ == "__main__":
    main()
