"""The other side of the comparison: LAPACK and numpy, one thread, warm.

Reads one JSON request a line on stdin and answers each with the seconds of CPU it took. A request names its work and a file of doubles;
what can be prepared once is kept by file name, so that only the work itself is timed.
"""
import json
import sys
import time

import numpy as np
import scipy.linalg as linalg

kept = {}


def plane(file, key, count, offset):
    return np.fromfile(file, dtype=np.float64, count=count, offset=8 * offset)


def matrix(request):
    file, n = request["file"], request["n"]
    if file not in kept:
        re = plane(file, "re", n * n, 0).reshape(n, n)
        a = re + 1j * plane(file, "im", n * n, n * n + 2 * n).reshape(n, n) if request["complex"] else re
        phi = plane(file, "phi", n, n * n)
        kept.clear()
        kept[file] = np.asfortranarray(a), phi
    return kept[file]


def dense(request):
    a, phi = matrix(request)
    start = time.process_time()
    energies, vectors = linalg.eigh(a, driver="evd", check_finite=False)
    amplitudes = vectors.conj().T @ phi
    weights = amplitudes.real**2 + amplitudes.imag**2
    seconds = time.process_time() - start
    return seconds, float(weights.sum()), float(weights @ energies**2)


def tridiagonal(request):
    n = request["n"]
    d, e = plane(request["file"], "d", n, 0), plane(request["file"], "e", n - 1, n)
    start = time.process_time()
    energies, vectors = linalg.eigh_tridiagonal(d, e, check_finite=False)
    weights = vectors[0] ** 2
    seconds = time.process_time() - start
    return seconds, float(weights.sum()), float(weights @ energies**2)


def averaged(request):
    """R <- Q (X o R) Q with Q = 1 - tt' as rank-one updates of two preallocated arrays: the fastest of the forms tried."""
    n, steps = request["n"], request["steps"]
    energies, t = plane(request["file"], "energies", n, 0), plane(request["file"], "t", n, n)
    difference = energies[:, None] - energies[None, :]
    # Gamma intervals of shape 2.5.
    x = (1 + 1j * difference * request["mean"] / 2.5) ** -2.5
    r = np.outer(t, t).astype(complex)
    column = t[:, None]
    scratch = np.empty_like(r)
    detected = 0.0
    start = time.process_time()
    for _ in range(steps):
        np.multiply(x, r, out=r)
        u = r @ t
        s = float((t @ u).real)
        detected += s
        c = (u - (s / 2) * t)[:, None]
        np.multiply(c, t[None, :], out=scratch)
        r -= scratch
        np.multiply(column, c.conj().T, out=scratch)
        r -= scratch
    return time.process_time() - start, detected, 0.0


def moments(request):
    """Mean and variance of the first detected return: the system of n unknowns, by Cholesky factorisation."""
    n = request["n"]
    energies, t = plane(request["file"], "energies", n, 0), plane(request["file"], "t", n, n)
    v = t * t
    start = time.process_time()
    difference = energies[:, None] - energies[None, :]
    complement = 1 - (1 + 1j * difference * request["mean"] / 2.5) ** -2.5
    np.fill_diagonal(complement, 1)
    b = 1 / complement
    c = b - 1
    np.fill_diagonal(c, 0)
    first = 1 / v
    g = -(first[:, None] + first[None, :]) / 2
    h = (c * g) @ v
    a = -c.real * np.outer(t, t)
    a[np.diag_indices(n)] = 1 + c.real @ v
    factor = linalg.cho_factor(a, overwrite_a=True, check_finite=False)
    z = linalg.cho_solve(factor, h.imag * t, check_finite=False) / t
    held = (first.sum() * 0 + v @ first + first) / 2 - h.real + (c.imag * (z[None, :] - z[:, None])) @ v
    second = held.sum()
    return time.process_time() - start, n, 2 * second - n - n * n


WORKS = {"dense": dense, "tridiagonal": tridiagonal, "averaged": averaged, "moments": moments}
print(json.dumps({"numpy": np.__version__, "blas": np.show_config("dicts")["Build Dependencies"]["blas"]["version"]}), flush=True)
for line in sys.stdin:
    request = json.loads(line)
    seconds, *values = WORKS[request["work"]](request)
    print(json.dumps({"seconds": seconds, "values": values}), flush=True)
