"""Reference fields of filaments, written to retarded.json: Jefimenko's integrals with 40 digits, for tests of src/retarded.

    python3 test/oracle/retarded.py

Nothing here is a closed form: every filament's field is quadrature of
    4 pi eps E = int [(lam/R^3 + lam'/(c R^2)) R - s I'/(c^2 R)] ds + sum_ends (Q/R^3 + Q'/(c R^2)) R
    4 pi/mu B = int (I/R^3 + I'/(c R^2)) s x R ds,  4 pi eps phi = int lam/R ds + sum_ends Q/R,  4 pi/mu A = int s I/R ds
with I = f a(s) w(t - delay - p s), lam = f (p a w - a' q), Q = -+ int I, w a Gaussian or its derivative from t = 0 on (Jackson, Classical
Electrodynamics, 3rd ed., sec. 6.5, from memory). Inputs are doubles, taken as exact; places are seeded.
"""
import json
import random
from mpmath import mp, mpf, quad, sqrt, exp, erf, pi, cos, sin, acos, floor

mp.dps = 40
C = mpf(299792458)
MU = mpf(1.25663706127e-6)
EPS = 1 / (MU * C * C)


class Waveform:
    def __init__(self, kind, sigma, delay):
        self.kind, self.sigma, self.delay = kind, mpf(sigma), mpf(delay)
        self.spec = {"type": kind, "amplitude": 1, "sigma": sigma, "delay": delay}

    def q(self, t):
        if t < 0:
            return mpf(0)
        u, u0 = (t - self.delay) / self.sigma, -self.delay / self.sigma
        if self.kind == "gaussian":
            return self.sigma * sqrt(pi / 2) * (erf(u / sqrt(2)) - erf(u0 / sqrt(2)))
        return self.sigma * exp(mpf(1) / 2) * (exp(-u * u / 2) - exp(-u0 * u0 / 2))

    def w(self, t):
        if t < 0:
            return mpf(0)
        u = (t - self.delay) / self.sigma
        return exp(-u * u / 2) if self.kind == "gaussian" else -exp(mpf(1) / 2) * u * exp(-u * u / 2)

    def slope(self, t):
        if t < 0:
            return mpf(0)
        u = (t - self.delay) / self.sigma
        if self.kind == "gaussian":
            return -u * exp(-u * u / 2) / self.sigma
        return -exp(mpf(1) / 2) * (1 - u * u) * exp(-u * u / 2) / self.sigma


def add(a, b, f=1):
    return [x + f * y for x, y in zip(a, b)]


def dot(a, b):
    return sum(x * y for x, y in zip(a, b))


def cross(a, b):
    return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]


class Line:
    def __init__(self, a, b, s0):
        self.a, self.s0 = [mpf(x) for x in a], s0
        d = add([mpf(x) for x in b], self.a, -1)
        self.length = sqrt(dot(d, d))
        self.d = [x / self.length for x in d]

    def look(self, p, s):
        return add(add(p, self.a, -1), self.d, -(s - self.s0)), self.d

    def nearest(self, p):
        return self.s0 + dot(add(p, self.a, -1), self.d)


class Circle:
    """In the frame that src/scenario/curve.ts uses does not matter: the current is uniform."""

    def __init__(self, centre, normal, radius):
        self.c, self.radius, self.s0 = [mpf(x) for x in centre], mpf(radius), mpf(0)
        n = [mpf(x) for x in normal]
        size = sqrt(dot(n, n))
        n = [x / size for x in n]
        seed = [mpf(1), mpf(0), mpf(0)] if abs(n[0]) < 0.7 else [mpf(0), mpf(1), mpf(0)]
        v = cross(n, seed)
        size = sqrt(dot(v, v))
        self.v = [x / size for x in v]
        self.u = cross(self.v, n)
        self.length = 2 * pi * self.radius

    def look(self, p, s):
        c, d = cos(s / self.radius), sin(s / self.radius)
        x = add(add(self.c, self.u, self.radius * c), self.v, self.radius * d)
        return add(p, x, -1), add([c * y for y in self.v], self.u, -d)

    def nearest(self, p):
        r = add(p, self.c, -1)
        a, b = dot(r, self.u), dot(r, self.v)
        size = sqrt(a * a + b * b)
        if size == 0:
            return mpf(-1)
        angle = acos(a / size)
        return self.radius * (angle if b >= 0 else 2 * pi - angle)


def pieces_of(curve):
    if curve["kind"] == "circle":
        return [Circle(curve["centre"], curve["normal"], curve["radius"])]
    out, s0 = [], mpf(0)
    for a, b in zip(curve["points"], curve["points"][1:]):
        out.append(Line(a, b, s0))
        s0 += out[-1].length
    return out


class Profile:
    """a(s) = 1, e^(-s/d), e^(-(L - s)/d), or sin k(L/2 - |s - L/2|), with its slope; d and k are doubles."""

    def __init__(self, spec, length):
        self.spec, self.length = spec or {"kind": "one"}, length
        self.breaks = [length / 2] if self.spec["kind"] == "standing" else []

    def __call__(self, s):
        kind = self.spec["kind"]
        if kind == "one":
            return mpf(1), mpf(0)
        if kind == "standing":
            k, first = mpf(self.spec["wavenumber"]), s <= self.length / 2
            x = k * (s if first else self.length - s)
            return sin(x), (1 if first else -1) * k * cos(x)
        d = mpf(self.spec["decay"])
        forward = self.spec["direction"] == "forward"
        a = exp(-s / d) if forward else exp((s - self.length) / d)
        return a, (-1 if forward else 1) * a / d


def field(curve, terms, w, point, t, profile=None):
    p, t = [mpf(x) for x in point], mpf(t)
    pieces = pieces_of(curve)
    total = [mpf(0)] * 10
    length = pieces[-1].s0 + pieces[-1].length
    shape = Profile(profile, length)
    for f, delay, slowness in terms:
        f, delay = mpf(f), mpf(delay)
        for piece in pieces:
            def integrand(s):
                R, d = piece.look(p, s)
                r = sqrt(dot(R, R))
                u = t - delay - slowness * s - r / C
                a, da = shape(s)
                I, dI = f * a * w.w(u), f * a * w.slope(u)
                lam, dlam = slowness * I - f * da * w.q(u), slowness * dI - f * da * w.w(u)
                near, far = lam / r**3 + dlam / (C * r**2), dI / (C * C * r)
                mag = I / r**3 + dI / (C * r**2)
                x = cross(d, R)
                return [near * R[a] - far * d[a] for a in range(3)] + [mag * y for y in x] + [lam / r] + [y * I / r for y in d]

            ends = [piece.s0, piece.s0 + piece.length]
            near = piece.nearest(p)
            R, _ = piece.look(p, min(max(near, ends[0]), ends[1]))
            gap = sqrt(dot(R, R))
            # Stations around the nearest point at distances that double, so that each panel is smooth.
            stations = set(ends) | {s for s in shape.breaks if ends[0] < s < ends[1]}
            step = gap
            while step < piece.length:
                for sign in (-1, 1):
                    s = near + sign * step
                    if ends[0] < s < ends[1]:
                        stations.add(s)
                step *= 2
            if ends[0] < near < ends[1]:
                stations.add(near)
            stations = sorted(stations)
            for a, b in zip(stations, stations[1:]):
                total = add(total, gauss(integrand, a, b))
        if curve["kind"] == "circle":
            continue  # uniform: end charges cancel
        for s, sign in ((mpf(0), -1), (length, 1)):
            R, _ = (pieces[0] if sign < 0 else pieces[-1]).look(p, s)
            r = sqrt(dot(R, R))
            u = t - delay - slowness * s - r / C
            a, _ = shape(s)
            Q, dQ = sign * f * a * w.q(u), sign * f * a * w.w(u)
            g = Q / r**3 + dQ / (C * r**2)
            total = add(total, [g * x for x in R] + [mpf(0)] * 3 + [Q / r] + [mpf(0)] * 3)
    ke, km = 1 / (4 * pi * EPS), MU / (4 * pi)
    return [float(x * (ke if i < 3 or i == 6 else km)) for i, x in enumerate(total)]


def legendre_nodes(n):
    nodes = []
    for m in range(n):
        x = cos(pi * (m + mpf(3) / 4) / (n + mpf(1) / 2))
        for _ in range(8):
            p0, p1 = mpf(1), x
            for j in range(2, n + 1):
                p0, p1 = p1, ((2 * j - 1) * x * p1 - (j - 1) * p0) / j
            d = n * (x * p1 - p0) / (x * x - 1)
            x -= p1 / d
        nodes.append((x, 2 / ((1 - x * x) * d * d)))
    return nodes


NODES = legendre_nodes(40)


def gauss(f, a, b):
    half, middle = (b - a) / 2, (a + b) / 2
    total = [mpf(0)] * 10
    for x, weight in NODES:
        total = add(total, f(middle + half * x), half * weight)
    return total


def main():
    rng = random.Random(20260)
    one = lambda: rng.uniform(-1, 1)
    slow = 1 / C
    cases = []

    def case(name, curve, terms, w, point, t, profile=None):
        numbers = [[f, delay, float(p)] for f, delay, p in terms]
        value = field(curve, terms, w, point, t, profile)
        row = {"name": name, "curve": curve, "terms": numbers, "waveform": w.spec, "point": point, "t": t, "field": value}
        cases.append({**row, "profile": profile} if profile else row)
        print(name, point, t, value[:3])

    gauss_w = Waveform("gaussian", 1.9e-10, 1.8e-9)
    slope_w = Waveform("gaussianDerivative", 1.9e-10, 1.8e-9)
    for n in range(60):
        w = gauss_w if n % 2 else slope_w
        points = [[0.05 * one() for _ in range(3)] for _ in range(2 + n % 2)]
        length = float(sum(x.length for x in pieces_of({"kind": "line", "points": points})))
        a, b = points[-2], points[-1]
        along = [y - x for x, y in zip(a, b)]
        size = sum(x * x for x in along) ** 0.5
        side = cross([x / size for x in along], [0.6, 0.0, 0.8])
        where = ["anywhere", "close", "on axis ahead", "on axis behind", "near axis", "far"][n // 2 % 6]
        if where == "anywhere":
            point = [0.15 * one() for _ in range(3)]
        elif where == "close":
            gap = 10 ** rng.uniform(-6, -3)
            f = rng.uniform(0.1, 0.9)
            point = [x + f * d + gap * s for x, d, s in zip(a, along, side)]
        elif where == "on axis ahead":
            f = 1 + rng.uniform(0.2, 3)
            point = [x + f * d for x, d in zip(a, along)]
        elif where == "on axis behind":
            f = -rng.uniform(0.2, 3)
            point = [x + f * d for x, d in zip(a, along)]
        elif where == "near axis":
            f = 1 + rng.uniform(0.2, 3)
            gap = 10 ** rng.uniform(-6, -2)
            point = [x + f * d + gap * s for x, d, s in zip(a, along, side)]
        else:
            point = [5 * one() for _ in range(3)]
        point = [float(x) for x in point]
        distance = sum((x - y) ** 2 for x, y in zip(point, a)) ** 0.5
        t = 1.8e-9 + distance / 299792458 + 4e-10 * one()
        # A forward and a backward wave at the speed of light; the double nearest to 1/c is taken for 1/c by the tests.
        forward = [(1.0, 1e-10, slow), (-0.7, 1e-10 + length / 299792458, -slow)]
        case("full-speed waves, " + where, {"kind": "line", "points": points}, forward, w, point, t)
        if n % 3 == 0:
            case("uniform, " + where, {"kind": "line", "points": points}, [(1.0, 0.0, mpf(0))], w, point, t)
            p = mpf(float(1.6 / C))
            case("slow wave, " + where, {"kind": "line", "points": points}, [(1.0, 0.0, p)], w, point, t)
        if n % 6 == 0:
            normal = [one(), one(), one()]
            size = sum(x * x for x in normal) ** 0.5
            circle = {"kind": "circle", "centre": [0.01 * one() for _ in range(3)], "normal": [x / size for x in normal], "radius": 0.02}
            case("uniform circle, " + where, circle, [(1.0, 0.0, mpf(0))], w, point, t)
    # Profiles, with places as above: near the wire, and anywhere.
    for n in range(24):
        w = gauss_w if n % 2 else slope_w
        points = [[0.05 * one() for _ in range(3)] for _ in range(2 + n % 2)]
        gap = 10 ** rng.uniform(-4, -1)
        f = rng.uniform(0.1, 0.9)
        point = [float(a + f * (b - a) + gap * one()) for a, b in zip(points[0], points[1])]
        t = 1.8e-9 + 4e-10 * one()
        length = float(sum(x.length for x in pieces_of({"kind": "line", "points": points})))
        kind = ["standing", "forward", "backward"][n % 3]
        p = {"standing": mpf(0), "forward": slow, "backward": -mpf(float(1.6 / C))}[kind]
        delay = length * 1.7 / 299792458 if kind == "backward" else 0.0
        spec = {"kind": "standing", "wavenumber": rng.uniform(20, 90)} if kind == "standing" else {
            "kind": "decaying", "direction": kind, "decay": rng.uniform(0.02, 0.3)}
        case("profile " + kind, {"kind": "line", "points": points}, [(0.8, delay, p)], w, point, t, spec)
    with open(__file__.replace(".py", ".json"), "w") as out:
        json.dump({"speed": 299792458, "permeability": 1.25663706127e-6, "cases": cases}, out, indent=1)


if __name__ == "__main__":
    main()
