"""What running a case leaves: records that tables, JSON and folders are made from."""

from __future__ import annotations

from collections.abc import Iterable
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
        return named + _numbered("turning point", self.turning_points)


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
        return _numbered("state", self.found.states)


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
        return _numbered("place", self.found.points)


def _numbered(word: str, found: Iterable[Any]) -> list[tuple[str, Any]]:
    """The profiles of what was found, each with its number; those that were not kept are left out, and keep their number."""
    states = [getattr(one, "state", None) for one in found]
    return [(f"{word} {number}", state) for number, state in enumerate(states, start=1) if state is not None]


Result = Traced | Solved | ReachedMeasure
