"""Writes acoustics.json: outside values for shared/acoustics, by other means than the code under test.

Bessel values: mpmath at 30 digits. Air: scipy.integrate.quad straight on the Hankel integral in k. Frequencies: roots of
det(K - omega^2 M(omega)) scanned in omega, with tan, tanh, coth and cosech in closed form and no losses.
Run: python3 tests/reference/acoustics.py (Debian python3-scipy, python3-mpmath)
"""
import json
import os

import mpmath
import numpy as np
from scipy import integrate, optimize, special

mpmath.mp.dps = 30
AIR = dict(densityKgM3=1.2041, soundSpeedMPerS=343.2)


def bessel_values():
    points = [(0, 0.1), (0, 2.0), (0, 24.9), (0, 25.1), (0, 137.5), (1, 1.0), (1, 30.0), (2, 0.003), (5, 5.0), (7, 60.25), (12, 3.0),
              (12, 12.5), (12, 26.0), (20, 8.0), (30, 27.0), (30, 90.0), (3, 5000.5)]
    return [dict(m=m, x=x, value=float(mpmath.besselj(m, mpmath.mpf(x))), slope=float(mpmath.besselj(m, mpmath.mpf(x), 1))) for m, x in points]


def prime_zeros():
    # mpmath counts x = 0 as the first zero of J_0'; here it is not counted.
    return {f'{m},{q}': float(mpmath.besseljzero(m, q + 1 if m == 0 else q, 1)) for m in range(0, 13) for q in (1, 2, 5)}


def spherical_values():
    f = lambda p, x: float(mpmath.sqrt(mpmath.pi / (2 * mpmath.mpf(x))) * mpmath.besselj(p + mpmath.mpf(1) / 2, mpmath.mpf(x)))
    return [dict(p=p, x=x, value=f(p, x)) for p, x in [(0, 0.5), (1, 0.001), (3, 2.0), (10, 4.0), (27, 15.0), (27, 100.0), (5, 30.0)]]


def transform(m, n, k):
    a = special.jn_zeros(m, n)[-1]
    if abs(k - a) < 1e-6:
        return special.jv(m + 1, a) / np.sqrt(2)
    return np.sqrt(2) * a * special.jv(m, k) / (a * a - k * k)


def half_space(m, n, p, kappa0):
    """Mass and loss of a half space by rho0 R, quad in k with the inverse square root as QUADPACK's algebraic weight."""
    product = lambda k: transform(m, n, k) * transform(m, p, k)
    mass, loss = 0.0, 0.0
    if kappa0 == 0:
        mass = integrate.quad(product, 0, 150, limit=2000, epsabs=1e-12)[0]
    else:
        near = kappa0 + 1
        mass = integrate.quad(lambda k: product(k) * k / np.sqrt(k + kappa0), kappa0, near, weight='alg', wvar=(-0.5, 0), epsabs=1e-12)[0]
        mass += integrate.quad(lambda k: product(k) * k / np.sqrt(k * k - kappa0 ** 2), near, 150, limit=2000, epsabs=1e-12)[0]
        loss = integrate.quad(lambda k: product(k) * k / np.sqrt(k + kappa0), 0, kappa0, weight='alg', wvar=(0, -0.5), epsabs=1e-12)[0]
    return mass, loss


def air_loads():
    cases = [(0, 1, 1, 0.0), (0, 1, 1, 0.5), (0, 2, 1, 0.8), (1, 1, 1, 0.9), (1, 2, 2, 2.1), (2, 1, 1, 1.3), (3, 1, 1, 3.05), (6, 2, 1, 4.0), (0, 5, 5, 6.3), (9, 1, 1, 7.7)]
    return [dict(m=m, n=n, p=p, kappa0=k, mass=half_space(m, n, p, k)[0], loss=half_space(m, n, p, k)[1]) for m, n, p, k in cases]


COUNT = 6
half_cache = {}


def half_matrix(m, kappa0):
    """Interpolated in kappa0 on Chebyshev nodes, so that a scan does not repeat the quadrature."""
    key = m
    if key not in half_cache:
        nodes = 4 * (1 - np.cos(np.pi * np.arange(0, 25) / 24)) / 2
        tables = np.zeros((25, COUNT, COUNT))
        for i, k in enumerate(nodes):
            for n in range(COUNT):
                for p in range(n + 1):
                    tables[i, n, p] = tables[i, p, n] = half_space(m, n + 1, p + 1, k)[0]
        from scipy.interpolate import BarycentricInterpolator
        half_cache[key] = BarycentricInterpolator(nodes, tables.reshape(25, -1))
    return half_cache[key](kappa0).reshape(COUNT, COUNT)


def overlaps(m, count=60):
    a = special.jn_zeros(m, COUNT)[:, None]
    # scipy's jnp_zeros(0, .) leaves out x = 0 as well.
    b = special.jnp_zeros(m, count)[None, :]
    c = 2 * a / ((a * a - b * b) * np.sqrt(1 - m * m / b ** 2))
    if m == 0:
        return np.hstack([2 / a, c]), np.concatenate([[0], b[0]])
    return c, b[0]


def matrices(case, m, omega):
    R, c, rho = case['radiusM'], AIR['soundSpeedMPerS'], AIR['densityKgM3']
    kappa0 = omega * R / c
    a = special.jn_zeros(m, COUNT)
    half = half_matrix(m, kappa0)
    kind = case['construction']
    def head(T, sigma):
        D = case['plies'] * case['modulusPa'] * case['plyThicknessM'] ** 3 / (12 * (1 - case['poisson'] ** 2))
        k = a / (R - 0.5 * np.sqrt(D / T))
        return np.diag(T * k ** 2 + D * k ** 4), np.eye(COUNT) * sigma
    K, S = head(case['tensionNPerM'], case['arealDensityKgM2'])
    if kind == 'fixture':
        return K, S + 2 * rho * R * half
    cq, b = overlaps(m)
    depth = (case['depthM'] if kind != 'kettle' else case['bowlVolumeM3'] / (np.pi * R ** 2)) / R
    k = np.sqrt((b ** 2 - kappa0 ** 2).astype(complex))
    if kind == 'open':
        length = np.where(b == 0, depth + 0.61, depth)
        tube = (np.tanh(k * length) / k).real
        return K, S + rho * R * (half + (cq * tube) @ cq.T)
    own = (1 / (k * np.tanh(k * depth))).real
    M = S + rho * R * (half + (cq * own) @ cq.T)
    if kind == 'kettle':
        return K, M
    cross = (-1 / (k * np.sinh(k * depth))).real
    K2, S2 = head(case['otherTensionNPerM'], case['arealDensityKgM2'])
    M2 = S2 + rho * R * (half + (cq * own) @ cq.T)
    C = rho * R * (cq * cross) @ cq.T
    zero = np.zeros_like(K)
    return np.block([[K, zero], [zero, K2]]), np.block([[M, C], [C.T, M2]])


def roots(case, m, to_hz):
    """Where an eigenvalue of K - omega^2 M(omega) passes from positive to negative; poles of M pass the other way."""
    f = np.arange(40.0, to_hz, 2.0)
    value = lambda hz: np.linalg.eigvalsh((lambda k, mm: k - (2 * np.pi * hz) ** 2 * mm)(*matrices(case, m, 2 * np.pi * hz)))
    spectra = np.array([value(x) for x in f])
    found = []
    for i in range(len(f) - 1):
        before, after = (spectra[i] < 0).sum(), (spectra[i + 1] < 0).sum()
        if after == before + 1:
            g = lambda x: value(x)[before]
            if abs(spectra[i]).min() < 1e9:
                found.append(optimize.brentq(g, f[i], f[i + 1], xtol=1e-9))
    return found


def drums():
    film = dict(plies=1, plyThicknessM=250e-6, filmDensityKgM3=1390, modulusPa=4.5e9, poisson=0.38, yieldPa=1e8, arealDensityKgM2=0.3475)
    cases = [dict(construction='fixture', radiusM=0.165, depthM=0.0, tensionNPerM=3000.0),
             dict(construction='open', radiusM=0.165, depthM=0.12, tensionNPerM=2500.0),
             dict(construction='kettle', radiusM=0.325, depthM=0.0, bowlVolumeM3=0.14, tensionNPerM=4000.0),
             dict(construction='double-headed', radiusM=0.165, depthM=0.2, tensionNPerM=2000.0, otherTensionNPerM=2600.0)]
    out = []
    for case in cases:
        case = {**film, **case}
        top = 420 if case['construction'] == 'kettle' else 600
        out.append(dict(case=case, roots={str(m): [round(x, 6) for x in roots(case, m, top)] for m in range(4)}))
    return out


here = os.path.dirname(os.path.abspath(__file__))
with open(os.path.join(here, 'acoustics.json'), 'w') as file:
    json.dump(dict(method='tests/reference/acoustics.py: mpmath 1.3, scipy 1.17', air=AIR, bessel=bessel_values(), primeZeros=prime_zeros(),
                   spherical=spherical_values(), halfSpace=air_loads(), drums=drums()), file, indent=1)
