# SPDX-License-Identifier: GPL-3.0-or-later
"""Nodes for mgf_average.c: python3 make_fading_nodes.py > fading_nodes.h, then clang-format.

x = 0, h, 2h ...: sinh^2 x and sinh 2x, 20 digits.
"""
from mpmath import mp, mpf, nstr, sinh

mp.dps = 30
STEP = mpf(7) / 50
COUNT = 71

print("/* SPDX-License-Identifier: GPL-3.0-or-later */")
print("/* Made by make_fading_nodes.py; what it is, see there. */")
print("#ifndef ROUTEFADE_PREDICT_FADING_NODES_H\n#define ROUTEFADE_PREDICT_FADING_NODES_H\n")
print(f"static const double node_step = {nstr(STEP, 20)};")
for name, function in (("node_square", lambda x: sinh(x) ** 2),
                       ("node_double", lambda x: sinh(2 * x))):
    numbers = ", ".join(nstr(function(k * STEP), 20) for k in range(COUNT))
    print(f"static const double {name}[] = {{{numbers}}};")
print("\n#endif")
