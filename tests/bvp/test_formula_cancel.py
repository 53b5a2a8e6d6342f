"""Nodal values written by their differences: exactly the same in rational arithmetic, and exact to rounding in floating point."""

from __future__ import annotations

import math
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import mpmath
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from bvp.formula import cancel, evaluate, float_functions, mpmath_functions, parse, write
from bvp.formula.precise import typed
from bvp.formula.tree import Binary, Call, Indexed, Name, Negative, Node, Number, walk
from tests.drawn_formulas import VOCABULARY

NODAL = [Indexed(name, Fraction(offset)) for name in ("u", "x") for offset in (-1, 0, 1)]
numbers = st.sampled_from([1.0, 2.0, 3.0, 0.5, 6.0, 10.0, 12.0]).map(Number)
leaves = st.sampled_from([*NODAL, Name("lam"), Name("h")])


def _larger(parts: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        st.builds(Binary, st.sampled_from("++---"), parts, parts),
        st.builds(lambda number, part: Binary("*", number, part), numbers, parts),
        st.builds(lambda part, number, sign: Binary(sign, part, number), parts, numbers, st.sampled_from("*/")),
        st.builds(Binary, st.just("*"), parts, parts),
        st.builds(Negative, parts),
    )


combinations = st.recursive(st.one_of(leaves, numbers), _larger, max_leaves=14)
with_functions = st.recursive(
    st.one_of(leaves, numbers),
    lambda parts: st.one_of(
        _larger(parts),
        st.builds(lambda name, part: Call(name, (part,)), st.sampled_from(["exp", "sin"]), parts),
        st.builds(lambda above, below: Call("log", (Binary("/", above, below),)), parts, parts),
    ),
    max_leaves=12,
)


def leaf_of(values: dict[str, list[Any]], others: dict[str, Any]) -> Callable[[Any], Any]:
    """Values of the leaves: three nodal values of each name, their differences formed from those."""

    def leaf(node: Any) -> Any:
        if isinstance(node, Indexed):
            return values[node.name][int(node.offset) + 1]
        kind, _, name = node.name.partition(":")
        if kind == "#up":
            return values[name][2] - values[name][1]
        if kind == "#down":
            return values[name][1] - values[name][0]
        return others[node.name]

    return leaf


RATIONAL = leaf_of(
    {"u": [Fraction(2, 7), Fraction(3, 11), Fraction(5, 13)], "x": [Fraction(1, 17), Fraction(4, 19), Fraction(6, 23)]},
    {"lam": Fraction(7, 29), "h": Fraction(3, 31)},
)


@settings(max_examples=800, deadline=None)
@given(combinations)
def test_nothing_changes_in_rational_arithmetic(tree: Node) -> None:
    assert evaluate(cancel(tree), RATIONAL, {}, Fraction) == evaluate(tree, RATIONAL, {}, Fraction)


@settings(max_examples=300, deadline=None)
@given(with_functions)
def test_nothing_changes_with_sixty_digits(tree: Node) -> None:
    with mpmath.workdps(60):
        nodal = {
            name: [mpmath.mpf(value) for value in values]
            for name, values in {"u": ["0.31", "0.42", "0.47"], "x": ["1.5", "1.7", "2.1"]}.items()
        }
        leaf = leaf_of(nodal, {"lam": mpmath.mpf("1.3"), "h": mpmath.mpf("0.2")})
        try:
            before = evaluate(tree, leaf, mpmath_functions(), typed)
        except (ZeroDivisionError, ValueError, OverflowError):
            assume(False)
        assume(isinstance(before, mpmath.mpf) and 1e-9 < abs(before) < 1e9)
        after = evaluate(cancel(tree), leaf, mpmath_functions(), typed)
        assert abs(after - before) < mpmath.mpf(10) ** -35 * abs(before)


def cancelled(text: str, only: frozenset[str] | None = None) -> str:
    return write(cancel(parse(text, "scheme", VOCABULARY), only))


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("u[k+1] - 2*u[k] + u[k-1]", "up:u - down:u"),
        ("(u[k+1] - 2*u[k] + u[k-1])/h^2 + lam*exp(u[k])", "(up:u - down:u)/h^2 + lam*exp(u[k])"),
        ("(u[k+1] - u[k-1])/(x[k+1] - x[k-1])", "(up:u + down:u)/(up:x + down:x)"),
        ("3*(u[k+1] - u[k]) - (u[k] - u[k-1])/2", "3*up:u - 0.5*down:u"),
        ("(u[k+1] - u[k] + lam)/3", "(up:u + lam)/3"),
        ("u[k+1]/3 - u[k]/3", "up:u/3"),
        ("u[k+1] + u[k]", "u[k+1] + u[k]"),
        ("u[k] - u[k]", "0"),
        ("lam*u[k+1] - lam*u[k]", "lam*u[k+1] - lam*u[k]"),
        ("u[k+1] - x[k]", "u[k+1] - x[k]"),
        ("x[k+1/2] - x[k-1/2]", "x[k+1/2] - x[k-1/2]"),
        ("u[k+1] - 2*u[k] + u[k-1] + u[k]*u[k]", "up:u - down:u + u[k]*u[k]"),
        ("log(x[k+1]/x[k])", "log1p(up:x/x[k])"),
        ("log(x[k]/x[k-1])", "log1p(down:x/x[k-1])"),
        ("(u[k+1] - u[k])/log(x[k+1]/x[k])", "up:u/log1p(up:x/x[k])"),
        # Nothing of the denominator cancels here: log1p of a number near -1 would lose digits.
        ("log((u[k+1] - u[k])/h)", "log(up:u/h)"),
        ("log(exp(u[k])/1)", "log(exp(u[k])/1)"),
        ("exp(u[k]) - 1", "expm1(u[k])"),
        ("1 - exp(u[k+1] - u[k])", "-expm1(up:u)"),
        ("exp(u[k]) - 2", "exp(u[k]) - 2"),
    ],
)
def test_what_is_written_instead(text: str, expected: str) -> None:
    assert cancelled(text) == expected


def test_only_the_names_asked_for() -> None:
    assert cancelled("(u[k+1] - u[k])/(x[k+1] - x[k])", frozenset({"x"})) == "(u[k+1] - u[k])/up:x"
    assert cancelled("log(x[k+1]/x[k])", frozenset({"u"})) == "log(x[k+1]/x[k])"


def test_a_tree_without_differences_is_left_as_it_is() -> None:
    tree = parse("lam*exp(u[k]) + x[k]*u[k+1]", "scheme", VOCABULARY)
    assert cancel(tree) is tree


def test_factors_beyond_all_numbers_are_left_alone() -> None:
    text = "1e300*(1e300*(u[k+1] - u[k]))"
    assert write(cancel(parse(text, "scheme", VOCABULARY))) == "1e+300*(1e+300*up:u)"
    summed = parse(f"{text} + lam", "scheme", VOCABULARY)
    leaf = leaf_of({"u": [1.0, 2.0, 3.0]}, {"lam": 1.0})
    assert evaluate(cancel(summed), leaf, float_functions()) == evaluate(summed, leaf, float_functions()) == math.inf


def test_nodes_further_away_are_left_alone() -> None:
    tree = Binary("-", Indexed("u", Fraction(2)), Indexed("u", Fraction(0)))
    assert cancel(tree) is tree


@settings(max_examples=200, deadline=None)
@given(st.floats(0.5, 2.0), st.floats(-1.0, 1.0), st.floats(-1.0, 1.0))
def test_a_second_difference_keeps_its_digits(value: float, slope: float, curve: float) -> None:
    step = 1e-5
    nodal = {"u": [value - slope * step + curve * step**2, value, value + slope * step + curve * step**2]}
    tree = parse("u[k+1] - 2*u[k] + u[k-1]", "scheme", VOCABULARY)
    exact = evaluate(tree, leaf_of({"u": [Fraction(each) for each in nodal["u"]]}, {}), {}, Fraction)
    differences = evaluate(cancel(tree), leaf_of(nodal, {}), float_functions())
    assert differences == exact  # both differences are exact for neighbours so close, and so is their own difference


@settings(max_examples=200, deadline=None)
@given(st.floats(1.0, 100.0), st.floats(1e-14, 0.5))
def test_the_logarithm_of_a_ratio_keeps_its_digits(value: float, part: float) -> None:
    nodal = {"x": [value, value, value * (1.0 + part)]}
    assume(nodal["x"][2] > value)
    tree = cancel(parse("log(x[k+1]/x[k])", "scheme", VOCABULARY))
    with mpmath.workdps(40):
        exact = mpmath.log(mpmath.mpf(nodal["x"][2]) / mpmath.mpf(value))
        assert abs(evaluate(tree, leaf_of(nodal, {}), float_functions()) - exact) < 4e-16 * exact


def test_the_leaves_of_differences_cannot_be_typed() -> None:
    made = {node.name for node in walk(cancel(parse("u[k+1] - u[k-1]", "scheme", VOCABULARY))) if isinstance(node, Name)}
    assert made == {"#up:u", "#down:u"}
