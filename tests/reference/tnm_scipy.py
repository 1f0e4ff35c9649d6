# SPDX-License-Identifier: GPL-3.0-or-later
"""The relaxation model of `chainend simulate` integrated another way, with SciPy.

Here exp(-z^beta) is a non-negative sum of exponentials found by NNLS, each exponential is one
differential equation in time, and the stiff system is solved by Radau's method to a tight tolerance; curves
are read with SciPy's splines and root finder. Equations: Tool 1946, Narayanaswamy 1971, Moynihan et
al. 1976 as in chainend-methods(7) (from memory). Only the parameters are shared with the program.

usage: tnm_scipy.py CHAINEND; exit 77 when NumPy or SciPy is not there."""
import json
import os
import subprocess
import sys
import tempfile

try:
    import numpy as np
    from scipy.integrate import solve_ivp
    from scipy.interpolate import CubicSpline
    from scipy.optimize import brentq, minimize_scalar, nnls
except ImportError:
    print("skipped: NumPy or SciPy is not installed")
    sys.exit(77)

# -ln A, h, x, beta: as published (see chainend-methods(7)); cooling and heating rate, K/min;
# ageing K below the 100-s temperature and its hours
CASES = {
    "pvac": (224.5, 71000.0, 0.35, 0.57, [(10, 10, None), (1, 10, None)]),
    "ps": (211.2, 80000.0, 0.43, 0.74, [(40, 10, None), (10, 10, None), (20, 20, None), (10, 10, (17.7, 1.0))]),
    "b2o3": (75.6, 45000.0, 0.40, 0.65, [(10, 10, None)]),
}
# reference K; glass J/(g K), its slope; step, its slope: flat lines, and lines as polymers have them
LINES = ((373.15, 1.5, 0.0, 0.3, 0.0), (373.15, 1.6, 0.0035, 0.3, -0.001))
TOLERANCE_K = 0.02


def modes(beta):
    """exp(-z^beta) = sum g exp(-z/lam), g >= 0, sum g = 1."""
    lam = np.logspace(-7, 2, 91)
    z = np.concatenate([[0.0], np.logspace(-8, np.log10(30.0 ** (1 / beta)), 800)])
    a = np.exp(-z[:, None] / lam[None, :])
    y = np.exp(-z ** beta)
    weight = np.ones_like(z)
    weight[0] = 1e4
    g, _ = nnls(a * weight[:, None], y * weight, maxiter=10000)
    misfit = np.max(np.abs(a @ g - y))
    assert misfit < 3e-4, f"sum of exponentials is off by {misfit}"
    keep = g > 0
    return g[keep] / g[keep].sum(), lam[keep]


def segment(glass, spectrum, state, from_K, to_K, seconds, points):
    ln_a, h, x, _ = glass
    g, lam = spectrum
    rate = (to_K - from_K) / seconds

    def slope(t, u):
        temperature = from_K + rate * t
        tau = np.exp(ln_a + x * h / temperature + (1 - x) * h / (g @ u))
        return (temperature - u) / (tau * lam)

    def jacobian(t, u):
        temperature, tf = from_K + rate * t, g @ u
        tau = np.exp(ln_a + x * h / temperature + (1 - x) * h / tf)
        return (np.outer((temperature - u) / (tau * lam), (1 - x) * h / tf ** 2 * g)
                - np.diag(1 / (tau * lam)))

    out = solve_ivp(slope, (0, seconds), state, method="Radau", jac=jacobian, t_eval=points,
                    rtol=1e-10, atol=1e-8)
    assert out.success, out.message
    return out.y


def heating(glass, cool, heat, age):
    """Temperature, fictive temperature and dTf/dT on the heating, after a history that starts in equilibrium."""
    ln_a, h, x, beta = glass
    tg = h / (np.log(100.0) - ln_a)
    high, low = tg + 30.0, tg - 90.0
    spectrum = modes(beta)
    state = np.full(len(spectrum[0]), high)
    at = high
    if age is not None:
        stop, hours = tg - age[0], age[1]
        for a, b, s in ((at, stop, (at - stop) / cool * 60), (stop, stop, hours * 3600)):
            state = segment(glass, spectrum, state, a, b, s, [s])[:, -1]
        at = stop
    s = (at - low) / cool * 60
    state = segment(glass, spectrum, state, at, low, s, [s])[:, -1]
    temperature = np.linspace(low, high, 2401)
    s = (high - low) / heat * 60
    u = segment(glass, spectrum, state, low, high, s, (temperature - low) / heat * 60)
    # dTf/dT from the equations themselves: differences of solver output would be too rough for an inflection
    g, lam = spectrum
    fictive = g @ u
    tau = np.exp(ln_a + x * h / temperature + (1 - x) * h / fictive)
    rate = g @ ((temperature - u) / (tau * lam[:, None])) * 60 / heat
    return temperature, fictive, rate, tg


def landmarks(temperature, fictive, rate, lines):
    """Of the heat capacity Cp,g(T) + dCp(Tf) dTf/dT against the lines of glass and liquid."""
    ref, cp, slope_glass, step, slope_step = lines

    def glass(t):
        return cp + slope_glass * (t - ref)

    def jump(t):
        return step + slope_step * (t - ref)

    c = CubicSpline(temperature, glass(temperature) + jump(fictive) * rate)
    slope = c.derivative()

    def half(t):
        return (c(t) - glass(t)) / jump(t) - 0.5

    y = half(temperature)
    first = np.argmax(y >= 0)
    k = np.argmax(slope(temperature))
    ti = minimize_scalar(lambda t: -slope(t), bounds=(temperature[k - 2], temperature[k + 2]),
                         method="bounded", options={"xatol": 1e-6}).x
    return {"half_step_K": brentq(half, temperature[first - 1], temperature[first]),
            "onset_K": ti - (c(ti) - glass(ti)) / (slope(ti) - slope_glass),
            "end_K": ti + (glass(ti) + jump(ti) - c(ti)) / (slope(ti) - slope_glass - slope_step),
            "inflection_K": ti, "fictive_K": fictive[0], "peak": y.max() + 0.5}


def program(chainend, material, cool, heat, age, tg, lines):
    high, low = tg + 30.0, tg - 90.0
    steps = []
    if age is not None:
        steps = ["--ramp", f"{tg - age[0]!r}K@{cool}", "--hold", f"{age[1] * 3600}s"]
    with tempfile.TemporaryDirectory() as folder:
        truth = os.path.join(folder, "truth.json")
        subprocess.run([chainend, "simulate", "run", "--material", material, "--start", f"{high!r}K", *steps,
                        "--reference", f"{lines[0]}K", "--cp-glass", str(lines[1]), "--slope-glass", str(lines[2]),
                        "--step", str(lines[3]), "--slope-step", str(lines[4]),
                        "--ramp", f"{low!r}K@{cool}", "--ramp", f"{high!r}K@{heat}", "--truth", truth,
                        "-o", os.path.join(folder, "run.csv")], check=True)
        with open(truth, encoding="utf-8") as f:
            ramps = json.load(f)["ramps"]
    return [r for r in ramps if r["kind"] == "heating"][-1]


bad = 0
for material, (minus_ln_a, h, x, beta, histories) in CASES.items():
    for cool, heat, age in histories:
        temperature, fictive, rate, tg = heating((-minus_ln_a, h, x, beta), cool, heat, age)
        for lines in LINES:
            reference = landmarks(temperature, fictive, rate, lines)
            ours = program(sys.argv[1], material, cool, heat, age, tg, lines)
            for key, value in reference.items():
                allowed = 0.005 * value if key == "peak" else TOLERANCE_K
                wrong = not abs(ours[key] - value) <= allowed
                bad += wrong
                print(f"{'WRONG' if wrong else 'ok   '} {material:5} {cool:3}/{heat:2} {'aged' if age else '    '} "
                      f"{'sloped' if lines[4] else 'flat':6} {key:12} {ours[key]:10.4f} {value:10.4f} {ours[key] - value:+.4f}")
sys.exit(1 if bad else 0)
