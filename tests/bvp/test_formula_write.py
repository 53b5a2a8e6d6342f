"""Trees back to paper notation: read again they are the same trees."""

from __future__ import annotations

import pytest
from hypothesis import given, settings

from bvp.formula import parse, write
from bvp.formula.tree import Node
from tests.drawn_formulas import VOCABULARY, equations


@settings(max_examples=800, deadline=None)
@given(equations)
def test_what_is_written_is_read_as_the_same_tree(tree: Node) -> None:
    assert parse(write(tree), "equation", VOCABULARY) == tree


@pytest.mark.parametrize(
    "text",
    [
        "u'' + lam*exp(u)",
        "u'^2",
        "(kappa(u)*u')'",
        "-u^2",
        "(-u)^2",
        "u^-2",
        "u^v^2",
        "(u^v)^2",
        "u - (v - x)",
        "u - v - x",
        "u/(v*x)",
        "u/v*x",
        "u*(v/x)",
        "(u + v)*x",
        "-(u + v)",
        "-u*v",
        "-(u*v)",
        "u + -v",
        "2*-u",
        "kappa''(u)",
        "kappa(u)'",
        "(u')'",
        "(q*u)''",
        "div(q*grad(u)) = Bi*u",
        "min(u, v) + max(u, 0.5)",
        "1e-05*u",
        "1e+20*u",
        "given(x, u)",
    ],
)
def test_no_bracket_is_written_that_is_not_needed(text: str) -> None:
    assert write(parse(text, "equation", VOCABULARY)) == text


@pytest.mark.parametrize(
    ("place", "text"),
    [
        ("condition", "u'(0) = 0"),
        ("condition", "u'(1) + Bi*u(1) = lam"),
        ("condition", "u(0) = u(2*lam)"),
        ("condition", "integral(u) = 1"),
        ("measure", "max(u) - u(0.3)"),
        ("measure", "mean(u*v) >= rms(u')"),
        ("scheme", "(u[k+1] - 2*u[k] + u[k-1])/h^2"),
        ("scheme", "x[k+1/2]*x[k-1/2]*step"),
    ],
)
def test_the_constructs_of_each_place_are_written_as_they_were_typed(place: str, text: str) -> None:
    assert write(parse(text, place, VOCABULARY)) == text


def test_needless_brackets_and_spaces_go() -> None:
    assert write(parse("((u)'' )+( lam * (exp( (u) )))", "equation", VOCABULARY)) == "u'' + lam*exp(u)"
