"""A problem before its truth is known: the typed statement and the symbols it was typed from."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import sympy

from tests.campaign.model import EXPONENTS, Model, U, V, X, typed
from tests.campaign.sources import symbol

LAM = symbol("lam")
BI = symbol("Bi")


@dataclass(frozen=True)
class EnergyIntegral:
    """What the time map needs: f and k as expressions in U, the half length, Bi at the wall (None: u = 0 there), kinks, the largest u."""

    source: Any
    conductivity: Any
    half: Fraction
    bi: float | None
    kinks: tuple[float, ...]
    most: float


@dataclass(frozen=True)
class Draft:
    """`closed` gives the turning points' values by a formula, `energy` by quadrature; without either collocation is the first origin.

    `collocation` False: the solution is not smooth enough for it, the second origin is shooting. `smallest`: the measure is min(u).
    """

    kind: str
    problem: Mapping[str, Any]
    trace: Mapping[str, Any]
    model: Model
    wanted: int = 1
    closed: Callable[[], list[Any]] | None = None
    closed_origin: str = "closed form"
    energy: EnergyIntegral | None = None
    collocation: bool = True
    smallest: bool = False


def source_of(form: str, f: Any, k: Any = sympy.Integer(1)) -> Any:
    """S with u'' + (s/x) u' + S = 0, of an equation of one of the forms below with everything but the leading term in f."""
    return (sympy.diff(k, X) * V + sympy.diff(k, U) * V**2 + f) / k if form in ("flux", "divergence") else f


def equation(form: str, f: Any, k: Any = sympy.Integer(1), geometry: str = "slab") -> str:
    """The typed equation: "plain" u'' + f, "laplacian", "flux" (k u')' + f, "divergence" div(k grad u) + f, or "text-book".

    The last is u'' + (s/x) u' + f.
    """
    s = EXPONENTS[geometry]
    leading = {
        "plain": "u''",
        "laplacian": "laplacian(u)",
        "flux": f"(({typed(k)})*u')'",
        "divergence": f"div(({typed(k)})*grad(u))",
        "text-book": f"u'' + ({s}/x)*u'",
        "weighted": f"(x^{s}*u')'/x^{s}",
    }[form]
    rest = typed(f)
    return f"{leading} - {rest[1:]} = 0" if rest.startswith("-") else f"{leading} + {rest} = 0"


def condition(expression: Any, place: str) -> str:
    """The typed condition at an end."""
    at = expression.subs({U: sympy.Symbol(f"u({place})", real=True), V: sympy.Symbol(f"u'({place})", real=True)}, simultaneous=True)
    return f"{typed(at)} = 0"


def renamed(text: str, unknown: str, coordinate: str) -> str:
    """A typed formula with other names for u and x, which stand alone in it (no name of a function holds them alone)."""
    import re

    text = re.sub(r"\bu\b", unknown, text)
    return re.sub(r"\bx\b", coordinate, text)


def draft(
    kind: str,
    form: str,
    f: Any,
    conditions: tuple[Any, Any],
    parameters: Mapping[str, float],
    *,
    k: Any = sympy.Integer(1),
    ends: tuple[float | str, float | str] = (0, 1),
    geometry: str = "slab",
    along: str = "lam",
    start: float = 0.0,
    direction: str = "up",
    guess: Any = sympy.Integer(0),
    names: tuple[str, str] = ("u", "x"),
    axis_said: bool = False,
    breaks: tuple[float, ...] = (),
    unit: float = 1.0,
    base: float = 0.0,
    along_unit: float = 1.0,
    axis_power: Any = None,
    **rest: Any,
) -> Draft:
    """A draft from its pieces; the statement's text and the model's symbols are made here, from the same expressions."""
    axis = EXPONENTS[geometry] > 0 and ends[0] == 0
    if axis:
        conditions = (V, conditions[1])
    texts = [condition(one, repr(end) if not isinstance(end, str) else end) for one, end in zip(conditions, ends, strict=True)]
    if axis and not axis_said:
        texts = texts[1:]
    numbers = {**parameters, along: start}
    problem: dict[str, Any] = {
        "equations": [renamed(equation(form, f, k, geometry), *names)],
        "unknowns": [names[0]],
        "domain": [names[1], *ends],
        "conditions": [renamed(text, *names) for text in texts],
        "parameters": numbers,
        "geometry": "slab" if form in ("text-book", "weighted") else geometry,
    }
    if guess != 0:
        problem["initial_guess"] = {names[0]: renamed(typed(guess), *names)}
    places = [symbol(end) if isinstance(end, str) else sympy.Rational(end) for end in ends]
    model = Model(
        source_of(form, f, k),
        *conditions,
        parameters=numbers,
        along=along,
        left=places[0],
        right=places[1],
        geometry=geometry,
        guess=guess,
        breaks=breaks,
        unit=unit,
        base=base,
        along_unit=along_unit,
        axis_power=axis_power,
    )
    trace = {"along": along, "start": start, "direction": direction}
    return Draft(kind, problem, trace, model, **rest)
