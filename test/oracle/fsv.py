"""
Feature selective validation with numpy's FFT, written from the standard's formulas independently of
src/compare/featureSelective.ts: IEEE Std 1597.1-2008, Annex; Duffy et al., IEEE Trans. EMC 48 (2006) 449 (from memory).

    python3 test/oracle/fsv.py      writes fsv.json beside itself
"""
import json
from pathlib import Path

import numpy as np


def split(signal, ib):
    spectrum = np.fft.fft(signal)
    n = len(signal)
    k = np.minimum(np.arange(n), n - np.arange(n))
    trend = k < 4
    ramp = np.clip((ib + 3 - k) / 6.0, 0, 1)
    low = np.where(trend, 0, ramp)
    high = np.where(trend, 0, 1 - ramp)
    return [np.fft.ifft(spectrum * w).real for w in (trend * 1.0, low, high)]


def break_line(signal):
    magnitude = np.abs(np.fft.rfft(signal))
    magnitude[:4] = 0
    return int(np.argmax(np.cumsum(magnitude) >= 0.4 * magnitude.sum())) + 5


def ratio(a, b, factor):
    a, b = np.abs(a), np.abs(b)
    return (a - b) / (factor * np.mean(a + b))


def fsv(a, b):
    ib = min(break_line(a), break_line(b))
    dc1, lo1, hi1 = split(a, ib)
    dc2, lo2, hi2 = split(b, ib)
    trend = np.abs(ratio(dc1, dc2, 1))
    adm = np.abs(ratio(lo1, lo2, 1)) + trend * np.exp(trend)
    g = np.gradient
    f = ratio(g(lo1), g(lo2), 2) + ratio(g(hi1), g(hi2), 6) + ratio(g(g(hi1)), g(g(hi2)), 7.2)
    fdm = 2 * np.abs(f)
    return {"ADM": adm.mean(), "FDM": fdm.mean(), "GDM": np.hypot(adm, fdm).mean(), "break": ib}


t = np.arange(200) / 200
pulse = lambda late, width: -(t - 0.3 - late) / width * np.exp(-((t - 0.3 - late) ** 2) / (2 * width**2))
cases = {
    "delayed pulse": (pulse(0, 0.04), pulse(0.004, 0.04)),
    "weaker pulse with a tail": (pulse(0, 0.04), 0.9 * pulse(0, 0.04) + 0.05 * np.exp(-t * 3) * np.sin(90 * t)),
    "wider pulse": (pulse(0, 0.04), pulse(0, 0.05)),
    "with an offset": (pulse(0, 0.04) + 0.1, pulse(0, 0.04) + 0.13),
    "ringing": (np.sin(60 * t) * np.exp(-4 * t), np.sin(63 * t) * np.exp(-4.5 * t)),
}
result = {name: {"a": list(a), "b": list(b), **fsv(a, b)} for name, (a, b) in cases.items()}
(Path(__file__).parent / "fsv.json").write_text(json.dumps(result) + "\n")
