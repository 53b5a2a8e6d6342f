"""Measured functions: through the data, as smooth as a spline, monotone where the data are, ending where they end."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bvp import generated
from bvp.errors import InputError
from bvp.kernels import tables
from bvp.kernels.jit import interpreted
from bvp.measured import MeasuredFunction, source_text

Floats = npt.NDArray[np.float64]
CONVEX = "x,y\n0,1\n1,2\n2,4\n"


def steps_of_pieces(function: MeasuredFunction, per_piece: int = 200) -> Floats:
    """Differences of the curve between close neighbours, one row a piece."""
    fractions = np.linspace(0.0, 1.0, per_piece)
    knots = function.knots
    return np.diff(function(knots[:-1, None] + fractions * np.diff(knots)[:, None]), axis=1)


@st.composite
def data(draw: st.DrawFn) -> tuple[list[float], list[float]]:
    """Up to 12 points with steps of very different length, and flat pieces among the values."""
    count = draw(st.integers(2, 12))
    steps = draw(st.lists(st.floats(1e-2, 1e2), min_size=count, max_size=count))
    values = draw(st.lists(st.one_of(st.floats(-10.0, 10.0), st.integers(-2, 2).map(float)), min_size=count, max_size=count))
    return list(np.cumsum(steps)), values


@settings(max_examples=150, deadline=None)
@given(data())
def test_the_curve_rises_and_falls_only_where_the_data_do(points: tuple[list[float], list[float]]) -> None:
    xs, ys = np.array(points[0]), np.array(points[1])
    function = MeasuredFunction("k", xs, ys)
    rises = np.diff(ys)
    rounding = 1e-14 * (np.max(np.abs(ys)) + np.max(np.abs(rises / np.diff(xs))) * np.max(np.diff(xs))) + 1e-300
    np.testing.assert_allclose(function(xs), ys, rtol=0, atol=rounding)
    at_extremum = np.concatenate([[False], np.sign(rises[:-1]) * np.sign(rises[1:]) < 0, [False]])
    beside_extremum = at_extremum[:-1] | at_extremum[1:]
    directed = steps_of_pieces(function) * np.sign(rises)[:, None]
    assert np.all(directed[~beside_extremum] >= -rounding)
    assert np.all(steps_of_pieces(function)[rises == 0] == 0)
    # Beside a local extremum slopes are at most 3 times the greatest of the data nearby,
    # so the curve overshoots by at most 3/4 of what those would rise.
    steepness = np.abs(rises / np.diff(xs))
    nearby = np.maximum(steepness, np.maximum(np.append(steepness[1:], 0.0), np.insert(steepness[:-1], 0, 0.0)))
    curve = ys[:-1, None] + np.cumsum(steps_of_pieces(function), axis=1)
    beyond = np.maximum(curve - np.maximum(ys[:-1], ys[1:])[:, None], np.minimum(ys[:-1], ys[1:])[:, None] - curve)
    assert np.all(beyond.max(axis=1) <= 0.75 * nearby * np.diff(xs) + rounding)


def test_a_smooth_extremum_between_two_points_is_kept() -> None:
    xs = np.array([0.0, 0.4, 0.9, 1.1, 1.5, 2.0])
    function = MeasuredFunction("k", xs, xs * (2.0 - xs) + 0.001 * xs)
    at = np.linspace(0.0, 2.0, 41)
    assert function.notes == ()
    np.testing.assert_allclose(function(at), at * (2.0 - at) + 0.001 * at, rtol=1e-13, atol=1e-14)


def test_smooth_data_have_two_continuous_derivatives_and_fourth_order() -> None:
    errors = []
    for count in (10, 20, 40):
        xs = np.linspace(0.0, 2.0, count + 1)
        function = MeasuredFunction("k", xs, np.exp(xs))
        assert function.notes == ()
        for order in (0, 1, 2):
            before = function(np.nextafter(xs[1:-1], 0.0), order)
            np.testing.assert_allclose(before, function(xs[1:-1], order), rtol=0, atol=1e-11)
        dense = np.linspace(0.0, 2.0, 1001)
        errors.append(np.max(np.abs(function(dense) - np.exp(dense))))
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    assert orders == pytest.approx(4.0, abs=0.3)


def test_a_cubic_is_reproduced_with_its_derivatives() -> None:
    xs = np.array([0.0, 0.7, 1.1, 2.0, 3.5, 4.0])
    function = MeasuredFunction("k", xs, 1 + 2 * xs + xs**3)
    at = np.linspace(0.0, 4.0, 33)
    for order, exact in enumerate([1 + 2 * at + at**3, 2 + 3 * at**2, 6 * at, 6 + 0 * at, 0 * at]):
        np.testing.assert_allclose(function(at, order), exact, rtol=1e-12, atol=1e-11)


def test_limited_slopes_are_said() -> None:
    function = MeasuredFunction("k", np.arange(8.0), [0, 0, 0, 0, 1, 1, 1, 1], origin="k.csv")
    (note,) = function.notes
    assert note.startswith("k.csv: slopes were limited at ")
    assert np.all(steps_of_pieces(function) >= 0)
    assert np.max(function(np.linspace(0, 7, 701))) == 1.0


def test_two_points_are_a_line_and_three_a_parabola() -> None:
    line = MeasuredFunction("k", [1.0, 3.0], [2.0, 6.0])
    np.testing.assert_allclose(line(np.array([1.0, 2.0, 3.0])), [2.0, 4.0, 6.0], rtol=1e-15)
    parabola = MeasuredFunction("k", [0.0, 1.0, 3.0], [1.0, 2.0, 10.0])
    at = np.linspace(0.0, 3.0, 7)
    np.testing.assert_allclose(parabola(at), 1 + at**2, rtol=1e-14)


def test_nothing_is_extrapolated() -> None:
    function = MeasuredFunction("k", [0.0, 1.0, 2.0], [1.0, 2.0, 4.0])
    assert function.domain == (0.0, 2.0)
    outside = np.array([-1e-12, 2.0 + 1e-12, np.nan, np.inf])
    for order in range(5):
        assert np.all(np.isnan(function(outside, order)))
        assert all(np.isnan(tables.table_value(function.table, 0, 3, x, order)) for x in outside)
    assert np.all(np.isfinite(function(np.array([0.0, 2.0]))))


def test_a_number_gives_a_number() -> None:
    function = MeasuredFunction("k", [0.0, 1.0, 2.0], [1.0, 2.0, 4.0])
    assert isinstance(function(0.5), float)
    assert function.evaluate(0.5, orders=(1,)) == function(0.5, 1)
    assert function.evaluate(0.5, orders=()) == function(0.5)


def test_kernels_agree_with_numpy_and_with_themselves_interpreted() -> None:
    generator = np.random.default_rng(0)
    functions = [MeasuredFunction("k", np.sort(generator.random(count)), generator.random(count)) for count in (2, 3, 17)]
    together = np.concatenate([function.table for function in functions])
    begin = 0
    for function in functions:
        count = function.knots.size
        points = np.concatenate([function.knots, generator.uniform(*function.domain, 40), [-1.0, 2.0]])
        for order in range(5):
            compiled = [tables.table_value(together, begin, count, x, order) for x in points]
            plain = [interpreted(tables.table_value)(together, begin, count, x, order) for x in points]
            np.testing.assert_array_equal(compiled, plain)
            np.testing.assert_allclose(compiled, function(points, order), rtol=1e-13, atol=1e-10)
        begin += function.table.size


def test_a_generated_module_can_carry_the_kernels() -> None:
    header = "from __future__ import annotations\n\nimport numpy as np\n\nfrom bvp.kernels.jit import kernel\n\n\n"
    body = "\n\n@kernel\ndef fill(table, x, out):\n    for i in range(x.size):\n        out[i] = table_value(table, 0, 3, x[i], 1)\n"
    module = generated.load(header + source_text() + body, "measured")
    function = MeasuredFunction("k", [0.0, 1.0, 2.0], [1.0, 2.0, 4.0])
    x, out = np.linspace(0.0, 2.0, 9), np.empty(9)
    module.fill(function.table, x, out)
    np.testing.assert_allclose(out, function(x, 1), rtol=1e-14)


@pytest.mark.parametrize(
    "text",
    [
        CONVEX,
        "0;1\n1;2\n2;4\n",
        "# measured on Tuesday\nx y\n0 1\n\n1\t2  # twice\n2 4",
        '\ufeff"x","y"\r\n0, 1.0\r\n1,2e0\r\n2,+4\r\n',
    ],
)
def test_ways_to_write_the_same_file(text: str, tmp_path: Path) -> None:
    path = tmp_path / "conductivity.csv"
    path.write_bytes(text.encode())
    function = MeasuredFunction.from_csv(path)
    assert function.name == "conductivity"
    assert function.notes == ()
    np.testing.assert_array_equal(function.table, MeasuredFunction("k", [0, 1, 2], [1, 2, 4]).table)


def test_points_in_another_order_are_sorted_and_that_is_said(tmp_path: Path) -> None:
    path = tmp_path / "k.csv"
    path.write_text("2,4\n0,1\n1,2\n")
    function = MeasuredFunction.from_csv(path)
    assert function.notes == ("k.csv: the points were not in the order of their abscissae; they were sorted.",)
    np.testing.assert_array_equal(function.table, MeasuredFunction("k", [0, 1, 2], [1, 2, 4]).table)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("", "no points"),
        ("x,y\n", "no points"),
        ("1,2\n", "1 point"),
        ("1,2,3\n2,3,4\n", "line 1: 3 columns"),
        ("1,2\n2\n", "line 2: 1 column,"),
        ("1,5,2,5\n", "Decimal commas"),
        ("1;2,5\n", "'2,5' is not a number"),
        ("1,2\n2,abc\n", "line 2: 'abc' is not a number"),
        ("x,y\nu,v\n1,2\n", "line 2: 'u' is not a number"),
        ("1,2\n1_0,3\n", "'1_0' is not a number"),
        ("1,2\n2,nan\n", "point 2 is (2.0, nan)"),
        ("1,2\n1e999,3\n", "point 2 is (inf, 3.0)"),
        ("1,2\n2,3\n1,4\n", "two values, 2 and 4, at the same abscissa 1"),
    ],
)
def test_what_is_wrong_in_a_file_is_said(text: str, expected: str, tmp_path: Path) -> None:
    path = tmp_path / "k.csv"
    path.write_text(text)
    with pytest.raises(InputError) as raised:
        MeasuredFunction.from_csv(path)
    message = str(raised.value)
    assert message.startswith("k.csv")
    assert expected in message
    assert "\nExpected: " in message


def test_files_that_cannot_be_read(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"missing\.csv: cannot be read \(No such file"):
        MeasuredFunction.from_csv(tmp_path / "missing.csv")
    with pytest.raises(InputError, match="cannot be read"):
        MeasuredFunction.from_csv(tmp_path)
    binary = tmp_path / "sheet.csv"
    binary.write_bytes(b"PK\x03\x04\xff\xfe\x00")
    with pytest.raises(InputError, match="is no text file"):
        MeasuredFunction.from_csv(binary)


def test_arrays_that_make_no_function() -> None:
    with pytest.raises(InputError, match="2 abscissae and 3 values"):
        MeasuredFunction("k", [0, 1], [0, 1, 2])
    with pytest.raises(InputError, match="not one row of numbers"):
        MeasuredFunction("k", [[0, 1]], [0, 1])
    with pytest.raises(InputError, match="not one row of numbers"):
        MeasuredFunction("k", ["a", "b"], [0, 1])
    with pytest.raises(InputError, match=r"point 2 is \(1\.0, 1e\+200\)"):
        MeasuredFunction("k", [0, 1], [0, 1e200])
    with pytest.raises(InputError, match="measured function k: 100001 points"):
        MeasuredFunction("k", np.arange(100_001), np.arange(100_001))
