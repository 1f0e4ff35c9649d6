# SPDX-License-Identifier: GPL-3.0-or-later
"""Errors in both variables against SciPy's orthogonal distance regression, 200 random series.

usage: fit_odr.py DRIVER; exit 77 when SciPy is not there."""
import math
import random
import subprocess
import sys

try:
    import numpy as np
    from scipy.odr import ODR, Model, RealData
except ImportError:
    print("skipped: SciPy is not installed")
    sys.exit(77)

SERIES, DISPERSITY = 200, 1.4
random.seed(20240607)


def model(relation):
    """Function, its derivatives by the parameters and by z, and a start from the truth."""
    if relation in ("flory-fox", "ogawa"):
        f = 1 / math.sqrt(DISPERSITY) if relation == "ogawa" else 1.0
        return (lambda b, z: b[0] - b[1] * f * z,
                lambda b, z: np.vstack([np.ones_like(z), -f * z]),
                lambda b, z: -b[1] * f * np.ones_like(z))
    if relation == "ueberreiter-kanig":
        return (lambda b, z: b[0] / (1 + b[1] * z),
                lambda b, z: np.vstack([1 / (1 + b[1] * z), -b[0] * z / (1 + b[1] * z) ** 2]),
                lambda b, z: -b[0] * b[1] / (1 + b[1] * z) ** 2)
    return (lambda b, z: b[0] - b[1] * np.cbrt(z) ** 2,
            lambda b, z: np.vstack([np.ones_like(z), -np.cbrt(z) ** 2]),
            lambda b, z: -2 / 3 * b[1] / np.cbrt(z))


def truth(relation):
    tg_inf = random.uniform(250, 450)
    scale = {"flory-fox": 1.5e5, "ogawa": 1.5e5, "ueberreiter-kanig": 400, "odriscoll-sanayei": 1.2e4}
    return [tg_inf, scale[relation] * random.uniform(0.5, 1.5)]


def series(relation, b):
    f, n = model(relation)[0], random.randint(5, 14)
    mn = sorted(math.exp(random.uniform(math.log(1500), math.log(4e5))) for _ in range(n))
    r, s = random.uniform(0.01, 0.1), random.uniform(0.2, 2)
    z = np.array([1 / m for m in mn])
    y = f(b, z) + np.array([random.gauss(0, s) for _ in range(n)])
    sy = np.array([s * random.uniform(0.5, 2) for _ in range(n)])
    zc = z * np.array([1 + r * random.gauss(0, 1) for _ in range(n)])
    return zc, r * zc, y, sy


def main(driver):
    relations = ["flory-fox", "ueberreiter-kanig", "odriscoll-sanayei", "ogawa"]
    cases, text = [], []
    for i in range(SERIES):
        relation = relations[i % 4]
        b = truth(relation)
        z, sz, y, sy = series(relation, b)
        # The driver is given Mn; what it makes of it is what ODR gets.
        mn = [float(repr(1 / v)) for v in z]
        u = [m * (e / v) for m, e, v in zip(mn, sz, z)]
        z = np.array([1 / m for m in mn])
        cases.append((relation, b, z, sz, y, sy))
        text.append(f"{relation} stated none {len(z)}")
        text += [f"{m!r} {float(v)!r} {m * DISPERSITY!r} 2 {float(e)!r} 1 {float(t)!r}"
                 for m, v, e, t in zip(mn, u, sy, y)]
    out = subprocess.run([driver], input="\n".join(text) + "\n", text=True, check=True,
                         stdout=subprocess.PIPE).stdout.splitlines()
    assert len(out) == SERIES, f"{len(out)} answers to {SERIES} series"
    worst_b = worst_u = 0.0
    for (relation, b, z, sz, y, sy), line in zip(cases, out):
        if line.startswith("fail"):
            sys.exit(f"{relation}: {line}")
        got = [float(w) for w in line.split()]
        f, fb, fz = model(relation)
        odr = ODR(RealData(z, y, sx=sz, sy=sy), Model(f, fjacb=fb, fjacd=fz), beta0=b, sstol=1e-15,
                  partol=1e-15, maxit=1000)
        odr.set_job(deriv=2)
        odr.run()
        result = odr.restart(iter=100)  # ODRPACK stops early; go on where it stopped
        for j in range(2):
            db = abs(got[1 + j] / result.beta[j] - 1)
            du = abs(got[3 + j] / math.sqrt(result.cov_beta[j][j]) - 1)
            worst_b, worst_u = max(worst_b, db), max(worst_u, du)
            if not db < 1e-6 or not du < 1e-4:
                sys.exit(f"{relation}: parameter {j}: {got[1 + j]} +- {got[3 + j]}, ODR "
                         f"{result.beta[j]} +- {math.sqrt(result.cov_beta[j][j])}")
    print(f"{SERIES} series: parameters within {worst_b:.1e}, standard errors within {worst_u:.1e}")


main(sys.argv[1])
