"""Waveforms with fifty digits from their definitions, for the scripts beside this one."""

import mpmath as mp

mp.mp.dps = 50


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


def spline_bend(times, currents):
    """Widths of the intervals, and second derivatives of the natural cubic spline from the full linear system."""
    n = len(times)
    h = [b - a for a, b in zip(times, times[1:])]
    matrix, right = mp.eye(n), mp.zeros(n, 1)
    for k in range(1, n - 1):
        matrix[k, k - 1], matrix[k, k], matrix[k, k + 1] = h[k - 1] / 6, (h[k - 1] + h[k]) / 3, h[k] / 6
        right[k] = (currents[k + 1] - currents[k]) / h[k] - (currents[k] - currents[k - 1]) / h[k - 1]
    return h, mp.lu_solve(matrix, right)


def spline(times, currents):
    """The natural cubic spline; 0 outside."""
    h, bend = spline_bend(times, currents)

    def piece(k, t):
        a, b = (times[k + 1] - t) / h[k], (t - times[k]) / h[k]
        return a * currents[k] + b * currents[k + 1] + ((a**3 - a) * bend[k] + (b**3 - b) * bend[k + 1]) * h[k] ** 2 / 6

    def w(t):
        r = mp.re(t)
        if r < times[0] or r >= times[-1]:
            return mp.mpf(0) * t
        return piece(max(k for k in range(len(h)) if times[k] <= r), t)

    def antiderivative(t):
        # Gauss-Legendre is exact for the cubic of each piece.
        cuts = [x for x in times if x < t] + [min(t, times[-1])]
        return sum((mp.quad(lambda x, k=k: piece(k, x), [a, b], method="gauss-legendre")
                    for k, (a, b) in enumerate(zip(cuts, cuts[1:]))), mp.mpf(0))

    return w, antiderivative
