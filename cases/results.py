"""What running a case leaves: records that tables, JSON and folders are made from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from cases.case import Case
from cases.published import Compared

if TYPE_CHECKING:
    from continuation.records import Branch, TurningPoint


@dataclass(frozen=True)
class Traced:
    """A case's traced branches, their turning points, and what is published beside them."""

    case: Case
    branches: tuple[Branch, ...]
    compared: tuple[Compared, ...]
    notes: tuple[str, ...]
    complete: bool
    reason: str = ""  # why it is not complete

    @property
    def turning_points(self) -> tuple[TurningPoint, ...]:
        """Those of all branches, in the order of the traces."""
        return tuple(point for branch in self.branches for point in branch.turning_points)

    @property
    def kept_states(self) -> list[tuple[str, Any]]:
        """The profiles that were kept, each with what it is called."""
        named = [(f"{branch.name}, point {index}", branch.states[index]) for branch in self.branches for index in sorted(branch.states)]
        turning = [(f"turning point {number}", point.state) for number, point in enumerate(self.turning_points, start=1)]
        return named + [(name, state) for name, state in turning if state is not None]


@dataclass(frozen=True)
class Solved:
    """The steady states of a case at given parameter values; `found` is what `continuation.states_at` gave."""

    case: Case
    found: Any
    notes: tuple[str, ...]
    complete: bool
    reason: str = ""

    @property
    def kept_states(self) -> list[tuple[str, Any]]:
        """The profiles that were kept, each with what it is called."""
        return [(f"state {number}", found.state) for number, found in enumerate(self.found.states, start=1) if found.state is not None]


@dataclass(frozen=True)
class ReachedMeasure:
    """Where a measure takes a value on a case's branch; `found` is what `continuation.reach` gave."""

    case: Case
    when: str
    found: Any
    notes: tuple[str, ...]
    complete: bool
    reason: str = ""

    @property
    def kept_states(self) -> list[tuple[str, Any]]:
        """The profiles that were kept, each with what it is called."""
        states = [getattr(point, "state", None) for point in self.found.points]
        return [(f"place {number}", state) for number, state in enumerate(states, start=1) if state is not None]


Result = Traced | Solved | ReachedMeasure
