"""The Arrhenius source exp(u/(1 + eps u)) by Taylor series from the middle: lam as a function of u(0), its extrema, its cusp."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from mpmath import mp, mpf

from tests.taylor import Series, exp, radial_until


def parameter(source: Callable[[Series, Series], Series], exponent: int, centre: Any) -> Any:
    """lam with laplacian(u) + lam source(u) = 0, u(1) = 0 and u(0) = centre: the square of the first zero at lam = 1."""
    zero, _ = radial_until(source, exponent, centre, lambda r, u, v: u)
    return zero**2


def arrhenius(eps: Any) -> Callable[[Series, Series], Series]:
    """The source for one activation number."""
    return lambda _, u: exp(u / (u * eps + 1))


def derivatives(function: Callable[[Any], Any], at: Any) -> tuple[Any, Any]:
    """First and second derivative by central differences of 9 points with a step of 1e-4 (errors near 1e-33)."""
    h = mpf("1e-4")
    samples = [function(at + k * h) for k in range(-4, 5)]
    first = [mpf(1) / 280, mpf(-4) / 105, mpf(1) / 5, mpf(-4) / 5, mpf(0), mpf(4) / 5, mpf(-1) / 5, mpf(4) / 105, mpf(-1) / 280]
    second = [mpf(-1) / 560, mpf(8) / 315, mpf(-1) / 5, mpf(8) / 5, mpf(-205) / 72, mpf(8) / 5, mpf(-1) / 5, mpf(8) / 315, mpf(-1) / 560]
    return mp.fdot(first, samples) / h, mp.fdot(second, samples) / h**2


def extremum(function: Callable[[Any], Any], guess: Any) -> Any:
    """Where the first derivative vanishes, by Newton with the second."""
    at = mpf(guess)
    for _ in range(30):
        slope, curvature = derivatives(function, at)
        at -= slope / curvature
        if abs(slope / curvature) < mpf("1e-22"):
            return at
    raise ArithmeticError("no extremum")


def cusp(exponent: int, eps: Any, centre: Any) -> tuple[Any, Any, Any]:
    """(eps, lam, u(0)) where first and second derivative vanish together, by Newton with differenced third derivatives."""
    eps, centre = mpf(eps), mpf(centre)

    def both(eps: Any, centre: Any) -> Any:
        return mp.matrix(derivatives(lambda m: parameter(arrhenius(eps), exponent, m), centre))

    h = mpf("1e-6")
    for _ in range(12):
        now = both(eps, centre)
        by_eps = (both(eps + h, centre) - both(eps - h, centre)) / (2 * h)
        by_centre = (both(eps, centre + h) - both(eps, centre - h)) / (2 * h)
        change = mp.lu_solve(mp.matrix([[by_eps[0], by_centre[0]], [by_eps[1], by_centre[1]]]), -now)
        eps, centre = eps + change[0], centre + change[1]
        if abs(change[1]) < mpf("1e-13"):
            return eps, parameter(arrhenius(eps), exponent, centre), centre
    raise ArithmeticError("no cusp")


def pellet(beta: Any, gamma_beta: Any) -> Callable[[Series, Series], Series]:
    """With c = 1 - y: c'' + phi^2 (1 - c) exp(gamma beta c/(1 + beta c)) = 0, first order in the concentration y."""
    return lambda _, c: (1 - c) * exp(c * gamma_beta / (c * beta + 1))


def values() -> dict[str, Any]:
    """Cusps, turning points at eps = 0.22 and 0.01, and the pellet with gamma = 20, beta = 0.4."""
    found: dict[str, Any] = {}
    near = {"slab": ("0.2458", "4.9"), "cylinder": ("0.2421", "5.9"), "sphere": ("0.2388", "7.2")}
    for exponent, (geometry, (eps, centre)) in enumerate(near.items()):
        for name, value in zip(("eps", "lam", "u(0)"), cusp(exponent, eps, centre), strict=True):
            found[f"{geometry}, Arrhenius, cusp, {name}"] = value

    def slab(eps: str) -> Callable[[Any], Any]:
        return lambda m: parameter(arrhenius(mpf(eps)), 0, m)

    found["slab, Arrhenius, eps 0.22, turning point 1"] = slab("0.22")(extremum(slab("0.22"), "2.6"))
    found["slab, Arrhenius, eps 0.22, turning point 2"] = slab("0.22")(extremum(slab("0.22"), "9.0"))
    found["slab, Arrhenius, eps 0.01, turning point 1"] = slab("0.01")(extremum(slab("0.01"), "1.2"))

    def reacting(c: Any) -> Any:
        return mp.sqrt(parameter(pellet(mpf("0.4"), mpf(8)), 0, c))

    for number, guess in ((1, "0.2071"), (2, "0.7727")):
        centre = extremum(reacting, guess)
        found[f"slab, pellet, turning point {number}, phi"] = reacting(centre)
        found[f"slab, pellet, turning point {number}, y(0)"] = 1 - centre
    return found
