"""A plain numpy slab recursion, vectorised over wavelengths, on the very profile and materials the C benchmark uses: cone of
300 nm, two-dimensional Bruggeman, 256 midpoint slabs (within 1e-5 of the settled answer), 901 wavelengths. Printed as a
JSON line like the others, so that the ratio of the two can be read off. Usage: recursion.py MATERIALS_FOLDER"""
import json
import sys
import time

import numpy as np


def silicon(folder, nm):
    rows = [line.split(",") for line in open(folder + "/silicon.csv") if line[0].isdigit()]
    t = np.array(rows, dtype=float)
    return (np.interp(nm, t[:, 0], t[:, 1]) + 1j * np.interp(nm, t[:, 0], t[:, 2])) ** 2


def bruggeman(f, e):
    """Air and silicon in the plane; the root with Re(x / sqrt(e)) > 0."""
    g, b = np.sqrt(e), (2.0 * f - 1.0) * (e - 1.0)
    x = 0.5 * (b + np.sqrt(b * b + 4.0 * e))
    return np.where((x / g).real > 0.0, x, 0.5 * (b - np.sqrt(b * b + 4.0 * e)))


def spectrum(nm, e, slabs=256, height=300.0):
    k0, r, below = 2.0 * np.pi / nm, 0.0, np.sqrt(e)
    for j in range(slabs - 1, -1, -1):
        n = np.sqrt(bruggeman(((j + 0.5) / slabs) ** 2, e))
        step = (n - below) / (n + below)
        r = (step + r) / (1.0 + step * r) * np.exp(2j * k0 * n * height / slabs)
        below = n
    step = (1.0 - below) / (1.0 + below)
    return np.abs((step + r) / (1.0 + step * r)) ** 2


def main():
    nm = np.arange(300.0, 1201.0)
    e = silicon(sys.argv[1], nm)
    times = []
    while len(times) < 5 or sum(times) < 1.0:
        start = time.perf_counter()
        R = spectrum(nm, e)
        times.append(time.perf_counter() - start)
    print(json.dumps({"name": "numpy_recursion_901_normal", "best_s": min(times), "mean_s": sum(times) / len(times),
                      "runs": len(times), "R_at_600_nm": round(float(R[300]), 6)}))


main()
