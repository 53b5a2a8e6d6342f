"""The slab's turning point to ten digits, against a loop of a general solver over the same branch.

`python -m tests.benchmarks.turning_point`
"""

from __future__ import annotations

import math
import time

import numpy as np
from scipy.integrate import solve_bvp

import bvp
import continuation

# lam = 8 (a^2 - 1) with a = coth a, the abstract of "On exact and numerical solutions of the one-dimensional planar Bratu
# problem"; digits recomputed with 40 figures.
TRUTH = 3.513830719125161


def hairpin(slab: bvp.Problem, digits: int = 10) -> tuple[float, float | None, float]:
    """Value, uncertainty and seconds of one run, from the problem to the record; compilation apart."""
    began = time.perf_counter()
    point = continuation.turning_point(slab, along="lam", digits=digits)
    return point.value, point.uncertainty, time.perf_counter() - began


def general_solver(points: int = 60, tolerance: float = 1e-6) -> tuple[float, float]:
    """The largest parameter on the branch up to u(1/2) = 4 and the seconds: the parameter as unknown, the middle value prescribed."""
    began = time.perf_counter()
    x = np.linspace(0.0, 0.5, 11)
    guess, parameter = np.zeros((2, x.size)), np.array([0.1])
    largest: list[float] = []
    middles = np.linspace(0.0, 4.0, points + 1)[1:]
    for middle in middles:
        found = solve_bvp(
            lambda x, y, p: np.vstack([y[1], -p[0] * np.exp(y[0])]),
            lambda left, right, p, middle=middle: np.array([left[0], right[1], right[0] - middle]),
            x,
            guess,
            p=parameter,
            tol=tolerance,
        )
        x, guess, parameter = found.x, found.y, found.p
        largest.append(float(found.p[0]))
    top = int(np.argmax(largest))
    near = slice(max(top - 2, 0), top + 3)
    parabola = np.polyfit(middles[near], largest[near], 4)
    roots = np.roots(np.polyder(parabola))
    real = [
        float(np.polyval(parabola, root.real))
        for root in roots
        if abs(root.imag) < 1e-9 and middles[near][0] < root.real < middles[near][-1]
    ]
    return max(real), time.perf_counter() - began


def main() -> None:
    """Print medians over interleaved runs."""
    first = time.perf_counter()
    slab = bvp.Problem("u'' + lam*exp(u) = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"lam": 0.0})
    hairpin(slab)
    compiled = time.perf_counter() - first
    ours, theirs, reading = [], [], []
    for _ in range(15):
        value, uncertainty, seconds = hairpin(slab)
        ours.append(seconds)
        began = time.perf_counter()
        bvp.Problem("u'' + lam*exp(u) = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"lam": 0.0})
        reading.append(time.perf_counter() - began)
        other, seconds = general_solver()
        theirs.append(seconds)
    mine, general = float(np.median(ours)), float(np.median(theirs))
    print(f"first run with loading or compiling {compiled:.2f} s")
    print(f"hairpin        {1e3 * mine:8.2f} ms  value off by {abs(value - TRUTH):.1e}, uncertainty {uncertainty:.1e}")
    print(f"  reading the formulas, apart: {1e3 * float(np.median(reading)):.2f} ms")
    print(
        f"solve_bvp loop {1e3 * general:8.2f} ms  value off by {abs(other - TRUTH):.1e}, digits {-math.log10(abs(other / TRUTH - 1)):.1f}"
    )
    print(f"ratio {mine / general:.4f}, that is 1/{general / mine:.0f}")


if __name__ == "__main__":
    main()
