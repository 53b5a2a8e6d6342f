"""The truth of a draft by two origins, which must agree to 1e-11, and the largest u of a lower and an upper state."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import sympy
from mpmath import mp, mpf

from tests.campaign.chebyshev import panels
from tests.campaign.collocation import DIGITS, Collocated, Turning, moved, refined, sharpened
from tests.campaign.draft import Draft, EnergyIntegral
from tests.campaign.follow import LADDER, Followed, crossings, follow, largest_value
from tests.campaign.model import Model, U
from tests.campaign.shooting import Shooting
from tests.campaign.statement import Statement, TrueStates, TrueTurningPoint
from tests.campaign.time_map import turning_point as by_quadrature

AGREED = 1e-11  # what the two origins may differ by, relative


class NotAgreed(Exception):
    """Two origins gave different values: one of them, or the problem's own text, is wrong."""


@dataclass(frozen=True)
class Truth:
    """One turning point from one origin, in the parameter's own unit."""

    value: Any
    uncertainty: Any
    largest: Any


def by_collocation(model: Model, followed: Followed, turning: Turning) -> Truth:
    """Collocation on more and more points until two of the ladder agree to 1e-16 after refinement in 34 digits."""
    before: tuple[Any, Any] | None = None
    for n in LADDER:
        system = Collocated(model, n)
        try:
            sharp = sharpened(system, moved(turning.y, followed.system, system), moved(turning.null, followed.system, system), turning.lam)
        except ArithmeticError:
            before = None
            continue
        lam, y = refined(system, sharp)
        with mp.workdps(DIGITS):
            _, largest = largest_value(panels(n, system.breaks, DIGITS), y)
            now = (lam * mpf(model.along_unit), mpf(model.base) + mpf(model.unit) * largest)
            if before is not None:
                gap = abs(now[0] - before[0])
                if gap < mpf("1e-16") * abs(now[0]) and abs(now[1] - before[1]) < mpf("1e-14") * abs(now[1]):
                    return Truth(now[0], gap + mpf("1e-25") * abs(now[0]), now[1])
            before = now
    raise ArithmeticError("collocation does not settle on 180 points")


def by_energy(energy: EnergyIntegral, parameters: dict[str, float]) -> Truth:
    """The time map's maximum."""
    names = [sympy.Symbol(name, real=True) for name in parameters]
    plain_numbers, exact_numbers = list(parameters.values()), [mpf(value) for value in parameters.values()]

    def made(expression: Any, module: str, numbers: list[Any]) -> Any:
        function = sympy.lambdify([U, *names], expression, modules=["scipy", "numpy"] if module == "numpy" else module)
        return lambda u: function(u, *numbers) + 0 * u

    both = (energy.source, energy.conductivity)
    plain = tuple(made(one, "numpy", plain_numbers) for one in both)
    exact = tuple(made(one, "mpmath", exact_numbers) for one in both)
    with np.errstate(all="ignore"):
        lam, middle, uncertainty = by_quadrature(plain, exact, energy.half, energy.bi, energy.kinks, energy.most)
    return Truth(lam, uncertainty, middle)


def by_shooting(model: Model, turning: Turning) -> list[float]:
    """The turning point by shooting from a disturbed start."""
    shooting = Shooting(model)
    free = turning.y[-2] if shooting.free_value else turning.y[-1]
    return [shooting.turning_point(float(free) * 1.0003 + 1e-5, turning.lam * 0.9997) * model.along_unit]


def statement_of(draft: Draft, name: str) -> Statement:
    """The problem with its truth; NotAgreed or ArithmeticError where there is none to stand behind."""
    model = draft.model
    followed = follow(model, float(draft.trace["start"]), str(draft.trace["direction"]), draft.wanted, beyond=60, n=54 if not draft.collocation else 36)
    turnings = [turning for _, turning in followed.turnings[: draft.wanted]]
    if draft.closed is not None:
        with mp.workdps(DIGITS):
            values = draft.closed()
        first = [Truth(value, mpf("1e-22") * abs(value), None) for value in values]
        origin = draft.closed_origin
    elif draft.energy is not None:
        first = [by_energy(draft.energy, {key: value for key, value in model.parameters.items() if key != model.along})]
        origin = "quadrature of the energy integral"
    else:
        first = []
        origin = "collocation in 34 digits"
    if draft.collocation:
        second = [by_collocation(model, followed, turning) for turning in turnings]
        if first:
            other, second_values = "collocation in 34 digits", [one.value for one in second]
            first = [Truth(a.value, a.uncertainty, b.largest) for a, b in zip(first, second, strict=True)]
        else:
            first = second
            other, second_values = "shooting", [mpf(value) for turning in turnings for value in by_shooting(model, turning)]
    else:
        other, second_values = "shooting", [mpf(value) for turning in turnings for value in by_shooting(model, turning)]
    agreement = max(float(abs(a.value - b) / abs(a.value)) for a, b in zip(first, second_values, strict=True))
    if not agreement < AGREED:
        raise NotAgreed(f"{[mp.nstr(one.value, 16) for one in first]} by {origin}, {[mp.nstr(one, 16) for one in second_values]} by {other}")
    points = tuple(TrueTurningPoint(mp.nstr(one.value, 22), float(one.uncertainty), text(one.largest, 17)) for one in first)
    states = states_beside(followed, draft) if draft.collocation else None
    return Statement(name, draft.kind, draft.problem, {**draft.trace, **draft.extra}, points, (origin, other), agreement, states)


def text(value: Any, digits: int) -> str:
    """Decimal digits, or nothing where the value is not known."""
    return "" if value is None else str(mp.nstr(value, digits))


def states_beside(followed: Followed, draft: Draft) -> TrueStates | None:
    """The largest u of the states at a parameter between the start and the turning point nearest to it, on two sets of points."""
    model = draft.model
    first = followed.turnings[0][1].lam
    start = float(draft.trace["start"]) / model.along_unit
    # A share that depends on the problem alone, between 0.35 and 0.9 of the way to the turning point.
    share = 0.35 + 0.55 * (abs(first) * 1e3 % 1.0)
    at = float(f"{(start + share * (first - start)) * model.along_unit:.6g}")
    lists = []
    for n in (54, 80):
        system = Collocated(model, n)
        exact = panels(n, system.breaks)
        values = []
        for y, lam in crossings(followed, at / model.along_unit)[:2]:
            found = system.newton(moved(y, followed.system, system), lam, np.eye(system.size + 1)[-1], lam, steps=30)
            if found is None:
                return None
            values.append(model.base + model.unit * float(largest_value(exact, [float(one) for one in found[0]])[1]))
        lists.append(values)
    if not lists[0] or any(abs(a - b) > 1e-11 * abs(b) for a, b in zip(*lists, strict=True)):
        return None
    return TrueStates(at, tuple(f"{one:.15g}" for one in lists[1]), 1e-11 * max(abs(one) for one in lists[1]))
