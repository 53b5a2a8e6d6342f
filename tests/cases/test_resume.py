"""Work that was cut off is gone on with, without doing again what was kept, and ends with the same numbers."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import continuation
from bvp.ledger import Entry, kept_in
from bvp.problem import Problem
from cases.keep import Keeper
from cases.pieces import Pieces
from continuation.records import Branch


class Cut(BaseException):
    """What a kill is here."""


class Counting(Keeper):
    """A keeper that writes every result at once, counts the new ones, and may end the work at one of them."""

    def __init__(self, folder: Path, resume: bool, last: int | None = None) -> None:
        folder.mkdir(exist_ok=True)
        super().__init__(Pieces(folder), quiet=True, resume=resume)
        self.last, self.fresh = last, 0

    def note(self, entry: Entry) -> None:
        super().note(entry)
        self.flush()
        self.fresh += 1
        if self.fresh == self.last:
            raise Cut


def trace() -> Branch:
    """A branch with a turning point, on grids that move."""
    sphere = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(1) = 0"], {"lam": 0.0}, geometry="sphere")
    return continuation.trace(sphere, along="lam", until="max(u) > 9", intervals=60, compiled=False)


@pytest.mark.parametrize("cuts", [[1], [40, 3, 25]])
def test_a_trace_goes_on_where_it_was_cut_off(tmp_path: Path, cuts: list[int]) -> None:
    with kept_in(whole := Counting(tmp_path / "whole", resume=False)):
        expected = trace()
    done = 0
    for number, cut in enumerate(cuts):
        with pytest.raises(Cut), kept_in(Counting(tmp_path / "cut", resume=number > 0, last=cut)):
            trace()
        done += cut
    with kept_in(rest := Counting(tmp_path / "cut", resume=True)):
        found = trace()
    assert rest.fresh == whole.fresh - done  # nothing is worked out twice
    assert np.array_equal(found.parameter, expected.parameter)
    assert np.array_equal(found.measure("max(u)"), expected.measure("max(u)"))
    assert [(one.value, one.uncertainty) for one in found.turning_points] == [
        (one.value, one.uncertainty) for one in expected.turning_points
    ]
    assert found.newton_steps == expected.newton_steps
