"""Evaluation of trees by floats, arrays and numbers of many digits, and the functions of each."""

from __future__ import annotations

import math
from typing import Any

import mpmath
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from bvp.formula import evaluate, float_functions, mpmath_functions, parse
from bvp.formula.arrays import numpy_functions
from bvp.formula.evaluate import cardinal, cardinal_slope, evaluate_all
from bvp.formula.precise import typed
from bvp.formula.tree import Call, Name, Node, walk
from bvp.formula.vocabulary import MADE, ONE_ARGUMENT, TWO_ARGUMENTS
from tests.drawn_formulas import VALUES, VOCABULARY, pointwise

ALL_FUNCTIONS = {*ONE_ARGUMENT, *TWO_ARGUMENTS, *MADE}


def by_hand(tree: Node, values: dict[str, Any], functions: Any) -> Any:
    """A slow literal twin of evaluation."""
    if hasattr(tree, "value"):
        return tree.value
    if isinstance(tree, Name):
        return values[tree.name]
    parts = [by_hand(part, values, functions) for part in tree.parts]
    if isinstance(tree, Call):
        return functions[tree.function](*parts)
    if len(parts) == 1:
        return -parts[0]
    left, right = parts
    operator = tree.operator  # type: ignore[attr-defined]
    if operator == "^":
        return math.pow(left, right)
    return {"+": lambda: left + right, "-": lambda: left - right, "*": lambda: left * right, "/": lambda: left / right}[operator]()


@settings(max_examples=300, deadline=None)
@given(pointwise)
def test_evaluation_equals_its_literal_twin(tree: Node) -> None:
    try:
        expected = by_hand(tree, VALUES, float_functions())
    except (ZeroDivisionError, OverflowError, ValueError):
        assume(False)
    assume(isinstance(expected, float) and math.isfinite(expected))
    assert evaluate(tree, lambda leaf: VALUES[leaf.name], float_functions()) == expected


@settings(max_examples=300, deadline=None)
@given(pointwise)
def test_arrays_hold_what_floats_give(tree: Node) -> None:
    shift = np.array([0.0, 0.03125, -0.0625])
    arrays = {name: value + shift for name, value in VALUES.items()}
    with np.errstate(all="ignore"):
        found = np.zeros(3) + evaluate(tree, lambda leaf: arrays[leaf.name], numpy_functions())
    for i in range(3):
        floats = {name: float(array[i]) for name, array in arrays.items()}
        parts = evaluate_all(list(walk(tree)), lambda leaf, at=floats: at[leaf.name], float_functions())  # type: ignore[misc]
        assume(all(1e-6 < abs(part) < 1e3 for part in parts if math.isfinite(part)))
        if math.isfinite(parts[0]):
            assert found[i] == pytest.approx(parts[0], rel=1e-9, abs=1e-9)
        else:
            assert found[i] == parts[0] or (math.isnan(found[i]) and math.isnan(parts[0]))


def floating(text: str, u: float = 0.0) -> float:
    return float(evaluate(parse(text, "equation", VOCABULARY), lambda _: u, float_functions()))


@pytest.mark.parametrize(
    ("text", "u", "expected"),
    [
        ("1/u", 0.0, math.inf),
        ("-1/u", 0.0, -math.inf),
        ("u/u", 0.0, math.nan),
        ("u^-1", 0.0, math.inf),
        ("u^0.5", -1.0, math.nan),
        ("u^2", -1e200, math.inf),
        ("u^3", -1e200, -math.inf),
        ("exp(u)", 1000.0, math.inf),
        ("cosh(u)", -1000.0, math.inf),
        ("sinh(u)", -1000.0, -math.inf),
        ("log(u)", 0.0, -math.inf),
        ("log(u)", -1.0, math.nan),
        ("sqrt(u)", -1.0, math.nan),
        ("asin(u)", 2.0, math.nan),
        ("min(u, 1)", math.nan, math.nan),
        ("min(1, u)", math.nan, math.nan),
        ("max(u, 1)", math.nan, math.nan),
        ("max(1, u)", math.nan, math.nan),
        ("sin(u)", math.inf, math.nan),
        ("u - u", math.inf, math.nan),
    ],
)
def test_outside_of_a_domain_there_is_nan_or_infinity_and_no_exception(text: str, u: float, expected: float) -> None:
    with np.errstate(all="ignore"):
        array = evaluate(parse(text, "equation", VOCABULARY), lambda _: np.array([u]), numpy_functions())
    for found in (floating(text, u), float(array[0])):
        assert found == expected or (math.isnan(expected) and math.isnan(found))


def test_every_table_has_every_function() -> None:
    assert set(float_functions()) == set(numpy_functions()) == set(mpmath_functions()) == ALL_FUNCTIONS


def test_each_part_is_worked_out_once() -> None:
    tree: Node = Name("u")
    for _ in range(50):
        tree = Call("max", (tree, tree))
    asked: list[str] = []

    def leaf(node: Any) -> float:
        asked.append(node.name)
        return 2.0

    def larger(a: float, b: float) -> float:
        asked.append("max")
        return max(a, b)

    assert evaluate_all([tree, tree], leaf, {"max": larger}) == [2.0, 2.0]
    assert (asked.count("max"), asked.count("u")) == (50, 1)


def test_a_long_chain_needs_no_deep_stack() -> None:
    tree: Node = Name("u")
    for _ in range(5000):
        tree = Call("sin", (tree,))
    assert 0.0 < evaluate(tree, lambda _: 0.5, float_functions()) < 0.1


def test_unknown_calls_and_derivatives_are_leaves() -> None:
    tree = parse("laplacian(u) + u'' + kappa'(u)", "equation", VOCABULARY)
    asked: list[Node] = []

    def leaf(node: Node) -> float:
        asked.append(node)
        return 1.0

    evaluate(tree, leaf, float_functions())
    assert len(asked) == 3
    orders = evaluate(tree, lambda _: 1.0, {"kappa": lambda x, orders=(): 10.0 * orders[0]})
    assert orders == 12.0


def test_literals_have_all_digits_where_that_is_asked_for() -> None:
    with mpmath.workdps(40):
        tree = parse("0.1*3 - 0.3 + (1/3)*3 - 1 + sin(pi)", "equation", VOCABULARY)
        assert abs(evaluate(tree, lambda _: None, mpmath_functions(), typed)) < mpmath.mpf(10) ** -39
        assert abs(evaluate(tree, lambda _: None, mpmath_functions())) > mpmath.mpf(10) ** -18


# -- the tool's own functions -----------------------------------------------------------------------------------------

NEAR_ZERO = [sign * 10.0**power for sign in (1, -1) for power in range(-30, 4)]
GRID = [0.0, *NEAR_ZERO, *np.linspace(-60.0, 60.0, 97), math.pi**2, 4.0, -4.0, np.nextafter(4.0, 0.0), 5e-324]


def exact_cardinal(z: float) -> tuple[Any, Any]:
    """2 (1 - cos sqrt z)/z and its derivative as they stand, with digits to spare for what cancels."""
    with mpmath.workdps(200):
        x = mpmath.mpf(z)
        if abs(z) < 1e-60:
            return 1 - x / 12, -mpmath.mpf(1) / 12 + x / 180
        value = (2 * (1 - mpmath.cos(mpmath.sqrt(x))) / x).real
        return value, ((mpmath.sin(mpmath.sqrt(x)) / mpmath.sqrt(x)).real - value) / x


@pytest.mark.parametrize("z", GRID)
def test_cardinal_and_its_slope(z: float) -> None:
    value, slope = exact_cardinal(float(z))
    arrays = numpy_functions()
    if z >= math.pi**2:  # where the fitted scheme, their only use, has no meaning
        found = [cardinal(z), cardinal_slope(z), *(float(arrays[name](np.array([z]))[0]) for name in ("cardinal", "cardinal_slope"))]
        assert all(math.isnan(number) for number in found)
        return
    sizes = (abs(value), abs(slope))
    for exact, size, found in (
        (value, sizes[0], [cardinal(z), float(arrays["cardinal"](np.array([z]))[0])]),
        (slope, sizes[1], [cardinal_slope(z), float(arrays["cardinal_slope"](np.array([z]))[0])]),
    ):
        for number in found:
            assert abs(number - exact) < 1.5e-15 * size
    with mpmath.workdps(40):
        precise = mpmath_functions()
        assert abs(precise["cardinal"](mpmath.mpf(z)) - value) < mpmath.mpf(10) ** -37 * sizes[0]
        assert abs(precise["cardinal_slope"](mpmath.mpf(z)) - slope) < mpmath.mpf(10) ** -37 * sizes[1]


def test_cardinal_overflows_to_infinity() -> None:
    functions = float_functions()
    assert (functions["cardinal"](-1e7), functions["cardinal_slope"](-1e7)) == (math.inf, -math.inf)
    assert math.isnan(functions["cardinal"](math.nan))
    assert math.isnan(functions["cardinal_slope"](math.nan))


@settings(max_examples=200, deadline=None)
@given(st.floats(-3.0, 3.0), st.floats(-3.0, 3.0))
def test_sign_and_step(a: float, b: float) -> None:
    for table in (float_functions(), numpy_functions(), mpmath_functions()):
        assert float(table["sign"](a)) == (a > 0) - (a < 0)
        assert float(table["step_le"](a, b)) == (1.0 if a <= b else 0.0)
        assert float(table["min"](a, b)) == min(a, b)
        assert float(table["max"](a, b)) == max(a, b)
