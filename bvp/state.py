"""One state: the nodal values of a solution, how well they satisfy their equations, and values between the nodes."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.interpolate import at_index, index_of
from bvp.measures import Measure
from bvp.problem import Problem

Array = npt.NDArray[np.float64]


@dataclass(frozen=True)
class State:
    """A state of a discrete system, or what Newton's method was left with where it is not `ok`.

    x : nodes, shape (N + 1,). u : the unknown there. unstable_directions : None where stability is not defined.
    """

    problem: Problem = field(repr=False)
    x: Array = field(repr=False)
    u: Array = field(repr=False)
    parameters: Mapping[str, float]
    scheme: str
    intervals: int
    ok: bool
    reason: str
    newton_steps: int
    unstable_directions: int | None = None
    error: float | None = None  # an estimate of the largest error of an extrapolated profile
    nodal: Array = field(default_factory=lambda: np.empty(0), repr=False)  # with ghosts, for going on from here
    residual_of: Callable[[], float] = field(default=lambda: float("nan"), repr=False)

    def __call__(self, x: Any) -> Any:
        """The unknown at one place or at several, by the interpolant through seven neighbouring nodes."""
        places = np.atleast_1d(np.asarray(x, dtype=float))
        if places.size and not (self.x[0] <= places.min() and places.max() <= self.x[-1]):
            raise ValueError(f"the state lives from {self.x[0]:g} to {self.x[-1]:g}")
        even = self.problem.axis
        values = np.array([at_index(self.u, index_of(self.x, float(place), even), even) for place in places.ravel()])
        return float(values[0]) if np.ndim(x) == 0 else values.reshape(np.shape(x))

    @cached_property
    def residual(self) -> float:
        """The largest over the rows of |row| over the sum of the sizes of its terms, worked out when asked for."""
        return self.residual_of()

    @cached_property
    def profiles(self) -> dict[str, Array]:
        """The nodal values by unknown."""
        return {self.problem.unknowns[0]: self.u}

    def measure(self, formula: str | Measure) -> float:
        """A measure of the state, such as "max(u)"; InputError where the formula is none."""
        taken = formula if isinstance(formula, Measure) else Measure(formula, self.problem)
        return taken.value(self.x, self.profiles, self.parameters)
