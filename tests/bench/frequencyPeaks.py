"""Peaks of decaying tones as scipy.signal.find_peaks gives them, for frequencyBound.ts.

Reads from standard input {"rate", "samples", "files": [path of raw little-endian float32, takes one after the other]},
writes [[peak frequencies in Hz of each take] of each file]. The spectrum is that of the whole take under a Hann window,
padded four times; find_peaks is asked for peaks 6 dB prominent; its answer is a bin, not interpolated.
"""
import json
import sys

import numpy as np
from scipy.signal import find_peaks
from scipy.signal.windows import hann

job = json.load(sys.stdin)
samples, rate = job["samples"], job["rate"]
window = hann(samples, sym=False)
out = []
for path in job["files"]:
    takes = np.fromfile(path, dtype="<f4").reshape(-1, samples)
    peaks = []
    for take in takes:
        level = 20 * np.log10(np.abs(np.fft.rfft(take * window, 4 * samples)) + 1e-12)
        found, _ = find_peaks(level, prominence=6, height=level.max() - 80)
        peaks.append((found * rate / (4 * samples)).tolist())
    out.append(peaks)
json.dump(out, sys.stdout)
