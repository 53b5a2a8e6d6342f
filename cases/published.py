"""What a case says is published: which value of a result is meant, and whether the result agrees with it."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol, TypeVar

from bvp.errors import InputError
from cases.case import Case, PublishedValue

if TYPE_CHECKING:
    from continuation.records import TurningPoint

FORM = "[MEASURE at] (turning point n | branch point n | lam=5 state n) [on branch NAME]"

_QUANTITY = re.compile(
    r"""(?:(?P<measure>\S.*?)\s+at\s+)?
        (?: (?P<kind>turning|branch)\s+point\s+(?P<point>\d+)
          | (?P<parameter>\w+)\s*=\s*(?P<at>[^\s=]+)\s+state\s+(?P<state>\d+) )
        (?:\s+on\s+branch\s+(?P<branch>\S.*))?""",
    re.VERBOSE,
)

TURNING_POINT, BRANCH_POINT, STATE = "turning point", "branch point", "state"


@dataclass(frozen=True)
class Quantity:
    """A place in a result, counted from 1, and what is measured there; without a measure the parameter itself."""

    kind: str
    number: int
    measure: str | None = None
    parameter: str | None = None
    at: float | None = None
    branch: str | None = None


@dataclass(frozen=True)
class Compared:
    """A published value beside the computed one; `agrees` is None where that cannot be judged, and `note` says why."""

    published: PublishedValue
    computed: float | None
    uncertainty: float | None
    difference: float | None
    agrees: bool | None
    note: str = ""


class FoundStates(Protocol):
    """What is asked of a state for comparison (see `continuation.FoundState`)."""

    @property
    def measures(self) -> Mapping[str, float]: ...
    @property
    def uncertainty(self) -> Mapping[str, float | None]: ...
    @property
    def branch(self) -> str: ...


def parse_quantity(text: str, origin: str) -> Quantity:
    """The place that a quantity names; InputError where it names none."""
    found = _QUANTITY.fullmatch(text.strip())
    if found is None:
        raise InputError(f'{origin} "quantity": "{text}" names no value of a result.\nExpected: {FORM}.')
    measure, branch = found["measure"], found["branch"]
    if found["kind"]:
        kind, number = (TURNING_POINT if found["kind"] == "turning" else BRANCH_POINT), int(found["point"])
        quantity = Quantity(kind, number, measure, branch=branch)
    else:
        quantity = Quantity(STATE, int(found["state"]), measure, found["parameter"], _number(found["at"], text, origin), branch)
    if quantity.number < 1:
        raise InputError(f'{origin} "quantity": "{text}" counts from 0.\nExpected: a count from 1.')
    return quantity


def quantities(case: Case) -> list[tuple[PublishedValue, Quantity]]:
    """Each published value with the place it names; InputError where it names none, or a parameter that is not traced."""
    pairs = []
    for number, published in enumerate(case.published, start=1):
        origin = f"{case.origin}, [published {number}]"
        quantity = parse_quantity(published.quantity, origin)
        if quantity.parameter is not None and quantity.parameter != case.trace.along:
            raise InputError(
                f'{origin} "quantity": "{published.quantity}" gives a value of {quantity.parameter}.\n'
                f"Expected: a value of the traced parameter, {case.trace.along}."
            )
        pairs.append((published, quantity))
    return pairs


def measures_needed(case: Case) -> tuple[str, ...]:
    """The measures of the case, and after them those that only its published values need."""
    needed = [quantity.measure for _, quantity in quantities(case) if quantity.measure]
    return tuple(dict.fromkeys([*case.trace.measure, *needed]))


def values_needed(case: Case) -> list[float]:
    """The values of the traced parameter at which states are published."""
    return sorted({quantity.at for _, quantity in quantities(case) if quantity.at is not None})


def hold_against(case: Case, turning_points: Sequence[TurningPoint], states: Mapping[float, Sequence[FoundStates]]) -> tuple[Compared, ...]:
    """Each published value of a case beside the computed one.

    turning_points : along the trace. states : those found at each value of `values_needed`, by the first measure; a
    value that is missing was not looked at.
    """
    compared = []
    for published, quantity in quantities(case):
        if quantity.kind == BRANCH_POINT:
            compared.append(_without(published, "branch points are not built yet"))
        elif quantity.kind == TURNING_POINT:
            compared.append(_turning_point(published, quantity, turning_points))
        else:
            found = states.get(quantity.at) if quantity.at is not None else None
            compared.append(_without(published, "no states were looked for") if found is None else _state(published, quantity, found, case))
    return tuple(compared)


def _turning_point(published: PublishedValue, quantity: Quantity, points: Sequence[TurningPoint]) -> Compared:
    point = _nth(points, quantity)
    if point is None:
        return _without(published, f"the trace met {len(points)} turning point{'s' * (len(points) != 1)}{_on(quantity)}")
    if quantity.measure is None:
        return _beside(published, point.value, point.uncertainty)
    uncertainties: Mapping[str, float | None] = getattr(point, "measure_uncertainty", {})
    return _beside(published, point.measures[quantity.measure], uncertainties.get(quantity.measure))


def _state(published: PublishedValue, quantity: Quantity, states: Sequence[FoundStates], case: Case) -> Compared:
    state = _nth(states, quantity)
    if state is None:
        return _without(published, f"{len(states)} state{'s were' if len(states) != 1 else ' was'} found there{_on(quantity)}")
    measure = quantity.measure or case.trace.measure[0]
    return _beside(published, state.measures[measure], state.uncertainty.get(measure))


class _OnBranch(Protocol):
    @property
    def branch(self) -> str: ...


Place = TypeVar("Place", bound=_OnBranch)


def _nth(places: Iterable[Place], quantity: Quantity) -> Place | None:
    on_branch = [place for place in places if quantity.branch in (None, place.branch)]
    return on_branch[quantity.number - 1] if quantity.number <= len(on_branch) else None


def _beside(published: PublishedValue, computed: float, uncertainty: float | None) -> Compared:
    if not math.isfinite(computed):
        return _without(published, "no finite value was computed")
    difference = computed - published.value
    if uncertainty is None:
        return Compared(published, computed, None, difference, None, "the computed value has no uncertainty")
    # Both numbers are rounded to doubles before they are subtracted: half a unit in the last place each.
    rounding = 0.5 * (math.ulp(computed) + math.ulp(published.value))
    return Compared(published, computed, uncertainty, difference, abs(difference) <= uncertainty + published.uncertainty + rounding)


def _without(published: PublishedValue, note: str) -> Compared:
    return Compared(published, None, None, None, None, note)


def _on(quantity: Quantity) -> str:
    return f" on branch {quantity.branch}" if quantity.branch else ""


def _number(text: str, quantity: str, origin: str) -> float:
    try:
        number = float(text)
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        raise InputError(f'{origin} "quantity": "{text}" in "{quantity}" is no finite number.\nExpected: something like lam=5 state 2.')
    return number
