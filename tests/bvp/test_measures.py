"""Measures of states against closed forms: the interpolant's extrema, integrals weighted by the geometry, values at places."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest

from bvp.errors import InputError
from bvp.interpolate import at_index, index_of, integral_by_index, largest, slopes_by_index
from bvp.measures import Measure
from bvp.problem import Problem

ENDS = {"slab": ["u(0) = 0", "u(1) = 0"], "cylinder": ["u(1) = 0"], "sphere": ["u(1) = 0"]}


def problem(geometry: str = "slab") -> Problem:
    """Any problem whose states can be measured."""
    return Problem("laplacian(u) + lam = 0", "u", (0, 1), ENDS[geometry], {"lam": 1.0}, geometry=geometry)


def value(text: str, profile: object, geometry: str = "slab", count: int = 40, graded: bool = False) -> float:
    """The measure of a profile given as a function, on a uniform or a graded grid."""
    s = np.linspace(0.0, 1.0, count + 1)
    x = np.sinh(2.0 * s) / np.sinh(2.0) if graded else s
    return Measure(text, problem(geometry)).value(x, {"u": profile(x)}, {"lam": 1.0})  # type: ignore[operator]


@pytest.mark.parametrize("graded", [False, True])
def test_extrema_are_those_of_the_curve_not_of_the_nodes(graded: bool) -> None:
    def hill(x: npt.NDArray[np.float64]) -> npt.NDArray[np.float64]:
        return np.exp(-(((x - 0.37) / 0.3) ** 2))

    assert value("max(u)", hill, graded=graded) == pytest.approx(1.0, abs=1e-8)
    assert value("min(u)", lambda x: -hill(x), graded=graded) == pytest.approx(-1.0, abs=1e-8)
    assert value("max(u - x)", lambda x: x - (x - 0.41) ** 2, graded=graded) == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("graded", [False, True])
@pytest.mark.parametrize(("geometry", "weight"), [("slab", 0), ("cylinder", 1), ("sphere", 2)])
def test_integrals_are_weighted_by_the_geometry(geometry: str, weight: int, graded: bool) -> None:
    """u = 1 - r^2: integral of (1 - r^2) r^s is 1/(s+1) - 1/(s+3), the volume is 1/(s+1)."""
    volume, whole = 1.0 / (weight + 1), 1.0 / (weight + 1) - 1.0 / (weight + 3)
    squares = 1.0 / (weight + 1) - 2.0 / (weight + 3) + 1.0 / (weight + 5)
    for text, exact in (("integral(u)", whole), ("mean(u)", whole / volume), ("rms(u)", np.sqrt(squares / volume))):
        assert value(text, lambda x: 1 - x * x, geometry, graded=graded) == pytest.approx(
            exact, abs=2e-6
        )  # Gregory's rule to the fifth difference, on 40 intervals


def test_places_slopes_and_formulas_of_measures() -> None:
    assert value("u(0.3)", np.sin) == pytest.approx(np.sin(0.3), abs=1e-11)
    assert value("u'(1)", np.sin, graded=True) == pytest.approx(np.cos(1.0), abs=1e-7)
    assert value("u'(0)", lambda x: x**3 - 2 * x) == pytest.approx(-2.0, abs=1e-11)
    assert value("2*max(u) - u(0.5)^2 + lam", lambda x: x) == pytest.approx(2.75, abs=1e-12)
    assert value("max(u) - 1.5", lambda x: x) == pytest.approx(-0.5, abs=1e-12)


def test_relations() -> None:
    x = np.linspace(0.0, 1.0, 21)
    for text, holds in (("max(u) > 0.9", True), ("max(u) < 0.9", False), ("u(0) >= 0", True), ("mean(u) <= 0.51", True)):
        assert Measure(text, problem()).holds(x, {"u": x}, {"lam": 1.0}) is holds


@pytest.mark.parametrize(
    ("text", "said"),
    [("u", "without a place"), ("max(max(u))", "measure"), ("u(3)", "outside"), ("max(v)", "not known"), ("mean(u) +", "ends too early")],
)
def test_what_is_no_measure_is_refused(text: str, said: str) -> None:
    with pytest.raises(InputError, match=said):
        value(text, np.cos)


def test_polynomials_of_degree_six_are_exact() -> None:
    k = np.arange(15.0)
    coefficients = [0.3, -1.2, 0.5, 0.07, -0.011, 0.002, -0.0001]
    curve = np.polynomial.Polynomial(coefficients)
    for place in (0.0, 0.4, 3.3, 7.9, 13.6, 14.0):
        assert at_index(curve(k), place) == pytest.approx(curve(place), rel=1e-10)
        assert at_index(curve(k), place, order=1) == pytest.approx(curve.deriv()(place), rel=1e-9, abs=1e-9)
    assert slopes_by_index(curve(k)) == pytest.approx(curve.deriv()(k), rel=1e-8, abs=1e-8)
    quintic = np.polynomial.Polynomial(coefficients[:6])
    assert integral_by_index(quintic(k)) == pytest.approx(quintic.integ()(14.0) - quintic.integ()(0.0), rel=1e-10)
    assert largest(-((k - 6.3) ** 2)) == pytest.approx((0.0, 6.3), abs=1e-9)


def test_positions_of_places() -> None:
    x = np.linspace(0.0, 1.0, 31) ** 2
    for wanted in (0.0, 0.01, 0.3333, 0.98, 1.0):
        assert index_of(x, wanted) == pytest.approx(30.0 * np.sqrt(wanted), abs=1e-9)
