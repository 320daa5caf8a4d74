#!/usr/bin/env python3
"""Times SciPy's solve_ivp with the run of BenchmarkSolveM1: a backwater curve of a trapezoid at 100 chainages, relative tolerance 1e-8.

The right-hand side is as quick as plain Python allows: floats and the math module, nothing from NumPy inside. Prints the least of many runs, the
median, and the largest difference from DOP853 at 1e-13; then runs the benchmark and prints how many times faster it is, least against least.

    /usr/bin/python3 profiles_pace.py        (needs numpy, scipy and Go)
"""
import math
import pathlib
import re
import statistics
import subprocess
import time

import numpy as np
from scipy.integrate import solve_ivp

WIDTH, SIDE, N, SLOPE, DISCHARGE, LENGTH, DEPTH, GRAVITY = 6.0, 1.5, 0.025, 0.001, 20.0, 5000.0, 3.0, 9.80665
COSINE = math.sqrt((1 - SLOPE) * (1 + SLOPE))
ARM = 2 * math.sqrt(1 + SIDE * SIDE)
FRICTION, INERTIA = (DISCHARGE * N) ** 2, DISCHARGE * DISCHARGE / GRAVITY


def rate(_, v):
    y = float(v[0])
    area = (WIDTH + SIDE * y) * y
    radius = area / (WIDTH + ARM * y)
    return [(SLOPE - FRICTION / (area * area * radius ** (4 / 3))) / (COSINE - INERTIA * (WIDTH + 2 * SIDE * y) / (area * area * area))]


def benchmark():
    root = pathlib.Path(__file__).resolve().parents[2]
    told = subprocess.run(["go", "test", "./compute/profile", "-run", "^$", "-bench", "^BenchmarkSolveM1$", "-count", "3", "-cpu", "1"], cwd=root, check=True,
                          capture_output=True, text=True).stdout
    return min(float(t) for t in re.findall(r"([0-9.]+) least-ns/op", told)) * 1e-9


def main():
    least = {}
    chainages = np.linspace(0, LENGTH, 100)[::-1]
    exact = solve_ivp(rate, (LENGTH, 0.0), [DEPTH], method="DOP853", rtol=1e-13, atol=1e-15, t_eval=chainages).y[0]
    for method in ("LSODA", "RK45"):
        times = []
        begun = time.perf_counter()
        while time.perf_counter() - begun < 3:
            start = time.perf_counter()
            result = solve_ivp(rate, (LENGTH, 0.0), [DEPTH], method=method, rtol=1e-8, atol=1e-8, t_eval=chainages)
            times.append(time.perf_counter() - start)
        least[method] = min(times)
        off = max(abs(result.y[0] - exact) / exact)
        print(f"{method}: least {min(times) * 1e6:.0f} us, median {statistics.median(times) * 1e6:.0f} us of {len(times)} runs, {result.nfev} evaluations, worst depth {off:.1e}")
    ours = benchmark()
    print(f"Leat: least {ours * 1e6:.0f} us: " + ", ".join(f"{t / ours:.1f} times faster than {m}" for m, t in least.items()))


if __name__ == "__main__":
    main()
