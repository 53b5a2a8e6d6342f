"""The truth of a draft by two origins, which must agree to 1e-11, and the largest u of states beside the turning point."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import sympy
from mpmath import mp, mpf

from tests.campaign.chebyshev import panels
from tests.campaign.collocation import DIGITS, Collocated, Turning, moved, refined, sharpened
from tests.campaign.draft import Draft, EnergyIntegral
from tests.campaign.follow import LADDER, Followed, crossings, extreme, follow
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
    measured: Any


def by_collocation(model: Model, smallest: bool, followed: Followed, turning: Turning) -> Truth:
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
            measured = extreme(panels(n, system.breaks, DIGITS), y, smallest)
            now = (lam * mpf(model.along_unit), mpf(model.base) + mpf(model.unit) * measured)
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
    if draft.energy is not None and draft.energy.kinks:
        return kinked_statement(draft, name)
    followed = follow(
        model, float(draft.trace["start"]), str(draft.trace["direction"]), draft.wanted, beyond=60, n=54 if not draft.collocation else 36
    )
    turnings = [turning for _, turning in followed.turnings]
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
        second = [by_collocation(model, draft.smallest, followed, turning) for turning in turnings]
        if first:
            other, second_values = "collocation in 34 digits", [one.value for one in second]
            first = [Truth(a.value, a.uncertainty, b.measured) for a, b in zip(first, second, strict=True)]
        else:
            first = second
            other, second_values = "shooting", [mpf(value) for turning in turnings for value in by_shooting(model, turning)]
    else:
        other, second_values = "shooting", [mpf(value) for turning in turnings for value in by_shooting(model, turning)]
    agreement = agreed([one.value for one in first], second_values, origin, other)
    states = states_beside(followed, draft) if draft.collocation else None
    return stated(draft, name, first, (origin, other), agreement, states)


def kinked_statement(draft: Draft, name: str) -> Statement:
    """A source with a kink in u: the energy integral split there, and shooting that stops and starts again where u passes it."""
    assert draft.energy is not None
    truth = by_energy(draft.energy, {key: value for key, value in draft.model.parameters.items() if key != draft.model.along})
    near = float(truth.value) / draft.model.along_unit
    value = (
        Shooting(draft.model, draft.energy.kinks[0]).turning_point(float(truth.measured) * 1.0003, near * 0.9997) * draft.model.along_unit
    )
    origins = ("quadrature of the energy integral", "shooting")
    return stated(draft, name, [truth], origins, agreed([truth.value], [mpf(value)], *origins), None)


def agreed(first: list[Any], second: list[Any], origin: str, other: str) -> float:
    """The largest relative difference of the two origins; NotAgreed where it is too large."""
    agreement = max(float(abs(a - b) / abs(a)) for a, b in zip(first, second, strict=True))
    if not agreement < AGREED:
        raise NotAgreed(f"{[mp.nstr(one, 16) for one in first]} by {origin}, {[mp.nstr(one, 16) for one in second]} by {other}")
    return agreement


def stated(
    draft: Draft, name: str, truths: list[Truth], origins: tuple[str, str], agreement: float, states: TrueStates | None
) -> Statement:
    """The record of a draft and its truth."""
    measure = f"{'min' if draft.smallest else 'max'}({draft.problem['unknowns'][0]})"
    points = tuple(TrueTurningPoint(mp.nstr(one.value, 22), float(one.uncertainty), text(one.measured, 17)) for one in truths)
    return Statement(name, draft.kind, measure, draft.problem, draft.trace, points, origins, agreement, states)


def text(value: Any, digits: int) -> str:
    """Decimal digits, or nothing where the value is not known."""
    return "" if value is None else str(mp.nstr(value, digits))


def states_beside(followed: Followed, draft: Draft) -> TrueStates | None:
    """The measure of the states at a parameter between the start and the turning point nearest to it, on two sets of points."""
    model = draft.model
    first = followed.turnings[0][1].lam
    start = float(draft.trace["start"]) / model.along_unit
    # A share that depends on the problem alone, between 0.35 and 0.9 of the way to the turning point.
    share = 0.35 + 0.55 * (abs(first) * 1e3 % 1.0)
    at = float(f"{(start + share * (first - start)) * model.along_unit:.6g}")
    values: list[float] = []
    uncertainty = 0.0
    for y, lam in crossings(followed, at / model.along_unit)[:2]:
        pair = [measure_of(followed, draft.smallest, y, lam, n) for n in (54, 80)]
        gap = abs(pair[1] - pair[0])
        if not gap < 1e-11 * abs(pair[1]):
            break
        values.append(pair[1])
        uncertainty = max(uncertainty, 3 * gap, 1e-13 * abs(pair[1]))
    return TrueStates(at, tuple(f"{one:.15g}" for one in values), uncertainty) if values else None


def measure_of(followed: Followed, smallest: bool, y: Any, lam: float, n: int) -> float:
    """The largest or smallest u of a state near y at a fixed parameter on n points; nan where Newton does not settle there."""
    model = followed.system.model
    system = Collocated(model, n)
    found = system.newton(moved(y, followed.system, system), lam, np.eye(system.size + 1)[-1], lam, steps=30)
    if found is None:
        return float("nan")
    return model.base + model.unit * float(extreme(panels(n, system.breaks), [float(one) for one in found[0]], smallest))
