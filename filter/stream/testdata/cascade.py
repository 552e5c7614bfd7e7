"""Reference outputs of cascades, from scipy.signal.sosfilt, and its speed.

Made with SciPy 1.10.1 and NumPy 1.24.2. Run:

    python3 cascade.py > cascade.json
    OMP_NUM_THREADS=1 python3 cascade.py time    # for BenchmarkCascade, beside it

The input is x[n] = ((7 n^2 + 3 n) mod 101 - 50) / 64, which is exact. A section is
[b0, b1, b2, a1, a2].
"""

import json
import sys
import time

import numpy as np
import scipy
from scipy import signal

FRAMES = 160


def designs():
    yield "butterworth high-pass 70 Hz at 48 kHz, order 8", signal.butter(8, 70, "highpass", fs=48000, output="sos")
    yield "butterworth low-pass 0.1, order 3", signal.butter(3, 0.2, output="sos")
    yield "elliptic band-pass, order 2 x 6", signal.ellip(6, 0.5, 60, [0.1, 0.3], "bandpass", output="sos")
    yield "chebyshev band-stop, order 2 x 9", signal.cheby2(9, 50, [0.2, 0.4], "bandstop", output="sos")
    yield "one resonance", signal.tf2sos(*signal.iirpeak(440, 30, fs=44100))
    hum = [signal.tf2sos(*signal.iirnotch(50 * k, 25 * k, fs=48000)) for k in range(1, 17)]
    yield "hum, 16 notches", np.concatenate(hum)


def reference():
    n = np.arange(FRAMES)
    x = ((7 * n * n + 3 * n) % 101 - 50) / 64
    return [
        {"name": name, "sections": np.delete(sos, 3, axis=1).tolist(), "y": signal.sosfilt(sos, x).tolist()}
        for name, sos in designs()
    ]


def rate(sections, channels):
    """Millions of samples a second, the best of 100 short runs."""
    sos = np.repeat(signal.butter(2, 70, "highpass", fs=48000, output="sos"), sections, axis=0)
    x = np.random.default_rng(0).uniform(-1, 1, size=(channels, 30_000))
    least = float("inf")
    for _ in range(100):
        begun = time.perf_counter()
        signal.sosfilt(sos, x, axis=1)
        least = min(least, time.perf_counter() - begun)
    return x.size / least / 1e6


if sys.argv[1:] == ["time"]:
    print("numpy", np.__version__, "scipy", scipy.__version__)
    for sections in [1, 2, 3, 4, 6, 8, 12, 16]:
        for channels in [1, 2, 3, 6]:
            print(f"sections={sections}/channels={channels}: {rate(sections, channels):.1f} Msamples/s")
else:
    json.dump(reference(), sys.stdout, indent=0)
    print()
