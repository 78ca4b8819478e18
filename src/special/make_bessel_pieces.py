# SPDX-License-Identifier: GPL-3.0-or-later
"""Polynomials for bessel.c: python3 make_bessel_pieces.py > bessel_pieces.h, then clang-format.

On each piece the functions sqrt(z) exp(-z) I0(z) and z (1 - I1(z)/I0(z)), both smooth, are
interpolated at Chebyshev nodes with mpmath in 40-digit arithmetic, and printed as powers of
the variable that runs from -1 to 1 over the piece: z below 8, 1/z above. What is left out is
below 1e-16 of either function.
"""
import mpmath
from mpmath import besseli, cos, exp, mp, mpf, nstr, pi, sqrt

mp.dps = 40


def scaled_i0(z):
    return sqrt(z) * besseli(0, z) * exp(-z)


def scaled_complement(z):
    return z * (1 - besseli(1, z) / besseli(0, z))


def powers(function, low, high, degree):
    count = degree + 1
    angles = [pi * (k + mpf(1) / 2) / count for k in range(count)]
    values = [function((low + high) / 2 + (high - low) / 2 * cos(t)) for t in angles]
    chebyshev = [2 * sum(v * cos(j * t) for v, t in zip(values, angles)) / count
                 for j in range(count)]
    chebyshev[0] /= 2
    before, current = [mpf(1)], [mpf(0), mpf(1)]
    total = [mpf(0)] * (count + 1)
    for c in chebyshev:
        for i, b in enumerate(before):
            total[i] += c * b
        following = [mpf(0)] + [2 * b for b in current]
        for i, b in enumerate(before):
            following[i] -= b
        before, current = current, following
    return total[:count]


def inverted(function, limit):
    return lambda u: function(1 / u) if u > 0 else limit


PIECES = [("2_to_4", mpf(2), mpf(4), 19, False), ("4_to_8", mpf(4), mpf(8), 19, False),
          ("8_to_20", mpf(1) / 20, mpf(1) / 8, 17, True), ("above_20", mpf(0), mpf(1) / 20, 11, True)]

print("/* SPDX-License-Identifier: GPL-3.0-or-later */")
print(f"/* Made by make_bessel_pieces.py with mpmath {mpmath.__version__}; what it is, see there. */")
print("#ifndef ROUTEFADE_SPECIAL_BESSEL_PIECES_H\n#define ROUTEFADE_SPECIAL_BESSEL_PIECES_H\n")
for name, low, high, degree, over in PIECES:
    for label, function, limit in (("i0", scaled_i0, 1 / sqrt(2 * pi)),
                                   ("complement", scaled_complement, mpf(1) / 2)):
        wanted = inverted(function, limit) if over else function
        numbers = ", ".join(nstr(c, 20) for c in powers(wanted, low, high, degree))
        print(f"static const double {label}_{name}[] = {{{numbers}}};")
print("\n#endif")
