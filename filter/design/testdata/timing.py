"""Times SciPy on the designs and kernels that the Go benchmarks time.

Run it beside them on one machine, one thread each (see DEVELOPERS.md):

    OMP_NUM_THREADS=1 python3 filter/design/testdata/timing.py
"""
import time

import numpy
import scipy
from scipy import signal


def best(work, times=5):
    least = float("inf")
    for _ in range(times):
        begun = time.perf_counter()
        work()
        least = min(least, time.perf_counter() - begun)
    return least


print("numpy", numpy.__version__, "scipy", scipy.__version__)
noise = numpy.random.default_rng(0).normal(size=(2, 2_000_000))
sections = signal.butter(8, 0.1, output="sos")
kernel = numpy.random.default_rng(1).normal(size=4095)
long_kernel = signal.firwin(16383, 0.5, window=("kaiser", 10.06))
bands = ([0, 0.2, 0.22, 0.5], [1, 0])

for name, work, samples in [
    ("sosfilt, 4 sections, stereo", lambda: signal.sosfilt(sections, noise, axis=1), noise.size),
    ("sosfilt, 4 sections, mono", lambda: signal.sosfilt(sections, noise[0]), noise[0].size),
    ("oaconvolve, 4095 taps, stereo", lambda: signal.oaconvolve(noise, kernel[None, :], axes=1), noise.size),
]:
    print(f"{name}: {samples / best(work) / 1e6:.1f} million samples a second")
for name, work in [
    ("remez, 255 taps, grid_density 16", lambda: signal.remez(255, *bands, fs=1)),
    ("remez, 255 taps, grid_density 1024", lambda: signal.remez(255, *bands, fs=1, grid_density=1024)),
    ("minimum_phase, 16383 taps, n_fft 2^18", lambda: signal.minimum_phase(long_kernel, method="homomorphic", n_fft=1 << 18)),
]:
    print(f"{name}: {1e3 * best(work):.2f} ms")
