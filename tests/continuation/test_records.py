"""What a branch gives to others: measures by name, a table for pandas."""

from __future__ import annotations

import sys
from types import SimpleNamespace

import pytest

from tests import drawn_branches


def test_a_measure_that_was_not_taken_names_those_that_were() -> None:
    with pytest.raises(KeyError, match="measured were"):
        drawn_branches.cylinder().measure("mean(u)")


def test_a_table_for_pandas(monkeypatch: pytest.MonkeyPatch) -> None:
    branch = drawn_branches.cylinder()
    monkeypatch.setitem(sys.modules, "pandas", SimpleNamespace(DataFrame=dict))
    table = branch.to_dataframe()
    assert list(table) == [branch.along, *branch.measures, "unstable directions", "arclength"]
    assert all(len(column) == branch.parameter.size for column in table.values())


def test_without_pandas_it_says_what_brings_it(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "pandas", None)
    with pytest.raises(ImportError, match=r"hairpin\[frames\]"):
        drawn_branches.cylinder().to_dataframe()
