#!/usr/bin/env python3
"""The stream computation written straightforwardly in numpy and scipy, to the same accuracy: the yardstick of `make bench`.

Two crossed +-45 degree panels at each end, 0.5 m apart, 5.8 GHz, 1.9 km, 25 dB, 3GPP TR 38.901 V16.1.0 RMa with sight and
UMi without: the mounts of calc/stream's BenchmarkStream4. Beside it scipy's adaptive quadrature for the correlation of two
elements. Prints milliseconds for each, and the figures, so that both sides are seen to compute the same.

Run:  /usr/bin/python3 testdata/yardstick/yardstick.py        (Debian: python3-numpy, python3-scipy)
"""
import math
import sys
import time

import numpy as np
from scipy import integrate, optimize

C = 299792458.0
DEG = math.pi / 180
FREQUENCY = 5.8e9
K = 2 * math.pi * FREQUENCY / C
DISTANCE = 1900.0
SNR = 10 ** 2.5
STEP = 0.5


def amplitude(az, el):
    """TR 38.901 table 7.3-1 with 65 and 8 degrees, 25 dB front to back, 18 dB side lobes."""
    a = np.minimum(12 * (az / (65 * DEG)) ** 2, 25)
    e = np.minimum(12 * (el / (8 * DEG)) ** 2, 18)
    return 10 ** (-np.minimum(a + e, 25) / 20)


def sigma(form, rms, half):
    """The sigma whose density, cut at +-half, has the published rms."""
    def cut(s):
        x = np.linspace(0, half, 4001)
        p = np.exp(-math.sqrt(2) * x / s) if form == "laplacian" else np.exp(-x * x / (2 * s * s))
        return math.sqrt(integrate.simpson(p * x * x, x) / integrate.simpson(p, x))
    return optimize.brentq(lambda s: cut(s) - rms, rms * 0.9, 20 * rms)


def covariance(azimuth_rms, elevation_rms, elevation_mean, positions):
    """R_V = R_H up to the slants: the covariance of places, by Gauss-Legendre over azimuth and elevation."""
    sa, se = sigma("gaussian", azimuth_rms, math.pi), sigma("laplacian", elevation_rms, math.pi / 2)
    x, w = np.polynomial.legendre.leggauss(256)
    az, waz = math.pi * x, math.pi * w * np.exp(-(math.pi * x) ** 2 / (2 * sa * sa))
    parts = []
    edges = [0, 0.5 * se, 1.5 * se, 3 * se, 6 * se, 12 * se, 20 * se]
    g, gw = np.polynomial.legendre.leggauss(8)
    for lo, hi in zip(edges, edges[1:]):
        for sign in (-1, 1):
            t = lo + (hi - lo) * (g + 1) / 2
            keep = np.abs(sign * t + elevation_mean) < math.pi / 2
            parts.append((sign * t + elevation_mean, (hi - lo) / 2 * gw * np.exp(-math.sqrt(2) * t / se) * keep))
    el = np.concatenate([p[0] for p in parts])
    wel = np.concatenate([p[1] for p in parts])
    wgt = np.outer(waz / waz.sum(), wel / wel.sum()).ravel()
    A, E = (m.ravel() for m in np.meshgrid(az, el, indexing="ij"))
    field = amplitude(A, E)
    omega = np.stack([np.sin(A) * np.cos(E), np.sin(E), np.cos(A) * np.cos(E)], 1)
    f = field[:, None] * np.exp(1j * K * omega @ positions.T) * np.sqrt(wgt)[:, None]
    return f.T @ f.conj()


def root(r):
    w, v = np.linalg.eigh(r)
    return v * np.sqrt(np.maximum(w, 0))


def capacity(near, far, k, xpr, rng, target=0.0085):
    """Ergodic capacity and effective streams to a standard error, by plain Monte Carlo in blocks."""
    positions = np.array([[0, 0, 0], [STEP, 0, 0]], float)
    rn, rf = covariance(*near, positions), covariance(*far, positions)
    slants = np.array([45, -45]) * DEG
    v, h = np.cos(slants), np.sin(slants)
    an = [np.kron(root(rn), e[:, None]) for e in (v, h)]
    af = [np.kron(root(rf), e[:, None]) for e in (v, h)]
    same, cross = xpr / (1 + xpr), 1 / (1 + xpr)
    mirrored = positions * [-1, 1, 1] + [0, 0, DISTANCE]
    d = np.linalg.norm(mirrored[:, None, :] - positions[None, :, :], axis=2)
    path = DISTANCE / d * np.exp(-1j * K * (d - DISTANCE))
    direct = np.kron(path, np.outer(v, v) - np.outer(h, h))
    total, square, dof, n = 0.0, 0.0, 0.0, 0
    block = 4000
    while True:
        g = (rng.standard_normal((4, block, 2, 2)) + 1j * rng.standard_normal((4, block, 2, 2))) / math.sqrt(2)
        s = 0
        for i, (p, q) in enumerate(((0, 0), (1, 1), (0, 1), (1, 0))):
            s = s + math.sqrt(same if p == q else cross) * af[p] @ g[i] @ an[q].T
        hh = math.sqrt(k / (1 + k)) * direct + math.sqrt(1 / (1 + k)) * s
        m = np.eye(4) + SNR * hh @ hh.conj().transpose(0, 2, 1)
        bits = np.linalg.slogdet(m)[1] / math.log(2)
        dof += (4 - np.trace(np.linalg.inv(m), axis1=1, axis2=2).real).sum()
        total, square, n = total + bits.sum(), square + (bits ** 2).sum(), n + block
        mean = total / n
        error = math.sqrt((square / n - mean * mean) / n)
        if error <= target:
            return mean, error, dof / n, n


def clock(f, repeat):
    best = math.inf
    for _ in range(repeat):
        t = time.perf_counter()
        out = f()
        best = min(best, time.perf_counter() - t)
    return best * 1000, out


def main():
    fc = FREQUENCY / 1e9
    zsd_rma = 10 ** max(-1, -0.17 * 1.9 + 0.22)
    zsd_umi = 10 ** max(-0.5, -3.1 * 1.9 + 0.2)
    rma = (10 ** 0.90 * DEG, zsd_rma * DEG, 0.0), (10 ** 1.52 * DEG, 10 ** 0.47 * DEG, 0.0)
    offset = -(10 ** (-1.5 * math.log10(1900) + 3.3)) * DEG
    umi = ((10 ** (1.53 - 0.23 * math.log10(1 + fc)) * DEG, zsd_umi * DEG, -offset),
           (10 ** (1.81 - 0.08 * math.log10(1 + fc)) * DEG, 10 ** (0.92 - 0.04 * math.log10(1 + fc)) * DEG, 0.0))
    rng = np.random.default_rng(1)
    for name, (near, far), k, xpr in (("RMa with sight", rma, 10 ** 0.7, 10 ** 1.2), ("UMi without", umi, 0.0, 10 ** 0.8)):
        ms, (bits, error, streams, n) = clock(lambda: capacity(near, far, k, xpr, rng), 3)
        print(f"capacity of 4 ports, {name}: {ms:.0f} ms, {bits:.3f} +- {error:.4f} bit/s/Hz, {streams:.3f} streams, {n} draws")
        positions = np.array([[0, 0, 0], [STEP, 0, 0]], float)
        ms, r = clock(lambda: covariance(*far, positions), 3)
        print(f"covariance at the far end, {name}: {ms:.1f} ms, |R01| {abs(r[0, 1]):.6f}, R00 {r[0, 0].real:.6f}")

    def correlation(d, spread, off):
        s = spread * DEG
        p = lambda x: math.exp(-math.sqrt(2) * abs(x) / s)
        part = lambda f: sum(integrate.quad(f, a, b, epsabs=1e-11, epsrel=1e-11, limit=400)[0] for a, b in ((-math.pi, 0), (0, math.pi)))
        total = part(p)
        re = part(lambda x: p(x) * math.cos(2 * math.pi * d * math.sin(x + off)))
        im = part(lambda x: p(x) * math.sin(2 * math.pi * d * math.sin(x + off)))
        return complex(re, im) / total
    ms, rho = clock(lambda: correlation(2, 20, 0.3), 5)
    print(f"correlation integral by scipy.quad: {ms:.3f} ms, {rho:.9f}")


if __name__ == "__main__":
    sys.exit(main())
