"""A drawn branch: nothing overlaps, stability and counts are those of the record, names and units are there."""

from __future__ import annotations

import colorsys
import dataclasses
import subprocess
import sys
from collections.abc import Callable
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import to_rgb
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle

from continuation.digits import with_uncertainty
from continuation.plot import draw_branch, height_of_figure
from continuation.records import Branch
from tests import drawn_branches
from tests.drawn_checks import faults_of, texts_of, words_of

BRANCHES: dict[str, Callable[[], Branch]] = {
    "one turning point": drawn_branches.cylinder,
    "an S": drawn_branches.s_shaped,
    "an S without uncertainty": lambda: drawn_branches.s_shaped(None),
    "an S without stability": lambda: drawn_branches.s_shaped(stable=False),
    "ten turning points on a ladder": drawn_branches.spiral,
    "ten turning points in a spiral": lambda: drawn_branches.spiral(both=True),
    "two turning points 0.03 % apart": drawn_branches.near_inflexion,
    "six decades": drawn_branches.six_decades,
    "no turning point": drawn_branches.straight,
    "two points": drawn_branches.two_points,
    "depth and temperature": drawn_branches.physical,
    "tiny values, a long unit": drawn_branches.tiny_values,
}


def drawn(branch: Branch, measure: str | None = None) -> Axes:
    figure = Figure(figsize=(160 / 25.4, height_of_figure(branch)), layout="constrained")
    FigureCanvasAgg(figure)
    axes: Axes = draw_branch(branch, measure, figure.add_subplot())
    return axes


@cache
def example(name: str) -> Axes:
    """One of BRANCHES, drawn once for all tests that only look at it."""
    return drawn(BRANCHES[name]())


def figure_of(axes: Axes) -> Figure:
    assert isinstance(axes.figure, Figure)
    return axes.figure


def lines_of(axes: Axes, gid: str) -> list[Line2D]:
    return [line for line in axes.get_lines() if line.get_gid() == gid]


def dashed(axes: Axes) -> list[bool]:
    return [line.is_dashed() for line in lines_of(axes, "piece")]


@pytest.mark.parametrize("name", BRANCHES)
def test_nothing_overlaps_or_leaves_the_figure_and_all_can_be_read(name: str) -> None:
    branch, axes = BRANCHES[name](), example(name)
    assert faults_of(figure_of(axes)) == []
    assert min(float(text.get_fontsize()) for text in texts_of(figure_of(axes))) >= 8
    values = [with_uncertainty(point.value, point.uncertainty, branch.units.get(branch.along, "")) for point in branch.turning_points]
    if len(values) > 3 or name.startswith("two turning"):
        bold = [text.get_text() for text in texts_of(figure_of(axes)) if text.get_gid() == "label" and text.get_fontweight() == "bold"]
        assert bold == [str(number) for number in range(1, len(values) + 1)]
        assert set(values) <= set(words_of(figure_of(axes), "below"))
    else:
        assert set(values) <= set(words_of(figure_of(axes), "label"))


def test_the_check_for_overlaps_finds_what_is_put_there() -> None:
    axes = drawn(drawn_branches.s_shaped())
    figure_of(axes).set_layout_engine("none")
    labels = [text for text in texts_of(figure_of(axes)) if text.get_gid() == "label"]
    labels[0].set_position((-10.0, -4.0))
    assert any("on the curve" in fault for fault in faults_of(figure_of(axes)))
    labels[0].set_position((900.0, 0.0))
    faults = faults_of(figure_of(axes))
    assert any("leaves the frame" in fault for fault in faults)
    assert any("leaves the figure" in fault for fault in faults)
    axes.text(0.5, 0.5, "one", transform=axes.transAxes)
    axes.text(0.5, 0.5, "other", transform=axes.transAxes)
    assert "'one' lies on 'other'" in faults_of(figure_of(axes))


def test_stable_is_solid_unstable_is_dashed_and_the_count_stands_beside() -> None:
    axes = example("an S")
    assert dashed(axes) == [False, True, False]
    assert [words for words in words_of(figure_of(axes), "label") if "±" not in words] == ["0 unstable", "1 unstable", "0 unstable"]
    ladder = example("ten turning points on a ladder")
    assert dashed(ladder) == [False] + [True] * 10
    assert "10 unstable" in words_of(figure_of(ladder), "label")


def test_where_stability_is_not_defined_all_is_solid_and_a_line_says_so() -> None:
    axes = example("an S without stability")
    assert dashed(axes) == [False]
    assert not [words for words in words_of(figure_of(axes), "label") if "unstable" in words]
    assert "Stability is not defined" in " ".join(words_of(figure_of(axes), "below"))


def test_strip_says_how_many_states_there_are() -> None:
    assert words_of(figure_of(example("an S")), "states") == ["1 state", "3 states", "1 state"]
    cylinder = example("one turning point")
    first, *others = words_of(figure_of(cylinder), "states")
    assert first in ("≥1", "1 or more")  # the longer words where they fit, which depends on how wide matplotlib draws them
    assert others == ["2 states", "0 states"]
    strips = [patch for patch in cylinder.patches if isinstance(patch, Rectangle) and patch.get_gid() == "strip"]
    edges = [(strip.get_x(), strip.get_x() + strip.get_width()) for strip in strips]
    assert edges[1] == pytest.approx((float(drawn_branches.cylinder().parameter[-1]), 2.0))


def test_each_turning_point_has_an_upright_stroke_at_its_value() -> None:
    branch, strokes = drawn_branches.spiral(), lines_of(example("ten turning points on a ladder"), "tangent")
    assert [float(np.asarray(line.get_xdata())[0]) for line in strokes] == [point.value for point in branch.turning_points]
    assert {line.get_marker() for line in strokes} == {"|"}
    assert all(6 <= line.get_markersize() <= 22 for line in strokes)


def test_one_hue_and_grey_and_no_marks_but_strokes() -> None:
    axes = example("ten turning points on a ladder")
    hues = set()
    for line in axes.get_lines():
        hue, _, saturation = colorsys.rgb_to_hls(*to_rgb(line.get_color()))
        hues |= {round(hue, 2)} if saturation > 0.2 else set()
    assert len(hues) == 1
    assert {line.get_linewidth() for line in lines_of(axes, "piece")} == {1.5}
    assert {line.get_marker() for line in axes.get_lines()} <= {"", "None", "|"}


def test_names_and_units_stand_on_the_axes() -> None:
    axes = example("depth and temperature")
    assert axes.get_xlabel() == "depth of the layer, L (m)"
    assert axes.get_ylabel() == "largest temperature, max(T) (K)"
    assert axes.yaxis.get_offset_text().get_text() == ""  # temperatures near 300 are written out
    assert any(words.endswith(" m") for words in words_of(figure_of(axes), "label"))


@pytest.mark.parametrize(
    ("branch", "scale"),
    [
        (drawn_branches.six_decades, "log"),
        (drawn_branches.cylinder, "linear"),  # from 0, and back toward 0
        (drawn_branches.s_shaped, "linear"),
        (drawn_branches.two_points, "linear"),
        (lambda: drawn_branches.parametric(lambda s: 0.5 * s * np.exp(1 - s), lambda s: s, (0.02, 20.0)), "linear"),  # a long tail to 0
        (lambda: drawn_branches.parametric(lambda s: s**3 / 3 - 2 * s**2 + 3 * s, lambda s: s, (0.0, 30.0)), "linear"),  # turns at 0
        (lambda: drawn_branches.parametric(lambda s: s**3 / 3 - 2 * s**2 + 3.3 * s, lambda s: s, (0.0, 30.0)), "log"),
    ],
)
def test_many_decades_have_a_logarithmic_axis(branch: Callable[[], Branch], scale: str) -> None:
    assert drawn(branch()).get_xscale() == scale


def test_a_value_of_the_scheme_alone_is_called_so() -> None:
    cylinder = drawn_branches.cylinder()
    alone = dataclasses.replace(cylinder.turning_points[0], survives=False, uncertainty=None)
    axes = drawn(dataclasses.replace(cylinder, turning_points=(alone,)))
    assert "2, uncertainty unknown\ndoes not survive refinement" in words_of(figure_of(axes), "label")
    assert faults_of(figure_of(axes)) == []


def test_a_long_measure_is_broken_into_lines() -> None:
    branch = drawn_branches.s_shaped()
    formula = "integral(u^2 + 3*exp(u)/(1 + u^2)) - integral(u)^2/3 + max(u)*min(u) + rms(u) + u(1/2)"
    axes = drawn(dataclasses.replace(branch, measures={"max(u)": branch.measures["max(u)"], formula: branch.measures["max(u)"]}), formula)
    assert "\n" in axes.get_ylabel()
    assert faults_of(figure_of(axes)) == []


def test_a_title_with_dollars_is_no_mathematics() -> None:
    axes = drawn(dataclasses.replace(drawn_branches.s_shaped(), labels={"lam": "price in $ per $"}))
    assert axes.get_xlabel() == "price in $ per $, lam"
    assert faults_of(figure_of(axes)) == []


def test_a_branch_of_one_point_is_seen() -> None:
    one = drawn_branches.branch_of(np.array([0.3]), {"max(u)": np.array([1.0])}, [0], np.array([0.0]))
    axes = drawn(one)
    assert [line.get_marker() for line in lines_of(axes, "piece")] == ["_"]
    assert faults_of(figure_of(axes)) == []


def test_a_measure_that_was_not_taken_is_named_before_anything_is_drawn() -> None:
    figure = Figure()
    axes = figure.add_subplot()
    with pytest.raises(KeyError, match=r"min\(u\).*max\(u\)"):
        draw_branch(drawn_branches.s_shaped(), "min(u)", axes)
    assert not axes.get_lines()


def test_plot_of_a_branch_makes_its_own_axes() -> None:
    import matplotlib

    matplotlib.use("Agg")
    from matplotlib import pyplot

    axes = drawn_branches.cylinder().plot()
    try:
        assert isinstance(axes, Axes)
        assert figure_of(axes).get_figwidth() * 25.4 == pytest.approx(160)
    finally:
        pyplot.close(figure_of(axes))


def test_matplotlib_is_not_loaded_before_something_is_drawn() -> None:
    code = "import sys, continuation.plot, continuation.drawing.strip; print('matplotlib' in sys.modules)"
    root = Path(__file__).parents[2]
    done = subprocess.run([sys.executable, "-c", code], cwd=root, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"
