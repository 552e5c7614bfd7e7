"""Reference values for the recursive families, from scipy.signal.

Made with SciPy 1.10.1 and NumPy 1.24.2. Run: python3 recursive.py > recursive.json
Roots are listed by their upper half, [real, imaginary >= 0], for prototype
orders up to 5. Responses are [real, imaginary] at the frequencies "hz".
A Linkwitz-Riley filter is SciPy's Butterworth of half the order, twice.
"""

import json

import numpy as np
import scipy
from scipy import signal

KINDS = ["lowpass", "highpass", "bandpass", "bandstop"]
# rate, single edge, band edges: ordinary; beside half the rate; a wide band; a
# narrow band; very low corners, narrow
PLACES = [(8000, 1000, (300, 1500)), (44100, 20500, (19000, 21000)), (48000, 70, (40, 16000)),
          (96000, 3000, (985, 1015)), (192000, 20, (20, 25))]
ORDERS = [1, 2, 3, 5, 8]
RIPPLE_REJECT = {1: (1, 40), 2: (0.5, 50), 3: (3, 60), 5: (0.1, 80), 8: (0.01, 100)}


def upper_half(roots):
    upper = sorted((x for x in roots if x.imag >= 0), key=lambda x: (x.real, x.imag))
    return [[float(x.real), float(x.imag)] for x in upper]


def probes(edges, rate):
    lo, hi = min(edges), max(edges)
    return sorted({0.5 * lo, lo, (lo * hi) ** 0.5 * 1.01, hi, 0.4 * rate})


def design(family, order, kind, edges, rate):
    ripple, reject = RIPPLE_REJECT[order]
    common = dict(btype=kind, output="zpk", fs=rate)
    if family == "chebyshev1":
        return signal.cheby1(order, ripple, edges, **common)
    if family == "chebyshev2":
        return signal.cheby2(order, reject, edges, **common)
    if family == "elliptic":
        return signal.ellip(order, ripple, reject, edges, **common)
    if family == "bessel":
        return signal.bessel(order, edges, norm="mag", **common)
    if family == "bessel by delay":
        return signal.bessel(order, edges, norm="delay", **common)
    z, p, k = signal.butter(order, edges, **common)
    return np.tile(z, 2), np.tile(p, 2), k * k


def designs():
    for family in ["chebyshev1", "chebyshev2", "elliptic", "bessel", "bessel by delay", "linkwitz-riley"]:
        for kind in KINDS:
            for rate, at, band in PLACES:
                for order in ORDERS:
                    edges = [at] if kind in KINDS[:2] else list(band)
                    z, p, k = design(family, order, kind, edges, rate)
                    hz = probes(edges, rate)
                    _, h = signal.freqz_zpk(z, p, k, worN=2 * np.pi * np.asarray(hz) / rate)
                    ripple, reject = RIPPLE_REJECT[order]
                    row = dict(family=family, kind=kind, order=order * (2 if family == "linkwitz-riley" else 1),
                               rate=rate, edges=edges, ripple=ripple, reject=reject, hz=hz,
                               response=[[float(x.real), float(x.imag)] for x in h])
                    if order <= 5:
                        row.update(zeros=upper_half(z), poles=upper_half(p))
                    yield row


# kind, rate, pass edges, stop edges; the transitions of the last of each kind of
# band differ
SPECS = [
    ("lowpass", 48000, [12000], [14000]), ("lowpass", 44100, [18000], [20000]), ("lowpass", 192000, [20], [80]),
    ("highpass", 48000, [80], [20]), ("highpass", 16000, [60], [30]), ("highpass", 192000, [20], [5]),
    ("bandpass", 48000, [300, 3400], [150, 5000]), ("bandpass", 96000, [900, 1100], [700, 1500]),
    ("bandstop", 48000, [300, 3400], [600, 1700]), ("bandstop", 8000, [900, 1500], [1000, 1200]),
]


def orders():
    """ripple is the whole drop, as everywhere in SciPy."""
    estimators = dict(butterworth=signal.buttord, chebyshev1=signal.cheb1ord,
                      chebyshev2=signal.cheb2ord, elliptic=signal.ellipord)
    for kind, rate, passes, stops in SPECS:
        for ripple, reject in [(0.1, 30), (0.5, 50), (3, 70)]:
            least = {name: int(f(passes, stops, ripple, reject, fs=rate)[0]) for name, f in estimators.items()}
            yield dict(kind=kind, rate=rate, passes=passes, stops=stops, ripple=ripple, reject=reject, least=least)


def rounded(x):
    """16 significant digits of every float: a pole 6e-6 from z = 1 needs them."""
    if isinstance(x, float):
        return float(f"{x:.16g}")
    if isinstance(x, list):
        return [rounded(y) for y in x]
    return {k: rounded(v) for k, v in x.items()} if isinstance(x, dict) else x


def lines(rows):
    return "[\n" + ",\n".join(json.dumps(rounded(row), separators=(",", ":")) for row in rows) + "\n]"


made_with = f"SciPy {scipy.__version__}, NumPy {np.__version__}"
print(f'{{\n"made_with": {json.dumps(made_with)},\n"designs": {lines(designs())},\n"orders": {lines(orders())}\n}}')
