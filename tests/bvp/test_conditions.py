"""Conditions at the ends: what a named formula means there, and what cannot be told."""

from __future__ import annotations

import pytest

from bvp import Problem
from bvp.conditions import RIGHT
from bvp.errors import ProblemError
from bvp.formula.tree import At, Name, walk


def slab(condition: str, **where: str) -> Problem:
    return Problem("u'' + lam*exp(u) = 0", "u", (0, 1), ["u'(0) = 0", condition], {"lam": 0.0}, where=where)


@pytest.mark.parametrize(
    ("named", "written_out"),
    [
        ("k*u'(1) + 10*u(1) = 0", "(1 + 0.1*u(1))*u'(1) + 10*u(1) = 0"),
        ("k*u'(1) + k^2 = 0", "(1 + 0.1*u(1))*u'(1) + (1 + 0.1*u(1))^2 = 0"),
        ("u'(1) + twice = 0", "u'(1) + 2*(1 + 0.1*u(1)) = 0"),
    ],
)
def test_a_named_formula_of_the_unknown_is_meant_at_the_conditions_end(named: str, written_out: str) -> None:
    found = slab(named, k="1 + 0.1*u", twice="2*k").conditions[1].tree
    assert found == slab(written_out).conditions[1].tree
    assert At(Name("u"), Name(RIGHT)) in walk(found)


def test_a_named_formula_in_a_condition_at_both_ends_is_refused() -> None:
    with pytest.raises(ProblemError, match="stands at both ends"):
        slab("k*u'(0) = u'(1)", k="1 + u")


def test_a_named_formula_of_parameters_may_stand_in_a_condition_at_both_ends() -> None:
    assert slab("k*u'(0) = u'(1)", k="1 + lam").conditions[1].sides == {"left", "right"}
