"""Every bundled case traced as it stands and held against all that it says is published."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pytest

from bvp.problem import Problem
from cases import build, run
from cases.case import Case
from cases.load import bundled_names, load


@pytest.fixture(autouse=True)
def _interpreted(monkeypatch: pytest.MonkeyPatch) -> None:
    """Rows evaluated by NumPy: compiling every case would take longer than tracing it."""

    def keywords(case: Case, problem: Problem) -> Mapping[str, Any]:
        return {**build.trace_keywords(case, problem), "compiled": False}

    monkeypatch.setattr(run, "trace_keywords", keywords)


@pytest.mark.parametrize("name", bundled_names())
def test_a_bundled_case_gives_what_is_published_about_it(name: str) -> None:
    case = load(name)
    result = run.trace(case)
    assert result.complete, result.reason
    assert [compared.published for compared in result.compared] == list(case.published)
    for compared in result.compared:
        assert compared.agrees, compared
        known = compared.published
        # an uncertainty that is too wide would agree with all
        assert compared.computed == pytest.approx(known.value, rel=1e-8, abs=known.uncertainty)
    assert result.turning_points
    for point in result.turning_points:
        assert point.survives
        assert point.uncertainty is not None
        assert 0.0 < point.uncertainty < 1e-7 * abs(point.value)


def test_the_cases_have_values_to_be_held_against() -> None:
    assert sum(len(load(name).published) for name in bundled_names()) >= 20
