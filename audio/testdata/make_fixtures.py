"""Write WAV files with other people's libraries, for the tests of package audio.

Run with: python3 make_fixtures.py  (in this folder)

Every file has 101 frames, so that odd sizes occur. Sample i, counted through
the interleaved channels, has the 32-bit code (i * 2654435761 mod 2^32) - 2^31,
of which narrower formats keep the upper bits; float is that code over 2^31,
cut to 24 bits for 32-bit float. The tests compute the same numbers.
"""

import numpy as np
import scipy
import scipy.io.wavfile as wavfile
import soundfile

FRAMES = 101


def codes(channels, bits, frames=FRAMES):
    i = np.arange(frames * channels, dtype=np.uint64)
    k = (i * np.uint64(2654435761)) % np.uint64(2**32)
    k = k.astype(np.int64) - 2**31
    return (k >> (32 - bits)).reshape(frames, channels)


def main():
    wavfile.write("scipy_8000Hz_1ch_pcm8.wav", 8000, (codes(1, 8) + 128).astype(np.uint8))
    wavfile.write("scipy_44100Hz_2ch_pcm16.wav", 44100, codes(2, 16).astype(np.int16))
    wavfile.write("scipy_96000Hz_1ch_pcm32.wav", 96000, codes(1, 32).astype(np.int32))
    wavfile.write("scipy_48000Hz_3ch_float32.wav", 48000, (codes(3, 24) / 2.0**23).astype(np.float32))
    wavfile.write("scipy_16000Hz_2ch_float64.wav", 16000, codes(2, 32) / 2.0**31)
    for name, rate, channels, kind, form in [
        ("sndfile_48000Hz_1ch_pcm24.wav", 48000, 1, "PCM_24", "WAV"),
        ("sndfile_192000Hz_6ch_pcm24_extensible.wav", 192000, 6, "PCM_24", "WAVEX"),
        ("sndfile_22050Hz_2ch_pcm16_extensible.wav", 22050, 2, "PCM_16", "WAVEX"),
        ("sndfile_48000Hz_4ch_float32_extensible.wav", 48000, 4, "FLOAT", "WAVEX"),
    ]:
        if kind == "FLOAT":
            x = (codes(channels, 24) / 2.0**23).astype(np.float32)
        else:
            x = (codes(channels, int(kind[4:])) << (32 - int(kind[4:]))).astype(np.int32)
        soundfile.write(name, x, rate, subtype=kind, format=form)
    print("numpy", np.__version__, "scipy", scipy.__version__,
          "soundfile", soundfile.__version__, soundfile.__libsndfile_version__)


if __name__ == "__main__":
    main()
