# SPDX-License-Identifier: GPL-3.0-or-later
"""Random reference points for the special functions, the fading models and the outage.

    python3 make_random.py marcum|gamma|ratio|psi|tails|interval|outage|valley|quantile > NAME_random.tsv

Integrals of the definitions with mpmath in 30-digit arithmetic: Gauss-Legendre panels of 40
nodes, no longer than a sixth of the integrand's e-folding or its spread, from the greatest
value outward until a panel adds less than 1e-26. Nothing is shared with the program.
Arguments are doubles, printed so that they read back exactly; 20 digits of each value.
"""
import random
import sys

import mpmath
from mpmath import besseli, erfc, exp, inf, log, loggamma, mp, mpf, nstr, pi, psi, sqrt

from legendre import gauss_legendre

mp.dps = 40
PER_DB = log(mpf(10)) / 10
NODES = gauss_legendre(40)
mp.dps = 30


def integrate(function, low, high, start, spread, slope):
    """Integrals of a vector function whose first part is > 0 and unimodal about start."""
    start = min(max(start, low), high)
    total = None
    for sign, end in ((1, high), (-1, low)):
        x = start
        while x < end if sign > 0 else x > end:
            step = min(spread, 6 / (abs(slope(x)) + mpf(10) ** -9))
            following = min(x + step, end) if sign > 0 else max(x - step, end)
            half, middle = abs(following - x) / 2, (x + following) / 2
            panel = None
            for t, w in NODES:
                values = [half * w * v for v in function(middle + half * t)]
                panel = values if panel is None else [a + b for a, b in zip(panel, values)]
            total = panel if total is None else [a + b for a, b in zip(total, panel)]
            if panel[0] < total[0] * mpf(10) ** -26:
                break
            x = following
    return total


class Rayleigh:
    spread = mpf(5.5)

    def __init__(self, parameter):
        pass

    def density(self, x):
        y = exp(PER_DB * x)
        return PER_DB * y * exp(-y)

    def slopes(self, x):
        return PER_DB * (exp(PER_DB * x) - 1), mpf(0)


class Rice:
    def __init__(self, k):
        self.k = mpf(k)
        self.spread = mpf(5.5) / sqrt(1 + self.k)

    def density(self, x):
        k, y = self.k, exp(PER_DB * x)
        z = 2 * sqrt(k * (1 + k) * y)
        return PER_DB * (1 + k) * y * exp(-k - (1 + k) * y) * besseli(0, z)

    def slopes(self, x):
        k, y = self.k, exp(PER_DB * x)
        z = 2 * sqrt(k * (1 + k) * y)
        half_ratio = besseli(1, z) / besseli(0, z) / z if z > 0 else mpf(1) / 2
        return (PER_DB * ((1 + k) * y - 1 - z * z * half_ratio / 2),
                1 / (1 + k) - 1 - y + (1 + 2 * k) * y * 2 * half_ratio)


class Nakagami:
    def __init__(self, m):
        self.m = mpf(m)
        self.spread = mpf(5.5) / sqrt(max(self.m, mpf(1)))
        self.constant = PER_DB * exp(self.m * log(self.m) - loggamma(self.m))
        self.log_psi = log(self.m) - psi(0, self.m)

    def density(self, x):
        s = PER_DB * x
        return self.constant * exp(self.m * (s - exp(s)))

    def slopes(self, x):
        s = PER_DB * x
        return PER_DB * self.m * (exp(s) - 1), self.log_psi + 1 + s - exp(s)


class Lognormal:
    def __init__(self, sigma):
        self.sigma = self.spread = mpf(sigma)

    def density(self, x):
        return exp(-(x / self.sigma) ** 2 / 2) / (self.sigma * sqrt(2 * pi))

    def slopes(self, x):
        return x / self.sigma**2, (x / self.sigma) ** 2 / self.sigma - 1 / self.sigma


MODELS = {"rayleigh": Rayleigh, "rice": Rice, "nakagami": Nakagami, "lognormal": Lognormal}


def random_parameter(name):
    if name == "rice":
        return 0.0 if random.random() < 0.05 else 10 ** random.uniform(-6, 5)
    if name == "nakagami":
        return 10 ** random.uniform(-1 if random.random() < 0.1 else -0.301, 4)
    if name == "lognormal":
        return 10 ** random.uniform(-2, 1.5)
    return 0.0


def random_level(model):
    if random.random() < 0.4:
        return random.uniform(-100, 30)
    return random.gauss(0, 4) * float(model.spread)


def model_integral(model, low, high, gradient):
    def function(x):
        f = model.density(x)
        if not gradient:
            return [f]
        d_mean, d_parameter = model.slopes(x)
        return [f, f * d_mean, f * d_parameter]

    return integrate(function, mpf(low), mpf(high), mpf(0), model.spread,
                     lambda x: model.slopes(x)[0])


def marcum(count):
    print("a\tb\tP\tQ1\tlnP\tlnQ1")
    for _ in range(count):
        a = 10 ** random.uniform(-4, 3)
        b = 10 ** random.uniform(-4, 3) if random.random() < 0.3 else abs(random.gauss(a, 12))
        density = lambda x: [x * exp(-(x * x + mpf(a) ** 2) / 2) * besseli(0, a * x)]
        slope = lambda x: abs(x - a) + 1 / x
        p = integrate(density, mpf(0), mpf(b), mpf(max(a, 1)), mpf(1), slope)[0]
        q = integrate(density, mpf(b), inf, mpf(max(a, 1)), mpf(1), slope)[0]
        print(repr(a), repr(b), *[nstr(v, 20) for v in (p, q, ln(p, q), ln(q, p))], sep="\t")


def ln(tail, other):
    return log(tail) if tail < 0.5 else mpmath.log1p(-other)


def gamma(count):
    print("shape\tx\tP\tQ\tlnP\tlnQ")
    for _ in range(count):
        a = 10 ** random.uniform(-1, 5)
        x = a * 10 ** random.uniform(-6, 2) if random.random() < 0.4 else abs(
            a + random.gauss(0, 12) * a**0.5)
        p, q = gamma_tails(mpf(a), mpf(x))
        print(repr(a), repr(x), *[nstr(v, 20) for v in (p, q, ln(p, q), ln(q, p))], sep="\t")


def gamma_tails(a, x):
    function = lambda s: [exp(a * s - x * exp(s) - loggamma(a) + a * log(x))]
    slope = lambda s: a - x * exp(s)
    spread = 1 / sqrt(max(a, mpf(1)))
    start = log(a / x)
    return (integrate(function, -inf, mpf(0), start, spread, slope)[0],
            integrate(function, mpf(0), inf, start, spread, slope)[0])


def ratio(count):
    print("z\tratio\tcomplement\tderivative")
    mp.dps = 60
    for _ in range(count):
        z = 10 ** random.uniform(-6, 7)
        r = besseli(1, mpf(z)) / besseli(0, mpf(z))
        print(repr(z), *[nstr(v, 20) for v in (r, 1 - r, 1 - r / z - r * r)], sep="\t")


def log_minus_psi(count):
    print("m\tvalue\tderivative")
    mp.dps = 50
    for _ in range(count):
        m = 10 ** random.uniform(-1, 6)
        print(repr(m), nstr(log(mpf(m)) - psi(0, mpf(m)), 20), nstr(1 / mpf(m) - psi(1, mpf(m)), 20),
              sep="\t")


def tails(count):
    print("model\tparameter\tx_db\tlower\tupper\tln_lower\tln_upper\tln_density")
    for _ in range(count):
        name = random.choice(["rice", "nakagami", "rice", "nakagami", "lognormal"])
        parameter = random_parameter(name)
        model = MODELS[name](parameter)
        x = random_level(model)
        p = model_integral(model, -inf, x, False)[0]
        q = model_integral(model, x, inf, False)[0]
        print(name, repr(parameter), repr(x),
              *[nstr(v, 20) for v in (p, q, ln(p, q), ln(q, p), log(model.density(mpf(x))))],
              sep="\t")


def interval(count):
    print("model\tparameter\tlow_db\thigh_db\tln_p\td_mean_db\td_parameter")
    for _ in range(count):
        name = random.choice(["rice", "nakagami", "rice", "nakagami", "lognormal", "rayleigh"])
        parameter = random_parameter(name)
        model = MODELS[name](parameter)
        middle, width = random_level(model), 10 ** random.uniform(-4, 1.6)
        low, high = middle - width / 2, middle + width / 2
        if random.random() < 0.3:
            low, high = (-inf, high) if random.random() < 0.5 else (low, inf)
        p, _, d_parameter = model_integral(model, low, high, True)
        rest = mpf(0)
        if p > 0.5:  # what is left near 1 comes from outside
            pieces = [(-inf, low)] * (low > -inf) + [(high, inf)] * (high < inf)
            outside = [model_integral(model, *ends, True) for ends in pieces]
            rest = sum(piece[0] for piece in outside)
            d_parameter = -sum(piece[2] for piece in outside)
        d_mean = (model.density(mpf(low)) if low > -inf else 0) - (
            model.density(mpf(high)) if high < inf else 0)
        print(name, repr(parameter), *[repr(float(v)) for v in (low, high)],
              *[nstr(v, 20) for v in (ln(p, rest), d_mean / p, d_parameter / p)], sep="\t")


def outage(count):
    print("model\tparameter\tshadowing_db\tx_db\toutage\tcoverage")
    for _ in range(count):
        name = random.choice(["rayleigh", "rice", "nakagami"])
        parameter = random_parameter(name)
        while name == "rice" and parameter > 1e4:
            parameter = random_parameter(name)
        model = MODELS[name](parameter)
        sigma = 10 ** random.uniform(-1, 1.477)
        x = random.gauss(0, 5) * (sigma**2 + float(model.spread) ** 2) ** 0.5
        values = []
        for sign in (1, -1):
            # normal tail of (x - u)/sigma, lower for the outage
            tail = lambda u: erfc(sign * (u - x) / (sigma * sqrt(mpf(2)))) / 2
            log_slope = lambda u: -model.slopes(u)[0] - sign * exp(
                -((u - x) / sigma) ** 2 / 2) / (sigma * sqrt(2 * pi)) / tail(u)
            low, high = mpf(-2000), mpf(100)
            for _ in range(60):
                middle = (low + high) / 2
                low, high = (middle, high) if log_slope(middle) > 0 else (low, middle)
            values.append(integrate(lambda u: [model.density(u) * tail(u)], -inf, inf, low,
                                    min(model.spread, mpf(sigma)), log_slope)[0])
        print(name, repr(parameter), repr(sigma), repr(x), *[nstr(v, 20) for v in values],
              sep="\t")


def valley(count):
    """Deep Rice outages: a deep fade and a deep local mean compete, a valley between."""
    print("model\tparameter\tshadowing_db\tx_db\toutage")
    for _ in range(count):
        k = 10 ** random.uniform(0.8, 2.5)
        model = Rice(k)
        sigma = random.uniform(1, 6)
        # both of one order: exp(-K) y against exp(-(x/sigma)^2/2)
        x = -sigma * (2 * k) ** 0.5 * random.uniform(0.95, 1.4)
        value = lambda u: model.density(u) * erfc((u - x) / (sigma * sqrt(mpf(2)))) / 2
        step = min(model.spread, mpf(sigma)) * 1.5
        low = mpf(x) - 300
        edges = [low + step * i for i in range(int((40 - low) / step))]
        values = [value(u) for u in edges]
        greatest = max(values)
        total = mpf(0)
        for u, left, right in zip(edges, values, values[1:]):
            if max(left, right) > greatest * mpf(10) ** -22:
                total += sum(w * value(u + (1 + t) * step / 2) for t, w in NODES) * step / 2
        print("rice", repr(k), repr(sigma), repr(x), nstr(total, 20), sep="\t")


def level_integral(model, sigma, x, sign):
    """Tail (sign 1: lower, -1: upper) or density (0) of shadowed fading at the level x."""
    spread = sigma * sqrt(mpf(2))
    if sign:
        factor = lambda u: erfc(sign * (u - x) / spread) / 2
        log_slope = lambda u: -model.slopes(u)[0] - sign * exp(-((u - x) / spread) ** 2) / (
            spread * sqrt(pi)) / factor(u)
    else:
        factor = lambda u: exp(-((u - x) / spread) ** 2) / (spread * sqrt(pi))
        log_slope = lambda u: -model.slopes(u)[0] - (u - x) / mpf(sigma) ** 2
    low, high = mpf(-2000), mpf(300)
    for _ in range(60):
        middle = (low + high) / 2
        low, high = (middle, high) if log_slope(middle) > 0 else (low, middle)
    return integrate(lambda u: [model.density(u) * factor(u)], -inf, inf, low,
                     min(model.spread, mpf(sigma)), log_slope)[0]


def quantile(count):
    """Levels of given probabilities: secant on ln tail until the 25th digit stands still."""
    print("model\tparameter\tshadowing_db\tlower\tupper\tx_db\tln_density")
    for i in range(count):
        name = random.choice(["rayleigh", "rice", "nakagami"])
        # one peak in every integral: no deep fades of strong direct rays here
        parameter = {"rayleigh": 0.0, "rice": 10 ** random.uniform(-2, 0.6),
                     "nakagami": 10 ** random.uniform(-0.3, 2)}[name]
        model, sigma = MODELS[name](parameter), 10 ** random.uniform(-0.5, 1.2)
        tail, sign = 10 ** random.uniform(-12, -0.31), 1 if i % 2 else -1
        if i % 8 < 2:
            tail = 10 ** random.uniform(-30, -12)
        points = [mpf(-sign) * sigma, mpf(-sign) * 2 * sigma]
        errors = [log(level_integral(model, sigma, x, sign) / tail) for x in points]
        for _ in range(60):
            step = -errors[-1] * (points[-1] - points[-2]) / (errors[-1] - errors[-2])
            step = max(min(step, mpf(40)), mpf(-40))
            points.append(points[-1] + step)
            if abs(step) < mpf(10) ** -22 * (1 + abs(points[-1])):
                break
            errors.append(log(level_integral(model, sigma, points[-1], sign) / tail))
        else:
            raise ArithmeticError(f"{name} {parameter} {sigma} {tail}")
        ends = (tail, 1 - mpf(tail)) if sign == 1 else (1 - mpf(tail), tail)
        density = level_integral(model, sigma, points[-1], 0)
        print(name, repr(parameter), repr(sigma),
              *[repr(v) if isinstance(v, float) else nstr(v, 20) for v in ends],
              nstr(points[-1], 20), nstr(log(density), 20), sep="\t")


TABLES = {"quantile": (quantile, 60), "valley": (valley, 30), "marcum": (marcum, 300), "gamma": (gamma, 300), "ratio": (ratio, 200),
          "psi": (log_minus_psi, 100), "tails": (tails, 400), "interval": (interval, 500),
          "outage": (outage, 120)}

if __name__ == "__main__":
    function, rows = TABLES[sys.argv[1]]
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else 20
    random.seed(seed)
    print(f"# {rows} random points: python3 make_random.py {sys.argv[1]} {seed}, "
          f"mpmath {mpmath.__version__}.")
    print("# Independent of the program; how: see make_random.py.")
    function(rows)
