"""Reference values for the averaged cross-spectra of package pair: SciPy 1.10.1.

    python3 welch.py > welch.json

Both signals come from a linear congruential generator whose numbers float64 holds exactly,
so that the test makes the same ones. The second is the first through a short filter, plus noise.
"""

import json

import numpy as np
import scipy
from scipy import signal


def numbers(seed, count):
    out, state = [], seed
    for _ in range(count):
        state = (1664525 * state + 1013904223) % 2**32
        out.append(state / 2**31 - 1)
    return np.array(out)


x = numbers(1, 4096)
y = 0.5 * x
y[3:] -= 0.25 * x[:-3]
y += 0.125 * numbers(2, 4096)
kind = dict(fs=1.0, window="hann", nperseg=512, noverlap=256, nfft=1024, detrend=False)
_, xx = signal.welch(x, **kind)
_, xy = signal.csd(x, y, **kind)
_, coherence = signal.coherence(x, y, **kind)
transfer = xy / xx
json.dump(
    {
        "scipy": scipy.__version__,
        "transfer_re": transfer.real.tolist(),
        "transfer_im": transfer.imag.tolist(),
        "coherence": coherence.tolist(),
    },
    open("/dev/stdout", "w"),
)
