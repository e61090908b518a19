"""Reference values of the waveforms, their charge and derivatives, and of the elementary functions.

Fifty digits by mpmath from the definitions: charge by the closed antiderivative written here independently, and checked
against adaptive quadrature (by quadrature alone where there is none); derivatives by automatic differentiation (Taylor
coefficients).

    python3 test/oracle/waveforms.py      writes waveforms.json and elementary.json beside itself
"""

import json
import random
from pathlib import Path

import mpmath as mp

from pulses import function_of

mp.mp.dps = 50
HERE = Path(__file__).parent
rng = random.Random(20240229)
# A generator of their own for later rows leaves the earlier ones, and the elementary functions, as they are.
later = random.Random(20240301)


def scale_of(spec):
    """A step of the Taylor expansion, a small part of what the pulse varies over."""
    if spec["type"] == "heidler":
        return min(mp.mpf(term["tau1"]) for term in spec["terms"]) / 1000
    if spec["type"] == "rampedSine":
        return 1 / (2 * mp.pi * mp.mpf(spec["frequency"])) / 1000
    if spec["type"] == "table":
        return (mp.mpf(spec["times"][1]) - mp.mpf(spec["times"][0])) / 10**6
    scale = mp.mpf(spec.get("sigma") or 1 / mp.mpf(spec["beta"]))
    if spec["type"] == "modulatedGaussian":
        scale = 1 / (1 / scale + 2 * mp.pi * mp.mpf(spec["frequency"]))
    return scale


def row(spec, t):
    w, antiderivative = function_of(spec)
    t = mp.mpf(t)
    # A local step keeps the Taylor coefficients of well-scaled size.
    scale = scale_of(spec)
    coefficients = mp.taylor(lambda x: w(t + x * scale), 0, 4)
    derivatives = [c * mp.factorial(n) / scale**n for n, c in enumerate(coefficients)]
    return [antiderivative(t) - antiderivative(mp.mpf(0)), *derivatives]


SPECS = [
    {"type": "gaussian", "amplitude": 1.0, "delay": 0.9e-9, "sigma": 0.1e-9},
    {"type": "gaussian", "amplitude": -3.7, "delay": 2.1e-6, "sigma": 0.7e-6},
    {"type": "gaussianDerivative", "amplitude": 2.5, "delay": 0.94799e-9, "sigma": 0.189598e-9},
    {"type": "gaussianDerivative", "amplitude": 1.0, "delay": 9e-3, "sigma": 1e-3},
    {"type": "modulatedGaussian", "amplitude": 1.0, "delay": 4.5e-9, "sigma": 0.5e-9, "frequency": 2.4e9},
    {"type": "modulatedGaussian", "amplitude": 0.3, "delay": 2e-9, "sigma": 0.25e-9, "frequency": 0.1e9},
    {"type": "modulatedGaussian", "amplitude": 1.0, "delay": 10e-9, "sigma": 1.1e-9, "frequency": 3.1e9},
    {"type": "doubleExponential", "amplitude": 30e3, "alpha": 1.4e4, "beta": 6e6},
    {"type": "doubleExponential", "amplitude": 5.0, "alpha": 4e7, "beta": 6e8},
    {"type": "doubleExponential", "amplitude": 1.0, "alpha": 1e9, "beta": 1.0001e9},
    {"type": "heidler", "terms": [
        {"amplitude": 16.6, "tau1": 1.1e-9, "tau2": 2e-9, "n": 1.8},
        {"amplitude": 9.3, "tau1": 12e-9, "tau2": 37e-9, "n": 1.8},
    ]},
    {"type": "heidler", "terms": [{"amplitude": 200e3, "tau1": 19e-6, "tau2": 485e-6, "n": 10}]},
    {"type": "rampedSine", "amplitude": 2.0, "frequency": 1e9, "ramp": 3, "hold": 4.3},
    {"type": "rampedSine", "amplitude": 1.0, "frequency": 50e6, "ramp": 1, "hold": 0},
]
_times = [0.0]
while len(_times) < 30:
    _times.append(_times[-1] + later.uniform(0.5, 1.5) * 1e-10)
SPECS.append({"type": "table", "times": _times, "currents": [0.0] + [later.uniform(-1, 1) for _ in range(28)] + [0.0]})


def instants(spec):
    if spec["type"] == "doubleExponential":
        return [0.0] + [float(10 ** rng.uniform(-2, 1) / rng.choice([spec["alpha"], spec["beta"]])) for _ in range(40)]
    if spec["type"] == "heidler":
        return [float(10 ** later.uniform(-2.5, 1) * later.choice(spec["terms"])[later.choice(["tau1", "tau2"])]) for _ in range(40)]
    if spec["type"] == "rampedSine":
        return [later.uniform(0, 1.02) * (2 * spec["ramp"] + spec["hold"]) / spec["frequency"] for _ in range(40)]
    if spec["type"] == "table":
        return [later.uniform(0, 1.02) * spec["times"][-1] for _ in range(40)]
    d, s = spec["delay"], spec["sigma"]
    return [0.0, d] + [max(0.0, d + s * rng.uniform(-9, 9)) for _ in range(40)]


def check_charge(spec, t, charge):
    """The antiderivative against quadrature of w, to 20 digits of the largest charge."""
    if spec["type"] in ("heidler", "rampedSine", "table"):
        return  # the charge is quadrature already
    w, _ = function_of(spec)
    pieces = 1 + int(40 * (1 + spec.get("frequency", 0) * t))
    points = [mp.mpf(t) * k / pieces for k in range(pieces + 1)]
    assert abs(mp.quad(w, points) - charge) <= mp.mpf(10) ** -20 * abs(spec["amplitude"]) * t, spec


cases = []
for spec in SPECS:
    rows = [(t, row(spec, t)) for t in instants(spec)]
    for t, values in rows[2:5]:
        check_charge(spec, t, values[0])
    cases.append({"spec": spec, "rows": [[t, *map(float, values)] for t, values in rows]})
(HERE / "waveforms.json").write_text(json.dumps(cases, indent=0) + "\n")


def doubles(low, high, count, signed=True):
    sign = lambda: rng.choice([-1, 1]) if signed else 1
    return [sign() * 10 ** rng.uniform(low, high) for _ in range(count)]


FUNCTIONS = {
    "exp": (mp.exp, doubles(-9, 2.84, 200)),
    "log": (mp.log, doubles(-300, 300, 100, False) + [1 + x for x in doubles(-9, -1, 100)]),
    "expm1": (mp.expm1, doubles(-12, 1.5, 200)),
    "log1p": (mp.log1p, doubles(-12, -0.01, 100) + doubles(-2, 9, 100, False)),
    "sin": (mp.sin, doubles(-9, 6, 200)),
    "cos": (mp.cos, doubles(-9, 6, 200)),
    "asin": (mp.asin, doubles(-9, 0, 200)),
}
values = {name: [[x, float(f(mp.mpf(x)))] for x in points] for name, (f, points) in FUNCTIONS.items()}
pairs = [(x, y) for x, y in zip(doubles(-9, 9, 200), doubles(-9, 9, 200))]
values["atan2"] = [[y, x, float(mp.atan2(mp.mpf(y), mp.mpf(x)))] for x, y in pairs]
pairs = [(x, y) for x, y in zip(doubles(-3, 3, 200, False), doubles(-2, 1.5, 200))]
values["pow"] = [[x, y, float(mp.power(mp.mpf(x), mp.mpf(y)))] for x, y in pairs]

# w(z) = e^(-z²) erfc(-iz) for real parts of either sign and imaginary parts ≥ 0
points = [mp.mpc(x, y) for x, y in zip(doubles(-6, 3, 400), doubles(-6, 3, 400, False))]
points += [mp.mpc(x, 0) for x in doubles(-3, 1, 50)] + [mp.mpc(0, y) for y in doubles(-3, 3, 50, False)]
faddeeva = []
for z in points:
    with mp.workdps(60):
        # Far out, e^(-z²) and erfc are huge and tiny: the continued fraction of DLMF 7.9 is the same function there.
        if abs(z) > 30:
            tail = mp.mpf(0)
            for n in range(200, 0, -1):
                tail = mp.mpf(n) / 2 / (z - tail)
            w = 1j / mp.sqrt(mp.pi) / (z - tail)
        else:
            w = mp.exp(-z * z) * mp.erfc(-1j * z)
    faddeeva.append([float(mp.re(z)), float(mp.im(z)), float(mp.re(w)), float(mp.im(w))])
values["faddeeva"] = faddeeva
(HERE / "elementary.json").write_text(json.dumps(values, indent=0) + "\n")
