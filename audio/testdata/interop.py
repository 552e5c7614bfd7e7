"""Read and write WAV files with other people's libraries, for the tests of package audio.

python3 interop.py read FOLDER: reads every *.wav there with libsndfile and, unless
it has 64-bit sizes, with SciPy, neither of which may warn. The samples, as float64
with full scale 1.0, go to files with .sndfile and .scipy added to the name, after
rate and channels, alike as float64.

python3 interop.py write FOLDER: writes files there with both, in every format that
they have, with the samples of make_fixtures.py. A name tells the library, the kind
of file, the sample format, the channels and the frames.
"""

import itertools
import pathlib
import sys
import warnings

import numpy as np
import scipy.io.wavfile as wavfile
import soundfile

from make_fixtures import codes

RATE = 44100
SF_TRUE, SFC_RF64_AUTO_DOWNGRADE = 1, 0x1210


def normalised(x):
    if x.dtype == np.uint8:
        return (x.astype(np.float64) - 128) / 128
    if x.dtype.kind == "i":
        return x / -float(np.iinfo(x.dtype).min)
    return x.astype(np.float64)


def put(path, library, rate, x):
    channels = x.shape[1] if x.ndim == 2 else 1
    out = np.concatenate([[rate, channels], x.reshape(-1)]).astype("<f8")
    out.tofile(str(path) + "." + library)


def read(folder):
    warnings.simplefilter("error", wavfile.WavFileWarning)
    # SciPy says so of every chunk that it does not know, which is no fault.
    warnings.filterwarnings("ignore", "Chunk .non-data. not understood", wavfile.WavFileWarning)
    for path in sorted(pathlib.Path(folder).glob("*.wav")):
        x, rate = soundfile.read(path, dtype="float64")
        put(path, "sndfile", rate, x)
        if path.read_bytes()[:4] == b"RIFF":
            rate, x = wavfile.read(path)
            put(path, "scipy", rate, normalised(x))


def integers(kind, frames, channels):
    """Codes of a PCM format at the top of 32 bits."""
    bits = {"PCM_U8": 8, "PCM_16": 16, "PCM_24": 24, "PCM_32": 32}[kind]
    return (codes(channels, bits, frames) << (32 - bits)).astype(np.int32)


def floats(dtype, frames, channels):
    bits = {"float32": 24, "float64": 32}[dtype]
    return (codes(channels, bits, frames) / 2.0 ** (bits - 1)).astype(dtype)


def write(folder):
    folder = pathlib.Path(folder)
    sizes = list(itertools.product([1, 2, 3, 6], [1, 101]))
    forms = [("WAV", "WAV", "LITTLE"), ("WAVEX", "WAVEX", "FILE"), ("RF64", "RF64", "FILE"), ("RIFX", "WAV", "BIG")]
    kinds = ["PCM_U8", "PCM_16", "PCM_24", "PCM_32", "FLOAT", "DOUBLE"]
    for (name, form, endian), kind, (channels, frames) in itertools.product(forms, kinds, sizes):
        if kind in ("FLOAT", "DOUBLE"):
            x = floats({"FLOAT": "float32", "DOUBLE": "float64"}[kind], frames, channels)
        else:
            x = integers(kind, frames, channels)
        path = folder / f"sndfile_{name}_{kind}_{channels}_{frames}.wav"
        soundfile.write(path, x, RATE, subtype=kind, format=form, endian=endian)
    for dtype, (channels, frames) in itertools.product(["uint8", "int16", "int32", "float32", "float64"], sizes):
        if dtype.startswith("float"):
            x = floats(dtype, frames, channels)
        elif dtype == "uint8":
            x = (codes(channels, 8, frames) + 128).astype(dtype)
        else:
            x = codes(channels, int(dtype[3:]), frames).astype(dtype)
        wavfile.write(folder / f"scipy_WAV_{dtype}_{channels}_{frames}.wav", RATE, x)
    downgraded(folder / "sndfile_downgraded_PCM_24_1_101.wav")


def downgraded(path):
    """RF64 that libsndfile turns into RIFF when it turns out to be small."""
    with soundfile.SoundFile(path, "w", RATE, 1, "PCM_24", format="RF64") as f:
        soundfile._snd.sf_command(f._file, SFC_RF64_AUTO_DOWNGRADE, soundfile._ffi.NULL, SF_TRUE)
        f.write(integers("PCM_24", 101, 1))


if __name__ == "__main__":
    {"read": read, "write": write}[sys.argv[1]](sys.argv[2])
