"""Branch records made from formulas, without a solver: what drawing and counting are tried on."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from scipy.optimize import brentq

from continuation.records import Array, Branch, TurningPoint


def turning_point(
    value: float,
    measures: Mapping[str, float],
    states: str,
    position: float,
    uncertainty: float | None,
    survives: bool = True,
    on_grid: float | None = None,
) -> TurningPoint:
    """A turning point's record with what drawing needs."""
    at = value if on_grid is None else on_grid
    return TurningPoint("main", value, uncertainty, measures, states, 2.0, at, (), survives, {}, position)


def branch_of(
    parameter: Array,
    measures: Mapping[str, Array],
    unstable: Sequence[int] | Array | None,
    arclength: Array,
    points: Sequence[TurningPoint] = (),
    along: str = "lam",
    **others: Any,
) -> Branch:
    """A branch's record with what drawing needs."""
    counts = None if unstable is None else np.asarray(unstable, dtype=np.int64)
    kept: dict[str, Any] = {"ended": "edge of the range", **others}
    return Branch(
        "main",
        along,
        "central",
        200,
        parameter,
        measures,
        counts,
        arclength,
        "at the start",
        kept.pop("ended"),
        tuple(points),
        {},
        0,
        0,
        0.0,
        0.0,
        True,
        **kept,
    )


def parametric(
    parameter: Callable[[float], float],
    measure: Callable[[float], float],
    ends: tuple[float, float],
    points: int = 60,
    uncertainty: float | None = 4e-11,
    name: str = "max(u)",
    stable: bool = True,
    step: float = 1e-6,
    **others: Any,
) -> Branch:
    """A branch (parameter(s), measure(s)) whose turning points are the roots of the parameter's slope.

    The number of unstable directions starts at 0 and goes 0, 1, 0, 1, … unless `stable` is False: then there is none.
    """

    def slope(s: float) -> float:
        return (parameter(s + step) - parameter(s - step)) / (2 * step)

    dense = np.linspace(*ends, 2001)[1:-1]
    slopes = np.array([slope(s) for s in dense])
    roots = [brentq(slope, dense[k], dense[k + 1], xtol=1e-12) for k in np.flatnonzero(np.sign(slopes[:-1]) != np.sign(slopes[1:]))]
    roots = [root for index, root in enumerate(roots) if index == 0 or root - roots[index - 1] > 1e-6]
    at = np.linspace(*ends, points)
    turned = []
    for root in roots:
        states = "below" if parameter(root) > parameter(root + 1e-3) else "above"
        turned.append(turning_point(parameter(root), {name: measure(root)}, states, root, uncertainty))
    counts = np.sum(at[:, None] > np.array(roots), axis=1) % 2 if roots else np.zeros(points)
    values = np.array([measure(s) for s in at])
    return branch_of(np.array([parameter(s) for s in at]), {name: values}, counts if stable else None, at, turned, **others)


def cylinder() -> Branch:
    """Exponential source in the cylinder: lam = 8B/(1+B)^2, u(0) = 2 ln(1+B), exactly; it turns at lam = 2."""
    arclength = np.linspace(0.0, 7.0, 40)
    growth = np.expm1(arclength / 2)
    fold = turning_point(2.0, {"max(u)": 2 * np.log(2.0)}, "below", 2 * np.log(2.0), 4e-11)
    return branch_of(
        8 * growth / (1 + growth) ** 2, {"max(u)": arclength}, (arclength > fold.position).astype(int), arclength, [fold], ended="until",
        labels={"lam": "heat production", "u": "temperature rise"},
    )  # fmt: skip


def s_shaped(uncertainty: float | None = 3e-10, **others: Any) -> Branch:
    """Two turning points with 0, 1, 0 unstable directions: lam = s^3/3 - 2 s^2 + 3 s + 1/2, which turns at s = 1 and 3."""
    return parametric(lambda s: s**3 / 3 - 2 * s**2 + 3 * s + 0.5, lambda s: s + 0.2 * s**2, (-0.12, 4.3), 50, uncertainty, **others)


def spiral(turns: float = 10.2, both: bool = False, **others: Any) -> Branch:
    """Turning points that pile up at lam = 2, with ever more unstable directions; the measure climbs, or winds up too."""
    angle = np.pi * turns

    def along(s: float) -> float:
        return float(2 - 2 * np.exp(-0.22 * s) * np.cos(s))

    def up(s: float) -> float:
        return float(3 + 3 * np.exp(-0.22 * s) * np.sin(s) if both else 1.5 * s + 0.3 * np.sin(s))

    made = parametric(along, up, (0.0, angle), 30 * int(turns + 1), 2e-9, **others)
    positions = np.array([point.position for point in made.turning_points])
    counts = np.sum(made.arclength[:, None] > positions, axis=1)
    return branch_of(made.parameter, made.measures, counts, made.arclength, made.turning_points, ended="turning points wanted")


def six_decades() -> Branch:
    """lam from 1e-6 up, turning at 1.2, back at 2e-5, and up to 0.3."""

    def parameter(s: float) -> float:
        return float(10.0 ** (-2.4 + 2.4 * np.sin(1.9 * s - 1.2) - 1.4 * np.exp(-2 * s)))

    return parametric(parameter, lambda s: float(10 ** (-2 + 1.2 * s)), (0.0, 3.4), 90, 2e-9)


def straight(points: int = 30) -> Branch:
    """No turning point."""
    at = np.linspace(0.0, 1.0, points)
    return branch_of(3 * at, {"max(u)": np.sinh(3 * at)}, np.zeros(points), at)


def physical() -> Branch:
    """A depth in m and a temperature in K near 300."""
    made = parametric(
        lambda s: 0.4 + 1.473 * np.sin(s), lambda s: 293.15 + 6.2 * s**2, (0.0, 2.9), 45, 2.3e-4, name="max(T)", along="L",
        units={"L": "m", "T": "K"}, labels={"L": "depth of the layer", "T": "temperature"}, ended="until",
    )  # fmt: skip
    return made


def two_points() -> Branch:
    """The shortest branch there is."""
    return branch_of(np.array([0.0, 0.1]), {"max(u)": np.array([0.0, 0.012])}, [0, 0], np.array([0.0, 0.1]), ended="interrupted")


def near_inflexion() -> Branch:
    """Two turning points 0.03 % apart in the parameter, as close on paper as makes no difference."""
    return parametric(lambda s: float(1 + s + 0.127 * np.sin(8 * s)), lambda s: s, (0.0, 1.0), 80, 1e-8)


def tiny_values() -> Branch:
    """A parameter of 1e-11 with a unit and a name that take room."""
    return parametric(
        lambda s: 3e-11 * s * (2 - s), lambda s: 5 * s, (0.0, 1.9), 40, 6e-20, ended="until",
        units={"lam": "mol/(m^3 s)"}, labels={"lam": "a rate that has a rather long name"},
    )  # fmt: skip
