"""Exact derivatives of drawn formulas against differences with 60 digits, and what is folded on the way."""

from __future__ import annotations

import math
from typing import Any

import mpmath
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from bvp.formula import derivative, evaluate, float_functions, folded, mpmath_functions, parse, write
from bvp.formula.precise import typed
from bvp.formula.tree import At, Call, Indexed, Name, Node, Number, Prime
from tests.drawn_formulas import VALUES, VOCABULARY, pointwise

DIGITS = 60


def precise_value(tree: Node, **changed: Any) -> Any:
    """The value at VALUES, some of them changed; the example is dropped where it is not real, or enormous."""
    values = {name: mpmath.mpf(value) for name, value in VALUES.items()} | changed
    try:
        value = evaluate(tree, lambda leaf: values[leaf.name], mpmath_functions(), typed)
    except (ZeroDivisionError, OverflowError, TypeError, ValueError):  # TypeError: complex numbers compared in min or max
        assume(False)
    assume(isinstance(value, mpmath.mpf) and mpmath.isfinite(value) and abs(value) < 1e12)
    return value


@settings(max_examples=600, deadline=None)
@given(pointwise, st.sampled_from(["u", "lam", "x"]))
def test_derivatives_equal_differences(tree: Node, name: str) -> None:
    with mpmath.workdps(DIGITS):
        step = mpmath.mpf(10) ** -20
        centre = mpmath.mpf(VALUES[name])
        after, before = precise_value(tree, **{name: centre + step}), precise_value(tree, **{name: centre - step})
        here = precise_value(tree)
        difference = (after - before) / (2 * step)
        assume(abs(after - 2 * here + before) < 1e-15 * (1 + abs(difference)))  # neither a kink nor a singularity close by
        exact = precise_value(derivative(tree, Name(name)))
        assert abs(exact - difference) <= 1e-15 * (1 + abs(exact))


def derived(text: str, leaf: Node, place: str = "equation") -> str:
    return write(derivative(parse(text, place, VOCABULARY), leaf))


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("lam*exp(u)", "lam*exp(u)"),
        ("lam", "0"),
        ("u", "1"),
        ("3*u + lam", "3"),
        ("u^2", "2*u"),
        ("u^3/Bi", "3*u^2/Bi"),
        ("u^-1", "-1*u^-2"),
        ("-u", "-1"),
        ("u - u", "0"),
        ("sin(2*u)", "cos(2*u)*2"),
        ("abs(u)", "sign(u)"),
        ("min(u, v)", "step_le(u, v)"),
        ("max(v, u)", "1 - step_le(u, v)"),
        ("kappa(u)", "kappa'(u)"),
        ("kappa'(u)*2", "kappa''(u)*2"),
        ("kappa(v)", "0"),
        ("cosh(u)/v", "sinh(u)/v"),
    ],
)
def test_derivatives_are_written_as_by_hand(text: str, expected: str) -> None:
    assert derived(text, Name("u")) == expected


def test_other_leaves_are_held_fixed() -> None:
    assert derived("u*u'' + v", Prime(Name("u"), 2)) == "u"
    assert derived("u*u'' + v", Name("u")) == "u''"
    assert derived("u(0)*Bi + u'(0)", At(Prime(Name("u"), 1), Number(0.0)), "condition") == "1"
    nodal = parse("u[k+1]*u[k] - x[k+1/2]", "scheme", VOCABULARY)
    assert write(derivative(nodal, Indexed("u", nodal.left.right.offset))) == "u[k+1]"  # type: ignore[attr-defined]


def test_a_given_function_counts_derivatives_by_each_argument() -> None:
    tree = derivative(parse("given(x, u)", "equation", VOCABULARY), Name("u"))
    assert tree == Call("given", (Name("x"), Name("u")), (0, 1))


@pytest.mark.parametrize("name", ["min", "max"])
def test_the_shares_of_a_tie_add_up_to_one(name: str) -> None:
    tree = parse(f"{name}(u, v)", "equation", VOCABULARY)
    shares = [evaluate(derivative(tree, Name(leaf)), lambda _: 1.5, float_functions()) for leaf in "uv"]
    assert sum(shares) == 1.0


@settings(max_examples=300, deadline=None)
@given(pointwise)
def test_folding_changes_no_value(tree: Node) -> None:
    value, short = (evaluate(one, lambda leaf: VALUES[leaf.name], float_functions()) for one in (tree, folded(tree)))
    assume(math.isfinite(value))
    assert short == pytest.approx(value, rel=1e-14, abs=1e-300)
    assert folded(tree).size <= tree.size


def test_zeros_and_ones_are_folded() -> None:
    assert write(folded(parse("0*u + 1*v^1 - (x - 0) + u^0", "equation", VOCABULARY))) == "v - x + 1"


def test_literals_are_folded_only_where_that_is_exact() -> None:
    assert write(folded(parse("0.5*4*u + (1 - 3)*v", "equation", VOCABULARY))) == "2*u + -2*v"
    for text in ("0.1*3*u", "(0.1 + 0.2)*u", "1e+300*1e+300*u"):
        assert write(folded(parse(text, "equation", VOCABULARY))) == text


def test_a_long_chain_needs_no_deep_stack() -> None:
    tree: Node = Name("u")
    for _ in range(3000):
        tree = Call("sin", (tree,))
    slope = derivative(tree, Name("u"))
    assert math.isfinite(evaluate(slope, lambda _: 0.5, float_functions()))


def test_a_shared_part_is_differentiated_once() -> None:
    tree: Node = Name("u")
    for _ in range(60):  # written out it would have 2^60 names
        tree = Call("min", (tree, tree))
    slope = evaluate(derivative(tree, Name("u")), lambda _: 0.5, float_functions())
    assert slope == 1.0
