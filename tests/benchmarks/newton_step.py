"""A Newton step of a trace, per interval, against LAPACK's tridiagonal solver of the same size: `python -m tests.benchmarks.newton_step`.

The whole trace's time is divided by its Newton steps and intervals: predictions, tests, measures and kept profiles are in it.
dgtsv gets two right-hand sides, as the bordered system needs them, and a matrix that is ready: no assembly is in its time.
"""

from __future__ import annotations

import argparse
import resource
import time

import numpy as np
from scipy.linalg import lapack

import bvp
import continuation


def slab() -> bvp.Problem:
    """The exponential source between two held faces."""
    return bvp.Problem("u'' + lam*exp(u) = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"lam": 0.0})


def lapack_seconds(intervals: int) -> float:
    """The median time of dgtsv with two right-hand sides."""
    count = intervals - 1
    right = np.asfortranarray(np.random.default_rng(1).standard_normal((count, 2)))
    times = []
    for _ in range(max(3, int(2e6 / intervals))):
        lower, middle, upper, given = np.ones(count - 1), np.full(count, -2.001), np.ones(count - 1), right.copy(order="F")
        began = time.perf_counter()
        lapack.dgtsv(lower, middle, upper, given, overwrite_dl=1, overwrite_d=1, overwrite_du=1, overwrite_b=1)
        times.append(time.perf_counter() - began)
    return float(np.median(times))


def peak_bytes() -> int:
    """The most memory this process has had."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024


def main() -> None:
    """Print one line a size; `--most 6` is the largest power of ten that is traced, `--solve 7` the largest that is solved."""
    options = argparse.ArgumentParser()
    options.add_argument("--most", type=int, default=6)
    options.add_argument("--solve", type=int, default=0)
    asked = options.parse_args()
    problem = slab()
    continuation.trace(problem, along="lam", intervals=1000, until="max(u) > 3", digits=None)
    print("intervals  newton steps  ns a step and interval  dgtsv, 2 right sides  ratio  seconds  bytes an interval")
    for power in range(3, asked.most + 1):
        intervals = 10**power
        before = peak_bytes()
        branch = continuation.trace(problem, along="lam", intervals=intervals, until="max(u) > 3", digits=None, profiles=2)
        grown = (peak_bytes() - before) / intervals
        ours = branch.seconds / branch.newton_steps / intervals
        theirs = lapack_seconds(intervals) / intervals
        turned = branch.turning_points[0].value
        print(
            f"{intervals:9d} {branch.newton_steps:13d} {1e9 * ours:23.1f} {1e9 * theirs:21.1f} {ours / theirs:6.2f}"
            f" {branch.seconds:8.2f} {grown:18.0f}   turning point {turned:.10f}",
            flush=True,
        )
    if asked.solve:
        began = time.perf_counter()
        state = bvp.solve(problem, {"lam": 2.0}, intervals=10**asked.solve)
        spent = time.perf_counter() - began
        print(f"{10**asked.solve} intervals solved in {spent:.1f} s: ok {state.ok}, max(u) {state.measure('max(u)'):.12f}")


if __name__ == "__main__":
    main()
