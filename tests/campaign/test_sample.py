"""The fixed sample of the campaign: thirty problems of all kinds, the schemes spread over them, none of whose truths may be missed."""

from __future__ import annotations

import pytest

import bvp
from tests.campaign.run import LOST, held_against
from tests.campaign.statement import Statement, read, sample

ALL = read()
CHOSEN = sample()
SCHEMES = bvp.schemes.names()
LEAST_PROBLEMS, SAMPLED = 300, 30
AGREEMENT = 1e-11  # what the two origins of a truth may differ by, relative


def other_scheme(number: int) -> str:
    """The scheme whose turn it is; `central` is tried on every problem."""
    return [name for name in SCHEMES if name != "central"][number % (len(SCHEMES) - 1)]


@pytest.mark.parametrize("statement", CHOSEN, ids=lambda one: one.name)
def test_no_truth_is_missed(statement: Statement) -> None:
    values = 0
    for scheme in ("central", other_scheme(CHOSEN.index(statement))):
        rows = held_against(statement, scheme, states=False)
        faults = [row for row in rows if row.get("missed") or row["what"] in (*LOST, "invented")]
        assert not faults
        values += sum(row.get("uncertainty") is not None for row in rows)
        if scheme == "central":  # no scheme refuses less
            assert values >= len(statement.turning_points)


@pytest.mark.parametrize("statement", [one for one in CHOSEN if one.states is not None][2::6], ids=lambda one: one.name)
def test_no_state_beside_a_turning_point_is_missed(statement: Statement) -> None:
    rows = held_against(statement, "central")
    assert not [row for row in rows if row.get("missed") or row["what"] in LOST]
    assert statement.states is not None
    assert sum(row["what"] == "state" and row["uncertainty"] is not None for row in rows) == len(statement.states.measured)


def test_the_uncertainties_are_not_uselessly_wide() -> None:
    widths = []
    for statement in CHOSEN[::3]:
        for row in held_against(statement, "central", states=False):
            if row["what"] == "turning point":
                widths.append(row["uncertainty"] / max(row["error"], row["own"], 1e-16 * abs(row["truth"])))
    assert sorted(widths)[len(widths) // 2] < 100.0


def test_every_truth_has_two_origins_that_agree() -> None:
    assert len(ALL) >= LEAST_PROBLEMS
    assert len({one.name for one in ALL}) == len(ALL)
    for statement in ALL:
        assert len(set(statement.origins)) == 2
        assert 0.0 <= statement.agreement < AGREEMENT
        assert statement.turning_points


def test_the_sample_is_spread_over_the_kinds() -> None:
    assert len(CHOSEN) == SAMPLED
    assert len({one.kind for one in CHOSEN}) >= 15
