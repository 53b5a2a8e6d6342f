"""What adaptive grids cost beside uniform ones, to the same true error: `python -m tests.benchmarks.adaptive [--figure FILE]`.

For each problem the smallest uniform grid (a power of two) whose own value, not extrapolated, is as good as that of the
adaptive grid of 200 intervals; intervals and time of a solve beside each other. --figure draws an interior layer that moves
along a branch, with its nodes.
"""

from __future__ import annotations

import argparse
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

import numpy as np
import numpy.typing as npt
from scipy.special import erf

import bvp
import continuation
from bvp.state import State

Array = npt.NDArray[np.float64]
Exact = Callable[[Array], Array]
MOST = 1 << 20


def problems() -> list[tuple[str, bvp.Problem, float, Exact]]:
    """Linear layers with exact solutions (Mazzia & Cash 2015, AIP Conf. Proc. 1648:020009)."""
    found: list[tuple[str, bvp.Problem, float, Exact]] = []
    for eps in (1e-2, 1e-4, 1e-6):
        decay = bvp.Problem("eps*y'' = y", "y", (0, 1), ["y(0) = 1", "y(1) = 0"], {"eps": eps})
        found.append((f"eps y'' = y, eps = {eps:g}", decay, eps, partial(_decay, eps)))
        outflow = bvp.Problem("eps*y'' = y'", "y", (0, 1), ["y(0) = 1", "y(1) = 0"], {"eps": eps})
        found.append((f"eps y'' = y', eps = {eps:g}", outflow, eps, partial(_outflow, eps)))
        text = "eps*y'' + x*y' = -eps*pi^2*cos(pi*x) - pi*x*sin(pi*x)"
        shock = bvp.Problem(text, "y", (-1, 1), ["y(-1) = -2", "y(1) = 0"], {"eps": eps})
        found.append((f"eps y'' + x y' = …, eps = {eps:g}", shock, eps, partial(_shock, eps)))
    return found


def _decay(eps: float, x: Array) -> Array:
    root = np.sqrt(eps)
    return (np.exp(-x / root) - np.exp((x - 2) / root)) / (1 - np.exp(-2 / root))


def _outflow(eps: float, x: Array) -> Array:
    return np.expm1((x - 1) / eps) / np.expm1(-1 / eps)


def _shock(eps: float, x: Array) -> Array:
    return np.cos(np.pi * x) + erf(x / np.sqrt(2 * eps)) / erf(1 / np.sqrt(2 * eps))


def timed(problem: bvp.Problem, eps: float, exact: Exact, **how: object) -> tuple[State, float, float]:
    """A state, its largest error at nodes, and the median seconds of three solves."""
    seconds = []
    for _ in range(3):
        began = time.perf_counter()
        state = bvp.solve(problem, {"eps": eps}, **how)  # type: ignore[arg-type]
        seconds.append(time.perf_counter() - began)
    return state, float(np.max(np.abs(state.u - exact(state.x)))), float(np.median(seconds))


def figure(path: Path) -> None:
    """Profiles of a moving interior layer with their nodes below."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    guess = "x - 0.25 + 0.75*(x - 0.25)/sqrt((x - 0.25)^2 + 0.0004)"
    problem = bvp.Problem(
        "eps*u'' + u*u' - u = 0", "u", (0, 1), ["u(0) = a", "u(1) = 1.5"], {"a": -1.0, "eps": 2e-3}, initial_guess={"u": guess}
    )
    branch = continuation.trace(problem, along="a", direction="both", within=(-1.4, -0.6))
    drawn = Figure(figsize=(6.3, 4.6), layout="constrained")
    FigureCanvasAgg(drawn)
    above, below = drawn.subplots(2, 1, sharex=True, height_ratios=(3, 1))
    chosen = [min(branch.states.values(), key=lambda state: abs(state.parameters["a"] - a)) for a in (-1.4, -1.2, -1.0, -0.8, -0.6)]
    for row, (state, grey) in enumerate(zip(chosen, (0.0, 0.15, 0.3, 0.45, 0.6), strict=True)):
        above.plot(state.x, state.u, color=str(grey), linewidth=1.2)
        below.plot(state.x, np.full(state.x.size, -row), "|", color=str(grey), markersize=7, markeredgewidth=0.4)
        below.text(1.03, -row, f"a = {state.parameters['a']:.2f}", fontsize=8, va="center")
    above.set_ylabel("u")
    above.set_title("eps u'' + u u' - u = 0, u(0) = a, u(1) = 3/2, eps = 0.002: states and their 201 nodes", fontsize=9, loc="left")
    below.set_xlabel("x (1)")
    below.set_yticks([])
    below.set_xlim(-0.02, 1.2)
    below.set_ylabel("nodes")
    drawn.savefig(path, dpi=150)


def main() -> None:
    """Print the table."""
    options = argparse.ArgumentParser()
    options.add_argument("--figure", type=Path)
    asked = options.parse_args()
    if asked.figure:
        figure(asked.figure)
        return
    print("| problem | adaptive: error | ms | extrapolated error | uniform: intervals for that error | ms | time ratio |")
    print("| --- | --- | --- | --- | --- | --- | --- |")
    for name, problem, eps, exact in problems():
        bvp.solve(problem, {"eps": eps}, grid="adaptive")
        _, error, seconds = timed(problem, eps, exact, grid="adaptive")
        _, better, _ = timed(problem, eps, exact, grid="adaptive", extrapolate=True)
        intervals, needed = 256, "more than 1048576"
        spent = float("nan")
        while intervals <= MOST:
            _, other, spent = timed(problem, eps, exact, intervals=intervals)
            if other <= error:
                needed = str(intervals)
                break
            intervals *= 2
        print(
            f"| {name} | {error:.1e} | {1e3 * seconds:.1f} | {better:.1e} | {needed} | {1e3 * spent:.1f} | {spent / seconds:.1f} |",
            flush=True,
        )


if __name__ == "__main__":
    main()
