"""The steps of the analysis, written plainly with numpy and scipy: what the product's speed is measured against.

Usage: scipyAnalysis.py recording.wav radius_m areal_density_kg_m2
Prints JSON: the median time of each step in ms, warm, and the tension found, so that the work can be seen to be done.
The air on both sides is taken as a half space, and the head as even: less than the product does, never more.
"""
import io
import json
import sys
import time

import numpy as np
from scipy import optimize, signal, special
from scipy.interpolate import CubicSpline
from scipy.io import wavfile

WARM, RUNS = 3, 15
AIR_DENSITY, SOUND = 1.204, 343.2
M, N, TOP_HZ = 6, 4, 2000
ALPHA = {(m, n + 1): special.jn_zeros(m, N)[n] for m in range(M) for n in range(N)}


def air_tables(radius):
    """Added mass of one half space a unit area against frequency: Hankel integral of each mode's shape, made once."""
    grid = np.linspace(20, TOP_HZ, 40)
    q = np.linspace(1e-3, 60, 4000)
    tables = {}
    for (m, n), a in ALPHA.items():
        shape = a * special.jv(m + 1, a) * special.jv(m, q) / (q**2 - a**2)
        weight = q * shape**2 / (special.jv(m + 1, a)**2 / 2)
        wave = (2 * np.pi * grid / SOUND * radius)[:, None]
        mass = np.trapezoid(np.where(q > wave * 1.001, weight / np.sqrt(np.maximum(q**2 - wave**2, 1e-6)), 0), q, axis=1)
        tables[m, n] = CubicSpline(grid, AIR_DENSITY * radius * mass)
    return tables


def decode(data):
    rate, samples = wavfile.read(io.BytesIO(data))
    return rate, samples.astype(np.float64) / 32768


def channel(x):
    return x - x.mean()


def waveform(x):
    columns = x[: len(x) // 1000 * 1000].reshape(1000, -1)
    return columns.min(axis=1), columns.max(axis=1)


def taps(x, rate):
    factor = max(1, int(rate // 9600))
    low = signal.resample_poly(x, 1, factor)
    low_rate = rate / factor
    frame = int(low_rate * 0.001)
    power = np.convolve((low[: len(low) // frame * frame].reshape(-1, frame)**2).mean(axis=1), np.ones(5) / 5, 'valid')
    past = np.array([power[max(0, i - 30): i - 5].max() for i in range(6, len(power))])
    rises = np.flatnonzero((power[6:] > 5 * past) & (power[6:] > 10**-2.6 * power.max()))
    onset = (rises[0] + 6) * frame
    return low[onset + int(0.012 * low_rate):], low_rate


def tone_model(p, t):
    shift = 2j * np.pi * p[0::2][:, None] - p[1::2][:, None]
    return np.exp(shift * t)


def lines(ring, rate):
    t = np.arange(len(ring)) / rate
    window = signal.get_window('hann', 2 * len(ring))[len(ring):]
    rest, found = ring.copy(), []
    for most in (14, 8):
        size = 1 << int(np.ceil(np.log2(4 * len(ring))))
        spectrum = np.abs(np.fft.rfft(rest * window, size))
        level = 20 * np.log10(spectrum + 1e-12)
        band = level[: int(TOP_HZ / rate * size)]
        peaks, _ = signal.find_peaks(band, height=max(band.max() - 55, np.median(level) + 12), prominence=8)
        peaks = sorted(peaks, key=lambda i: -level[i])[:most]
        new = []
        for i in peaks:
            a, b, c = level[i - 1: i + 2]
            hz = (i + (a - c) / (2 * (a - 2 * b + c))) * rate / size
            if 40 < hz < TOP_HZ and all(abs(hz - f[0]) > 4 for f in found):
                new.append(hz)
        if not new:
            break
        found += [fit_band(rest, t, rate, hz) for hz in new]
        basis = np.concatenate([tone_model(np.array(f), t) for f in found])
        design = np.concatenate([basis.real, -basis.imag]).T
        weights, *_ = np.linalg.lstsq(design, ring, rcond=None)
        rest = ring - design @ weights
    amplitude = np.hypot(*weights.reshape(2, -1))
    return np.array(found), amplitude


def fit_band(x, t, rate, hz):
    """One decaying tone by least squares on its band moved to zero frequency."""
    step = int(rate // 100)
    base = np.exp(-2j * np.pi * hz * t)
    narrow = signal.oaconvolve(x * base, np.ones(step) / step, 'valid')[::step]
    times = np.arange(len(narrow)) * step / rate

    def residual(p):
        tone = np.exp((2j * np.pi * p[0] - p[1]) * times)
        gain = (tone.conj() @ narrow) / (tone.conj() @ tone)
        rest = narrow - gain * tone
        return np.concatenate([rest.real, rest.imag])

    fit = optimize.least_squares(residual, [0, 8], max_nfev=8)
    return hz + fit.x[0], max(0.5, fit.x[1])


def matching(found, amplitude, radius, density, tables):
    hz = found[:, 0]
    weight = np.log10(amplitude / amplitude.max() + 1e-3) + 3
    modes = list(ALPHA)

    def predict(tension, air=1.0):
        f = np.array([ALPHA[k] / (2 * np.pi * radius) * np.sqrt(tension / (density + AIR_DENSITY * radius)) for k in modes])
        for _ in range(4):
            mass = np.array([2 * tables[k](min(f[i], TOP_HZ)) for i, k in enumerate(modes)])
            f = np.array([ALPHA[k] for k in modes]) / (2 * np.pi * radius) * np.sqrt(tension / (density + air * mass))
        return f

    grid = np.exp(np.arange(np.log(300), np.log(20000), 0.002))
    nodes = np.exp(np.linspace(np.log(300), np.log(20000), 24))
    table = CubicSpline(np.log(nodes), np.log(np.array([predict(v) for v in nodes])))
    predicted = np.exp(table(np.log(grid)))
    low = np.array([m + 2 * n <= 6 for m, n in modes])
    score = np.empty(len(grid))
    for i, row in enumerate(predicted):
        gap = np.abs(np.log(hz[:, None] / row[None, low]))
        missing = gap[:, row[low] < 1000].min(axis=0, initial=1) > 0.02
        score[i] = (weight * np.exp(-(gap.min(axis=1) / 0.008)**2)).sum() - 0.5 * missing.sum()
    best = []
    for i in np.argsort(-score)[:5]:
        def residual(p):
            f = predict(np.exp(p[0]), np.exp(p[1]))
            gap = np.log(hz[:, None] / f[None, :])
            nearest = gap[np.arange(len(hz)), np.abs(gap).argmin(axis=1)]
            return np.append(np.sqrt(weight) * nearest / 0.01, p[1] / 0.02)
        fit = optimize.least_squares(residual, [np.log(grid[i]), 0.0], loss='soft_l1', max_nfev=10)
        best.append(np.exp(fit.x[0]))
    return best[0]


def main():
    path, radius, density = sys.argv[1], float(sys.argv[2]), float(sys.argv[3])
    with open(path, 'rb') as file:
        data = file.read()
    tables = air_tables(radius)
    times = {}
    for run in range(WARM + RUNS):
        def timed(step, work):
            start = time.perf_counter()
            result = work()
            if run >= WARM:
                times.setdefault(step, []).append(1000 * (time.perf_counter() - start))
            return result
        whole = time.perf_counter()
        rate, x = timed('decode', lambda: decode(data))
        x = timed('channel', lambda: channel(x))
        timed('waveform', lambda: waveform(x))
        ring, low_rate = timed('taps', lambda: taps(x, rate))
        found, amplitude = timed('lines', lambda: lines(ring[: int(2.7 * low_rate)], low_rate))
        tension = timed('matching', lambda: matching(found, amplitude, radius, density, tables))
        timed('spectrum', lambda: signal.periodogram(ring, low_rate, 'hann'))
        if run >= WARM:
            times.setdefault('whole', []).append(1000 * (time.perf_counter() - whole))
    print(json.dumps({'ms': {k: round(float(np.median(v)), 1) for k, v in times.items()}, 'tensionNPerM': float(tension), 'lines': len(found)}))


main()
