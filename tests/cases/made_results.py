"""Results made from a closed form instead of a computation, for tests of what is done with results.

The cylinder with exponential source has u = 2 ln[(1 + B)/(1 + B r^2)] at lam = 8B/(1 + B)^2, with its turning point at B = 1.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from types import SimpleNamespace
from typing import Any

import numpy as np
import numpy.typing as npt

from cases.case import Case
from cases.load import load
from cases.published import hold_against
from cases.results import Solved, Traced
from continuation.records import Branch, Refined, TurningPoint


@dataclass(frozen=True)
class Profile:
    """What is stored of a state."""

    x: npt.NDArray[np.float64]
    u: npt.NDArray[np.float64]
    parameters: dict[str, float]


def lam_of(b: Any) -> Any:
    """The parameter on the cylinder's closed-form branch."""
    return 8 * b / (1 + b) ** 2


def profile(b: float, nodes: int = 9) -> Profile:
    """The closed-form state on a uniform grid."""
    r = np.linspace(0.0, 1.0, nodes)
    return Profile(r, 2 * np.log((1 + b) / (1 + b * r**2)), {"lam": float(lam_of(b))})


def branch(points: int = 41, ended: str = "until") -> Branch:
    """The cylinder's branch from lam = 0 over its turning point, with three profiles kept."""
    b = np.expm1(np.linspace(0.0, np.log(8.0), points))
    turning = TurningPoint(
        branch="main",
        value=2.0,
        uncertainty=3e-12,
        measures={"max(u)": 2 * np.log(2.0)},
        states="below",
        order=2.0,
        on_grid=1.99984,
        refinement=(Refined(50, 1.9997), Refined(100, 1.9999)),
        survives=True,
        sensitivity={},
        position=float(b[0] + 1.0),
        state=profile(1.0),  # type: ignore[arg-type]
    )
    return Branch(
        name="main",
        along="lam",
        scheme="central",
        intervals=200,
        parameter=lam_of(b),
        measures={"max(u)": 2 * np.log1p(b)},
        unstable_directions=(b > 1.0).astype(np.int64),
        arclength=b,
        began="lam = 0, upwards",
        ended=ended,
        turning_points=(turning,),
        states={index: profile(float(b[index])) for index in (0, 20, 40)},  # type: ignore[misc]
        newton_steps=190,
        factorizations=200,
        seconds=0.01,
        compile_seconds=0.0,
        complete=ended != "interrupted",
    )


def cylinder() -> Case:
    """The bundled case that the closed form belongs to."""
    return load("cylinder")


def found_states(lam: float = 1.0) -> Any:
    """The two states at a value of the parameter, as a search for them gives them."""
    root = np.sqrt((8 - 2 * lam) ** 2 - 4 * lam**2)
    both = [(8 - 2 * lam - root) / (2 * lam), (8 - 2 * lam + root) / (2 * lam)]
    states = tuple(
        SimpleNamespace(
            measures={"max(u)": float(2 * np.log1p(b))},
            unstable_directions=index,
            residual=1e-16,
            uncertainty={"max(u)": 1e-11},
            branch="main",
            state=profile(b),
        )
        for index, b in enumerate(both)
    )
    return SimpleNamespace(
        asked="equation",
        at={"lam": lam},
        states=states,
        margin={"turning_point": 2.0, "uncertainty": 1e-9, "distance": 2.0 - lam, "past": False, "share": 1.0 - lam / 2.0},
        complete=True,
        notes=(),
    )


def traced(case: Case | None = None, **changes: Any) -> Traced:
    """The cylinder traced, held against what is published about it."""
    case = cylinder() if case is None else case
    one = branch()
    compared = hold_against(case, one.turning_points, {1.0: found_states().states})
    return replace(Traced(case, (one,), compared, ("a note.",), True), **changes)


def solved(lam: float = 1.0) -> Solved:
    """The cylinder's steady states at one value."""
    return Solved(cylinder(), found_states(lam), (), True)
