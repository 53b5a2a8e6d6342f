"""Turning points of difference schemes on fixed grids, marched from the middle with 40 digits, and the constants of their errors.

With the source lam e^u a symmetric discrete state is u = U - U(end), U = 0 in the middle and lam e^u = mu e^U there: marching
needs mu alone, lam = mu exp(U(end)), and the turning point is where d ln lam/d ln mu = 1 + dU(end)/d ln mu = 0.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

from mpmath import mp, mpf

from tests.recomputed.exponential import interval_turning_point

Next = Callable[[Any, Any, Any, Any], Any]  # (U[k-1], U[k], h, mu) -> U[k+1]

AXIS_CELLS = {"node on the axis": "balanced", "node on the axis, source of its cell lost": "lost", "axis half a step off": "half"}


def central(before: Any, now: Any, h: Any, mu: Any) -> Any:
    """u[k+1] - 2u[k] + u[k-1] = -h^2 f."""
    return 2 * now - before - h * h * mu * mp.exp(now)


def fitted(before: Any, now: Any, h: Any, mu: Any) -> Any:
    """u[k+1] - 2u[k] + u[k-1] = -(f/b) 4 sin^2(sqrt(b) h/2) with b = f_u = f here."""
    return 2 * now - before - 4 * mp.sin(h * mp.sqrt(mu * mp.exp(now)) / 2) ** 2


def logarithmic(before: Any, now: Any, h: Any, mu: Any) -> Any:
    """u[k+1] - 2u[k] + u[k-1] = -2 ln(1 + (h^2/2) f)."""
    return 2 * now - before - 2 * mp.log(1 + h * h * mu * mp.exp(now) / 2)


def fourth_order(before: Any, now: Any, h: Any, mu: Any) -> Any:
    """u[k+1] - 2u[k] + u[k-1] = -(h^2/12)(f[k-1] + 10 f[k] + f[k+1]), the last solved for by Newton."""
    c = h * h * mu / 12
    known = 2 * now - before - c * (mp.exp(before) + 10 * mp.exp(now))
    after = 2 * now - before
    for _ in range(60):
        change = (known - c * mp.exp(after) - after) / (1 + c * mp.exp(after))
        after += change
        if abs(change) < mpf(10) ** (3 - mp.dps):
            return after
    raise ArithmeticError("the implicit step did not settle")


def end_value(rule: Next, intervals: int, mu: Any) -> Any:
    """U at the end of [0, 1]: from a node in the middle (even N) or from between two (odd N)."""
    h = mpf(1) / intervals
    if intervals % 2:
        before, now = mpf(0), mpf(0)
        remaining = intervals // 2
    else:
        # Symmetry: the middle node's equation with equal neighbours, solved for the neighbour by a secant (explicit rules at once).
        after = mp.findroot(lambda after: rule(after, mpf(0), h, mu) - after, -h * h * mu / 2)
        before, now = mpf(0), after
        remaining = intervals // 2 - 1
    for _ in range(remaining):
        before, now = now, rule(before, now, h, mu)
    return now


def turning_point(end: Callable[[Any], Any], guess: Any) -> Any:
    """The largest mu exp(U(end; mu)), by Newton on its logarithmic slope with differences of 1e-10 (error 1e-20 squared)."""
    step = mpf("1e-10")

    def log_lam(log_mu: Any) -> Any:
        return log_mu + end(mp.exp(log_mu))

    at = mp.log(guess)
    for _ in range(20):
        left, middle, right = (log_lam(at + k * step) for k in (-1, 0, 1))
        change = (right - left) * step / 2 / (left - 2 * middle + right)
        at -= change
        if abs(change) < mpf("1e-14"):
            return mp.exp(log_lam(at))
    raise ArithmeticError("no turning point of the scheme")


def interval(rule: Next, intervals: int) -> Any:
    """The scheme's turning point on [0, 1]; mu starts at lam e^u of the true one."""
    return turning_point(lambda mu: end_value(rule, intervals, mu), mpf("11.5"))


def radial_end(intervals: int, mu: Any, flux: Callable[[Any, Any], Any], axis_cell: str) -> Any:
    """U(1) in the cylinder from flux(r[k], r[k+1]) (U[k+1] - U[k]) - flux(r[k-1], r[k]) (U[k] - U[k-1]) = -r[k] h mu e^U[k].

    axis_cell "balanced": a node on the axis, its cell h^2/8 large, all of its source flowing into the first shell;
    "lost": the same equation of the axis node, but a flux that vanishes in the first cell (as 1/ln(r[1]/r[0]) does at r[0] = 0);
    "half": nodes at (k + 1/2) h, the first face on the axis, h = 1/(N + 1/2).
    """
    h = mpf(1) / intervals if axis_cell != "half" else mpf(1) / (mpf(intervals) + mpf(1) / 2)
    if axis_cell == "half":
        r, u, flow, remaining = h / 2, mpf(0), mpf(0), intervals
    else:
        r, u, flow, remaining = h, -h * h / 4 * mu, -h * h / 8 * mu if axis_cell == "balanced" else mpf(0), intervals - 1
    for _ in range(remaining):
        flow -= r * h * mu * mp.exp(u)
        u += flow / flux(r, r + h)
        r += h
    return u


def arithmetic_flux(inner: Any, outer: Any) -> Any:
    """Face radius over step: the central scheme written as a balance."""
    return (inner + outer) / 2 / (outer - inner)


def logarithmic_flux(inner: Any, outer: Any) -> Any:
    """1/ln(outer/inner): exact for 1 and ln r."""
    return 1 / mp.log(outer / inner)


def constant(turning_point_on: Callable[[int], Any], truth: Any, power: int, offset: Any = 0) -> Any:
    """The limit of (turning point - truth)/h^power with h = 1/(N + offset), extrapolated in h^2 from N = 80, 120, 160."""
    grids = (80, 120, 160)
    steps = [1 / (n + mpf(offset)) ** 2 for n in grids]
    ratios = [(turning_point_on(n) - truth) / step ** (power // 2) for n, step in zip(grids, steps, strict=True)]
    return mp.fsum(
        ratio * mp.fprod(other / (other - step) for j, other in enumerate(steps) if j != i)
        for i, (ratio, step) in enumerate(zip(ratios, steps, strict=True))
    )


def log_cosh(h: Any) -> Any:
    """2 ln cosh h."""
    return 2 * mp.log(mp.cosh(h))


def hyperbolic(h: Any) -> Any:
    """4 sinh^2(h/2)."""
    return 4 * mp.sinh(h / 2) ** 2


def rescaled(phi: Callable[[Any], Any], intervals: int) -> Any:
    """The turning point of the central scheme with the denominator phi(h) in place of h^2."""
    return interval(central, intervals) / (intervals**2 * phi(mpf(1) / intervals))


def cylinder(flux: Callable[[Any, Any], Any], axis_cell: str, intervals: int) -> Any:
    """The turning point of a balance scheme in the cylinder; mu starts at the true lam e^u(0) = 8."""
    return turning_point(lambda mu: radial_end(intervals, mu, flux, axis_cell), mpf(8))


def values() -> dict[str, Any]:
    """Everything recorded about schemes but the listed states, which `state_residual` checks."""
    e, truth = mp.e, interval_turning_point()
    found = {f"central, interval, N {n}, turning point": interval(central, n) for n in (2, 3, 10, 256)}
    found |= {f"fitted, interval, N {n}, turning point": interval(fitted, n) for n in (10, 20)}
    found |= {f"logarithmic source, interval, N {n}, turning point": interval(logarithmic, n) for n in (8, 64)}
    found["fourth order, interval, N 32, turning point"] = interval(fourth_order, 32)
    # N = 3, u1 = u2 = u: u = lam e^u/9; the antisymmetric variation (1, -1) vanishes where 3 = lam e^u/9, so u = 3.
    found["central, interval, N 3, pitchfork"] = 27 / e**3
    for name, rule, power in (
        ("central", central, 2),
        ("fitted", fitted, 2),
        ("logarithmic source", logarithmic, 2),
        ("fourth order", fourth_order, 4),
    ):
        found[f"{name}, interval, error constant, h^{power}"] = constant(partial(interval, rule), truth, power)
    # lam of a scheme with the denominator phi is lam h^2/phi of the central one.
    for name, phi in (("2 ln cosh h", log_cosh), ("4 sinh^2(h/2)", hyperbolic)):
        found[f"{name}, interval, error constant, h^2"] = constant(partial(rescaled, phi), truth, 2)
    for name, flux in (("central", arithmetic_flux), ("logarithmic flux", logarithmic_flux)):
        for place, axis_cell in AXIS_CELLS.items():
            offset = mpf(1) / 2 if axis_cell == "half" else 0
            found[f"{name}, cylinder, {place}, error constant, h^2"] = constant(partial(cylinder, flux, axis_cell), mpf(2), 2, offset)
    return found


def state_residual(interior: tuple[float, ...], lam: float) -> float:
    """How far a recorded state of the central scheme moves when Newton is run on it in double precision."""
    import numpy as np

    from tests.naive import NaiveProblem, newton

    problem = NaiveProblem(lambda x, u, lam: lam * np.exp(u), lambda x, u, lam: lam * np.exp(u))
    start = np.array([0.0, *interior, 0.0])
    return float(np.max(np.abs(newton(problem, start, lam) - start)))
