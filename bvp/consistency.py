"""Whether a scheme's rows say the same as the equation for vanishing steps: ends and axis included.

Every row is expanded in the step, at a random smooth profile of the state's size: nodal values, coordinates and the step
become truncated series, and the row's leading coefficient has to be the differential equation's value times one
factor, whatever the profile. A scheme without that property converges beautifully, to something else.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from bvp.discretize import Discretization
from bvp.formula import evaluate
from bvp.formula.series import Series, SeriesError, series_functions
from bvp.formula.tree import At, Call, Indexed, Name, Node, Prime
from bvp.given import GivenFunction
from bvp.rows import AXIS, PART, PLACE
from bvp.schemes.scheme import STEP

PROFILES = 4  # random profiles; an inconsistent row agrees on all of them by no chance
TERMS = 8
SAME = 1e-7  # relative: series of ten terms in doubles keep more


@dataclass(frozen=True)
class Consistency:
    """`ok` is True, False, or None where it cannot be decided; `reason` says which row, and why."""

    ok: bool | None
    reason: str = ""


def consistency(of: Discretization, size: float, values: Mapping[str, float]) -> Consistency:
    """The consistency of all rows at profiles of that size, parameters having the given values; worked out once."""
    if of.known_consistency is None:
        of.known_consistency = _consistency(of, size, values)
    return of.known_consistency


def _consistency(of: Discretization, size: float, values: Mapping[str, float]) -> Consistency:
    if of.scheme.weight_powers:
        return Consistency(True)  # weights by node are no series; the built-in scheme that has them is exact for quartics
    rows: list[tuple[str, Node, Node | None, bool]] = [("the difference equation", of.rows.inner.residual, None, False)]
    if of.rows.left_kind == AXIS:
        rows.append(("the difference equation at the axis", of.rows.first().residual, None, True))
    for condition in of.problem.conditions:
        side = next(iter(condition.sides))
        end = of.rows.left if side == "left" else of.rows.right
        assert end is not None
        rows.append((f'the difference form of "{condition.text}"', end.residual, condition.tree, False))
    try:
        for what, row, condition_tree, axis in rows:
            factors = [_factor(of, row, condition_tree, axis, size, values, seed) for seed in range(PROFILES)]
            powers = {power for power, _ in factors}
            reference = max((factor for _, factor in factors), key=abs)
            if len(powers) > 1 or reference == 0.0 or any(abs(factor - reference) > SAME * abs(reference) for _, factor in factors):
                return Consistency(False, f'{what} of the scheme "{of.scheme.name}" does not become that of the equation for small steps')
    except (SeriesError, ZeroDivisionError, OverflowError, ValueError, KeyError) as error:
        return Consistency(None, f'whether the scheme "{of.scheme.name}" is consistent could not be decided ({error})')
    return Consistency(True)


def _factor(
    of: Discretization, row: Node, condition: Node | None, axis: bool, size: float, values: Mapping[str, float], seed: int
) -> tuple[int, float]:
    """The power of the step and the factor between the row's leading term and the equation's value."""
    chance = random.Random(1000 + seed)
    problem = of.problem
    left, right = problem.end_values(values)
    length = right - left
    given = {name: value if value else chance.uniform(0.3, 0.9) for name, value in values.items()}
    # A smooth profile of that size in units of the domain, even at the axis; its derivatives are random.
    profile = [_level(of, size, chance)] + [size * chance.uniform(-1.0, 1.0) / (order + 1) for order in range(1, TERMS)]
    place = [0.5 if condition is None else 0.0 if _at_left(condition) else 1.0, 1.0] + [0.0] * (TERMS - 2)
    if not of.uniform:
        place[2] = chance.uniform(-0.3, 0.3)
        place[3] = chance.uniform(-0.3, 0.3)
    if axis:
        profile = [value if order % 2 == 0 else 0.0 for order, value in enumerate(profile)]
        place[0] = 0.0
        place[2] = 0.0
    functions = {**series_functions(), **_other_functions(of)}
    row_series = evaluate(row, _discrete_leaf(of, profile, place, left, length, given), functions)
    continuous = _continuous(
        condition if condition is not None else problem.equations[0].tree, of, profile, place, left, length, given, functions
    )
    value = _constant_term(continuous)
    row_series = row_series if isinstance(row_series, Series) else Series.constant(float(row_series), TERMS)
    power = row_series.valuation
    seen = range(power, min(power + 3, row_series.end))
    scale = max((abs(row_series.coefficient(order)) for order in seen), default=0.0)
    while abs(row_series.coefficient(power)) <= 1e-9 * scale and power < row_series.end - 1:
        power += 1
    if abs(value) <= 1e-9 * max(scale, 1e-300):
        return power, 0.0
    factor = row_series.coefficient(power) / value
    if not math.isfinite(factor):
        raise SeriesError("it has no finite value at the profiles tried")
    return power, factor


def _level(of: Discretization, size: float, chance: random.Random) -> float:
    """A random value of the unknown: of that size, or from inside a measured table, which has none outside."""
    for function in of.problem.functions.values():
        if hasattr(function, "knots"):
            lowest, highest = float(function.knots[0]), float(function.knots[-1])
            return lowest + (highest - lowest) * chance.uniform(0.3, 0.7)
    return size * chance.uniform(0.3, 1.0)


def _at_left(condition: Node) -> bool:
    from bvp.formula.tree import walk

    return any(isinstance(node, At) and node.location == Name("left") for node in walk(condition))


def _other_functions(of: Discretization) -> dict[str, Callable[..., Any]]:
    """Measured and given functions expanded around the value at hand, by their own derivatives."""

    def expanded(function: Any) -> Callable[..., Any]:
        def of_series(argument: Any, orders: tuple[int, ...] = (0,)) -> Any:
            if not isinstance(argument, Series):
                return function.evaluate(argument, orders=orders)
            base = argument.coefficient(0)
            rest = argument - base
            total: Any = Series.constant(float(function.evaluate(base, orders=orders)), TERMS)
            power: Any = 1.0
            factorial = 1.0
            for order in (1, 2, 3):
                factorial *= order
                power = power * rest
                total = total + power * (float(function.evaluate(base, orders=(sum(orders) + order,))) / factorial)
            return total

        return of_series

    def given(function: GivenFunction) -> Callable[..., Any]:
        def of_several(*arguments: Any, orders: tuple[int, ...] = ()) -> Any:
            bases = [one.coefficient(0) if isinstance(one, Series) else one for one in arguments]
            terms = [float(function.evaluate(*bases, orders=orders))]
            rises = [one.coefficient(1) if isinstance(one, Series) else 0.0 for one in arguments]
            known = list(zip(rises, function.partials, strict=True))
            if not any(orders) and all(partial is not None or rise == 0.0 for rise, partial in known):
                terms.append(sum(rise * float(partial(*bases)) for rise, partial in known if partial is not None and rise))
            return Series(terms)  # what is not known of it is not made up

        return of_several

    functions = of.problem.functions.items()
    return {name: given(one) if isinstance(one, GivenFunction) else expanded(one) for name, one in functions}


def _series(coefficients: list[float], shift: float = 1.0) -> Series:
    """The series of a polynomial at shift times the small variable."""
    return Series.polynomial([value * shift**order for order, value in enumerate(coefficients)], TERMS)


def _composed(profile: list[float], place: list[float], shift: float) -> Series:
    """profile(x) at x = place(shift * variable), the profile expanded around place[0]."""
    inner = _series([0.0, *place[1:]], shift)
    total: Any = Series.constant(profile[0], TERMS)
    power: Any = Series.constant(1.0, TERMS)
    for value in profile[1:]:
        power = power * inner
        total = total + power * value
    return total


def _discrete_leaf(
    of: Discretization, profile: list[float], place: list[float], left: float, length: float, given: Mapping[str, float]
) -> Callable[[Node], Any]:
    def nodal(name: str, offset: float) -> Any:
        if name == of.unknown:
            return _composed(profile, place, offset)
        reference = _series(place, offset)
        return reference if name == PLACE else reference * length + left

    def leaf(node: Node) -> Any:
        if isinstance(node, Indexed):
            return nodal(node.name, float(node.offset))
        assert isinstance(node, Name)
        kind, _, name = node.name.partition(":")
        if kind == "#up":
            return nodal(name, 1.0) - nodal(name, 0.0)
        if kind == "#down":
            return nodal(name, 0.0) - nodal(name, -1.0)
        if node == STEP:
            return Series.polynomial([0.0, length], TERMS)
        if node == PART:
            return Series.polynomial([0.0, 1.0], TERMS)
        return given[node.name]

    return leaf


def _continuous(
    tree: Node,
    of: Discretization,
    profile: list[float],
    place: list[float],
    left: float,
    length: float,
    given: Mapping[str, float],
    functions: Mapping[str, Any],
) -> Any:
    """The equation as a series in the reference coordinate around the place, whose constant term is its value there."""
    problem = of.problem
    u = Series.polynomial(profile, TERMS)
    x = Series.polynomial([left + length * place[0], length], TERMS)
    radius = x**problem.exponent if problem.exponent else 1.0

    def primed(inside: Any, times: int = 1) -> Any:
        for _ in range(times):
            inside = _differentiated(inside) * (1.0 / length)
        return inside

    def leaf(node: Node) -> Any:
        if isinstance(node, Prime):
            return primed(of_tree(node.operand), node.order)
        if isinstance(node, At):
            return of_tree(node.operand)
        if isinstance(node, Call):
            inside = of_tree(node.arguments[0])
            if node.function == "grad":
                return primed(inside)
            flux = primed(inside) if node.function == "laplacian" else inside
            return primed(flux * radius) / radius
        assert isinstance(node, Name)
        if node.name == of.unknown:
            return u
        return x if node.name == problem.coordinate else given[node.name]

    def of_tree(part: Node) -> Any:
        return evaluate(part, leaf, functions)

    return of_tree(tree)


def _differentiated(series: Any) -> Any:
    if not isinstance(series, Series):
        return Series.constant(0.0, TERMS)
    first, end = series.valuation, series.end
    shifted = [order * series.coefficient(order) for order in range(first, end)]
    return Series(shifted, first - 1) if shifted else Series.constant(0.0, TERMS)


def _constant_term(value: Any) -> float:
    return float(value.coefficient(0)) if isinstance(value, Series) else float(value)
