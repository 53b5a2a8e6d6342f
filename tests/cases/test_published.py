"""Which value of a result a published quantity means, and when the two agree."""

from __future__ import annotations

from dataclasses import replace

import pytest

from bvp.errors import InputError
from cases.case import PublishedValue
from cases.published import BRANCH_POINT, STATE, TURNING_POINT, Quantity, hold_against, measures_needed, parse_quantity, values_needed
from tests.cases.made_results import branch, cylinder, found_states


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("turning point 1", Quantity(TURNING_POINT, 1)),
        ("  turning  point 12 ", Quantity(TURNING_POINT, 12)),
        ("branch point 2", Quantity(BRANCH_POINT, 2)),
        ("max(u) at turning point 1", Quantity(TURNING_POINT, 1, "max(u)")),
        ("u'(0) at lam=5 state 2", Quantity(STATE, 2, "u'(0)", "lam", 5.0)),
        ("lam = -1.5e-3 state 1", Quantity(STATE, 1, None, "lam", -1.5e-3)),
        ("turning point 3 on branch main/pitchfork 1", Quantity(TURNING_POINT, 3, branch="main/pitchfork 1")),
        ("max(u) - u(1/2) at lam=1 state 1 on branch loop 1", Quantity(STATE, 1, "max(u) - u(1/2)", "lam", 1.0, "loop 1")),
    ],
)
def test_quantity(text: str, expected: Quantity) -> None:
    assert parse_quantity(text, "here") == expected


@pytest.mark.parametrize(
    "text",
    [
        "",
        "turning point",
        "turning point x",
        "turning points 1",
        "fold 1",
        "lam=5",
        "lam=5 state",
        "state 2",
        "lam=nan state 1",
        "at turning point 1",
        "turning point 0",
    ],
)
def test_no_quantity(text: str) -> None:
    with pytest.raises(InputError, match="here"):
        parse_quantity(text, "here")


def published(quantity: str, value: float, uncertainty: float) -> PublishedValue:
    return PublishedValue(quantity, value, uncertainty, "the closed form")


def held(*values: PublishedValue) -> list[bool | None]:
    case = replace(cylinder(), published=values)
    return [compared.agrees for compared in hold_against(case, branch().turning_points, {1.0: found_states(1.0).states})]


def test_agreement_is_within_both_uncertainties_together() -> None:
    # The turning point is 2 with an uncertainty of 3e-12 (see made_results).
    assert held(published("turning point 1", 2.0, 0.0)) == [True]
    assert held(published("turning point 1", 2.0 + 2.9e-12, 0.0)) == [True]
    assert held(published("turning point 1", 2.0 + 3.1e-12, 0.0)) == [False]
    assert held(published("turning point 1", 2.0 + 3.1e-12, 0.2e-12)) == [True]
    assert held(published("turning point 1", 1.9, 0.05)) == [False]


def test_what_cannot_be_judged() -> None:
    assert held(published("turning point 2", 2.0, 1.0)) == [None]
    assert held(published("branch point 1", 2.0, 1.0)) == [None]
    assert held(published("lam=0.5 state 1", 2.0, 1.0)) == [None]  # not looked at
    assert held(published("lam=1 state 3", 2.0, 1.0)) == [None]
    assert held(published("max(u) at turning point 1", 1.386, 1.0)) == [None]  # the record has no uncertainty of it
    assert held(published("turning point 1 on branch loop 1", 2.0, 1.0)) == [None]


def test_states_are_counted_by_the_first_measure() -> None:
    assert held(published("lam=1 state 1", 0.31669436764, 1e-9), published("lam=1 state 2", 0.31669436764, 1e-9)) == [True, False]


def test_what_a_trace_has_to_measure_and_where() -> None:
    case = replace(cylinder(), published=(published("u(1/2) at lam=1 state 1", 1.0, 0.0), published("lam=0.5 state 1", 1.0, 0.0)))
    assert measures_needed(case) == ("max(u)", "u(1/2)")
    assert values_needed(case) == [0.5, 1.0]


def test_states_are_published_at_values_of_the_traced_parameter() -> None:
    case = replace(cylinder(), published=(published("Bi=1 state 1", 1.0, 0.0),))
    with pytest.raises(InputError, match="Expected: a value of the traced parameter, lam"):
        values_needed(case)
