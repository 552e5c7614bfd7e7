"""Reference values for the tests of package design, from scipy.signal.

Made with SciPy 1.10.1 and NumPy 1.24.2. Run: python3 fixtures.py > fixtures.json
Roots are listed by their upper half: [real, imaginary >= 0]. Responses are
[real, imaginary] at the frequencies "hz".
"""

import json

import numpy as np
import scipy
from scipy import signal, special

KINDS = ["lowpass", "highpass", "bandpass", "bandstop"]
# rate, single edge, band edges: an ordinary, a low and a very low corner
PLACES = [(8000, 1000, (300, 1500)), (44100, 70, (40, 16000)), (192000, 20, (20, 20000))]


def roots(r):
    """Upper half, sorted by real then imaginary part."""
    upper = [x for x in r if x.imag >= 0]
    return [[float(x.real), float(x.imag)] for x in sorted(upper, key=lambda x: (x.real, x.imag))]


def response(z, p, k, hz, rate):
    _, h = signal.freqz_zpk(z, p, k, worN=2 * np.pi * np.asarray(hz) / rate)
    return [[float(x.real), float(x.imag)] for x in h]


def probes(edges, rate):
    lo, hi = min(edges), max(edges)
    return sorted({0.5 * lo, lo, 1.1 * lo, (lo * hi) ** 0.5, hi, min(1.5 * hi, 0.49 * rate), 0.4 * rate})


def butterworth():
    for kind in KINDS:
        for rate, at, band in PLACES:
            edges = [at] if kind in KINDS[:2] else list(band)
            for order in range(1, 11):
                z, p, k = signal.butter(order, edges, kind, fs=rate, output="zpk")
                hz = probes(edges, rate)
                yield dict(kind=kind, order=order, rate=rate, edges=edges, zeros=roots(z), poles=roots(p),
                           gain=float(k), hz=hz, response=response(z, p, k, hz, rate))


def elliptic():
    for kind in KINDS:
        for order in range(1, 9):
            for rate, at, band in PLACES[:2]:
                edges = [at] if kind in KINDS[:2] else list(band)
                ripple, reject = [(0.1, 60), (1, 90)][order % 2]
                z, p, k = signal.ellip(order, ripple, reject, edges, kind, fs=rate, output="zpk")
                hz = probes(edges, rate)
                yield dict(kind=kind, order=order, rate=rate, edges=edges, ripple=ripple, reject=reject,
                           hz=hz, response=response(z, p, k, hz, rate))


def elliptic_orders():
    """ripple here is the whole drop; band edges are chosen with transitions alike."""
    for kind, rate, passes, stops in [
        ("lowpass", 48000, [12000], [14000]), ("lowpass", 44100, [18000], [20000]), ("lowpass", 8000, [3400], [3900]),
        ("highpass", 48000, [80], [50]), ("highpass", 16000, [60], [45]),
        ("bandpass", 48000, [300, 3400], [150, 5000]), ("bandpass", 8000, [300, 3000], [200, 3500]),
        ("bandstop", 48000, [300, 3400], [400, 3000]), ("bandstop", 8000, [900, 1100], [950, 1060]),
    ]:
        for ripple, reject in [(0.1, 40), (0.2, 80), (1, 60)]:
            n, _ = signal.ellipord(passes, stops, ripple, reject, fs=rate)
            yield dict(kind=kind, rate=rate, passes=passes, stops=stops, ripple=ripple, reject=reject, order=int(n))


def windows():
    for n, beta in [(1, 5), (2, 3), (9, 0), (24, 2.11662), (51, 8.6), (64, 20)]:
        yield dict(n=n, beta=beta, taps=signal.windows.kaiser(n, beta).tolist())


def sincs():
    for kind, n, beta, scale, rate, edges in [
        ("lowpass", 38, 5.65326, False, 2, [0.5]), ("lowpass", 101, 7.85726, True, 48000, [13000]),
        ("highpass", 25, 2.597, False, 2, [0.425]), ("highpass", 129, 6.20426, True, 44100, [80]),
        ("bandpass", 64, 4.53351, False, 8000, [300, 3400]), ("bandpass", 151, 8, True, 48000, [1000, 4000]),
        ("bandstop", 65, 3.39532, False, 8000, [900, 1600]), ("bandstop", 101, 10.06126, True, 192000, [20000, 40000]),
    ]:
        taps = signal.firwin(n, edges, window=("kaiser", beta), pass_zero=kind, scale=scale, fs=rate)
        yield dict(kind=kind, n=n, beta=beta, scale=scale, rate=rate, edges=edges, taps=taps.tolist())


def bessel():
    for x in (0, 0.1, 0.5, 1, 2.5, 5, 10, 20, 40):
        yield dict(x=x, i0=float(special.i0(x)))


def rounded(x):
    """15 significant digits of every float: 1e-15 where the tests allow 1e-12 and more."""
    if isinstance(x, float):
        return float(f"{x:.15g}")
    if isinstance(x, list):
        return [rounded(y) for y in x]
    return {k: rounded(v) for k, v in x.items()} if isinstance(x, dict) else x


data = dict(butterworth=butterworth(), elliptic=elliptic(), elliptic_orders=elliptic_orders(), windows=windows(), sincs=sincs(), bessel=bessel())
out = {"made_with": f"SciPy {scipy.__version__}, NumPy {np.__version__}"}
out.update({name: rounded(list(rows)) for name, rows in data.items()})
lines = [f"{json.dumps(k)}: " + (json.dumps(v) if isinstance(v, str) else
         "[\n" + ",\n".join(json.dumps(row, separators=(",", ":")) for row in v) + "\n]") for k, v in out.items()]
print("{\n" + ",\n".join(lines) + "\n}")
