"""The frozen records that tracing leaves: points, turning points, branches."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from bvp.state import State

Array = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Refined:
    """A scheme's own value on one grid of the refinement."""

    intervals: int
    value: float


@dataclass(frozen=True)
class TurningPoint:
    """A place where the branch turns back in the parameter.

    `value` is the refined one, `uncertainty` the half-width within which the true value of the continuous problem
    lies (None where it cannot be estimated: `notes` say why; the same for each measure), `on_grid` the scheme's own on the trace's grid.
    `states` is "below" or "above": the side, in the parameter, on which the two states exist.
    """

    branch: str
    value: float
    uncertainty: float | None
    measures: Mapping[str, float]
    states: str
    order: float | None
    on_grid: float
    refinement: tuple[Refined, ...]
    survives: bool
    sensitivity: Mapping[str, float | None]
    position: float  # arclength along the branch
    state: State | None = None
    notes: tuple[str, ...] = ()
    measure_uncertainty: Mapping[str, float | None] = field(default_factory=dict)


@dataclass(frozen=True)
class Branch:
    """A traced branch: one entry per accepted point in every array, in the order of the arclength."""

    name: str
    along: str
    scheme: str
    intervals: int
    parameter: Array
    measures: Mapping[str, Array]
    unstable_directions: npt.NDArray[np.int64] | None
    arclength: Array
    began: str
    ended: str
    turning_points: tuple[TurningPoint, ...]
    states: Mapping[int, State]  # profiles kept, by the index of their point
    newton_steps: int
    factorizations: int
    seconds: float
    compile_seconds: float
    complete: bool
    notes: tuple[str, ...] = ()
    units: Mapping[str, str] = field(default_factory=dict)
    labels: Mapping[str, str] = field(default_factory=dict)

    def measure(self, formula: str) -> Array:
        """The values of one measure along the branch; KeyError names those that there are."""
        if formula not in self.measures:
            raise KeyError(f"{formula!r} was not measured; measured were {', '.join(self.measures)}")
        return self.measures[formula]

    def to_dataframe(self) -> Any:
        """A pandas DataFrame with a row for each point: parameter, measures, unstable directions, arclength.

        ImportError where pandas is not there, with what installs it.
        """
        try:
            import pandas
        except ImportError as error:
            raise ImportError("to_dataframe needs pandas, which pip install 'hairpin[frames]' brings") from error
        unstable = {} if self.unstable_directions is None else {"unstable directions": self.unstable_directions}
        return pandas.DataFrame({self.along: self.parameter, **self.measures, **unstable, "arclength": self.arclength})

    def plot(self, measure: str | None = None, axes: Any = None) -> Any:
        """The branch against its parameter on a matplotlib Axes (see `continuation.plot`)."""
        from continuation.plot import draw_branch

        return draw_branch(self, measure, axes)
