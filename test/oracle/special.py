"""Values of special functions written to special.json, from scipy, for the tests of radiation and of spectra.

    python3 test/oracle/special.py

  sphericalBessel  [x, [j_0(x) ... j_15(x)]]        scipy.special.spherical_jn
  sineCosine       [x, Si(x), Cin(x)]               scipy.special.sici; Cin(x) = ln x + gamma - Ci(x)
  bessel           [x, J_0(x), J_1(x)]              scipy.special.jv
  fullWave         directivity of a full-wave dipole: 4 max U / int U dOmega of (cos(pi cos t) + 1)^2/sin^2 t
  mutual           [a, b, d, M]  inductance of two coaxial circles (Maxwell): mu0 sqrt(ab) [(2/k - k) K - (2/k) E], H
  besselLoop       [x, int_0^pi J_1(x sin t)^2 sin t dt]   what a loop of circumference x wavelengths radiates
"""
import json
import numpy as np
from scipy.integrate import quad
from scipy.special import ellipe, ellipk, jv, sici, spherical_jn

tables = {"sphericalBessel": [], "sineCosine": [], "bessel": [], "besselLoop": []}
for x in [1e-9, 1e-3, 0.05, 0.0999, 0.1001, 0.7, 1, np.pi, 5.5, 2 * np.pi, 12, 15, 15.1, 16.3, 40, 1234.5]:
    tables["sphericalBessel"].append([x, [float(spherical_jn(l, x)) for l in range(16)]])
for x in [0.5 * np.pi, np.pi, 2 * np.pi, 4 * np.pi]:
    si, ci = sici(x)
    tables["sineCosine"].append([x, float(si), float(np.log(x) + np.euler_gamma - ci)])
for x in [0.1, 0.5, 1, 2, 5, 10]:
    tables["bessel"].append([x, float(jv(0, x)), float(jv(1, x))])
    value = quad(lambda t: jv(1, x * np.sin(t)) ** 2 * np.sin(t), 0, np.pi, epsabs=1e-15, epsrel=1e-13)[0]
    tables["besselLoop"].append([x, float(value)])
tables["mutual"] = []
for a, b, d in [(2e-3, 3e-3, 4e-3), (2e-3, 3e-3, 4e-2), (0.05, 0.03, 0.01)]:
    m = 4 * a * b / ((a + b) ** 2 + d * d)
    k = np.sqrt(m)
    mutual = 1.25663706127e-6 * np.sqrt(a * b) * ((2 / k - k) * ellipk(m) - 2 / k * ellipe(m))
    tables["mutual"].append([a, b, d, float(mutual)])


def full_wave(t):
    return (np.cos(np.pi * np.cos(t)) + 1) ** 2 / np.sin(t)


power = quad(full_wave, 0, np.pi, epsabs=1e-14, epsrel=1e-13)[0]
tables["fullWave"] = {"directivity": 2 * 4 / power, "integral": power}
with open(__file__.replace(".py", ".json"), "w") as out:
    json.dump(tables, out, indent=1)
    out.write("\n")
