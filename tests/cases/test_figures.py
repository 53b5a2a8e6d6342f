"""Figures for a report: readable, of one width, the same bytes every time, and whole on the disk."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import matplotlib
import pytest

from cases.case import PublishedValue
from cases.figures import branch_figure, rendered, save
from cases.published import Compared
from cases.store import StoreError
from continuation.records import Branch
from tests import drawn_branches
from tests.drawn_checks import faults_of, texts_of

CAUTION = (
    "A calculation on a model, no proof of safety. Whether a store is safe is decided by tests on the material itself, "
    "by the codes that hold at the place, and by licensed practice."
)
HANDBOOK = PublishedValue("turning point 1", 2.0, 0.005, "handbooks of self-heating, common practice")
PAPER = PublishedValue("max(u) at turning point 1", 1.3862943611, 1e-10, "closed form, 2 ln 2")


@pytest.mark.parametrize("branch", [drawn_branches.cylinder, drawn_branches.physical, drawn_branches.spiral, drawn_branches.two_points])
def test_figure_is_readable_with_all_that_can_stand_on_it(branch: Callable[[], Branch]) -> None:
    title = "A title that costs $5, and so long that it has to be broken into two lines, or into even more of them where that is needed"
    compared = Compared(PAPER, 1.38629436112, 1e-11, 2e-11, True)
    figure = branch_figure(branch(), title=title, caution=CAUTION, published=[HANDBOOK, compared])
    assert faults_of(figure) == []
    assert figure.get_figwidth() * 25.4 == pytest.approx(160)
    words = " ".join(text.get_text() for text in texts_of(figure))
    for expected in (title, f"Caution: {CAUTION}", "turning point 1: 2.000 ± 0.005. Source: handbooks", "1.3862943611 ± 1e-10 (agrees)"):
        assert expected in words
    assert min(float(text.get_fontsize()) for text in texts_of(figure)) >= 8


def test_values_of_one_source_share_a_sentence() -> None:
    other = PublishedValue("turning point 2", 1.6, 0.1, HANDBOOK.source)
    figure = branch_figure(drawn_branches.cylinder(), title="t", published=[HANDBOOK, PAPER, other])
    words = " ".join(text.get_text() for text in texts_of(figure))
    assert "Published: turning point 1: 2.000 ± 0.005; turning point 2: 1.6 ± 0.1. Source: handbooks" in words
    assert words.count("handbooks") == 1


def test_the_same_branch_gives_the_same_bytes_whatever_the_settings(monkeypatch: pytest.MonkeyPatch) -> None:
    figure = branch_figure(drawn_branches.s_shaped(), title="An S")
    first = rendered(figure)
    assert rendered(figure) == first
    monkeypatch.setitem(matplotlib.rcParams, "font.size", 23.0)
    monkeypatch.setitem(matplotlib.rcParams, "svg.hashsalt", "another")
    monkeypatch.setitem(matplotlib.rcParams, "axes.facecolor", "yellow")
    assert rendered(branch_figure(drawn_branches.s_shaped(), title="An S")) == first
    assert rendered(branch_figure(drawn_branches.s_shaped(), title="Another S")) != first
    assert b"<dc:date>" not in first["figure.svg"]


def test_another_process_gives_the_same_svg() -> None:
    code = (
        "import sys\nfrom tests import drawn_branches\nfrom cases.figures import branch_figure, rendered\n"
        "sys.stdout.buffer.write(rendered(branch_figure(drawn_branches.two_points(), title='Two points'))['figure.svg'])"
    )
    root = Path(__file__).parents[2]
    environment = {**os.environ, "PYTHONHASHSEED": "7"}
    done = subprocess.run([sys.executable, "-c", code], cwd=root, env=environment, capture_output=True, check=True)
    assert done.stdout == rendered(branch_figure(drawn_branches.two_points(), title="Two points"))["figure.svg"]


def test_files_are_written_whole_and_nothing_else_is_left(tmp_path: Path) -> None:
    figure = branch_figure(drawn_branches.two_points(), title="Two points")
    (tmp_path / "figure.png").write_bytes(b"old")
    save(figure, tmp_path)
    assert {path.name for path in tmp_path.iterdir()} == {"figure.png", "figure.svg"}
    assert (tmp_path / "figure.png").read_bytes().startswith(b"\x89PNG")
    assert (tmp_path / "figure.svg").read_bytes().rstrip().endswith(b"</svg>")
    with pytest.raises(StoreError, match=r"figure\.png"):
        save(figure, tmp_path / "missing")


def test_a_measure_that_was_not_taken_is_named() -> None:
    with pytest.raises(KeyError, match=r"max\(u\)"):
        branch_figure(drawn_branches.cylinder(), title="t", measure="min(u)")


def test_letters_that_the_font_has_not_are_no_trouble() -> None:
    figure = branch_figure(drawn_branches.two_points(), title="自己発熱")
    assert rendered(figure)["figure.svg"]
