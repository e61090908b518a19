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

mp.mp.dps = 50
HERE = Path(__file__).parent
rng = random.Random(20240229)
# A generator of their own for later rows leaves the earlier ones, and the elementary functions, as they are.
later = random.Random(20240301)


def function_of(spec):
    """w(t) without the cut at t = 0, and an antiderivative of it."""
    if spec["type"] == "heidler":
        return heidler(spec["terms"])
    if spec["type"] == "table":
        return spline([mp.mpf(t) for t in spec["times"]], [mp.mpf(i) for i in spec["currents"]])
    if spec["type"] == "rampedSine":
        return ramped(*(mp.mpf(spec[key]) for key in ("amplitude", "frequency", "ramp", "hold")))
    # Inputs are doubles, taken exactly.
    p = {key: mp.mpf(value) for key, value in spec.items() if key != "type"}
    amplitude = p["amplitude"]
    if spec["type"] == "doubleExponential":
        a, b = p["alpha"], p["beta"]
        top = mp.log(b / a) / (b - a)
        k = amplitude / (mp.exp(-a * top) - mp.exp(-b * top))
        return (
            lambda t: k * (mp.exp(-a * t) - mp.exp(-b * t)),
            lambda t: k * (mp.exp(-b * t) / b - mp.exp(-a * t) / a),
        )
    d, s = p["delay"], p["sigma"]
    bell = lambda t: mp.exp(-(((t - d) / s) ** 2) / 2)
    if spec["type"] == "gaussian":
        return (
            lambda t: amplitude * bell(t),
            lambda t: amplitude * s * mp.sqrt(mp.pi / 2) * mp.erf((t - d) / (s * mp.sqrt(2))),
        )
    if spec["type"] == "gaussianDerivative":
        return (
            lambda t: -amplitude * mp.sqrt(mp.e) * (t - d) / s * bell(t),
            lambda t: amplitude * mp.sqrt(mp.e) * s * bell(t),
        )
    f = p["frequency"]
    turns = 2 * mp.pi * f * s
    # Antiderivative of e^(-u²/2 + iΩu): √(π/2) e^(-Ω²/2) erf((u - iΩ)/√2). Its imaginary part cancels like e^(-Ω²/2).
    digits = 60 + int(turns * turns)

    def antiderivative(t):
        with mp.workdps(digits):
            u = (t - d) / s
            return +(
                amplitude * s * mp.sqrt(mp.pi / 2) * mp.exp(-turns**2 / 2)
                * mp.im(mp.erf((u - 1j * turns) / mp.sqrt(2)))
            )

    return lambda t: amplitude * bell(t) * mp.sin(2 * mp.pi * f * (t - d)), antiderivative


def heidler(terms):
    """Sum of (I/eta) x^n/(1 + x^n) e^(-t/tau2), x = t/tau1; charge by tanh-sinh quadrature (t^n at 0 is no hindrance)."""
    terms = [[mp.mpf(term[key]) for key in ("amplitude", "tau1", "tau2", "n")] for term in terms]

    def w(t):
        total = mp.mpf(0)
        for i, a, b, n in terms:
            eta = mp.exp(-(a / b) * (n * b / a) ** (1 / n))
            x = (t / a) ** n if t != 0 else mp.mpf(0)
            total += i / eta * x / (1 + x) * mp.exp(-t / b)
        return total

    def antiderivative(t):
        cuts = sorted({mp.mpf(0), t} | {a * 2**k for _, a, _, _ in terms for k in range(-3, 9) if a * 2**k < t})
        with mp.workdps(30):
            return mp.quad(w, cuts) if t > 0 else mp.mpf(0)

    return w, antiderivative


def ramped(amplitude, f, ramp, hold):
    """A r(t) sin(2 pi f t), r(x) = 35x^4 - 84x^5 + 70x^6 - 20x^7 up, 1, and down; each piece integrated by quadrature."""
    rise, fall, end = ramp / f, (ramp + hold) / f, (2 * ramp + hold) / f
    step = lambda x: x**4 * (35 - 84 * x + 70 * x**2 - 20 * x**3)

    def w(t):
        # Taylor coefficients are taken at complex neighbours of t: the piece is that of the real part.
        r = mp.re(t)
        if r >= end:
            return mp.mpf(0) * t
        envelope = step(t * f / ramp) if r < rise else 1 if r < fall else step((end - t) * f / ramp)
        return amplitude * envelope * mp.sin(2 * mp.pi * f * t)

    def antiderivative(t):
        t = min(t, end)
        cuts = sorted({mp.mpf(0), t} | {c for c in (rise, fall) if c < t} | {k / f for k in range(1, int(t * f) + 1) if k / f < t})
        with mp.workdps(30):
            return mp.quad(w, cuts) if t > 0 else mp.mpf(0)

    return w, antiderivative


def spline(times, currents):
    """The natural cubic spline, its second derivatives from the full linear system; 0 outside."""
    n = len(times)
    h = [b - a for a, b in zip(times, times[1:])]
    matrix, right = mp.eye(n), mp.zeros(n, 1)
    for k in range(1, n - 1):
        matrix[k, k - 1], matrix[k, k], matrix[k, k + 1] = h[k - 1] / 6, (h[k - 1] + h[k]) / 3, h[k] / 6
        right[k] = (currents[k + 1] - currents[k]) / h[k] - (currents[k] - currents[k - 1]) / h[k - 1]
    bend = mp.lu_solve(matrix, right)

    def piece(k, t):
        a, b = (times[k + 1] - t) / h[k], (t - times[k]) / h[k]
        return a * currents[k] + b * currents[k + 1] + ((a**3 - a) * bend[k] + (b**3 - b) * bend[k + 1]) * h[k] ** 2 / 6

    def w(t):
        r = mp.re(t)
        if r < times[0] or r >= times[-1]:
            return mp.mpf(0) * t
        return piece(max(k for k in range(n - 1) if times[k] <= r), t)

    def antiderivative(t):
        # Gauss-Legendre is exact for the cubic of each piece.
        cuts = [x for x in times if x < t] + [min(t, times[-1])]
        return sum((mp.quad(lambda x, k=k: piece(k, x), [a, b], method="gauss-legendre")
                    for k, (a, b) in enumerate(zip(cuts, cuts[1:]))), mp.mpf(0))

    return w, antiderivative


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
