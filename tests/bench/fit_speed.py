# SPDX-License-Identifier: GPL-3.0-or-later
"""The fit beside SciPy's orthogonal distance regression on the same series, in one run.

usage: /usr/bin/python3 fit_speed.py BUILD/tests/bench/fit_speed"""
import subprocess
import sys
import time

import numpy as np
from scipy.odr import ODR, Model, RealData

mn = np.array([1930, 4010, 7690, 16600, 35900, 68800, 155000, 293000.0])
tg = np.array([[297.78, 298.61, 298.82], [343.73, 343.39, 343.66], [364.79, 365.64, 366.13],
               [376.31, 376.63, 376.47], [382.37, 383.14, 381.71], [385.49, 385.84, 385.86],
               [386.42, 387.43, 386.92], [388.00, 387.97, 387.13]])
sw = np.sqrt(tg.var(axis=1, ddof=1).mean() / 3)
line = Model(lambda b, x: b[0] - b[1] * x, fjacb=lambda b, x: np.vstack([np.ones_like(x), -x]),
             fjacd=lambda b, x: -b[1] * np.ones_like(x))


def odr(i):
    z, y = 1 / mn[i], tg.mean(axis=1)[i]
    fit = ODR(RealData(z, y, sx=0.05 * z, sy=sw), line, beta0=[388, 1.8e5])
    fit.set_job(deriv=2)
    return fit.run().beta


def best(function, repeats):
    times = []
    for _ in range(5):
        start = time.perf_counter()
        for _ in range(repeats):
            function()
        times.append((time.perf_counter() - start) / repeats)
    return min(times)


resamples, scipy_resamples = 10000, 500
ours = {k: float(v) for k, v in (l.split() for l in subprocess.run(
    [sys.argv[1], str(resamples)], check=True, text=True, stdout=subprocess.PIPE).stdout.splitlines())}
rng = np.random.default_rng(1)
draws = [rng.integers(0, 8, 8) for _ in range(scipy_resamples)]
draws = [d for d in draws if len(set(d)) >= 3]
one = best(lambda: odr(np.arange(8)), 50)
many = best(lambda: [odr(d) for d in draws], 1) / len(draws) * resamples
print(f"SciPy ODR, one fit                  {one:9.2e} s")
for name in ("fit", "fit_with_diagnostics", "fit_with_diagnostics_and_comparison"):
    print(f"{name:35} {ours[name]:9.2e} s   SciPy's one fit takes {one / ours[name]:.2g} times as long")
print(f"SciPy ODR, {resamples} resamples         {many:9.2e} s")
name = f"resamples_{resamples}"
print(f"{name:35} {ours[name]:9.2e} s   SciPy takes {many / ours[name]:.2g} times as long")
