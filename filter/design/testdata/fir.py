"""Reference kernels for the tests of package design, from scipy.signal.

Made with SciPy 1.10.1 and NumPy 1.24.2. Run: python3 fir.py > fir.json
Least-squares kernels of types II to IV, which scipy.signal.firls does not make,
are solved here with numpy.linalg on Gauss-Legendre quadrature.
"""

import json

import numpy as np
import scipy
from scipy import signal
from scipy.signal import windows as w

NUTTALL = [0.355768, 0.487396, 0.144232, 0.012604]  # Nuttall 1981, continuous first derivative
WINDOWS = {
    "rectangular": w.boxcar, "bartlett": w.bartlett, "triangular": w.triang, "hann": w.hann, "hamming": w.hamming,
    "blackman": w.blackman, "blackman-harris": w.blackmanharris, "blackman-nuttall": w.nuttall, "flat-top": w.flattop,
    "nuttall": lambda n: w.general_cosine(n, NUTTALL),
}


def named_windows():
    for name, make in WINDOWS.items():
        for n in (1, 2, 9, 24):
            yield dict(window=name, n=n, parameter=0, taps=make(n).tolist())
    for n in (1, 2, 9, 24, 51):
        yield dict(window="gaussian", n=n, parameter=n / 5 + 1, taps=w.gaussian(n, n / 5 + 1).tolist())
        for at in (50, 80, 120):
            yield dict(window="chebyshev", n=n, parameter=at, taps=w.chebwin(n, at).tolist())


def sincs():
    for i, (name, make) in enumerate(WINDOWS.items()):
        for kind, n, edges in [("lowpass", 24 + i, [3000]), ("highpass", 31 + 2 * i, [1500]),
                               ("bandpass", 40 + i, [300, 3400]), ("bandstop", 33 + 2 * i, [2000, 5000])][i % 2::2]:
            # firwin takes windows by its own names; the ideal is the same for all
            taps = signal.firwin(n, edges, window="boxcar", pass_zero=kind, scale=False, fs=16000) * make(n)
            if name not in ("nuttall", "bartlett"):
                own = {"rectangular": "boxcar", "triangular": "triang", "blackman-harris": "blackmanharris",
                       "blackman-nuttall": "nuttall", "flat-top": "flattop"}.get(name, name)
                taps = signal.firwin(n, edges, window=own, pass_zero=kind, scale=True, fs=16000)
                yield dict(window=name, kind=kind, n=n, scale=True, rate=16000, edges=edges, taps=taps.tolist())
            else:
                yield dict(window=name, kind=kind, n=n, scale=False, rate=16000, edges=edges, taps=taps.tolist())


def sampled():
    ramp = ([0, 1000, 3000, 4000], [0, 0.5, 1.5, 0])
    step = ([0, 1000, 1000, 4000], [1, 1, 0, 0])
    shelf = ([0, 500, 2000, 4000], [2, 2, 1, 1])
    for n, anti, (hz, gain) in [
        (25, False, ramp), (26, False, ramp), (27, True, ramp), (28, True, ramp), (51, False, step), (64, False, step),
        (101, False, shelf), (33, False, shelf), (64, True, ([0, 100, 4000], [0, 1, 1])), (65, True, ([0, 100, 3900, 4000], [0, 1, 1, 0])),
        (32, True, ([0, 4000], [0, 2])), (5, False, step),
    ]:
        for name in ("hamming", "blackman"):
            points = 2 ** int(np.ceil(np.log2(n)))
            taps = signal.firwin2(n, [float(x) for x in hz], gain, nfreqs=points + 1, window=name, antisymmetric=anti, fs=8000)
            yield dict(window=name, n=n, antisymmetric=anti, rate=8000, hz=hz, gain=gain, points=points, taps=taps.tolist())


def band(lo, hi, gain, weight=1.0):
    g = gain if isinstance(gain, tuple) else (gain, gain)
    return dict(From=lo, To=hi, GainFrom=g[0], GainTo=g[1], Weight=weight)


def amplitude(taps, anti, omega):
    lag = (len(taps) - 1) / 2 - np.arange(len(taps))
    wave = np.sin if anti else np.cos
    return np.concatenate([wave(np.outer(o, lag)) @ taps for o in np.array_split(omega, max(1, len(omega) // 2000))])


def quadrature(n, anti, bands, rate):
    terms = n // 2 if anti or n % 2 == 0 else n // 2 + 1
    first = 0.5 if n % 2 == 0 else (1.0 if anti else 0.0)
    x, q = np.polynomial.legendre.leggauss(6 * n + 40)
    rows, right, weights = [], [], []
    for b in bands:
        part = (x + 1) / 2
        omega = 2 * np.pi * (b["From"] + (b["To"] - b["From"]) * part) / rate
        rows.append((np.sin if anti else np.cos)(np.outer(omega, first + np.arange(terms))))
        right.append(b["GainFrom"] + (b["GainTo"] - b["GainFrom"]) * part)
        weights.append(q * b["Weight"] * (b["To"] - b["From"]))
    root = np.sqrt(np.concatenate(weights))
    a = np.linalg.lstsq(np.vstack(rows) * root[:, None], np.concatenate(right) * root, rcond=None)[0]
    half = a / 2
    if first == 0:
        return np.concatenate([half[:0:-1], [a[0]], half[1:]])
    middle = [0.0] if n % 2 else []
    return np.concatenate([half[::-1], middle, (-half if anti else half)])


def squares():
    sloped = [band(0, 1000, (0, 1)), band(1400, 4000, (2, 1), 3)]
    lists = [[band(0, 1000, 1), band(1400, 4000, 0)], [band(0, 1000, 1), band(1400, 4000, 0, 100)],
             [band(0, 800, 0, 10), band(1100, 2500, 1), band(2800, 4000, 0, 5)], sloped]
    for bands in lists:
        for n in (15, 41, 75):
            edges = [e for b in bands for e in (b["From"], b["To"])]
            gains = [g for b in bands for g in (b["GainFrom"], b["GainTo"])]
            taps = signal.firls(n, edges, gains, weight=[b["Weight"] for b in bands], fs=8000)
            yield dict(n=n, antisymmetric=False, rate=8000, bands=bands, source="scipy.signal.firls", taps=taps.tolist())
    for n, anti, bands in [
        (24, False, lists[0]), (40, False, lists[2]), (63, False, sloped), (31, True, [band(200, 3800, 1)]), (32, True, [band(200, 4000, 1)]),
        (27, True, [band(0, 3200, (0, 1))]), (28, True, [band(0, 4000, (0, 1))]), (45, True, lists[2]), (44, True, lists[2]),
    ]:
        yield dict(n=n, antisymmetric=anti, rate=8000, bands=bands, source="numpy.linalg", taps=quadrature(n, anti, bands, 8000).tolist())


def deviation(taps, anti, bands, rate):
    """Largest weighted deviation: 64 points to a tap, edges, vertices of parabolas."""
    worst = 0.0
    for b in bands:
        points = max(64, int(64 * len(taps) * (b["To"] - b["From"]) / (rate / 2)))
        hz = np.linspace(b["From"], b["To"], points + 1)
        wanted = b["GainFrom"] + (b["GainTo"] - b["GainFrom"]) * (hz - b["From"]) / (b["To"] - b["From"])
        e = b["Weight"] * np.abs(amplitude(taps, anti, 2 * np.pi * hz / rate) - wanted)
        worst = max(worst, e.max())
        for i in range(1, points):
            if e[i] > e[i - 1] and e[i] >= e[i + 1]:
                slope, bend = (e[i + 1] - e[i - 1]) / 2, e[i - 1] - 2 * e[i] + e[i + 1]
                worst = max(worst, e[i] - slope * slope / (2 * bend))
    return float(worst)


def equiripple():
    low = lambda a, b, v=1.0: [band(0, a, 1), band(b, 24000, 0, v)]
    mid = lambda a, b, c, d, v=1.0, u=1.0: [band(0, a, 0, v), band(b, c, 1), band(d, 24000, 0, u)]
    cases = [
        (21, False, low(6000, 9000)), (21, False, low(6000, 9000, 10)), (24, False, low(3840, 7680)), (35, False, low(12000, 14000, 0.1)),
        (63, False, low(1000, 2500, 100)), (64, False, low(1000, 2500)), (64, False, low(21000, 22500, 30)), (101, False, low(20000, 21000)),
        (127, False, low(12000, 13500, 1000)), (128, False, low(12000, 13000)), (200, False, low(100, 900, 10)), (255, False, low(4800, 5280)),
        (255, False, low(10000, 10900, 1000)), (511, False, low(10000, 10300, 10)), (1023, False, low(10000, 10200, 100)),
        (255, False, low(8000, 9600, 1)), (301, False, low(8000, 9500, 3)), (511, False, low(40, 400, 10)), (7, False, low(4000, 16000)),
        (21, False, [band(0, 3000, 0, 10), band(6000, 24000, 1)]), (255, False, [band(0, 200, 0, 30), band(500, 24000, 1)]),
        (401, False, [band(0, 40, 0), band(240, 24000, 1)]), (101, False, [band(0, 20000, 0, 5), band(21000, 24000, 1)]),
        (32, False, mid(4800, 9600, 16800, 20400, 10, 10)), (55, False, mid(4000, 5500, 12000, 13500, 10, 10)), (128, False, mid(300, 1000, 3400, 4200)),
        (151, False, mid(4000, 5000, 6000, 7000, 30, 10)), (200, False, mid(15000, 15500, 16500, 17000)), (301, False, mid(900, 1150, 1250, 1500, 10, 10)),
        (55, False, [band(0, 4000, 1), band(5500, 9000, 0, 20), band(10500, 24000, 1)]), (255, False, [band(0, 800, 1), band(1100, 1300, 0, 20), band(1600, 24000, 1)]),
        (101, False, [band(0, 3000, 1), band(3700, 7000, 0, 10), band(7700, 12000, 1), band(12800, 18000, 0, 10), band(18800, 24000, 1)]),
        (100, False, [band(0, 3000, 0.5), band(3700, 7000, 1, 2), band(7700, 12000, 0.25), band(12800, 24000, 0, 10)]),
        (31, True, [band(1200, 22800, 1)]), (32, True, [band(1200, 24000, 1)]), (101, True, [band(500, 23500, 1)]), (102, True, [band(300, 24000, 1)]),
        (255, True, [band(300, 23700, 1)]), (71, True, mid(2000, 4000, 12000, 14000, 10, 10)), (72, True, mid(2000, 4000, 12000, 14000, 10, 10)),
        (64, True, [band(0, 3000, 0, 10), band(5000, 24000, 1)]),
    ]
    for n, anti, bands in cases:
        edges = [e for b in bands for e in (b["From"], b["To"])]
        gains, weights = [b["GainFrom"] for b in bands], [b["Weight"] for b in bands]
        make = lambda density: signal.remez(n, edges, gains, weight=weights, fs=48000, maxiter=200, grid_density=density,
                                            type="hilbert" if anti else "bandpass")
        # Of this one remez misses an extremum at densities of 512 and more: one ripple is 1e-3 over the others.
        density = 256 if n == 200 and bands[0]["To"] == 100 else 1024
        row = dict(n=n, antisymmetric=anti, rate=48000, bands=bands, deviation=deviation(make(density), anti, bands, 48000))
        if n <= 72:
            row["taps16"] = make(16).tolist()
        yield row


def rounded(x):
    """15 significant digits of every float."""
    if isinstance(x, float):
        return float(f"{x:.15g}")
    if isinstance(x, list):
        return [rounded(y) for y in x]
    return {k: rounded(v) for k, v in x.items()} if isinstance(x, dict) else x


data = dict(windows=named_windows(), sincs=sincs(), sampled=sampled(), squares=squares(), equiripple=equiripple())
out = {"made_with": f"SciPy {scipy.__version__}, NumPy {np.__version__}"}
out.update({name: rounded(list(rows)) for name, rows in data.items()})
lines = [f"{json.dumps(k)}: " + (json.dumps(v) if isinstance(v, str) else
         "[\n" + ",\n".join(json.dumps(row, separators=(",", ":")) for row in v) + "\n]") for k, v in out.items()]
print("{\n" + ",\n".join(lines) + "\n}")
