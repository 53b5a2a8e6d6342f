"""The JSON documents: their keys, strict JSON, and numbers that come back digit for digit."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from cases.documents import case_document, document_of, json_text, plain
from cases.results import ReachedMeasure
from tests.cases.made_results import branch, cylinder, solved, traced


def refused(text: str) -> None:
    raise AssertionError(f"{text} is no JSON")


def strict(text: str) -> Any:
    """The document of a text that must be strict JSON: NaN and Infinity, which Python would read, are refused."""
    return json.loads(text, parse_constant=refused)


def test_trace_has_the_keys_that_others_rely_on() -> None:
    document = strict(json_text(document_of(traced())))
    assert list(document) == [
        "case", "title", "scheme", "along", "intervals", "branches", "turning_points", "branch_points", "published", "work",
        "complete", "notes",
    ]  # fmt: skip
    assert list(document["branches"][0]) == ["name", "points", "values", "measures", "unstable_directions", "began", "ended"]
    assert list(document["turning_points"][0]) == [
        "branch", "value", "uncertainty", "measures", "states", "order", "on_grid", "refinement", "survives", "sensitivity",
    ]  # fmt: skip
    assert document["turning_points"][0]["refinement"][0] == {"intervals": 50, "value": 1.9997}
    assert list(document["published"][0]) == ["quantity", "value", "computed", "difference", "agrees", "source"]
    assert list(document["work"]) == ["seconds", "newton_steps", "factorizations"]
    assert document["complete"] is True


def test_numbers_come_back_digit_for_digit() -> None:
    document = strict(json_text(document_of(traced())))
    one = branch()
    assert document["branches"][0]["values"] == one.parameter.tolist()
    assert document["branches"][0]["measures"]["max(u)"] == one.measures["max(u)"].tolist()
    assert document["branches"][0]["unstable_directions"] == [0] * 14 + [1] * 27
    assert document["branches"][0]["points"] == 41


def test_what_is_no_finite_number_becomes_null() -> None:
    turning = replace(branch().turning_points[0], uncertainty=None, order=math.nan, sensitivity={"Bi": math.inf})
    one = replace(branch(), turning_points=(turning,), unstable_directions=None, seconds=math.nan)
    document = strict(json_text(document_of(traced(branches=(one,)))))
    point = document["turning_points"][0]
    assert (point["uncertainty"], point["order"], point["sensitivity"]) == (None, None, {"Bi": None})
    assert document["branches"][0]["unstable_directions"] is None
    assert document["work"]["seconds"] is None


def test_solve_and_reach() -> None:
    document = strict(json_text(document_of(solved())))
    assert list(document) == ["asked", "at", "states", "margin", "complete", "notes"]
    assert document["at"] == {"lam": 1.0}
    assert list(document["states"][0]) == ["measures", "unstable_directions", "residual", "uncertainty", "branch"]
    more = {"refinement": (), "unstable_directions": 0, "order": 2.0, "survives": True}
    point = SimpleNamespace(value=1.98, uncertainty=1e-10, measures={"max(u)": 1.2}, **more)
    found = SimpleNamespace(points=(point,), branch=SimpleNamespace(name="main"))
    reached = ReachedMeasure(cylinder(), "max(u) = 1.2", found, (), True)
    document = strict(json_text(document_of(reached)))
    assert list(document) == ["case", "title", "scheme", "along", "intervals", "when", "points", "complete", "notes"]
    assert document["points"][0]["value"] == 1.98


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (np.float64(0.1), 0.1),
        (np.int64(3), 3),
        (np.bool_(True), True),
        (np.array([[1.0, np.nan], [np.inf, 2.0]]), [[1.0, None], [None, 2.0]]),
        ({1: (True, None, "a")}, {"1": [True, None, "a"]}),
        (-math.inf, None),
    ],
)
def test_plain(value: Any, expected: Any) -> None:
    assert plain(value) == expected
    assert type(plain(value)) is type(expected)


def test_strangers_are_refused_and_not_written_as_text() -> None:
    with pytest.raises(TypeError, match="object"):
        plain({"a": object()})
    with pytest.raises(TypeError, match="no document"):
        document_of(3)


def test_a_case_as_a_document() -> None:
    document = strict(json_text(case_document(cylinder())))
    assert document["equations"] == ["laplacian(u) + lam*exp(u) = 0"]
    assert document["trace"]["along"] == "lam"
