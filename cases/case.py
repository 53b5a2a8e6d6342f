"""The frozen records of a case: a problem as text, the questions asked of it, and what is published about it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any


@dataclass(frozen=True)
class PublishedValue:
    """A value to hold the result against, with its uncertainty and its source."""

    quantity: str
    value: float
    uncertainty: float
    source: str


@dataclass(frozen=True)
class TraceQuestion:
    """What is traced: see `cases.schema.TRACE` for the meaning of each."""

    along: str | None
    start: float | None
    direction: str
    within: tuple[float, float] | None
    until: str | None
    turning_points_wanted: int | None
    measure: tuple[str, ...]
    branches: str
    look_for_others: bool


@dataclass(frozen=True)
class Discretization:
    """How the equation becomes difference equations."""

    scheme: str
    intervals: int
    grid: str
    digits: int


@dataclass(frozen=True)
class Case:
    """A case file as it was read. Formulas are still text; nothing of it has been evaluated."""

    name: str
    origin: str  # how messages call the file
    folder: Path  # where the files under [measured] are looked for
    text: str
    title: str
    about: str
    caution: str
    unknowns: tuple[str, ...]
    equations: tuple[str, ...]
    conditions: tuple[str, ...]
    coordinate: str
    ends: tuple[float | str, float | str]
    geometry: str
    parameters: Mapping[str, float]
    where: Mapping[str, str]
    measured: Mapping[str, str]
    initial_guess: Mapping[str, str]
    units: Mapping[str, str]
    labels: Mapping[str, str]
    trace: TraceQuestion
    discretization: Discretization
    schemes: Mapping[str, Mapping[str, Any]]
    published: tuple[PublishedValue, ...]

    @property
    def start(self) -> float | None:
        """The traced parameter's value at the first state; None where nothing can be traced."""
        if self.trace.start is not None or self.trace.along is None:
            return self.trace.start
        return self.parameters[self.trace.along]

    def unit(self, name: str) -> str:
        """The unit of a name of the case, empty where there is none."""
        unit = self.units.get(name, "")
        return "" if unit == "1" else unit
