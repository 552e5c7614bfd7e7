"""Times SciPy on what the Go benchmarks of filter/stream time: one round of
scipy.signal.oaconvolve and sosfilt in double precision, one thread.

    scipy_reference.py TAPS...

Prints lines "what Msamples/s", samples of all channels. sosfilt is given the
array length that suits it best, with its state kept; oaconvolve, which keeps no
state, a long array and, in a second line, the length that suits it best.
"""
import os
import sys
import time

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[name] = "1"

import numpy
from scipy import signal

SECONDS = 0.3
LONG = 1 << 21  # frames, 44 s at 48 kHz
RANDOM = numpy.random.default_rng(1)


def pace(work, samples):
    """Millions of samples a second, over at least SECONDS, after a first call."""
    work()
    calls, begun = 0, time.perf_counter()
    while (spent := time.perf_counter() - begun) < SECONDS:
        work()
        calls += 1
    return calls * samples / spent / 1e6


def oaconvolve(taps):
    """The pace for a long array, as of a recording, and for the best length."""
    kernel = RANDOM.normal(size=(1, taps))
    paces = []
    for frames in (LONG, 1 << 18, 1 << 16):
        if frames >= 2 * taps:
            x = RANDOM.normal(size=(2, frames))
            paces.append(pace(lambda: signal.oaconvolve(x, kernel, axes=1), x.size))
    return paces[0], max(paces)


def sosfilt(channels):
    sections = signal.butter(8, 70, "highpass", fs=48000, output="sos")
    best = 0
    for frames in (8192, 1 << 18, LONG):
        x = RANDOM.normal(size=(channels, frames))
        state = numpy.zeros((len(sections), channels, 2))
        best = max(best, pace(lambda: signal.sosfilt(sections, x, axis=1, zi=state), x.size))
    return best


if __name__ == "__main__":
    for taps in map(int, sys.argv[1:]):
        long, best = oaconvolve(taps)
        print(f"oaconvolve-long/{taps} {long:.1f}")
        print(f"oaconvolve-best/{taps} {best:.1f}")
    for channels in (1, 2):
        print(f"sosfilt/{channels} {sosfilt(channels):.1f}")
