"""Group delays of 100 random stable filters, from scipy.signal.group_delay.

Made with SciPy 1.10.1 and NumPy 1.24.2. Run: python3 group_delay.py > group_delay.json

Poles lie within 0.97 of the unit circle's centre; of the zeros a third lies on the
circle, at frequencies that are asked for, a third inside and a third outside.
A filter's figures are [magnitude in dB, group delay in samples] at "radians". SciPy
gives 0 for a delay that it calls singular.
"""

import json
import warnings

import numpy as np
import scipy
from scipy import signal

RATE = 16000
# Every sixth frequency of the curve: 10 Hz in steps of a quarter octave.
HZ = [f for f in 10 * 2.0 ** (np.arange(0, 60) / 4) if f < RATE / 2]


def pair(radius, angle):
    root = radius * np.exp(1j * angle)
    return np.real(np.poly([root, root.conjugate()]))


def zeros(random, i, w):
    place = i % 3
    if place == 0:
        return pair(1, random.choice(w[20:]))
    angle = random.uniform(0, np.pi)
    return pair(random.uniform(0, 0.98), angle) if place == 1 else pair(random.uniform(1.02, 2), angle)


random = np.random.default_rng(61260)
warnings.simplefilter("ignore")
w = 2 * np.pi * np.array(HZ) / RATE
filters = []
for _ in range(100):
    sections = []
    for i in range(random.integers(1, 5)):
        b = zeros(random, random.integers(0, 3), w)
        a = pair(random.uniform(0, 0.97), random.uniform(0, np.pi))
        sections.append([float(v) for v in (*b, *a)])
    b, a = signal.sos2tf(sections)
    _, h = signal.freqz(b, a, w)
    _, delay = signal.group_delay((b, a), w)
    with np.errstate(divide="ignore"):
        level = np.maximum(20 * np.log10(np.abs(h)), -400)
    filters.append({"sections": sections, "figures": [[round(float(m), 6), round(float(d), 9)] for m, d in zip(level, delay)]})

print('{"made_with": "SciPy %s, NumPy %s",' % (scipy.__version__, np.__version__))
print('"radians": %s,' % json.dumps([float(v) for v in w]))
print('"filters": [\n' + ",\n".join(json.dumps(f, separators=(",", ":")) for f in filters) + "\n]}")
