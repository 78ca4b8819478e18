#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Times maximum likelihood fits against scipy.stats, alternately in one run.

usage: fit_against_scipy.py BUILD/tests/bench/bench_fit [COUNT...]

Prints, for each number of readings and each round, scipy's processor seconds over ours and our
log-likelihood less scipy's (of the same amplitudes; not negative if ours is as good).
"""
import subprocess
import sys
import tempfile
import time

import numpy
from scipy import stats

ROUNDS = 3
K = 3.0


def ours(program, levels_db):
    with tempfile.NamedTemporaryFile() as file:
        levels_db.tofile(file.name)
        lines = subprocess.run([program, file.name], check=True, capture_output=True, text=True)
    rows = (line.split() for line in lines.stdout.splitlines())
    return {row[0]: (float(row[1]), float(row[2])) for row in rows}


def scipys(distribution, amplitudes):
    start = time.process_time()
    parameters = distribution.fit(amplitudes, floc=0)
    seconds = time.process_time() - start
    return seconds, distribution.logpdf(amplitudes, *parameters).sum()


def main():
    program = sys.argv[1]
    counts = [int(text) for text in sys.argv[2:]] or [1000, 10000, 100000]
    generator = numpy.random.default_rng(457)
    for count in counts:
        for _ in range(ROUNDS):
            amplitudes = stats.rice.rvs(numpy.sqrt(2 * K), scale=numpy.sqrt(0.5 / (1 + K)),
                                        size=count, random_state=generator)
            # d(dB)/dr = 20 / (r ln 10): from densities of levels to those of amplitudes
            jacobian = numpy.log(20 / (amplitudes * numpy.log(10))).sum()
            mine = ours(program, 20 * numpy.log10(amplitudes))
            for name, distribution in (("rice", stats.rice), ("nakagami", stats.nakagami)):
                seconds, likelihood = scipys(distribution, amplitudes)
                print(f"{count} readings, {name}: {seconds / mine[name][0]:.0f} times as fast, "
                      f"{mine[name][0] * 1e3:.2f} ms, log-likelihood higher by "
                      f"{mine[name][1] + jacobian - likelihood:.3g}", flush=True)
            for name, (seconds, _likelihood) in mine.items():
                if name.startswith("tally"):
                    print(f"{count} readings, {name}, three models: {seconds * 1e3:.2f} ms")


if __name__ == "__main__":
    main()
