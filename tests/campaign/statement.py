"""A campaign problem as data: what is typed, how it is traced, and what is known about its turning points.

Needs nothing but the standard library.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

FILE = Path(__file__).with_name("problems.json")


@dataclass(frozen=True)
class TrueTurningPoint:
    """The traced parameter at a turning point, as decimal text, with its own uncertainty, and the measure there ("" if not known)."""

    value: str
    uncertainty: float
    measured: str

    @property
    def number(self) -> float:
        """The value as a float."""
        return float(self.value)


@dataclass(frozen=True)
class TrueStates:
    """At one value of the traced parameter: the problem's measure of the states met before and after the first turning point.

    One entry where the branch was not followed far enough beyond the turning point; a third state may exist beyond.
    """

    at: float
    measured: tuple[str, ...]
    uncertainty: float


@dataclass(frozen=True)
class Statement:
    """One problem. `problem` are the keywords of bvp.Problem, `trace` those of continuation.trace but for schemes, grids and digits."""

    name: str
    kind: str
    measure: str
    problem: Mapping[str, Any]
    trace: Mapping[str, Any]
    turning_points: tuple[TrueTurningPoint, ...]
    origins: tuple[str, str]
    agreement: float  # relative, between the two origins
    states: TrueStates | None = None
    sample: bool = False


def read(path: Path = FILE) -> list[Statement]:
    """All problems of the campaign."""
    return [from_data(one) for one in json.loads(path.read_text(encoding="utf-8"))["problems"]]


def sample(path: Path = FILE) -> list[Statement]:
    """The fixed sample for the ordinary suite."""
    return [one for one in read(path) if one.sample]


def from_data(data: Mapping[str, Any]) -> Statement:
    """A statement from its JSON object."""
    problem = {**data["problem"], "domain": tuple(data["problem"]["domain"])}
    return Statement(
        **{
            **data,
            "problem": problem,
            "turning_points": tuple(TrueTurningPoint(**one) for one in data["turning_points"]),
            "origins": tuple(data["origins"]),
            "states": None if data["states"] is None else TrueStates(**{**data["states"], "measured": tuple(data["states"]["measured"])}),
        }
    )


def write(statements: list[Statement], about: str, path: Path = FILE) -> None:
    """One problem a line, so that a change of one shows as one."""
    lines = ",\n".join(json.dumps(asdict(one), ensure_ascii=False) for one in statements)
    path.write_text(f'{{"about": {json.dumps(about)},\n"problems": [\n{lines}\n]}}\n', encoding="utf-8")
