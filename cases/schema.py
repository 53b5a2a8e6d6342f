"""The keys that a case file has: kinds, bounds, defaults and meanings, as data."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

MOST_INTERVALS = 50_000_000  # as `bvp.grid` has it; said again here because reading a case imports no numpy
MOST_DIGITS = 15  # a double holds no more


@dataclass(frozen=True)
class Key:
    """What one key of a case file takes; `kind` is one of those that `cases.faults` knows how to judge."""

    kind: str
    meaning: str
    default: Any = None
    required: bool = False
    choices: tuple[str, ...] = ()
    least: float | None = None
    most: float | None = None


TOP: Mapping[str, Key] = {
    "title": Key("text", "one line that names the case", required=True),
    "about": Key("text", "what it is about, shown with the results", default=""),
    "caution": Key("text", "what the result must not be used for, shown with the results", default=""),
    "unknowns": Key("texts", "the names of the unknowns", required=True),
    "equations": Key("texts", "one equation for each unknown", required=True),
    "conditions": Key("texts", "the conditions at the ends of the domain", default=()),
    "domain": Key("table", "the coordinate with its two ends, and the geometry", required=True),
    "parameters": Key("table", "name = value", default={}),
    "where": Key("table", "name = formula", default={}),
    "measured": Key("table", "name = file with two columns", default={}),
    "initial_guess": Key("table", "unknown = formula of the coordinate and of parameters", default={}),
    "units": Key("table", "name = unit", default={}),
    "labels": Key("table", "name = words", default={}),
    "trace": Key("table", "which branch is traced, and how far", default={}),
    "discretization": Key("table", "how the equation becomes difference equations", default={}),
    "scheme": Key("table", "schemes of one's own, each a table [scheme.NAME]", default={}),
    "published": Key("tables", "values to hold the result against, each a table [[published]]", default=()),
}

GEOMETRY = Key("choice", "the meaning of laplacian, div and of integrals", default="slab", choices=("slab", "cylinder", "sphere"))

TRACE: Mapping[str, Key] = {
    "along": Key("text", "the parameter that is traced; the first one without it"),
    "start": Key("number", "its value at the first state; the one under [parameters] without it"),
    "direction": Key("choice", "the way the parameter first moves", default="up", choices=("up", "down", "both")),
    "within": Key("range", "the trace ends where the parameter leaves it"),
    "until": Key("text", "a comparison of measures that ends the trace"),
    "turning_points_wanted": Key("whole number", "the trace ends once it has so many", least=1, most=10_000),
    "measure": Key("text or texts", "what is measured of each state; the largest value of the first unknown without it"),
    "branches": Key("choice", "one branch, or also those met at branch points", default="one", choices=("one", "all")),
    "look_for_others": Key("yes or no", "whether states off the traced branches are searched for", default=False),
}

DISCRETIZATION: Mapping[str, Key] = {
    "scheme": Key("text", "a built-in scheme's name, or a name under [scheme]", default="central"),
    "intervals": Key("whole number", "N, where the work starts", default=200, least=2, most=MOST_INTERVALS),
    "grid": Key("text", "adaptive, uniform, or a map of s in [0, 1] onto the domain's share", default="adaptive"),
    "digits": Key("whole number", "digits wanted of each turning point", default=8, least=1, most=MOST_DIGITS),
}

SCHEME: Mapping[str, Key] = {
    "denominator": Key("text", "in place of h^2 in the second difference"),
    "flux": Key("text", "the flux between k and k+1"),
    "volume": Key("text", "the cell's volume, beside a flux"),
    "axis": Key("text", "the equation of the node on the axis"),
    "first": Key("text", "what stands for u'"),
    "end": Key("text", "what stands for a derivative in a condition"),
    "source": Key("text", "what stands for u where it is undifferentiated and outside a flux"),
    "right_hand_side": Key("text", "what stands for the part without derivatives, f"),
    "replace": Key("term for term", "a table of a term for a term"),
    "equation": Key("text", "the whole difference equation"),
}

PUBLISHED: Mapping[str, Key] = {
    "quantity": Key("text", "which value of the result: turning point 1, max(u) at turning point 1, lam=5 state 2, …", required=True),
    "value": Key("number", "the published value", required=True),
    "uncertainty": Key("number", "its uncertainty; half a unit of the last digit given without it", least=0.0),
    "source": Key("text", "author, title, year, page or table", required=True),
}

# Tables whose keys are the user's own names: the kind of their values, and what a key names.
OPEN: Mapping[str, tuple[Key, str]] = {
    "parameters": (Key("number", "the parameter's value"), "a parameter"),
    "where": (Key("formula", "a formula of the coordinate, unknowns and parameters"), "a named formula"),
    "measured": (Key("text", "the name of a file with two columns"), "a measured function"),
    "initial_guess": (Key("formula", "a formula of the coordinate and of parameters"), "an unknown"),
    "units": (Key("text", "a unit, 1 where there is none"), "a name of the case"),
    "labels": (Key("text", "words for axes and tables"), "a name of the case"),
}

CLOSED: Mapping[str, Mapping[str, Key]] = {"trace": TRACE, "discretization": DISCRETIZATION}

# Tables that have their place in the language and are not built yet: refused in one sentence, never ignored.
NOT_BUILT: Mapping[str, str] = {
    "unknown_numbers": "numbers that are found with the state",
    "mass": "the mass matrix of an evolution",
}
