"""The exponential source: closed forms in slab and cylinder, Taylor series in the sphere."""

from __future__ import annotations

from typing import Any

from mpmath import mp, mpf

from tests.taylor import Series, advance, advance_until, exp, from_axis, radial, radial_until


def interval_turning_point() -> Any:
    """8 (a^2 - 1) with a = coth a."""
    a = mp.findroot(lambda a: a - mp.coth(a), mpf("1.2"))
    return 8 * (a * a - 1)


def interval_state(lam: Any, guess: Any) -> tuple[Any, Any]:
    """u(1/2) and u'(0) from theta = sqrt(2 lam) cosh(theta/4): 2 ln cosh(theta/4) and theta tanh(theta/4)."""
    theta = mp.findroot(lambda theta: theta - mp.sqrt(2 * mpf(lam)) * mp.cosh(theta / 4), guess)
    return 2 * mp.log(mp.cosh(theta / 4)), theta * mp.tanh(theta / 4)


def cooled_slab(bi: Any) -> Any:
    """The largest lam of the slab of half width 1 with u'(1) + Bi u(1) = 0.

    u = m - 2 ln cosh(z x), lam = 2 z^2 e^-m, and m = 2 ln cosh z + (2/Bi) z tanh z from the condition.
    """
    bi = mpf(bi)

    def log_lam(z: Any) -> Any:
        return mp.log(2 * z * z) - 2 * mp.log(mp.cosh(z)) - 2 * z * mp.tanh(z) / bi

    def slope(z: Any) -> Any:
        return 2 / z - 2 * mp.tanh(z) - 2 * (mp.tanh(z) + z / mp.cosh(z) ** 2) / bi

    return mp.exp(log_lam(mp.findroot(slope, (mpf("1e-3"), mpf(2)), solver="anderson")))


def cooled_cylinder(bi: Any) -> Any:
    """lam = 8B/(1+B)^2 exp(-4B/(Bi(1+B))) at B = -2/Bi + sqrt(1 + 4/Bi^2)."""
    bi = mpf(bi)
    b = -2 / bi + mp.sqrt(1 + 4 / bi**2)
    return 8 * b / (1 + b) ** 2 * mp.exp(-4 * b / (bi * (1 + b)))


def exponential(_: Series, u: Series) -> Series:
    """The source with the factor lam scaled into the radius."""
    return exp(u)


def sphere_turning_points(count: int) -> list[tuple[Any, Any]]:
    """(lam, u(0)) of the first turning points of the sphere.

    With U'' + (2/p) U' + e^U = 0, U(0) = 0 every state is u = U(p r) - U(p), lam = p^2 e^U(p): d lam/dp = 0 where 2 + p U' = 0.
    """
    found = []
    p, (u, v) = radial_until(exponential, 2, 0, lambda p, u, v: 2 + p * v)
    while True:
        found.append((p**2 * mp.exp(u), -u))
        if len(found) == count:
            return found
        further = p * mpf("1.000001")
        u, v = advance(radial(exponential, 2), p, (u, v), further)
        p, (u, v) = advance_until(radial(exponential, 2), further, (u, v), lambda p, u, v: 2 + p * v)


def cooled_sphere(bi: Any) -> Any:
    """The first turning point with u'(1) + Bi u(1) = 0: u = U(p r) - U(p) - p U'(p)/Bi, lam = p^2 exp(U + p U'/Bi).

    d ln lam/dp = 2/p + U' + (U' + p U'')/Bi with p U'' = -2 U' - p e^U.
    """
    bi = mpf(bi)

    def slope(p: Any, u: Any, v: Any) -> Any:
        return 2 + p * v + p * (-v - p * mp.exp(u)) / bi

    p, u, v = from_axis(exponential, 2, 0, mpf("1e-3"))
    p, (u, v) = advance_until(radial(exponential, 2), p, (u, v), slope)
    return p**2 * mp.exp(u + p * v / bi)


def values() -> dict[str, Any]:
    """Everything recorded about the exponential source in one dimension."""
    a = mp.findroot(lambda a: a - mp.coth(a), mpf("1.2"))
    found = {
        "interval, exponential, turning point": interval_turning_point(),
        "interval, exponential, turning point, u(1/2)": 2 * mp.log(mp.cosh(a)),
        "interval, exponential, turning point, u'(0)": 4 * a * mp.tanh(a),
        "slab, exponential, turning point": 2 * (a * a - 1),
        "cylinder, exponential, turning point": cylinder_turning_point()[0],
        "cylinder, exponential, turning point, u(0)": cylinder_turning_point()[1],
        "slab, exponential, Bi 1, turning point": cooled_slab(1),
    }
    for lam in ("0.5", "1", "2", "3", "3.5"):
        for side, guess in (("lower", (mpf("0.1"), 4 * a)), ("upper", (4 * a, mpf(40)))):
            middle, slope = interval_state_between(lam, guess)
            found[f"interval, exponential, lam {lam}, {side}, u(1/2)"] = middle
            if lam in ("1", "2", "3"):
                found[f"interval, exponential, lam {lam}, {side}, u'(0)"] = slope
    for bi in ("0.5", "2", "20"):
        found[f"slab, exponential, Bi {bi}, turning point"] = cooled_slab(bi)
        found[f"sphere, exponential, Bi {bi}, turning point"] = cooled_sphere(bi)
    for number, (lam, centre) in enumerate(sphere_turning_points(2), start=1):
        found[f"sphere, exponential, turning point {number}"] = lam
        found[f"sphere, exponential, turning point {number}, u(0)"] = centre
    return found | {"slab, handbook": 2 * (a * a - 1), "cylinder, handbook": mpf(2), "sphere, handbook": sphere_turning_points(1)[0][0]}


def interval_state_between(lam: Any, bracket: tuple[Any, Any]) -> tuple[Any, Any]:
    """`interval_state` with theta between two values on one side of the turning point's."""
    root = mp.findroot(lambda theta: theta - mp.sqrt(2 * mpf(lam)) * mp.cosh(theta / 4), bracket, solver="anderson")
    return interval_state(lam, root)


def cylinder_turning_point() -> tuple[Any, Any]:
    """By Taylor series, so that "2 exactly" is not assumed: lam = p^2 e^U(p), u(0) = -U(p)."""
    p, (u, _) = radial_until(exponential, 1, 0, lambda p, u, v: 2 + p * v)
    return p**2 * mp.exp(u), -u
