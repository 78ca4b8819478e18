# SPDX-License-Identifier: GPL-3.0-or-later
"""Gauss-Legendre nodes and weights at the working precision, for the scripts beside."""
import mpmath
from mpmath import mpf, pi


def gauss_legendre(n):
    nodes = []
    for k in range(1, n + 1):
        x = mpmath.cos(pi * (k - mpf(1) / 4) / (n + mpf(1) / 2))
        for _ in range(8):
            p0, p1 = mpf(1), x
            for j in range(2, n + 1):
                p0, p1 = p1, ((2 * j - 1) * x * p1 - (j - 1) * p0) / j
            slope = n * (x * p1 - p0) / (x * x - 1)
            x -= p1 / slope
        nodes.append((x, 2 / ((1 - x * x) * slope * slope)))
    return nodes
