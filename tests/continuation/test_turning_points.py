"""Turning points of the continuous problem: known values lie within the uncertainty, which is narrow, for every scheme."""

from __future__ import annotations

import math

import pytest

import continuation
from bvp import Problem
from tests.problems import body, interval
from tests.reference import KNOWN

SCHEMES = ("central", "shell-balance", "radial-exact", "fitted", "log-cosh", "compact")
NARROW = 1e-8  # of the value

# The problem, and the names of its turning points in `reference`, in the order of the branch.
PROBLEMS: dict[str, tuple[Problem, tuple[str, ...]]] = {
    "interval": (interval(), ("interval, exponential, turning point",)),
    "slab": (body("slab"), ("slab, exponential, turning point",)),
    "cylinder": (body("cylinder"), ("cylinder, exponential, turning point",)),
    "sphere": (body("sphere"), ("sphere, exponential, turning point 1", "sphere, exponential, turning point 2")),
    "strip": (
        Problem("w'' + lam/(1-w)^2 = 0", "w", x=(-0.5, 0.5), conditions=["w(-1/2) = 0", "w(1/2) = 0"], parameters={"lam": 0.0}),
        ("strip, membrane, turning point",),
    ),
    "disk": (body("cylinder", "lam/(1-u)^2"), ("disk, membrane, turning point 1",)),
    **{f"slab, Bi {bi}": (body("slab", bi=float(bi)), (f"slab, exponential, Bi {bi}, turning point",)) for bi in ("0.5", "1", "2", "20")},
    **{f"sphere, Bi {bi}": (body("sphere", bi=float(bi)), (f"sphere, exponential, Bi {bi}, turning point",)) for bi in ("0.5", "2", "20")},
    "slab, Arrhenius": (
        body("slab", "lam*exp(u/(1 + eps*u))", eps=0.22),
        ("slab, Arrhenius, eps 0.22, turning point 1", "slab, Arrhenius, eps 0.22, turning point 2"),
    ),
}


@pytest.mark.parametrize("grid", ["uniform", "adaptive"])
@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("name", PROBLEMS)
def test_known_value_is_within_a_narrow_uncertainty(name: str, scheme: str, grid: str) -> None:
    problem, names = PROBLEMS[name]
    branch = continuation.trace(problem, along="lam", scheme=scheme, grid=grid, digits=9, turning_points_wanted=len(names), compiled=False)
    assert len(branch.turning_points) == len(names)
    assert branch.ended == "turning points wanted"
    for point, known in zip(branch.turning_points, (KNOWN[one] for one in names), strict=True):
        assert point.survives
        assert point.uncertainty is not None
        assert known.agrees(point.value, point.uncertainty), f"{point.value!r} ± {point.uncertainty:.1e}, known {known.digits}"
        assert point.uncertainty <= NARROW * point.value


@pytest.mark.parametrize("scheme", ["central", "compact"])
@pytest.mark.parametrize(
    ("problem", "measure", "names"),
    [
        (interval(), "u(1/2)", ("interval, exponential, turning point, u(1/2)",)),
        (interval(), "max(u)", ("interval, exponential, turning point, u(1/2)",)),
        (interval(), "u'(0)", ("interval, exponential, turning point, u'(0)",)),
        (body("cylinder"), "u(0)", ("cylinder, exponential, turning point, u(0)",)),
        (body("sphere"), "max(u)", ("sphere, exponential, turning point 1, u(0)", "sphere, exponential, turning point 2, u(0)")),
        (PROBLEMS["strip"][0], "w(0)", ("strip, membrane, turning point, w(0)",)),
        (PROBLEMS["disk"][0], "1 - u(0)", ("disk, membrane, turning point 1, 1-w(0)",)),
    ],
)
def test_known_measure_at_a_turning_point_is_within_its_uncertainty(
    problem: Problem, measure: str, names: tuple[str, ...], scheme: str
) -> None:
    branch = continuation.trace(problem, measure=measure, scheme=scheme, digits=9, turning_points_wanted=len(names), compiled=False)
    for point, known in zip(branch.turning_points, (KNOWN[one] for one in names), strict=True):
        uncertainty = point.measure_uncertainty[measure]
        assert uncertainty is not None
        assert known.agrees(point.measures[measure], uncertainty)
        assert uncertainty <= 1e-5 * known.value


def test_printed_values_of_handbooks_agree_to_the_digits_they_print() -> None:
    for geometry in ("slab", "cylinder", "sphere"):
        point = continuation.turning_point(body(geometry), digits=6, compiled=False)
        assert KNOWN[f"{geometry}, handbook"].agrees(point.value, 0.0)


@pytest.mark.parametrize("power", [1.0, 2.0, 3.0])
def test_source_with_a_power_of_the_radius(power: float) -> None:
    # x = s^(2/(2+a)) takes x^a away and leaves the factor ((2+a)/2)^2 with the source: the turning point of a disk is
    # multiplied by (1 + a/2)^2 exactly (change of variable).
    problem = body("cylinder", "lam*x^a/(1-u)^2", a=power)
    point = continuation.turning_point(problem, along="lam", digits=7, compiled=False)
    known, factor = KNOWN["disk, membrane, turning point 1"], (1 + power / 2) ** 2
    assert point.uncertainty is not None
    assert abs(point.value - factor * known.value) <= point.uncertainty + factor * known.uncertainty
    assert point.uncertainty <= 1e-6 * point.value


@pytest.mark.parametrize("bi", [1e-4, 1e-2])
@pytest.mark.parametrize(("geometry", "exponent"), [("slab", 0), ("cylinder", 1), ("sphere", 2)])
def test_weak_cooling_tends_to_the_lumped_limit(geometry: str, exponent: int, bi: float) -> None:
    # Thomas 1958, from memory: lam -> (j + 1) Bi/e as Bi -> 0, the body being all of one temperature.
    point = continuation.turning_point(body(geometry, bi=bi), along="lam", digits=8, compiled=False)
    assert point.value == pytest.approx((exponent + 1) * bi / math.e, rel=bi)
    if geometry == "cylinder":  # Thomas 1958, from memory: at B = -2/Bi + sqrt(1 + 4/Bi^2), here with the cancellation written away
        root = math.sqrt(bi * bi + 4)
        b = bi / (2 + root)
        exact = 8 * b / (1 + b) ** 2 * math.exp(-4 * b / (bi * (1 + b)))
        assert point.uncertainty is not None
        assert abs(point.value - exact) <= point.uncertainty + 4e-16 * exact


def test_cooled_cylinder_is_in_its_closed_form_within_the_uncertainty() -> None:
    for bi in (0.3, 1.0, 5.0, 60.0):
        b = -2 / bi + math.sqrt(1 + 4 / bi**2)
        exact = 8 * b / (1 + b) ** 2 * math.exp(-4 * b / (bi * (1 + b)))
        point = continuation.turning_point(body("cylinder", bi=bi), along="lam", digits=9, compiled=False)
        assert point.uncertainty is not None
        assert abs(point.value - exact) <= point.uncertainty + 1e-15
        assert point.uncertainty <= NARROW * exact


def test_turning_point_is_the_same_from_any_start_and_grid() -> None:
    known = KNOWN["sphere, exponential, turning point 1"]
    for start, intervals in ((0.0, 7), (1e-6, 40), (2.5, 100), (3.3, 513)):
        point = continuation.turning_point(body("sphere"), along="lam", start=start, intervals=intervals, compiled=False)
        assert point.uncertainty is not None
        assert known.agrees(point.value, point.uncertainty)
        assert point.uncertainty <= NARROW * known.value


@pytest.mark.parametrize("scheme", ["central", "compact"])
def test_compiled_kernels_and_arrays_give_the_same(scheme: str) -> None:
    # Two ways to the same numbers, one generated and compiled, one in whole arrays.
    problem = body("cylinder", bi=2.0)
    compiled, arrays = (
        continuation.trace(problem, along="lam", scheme=scheme, turning_points_wanted=1, intervals=50, compiled=way)
        for way in (True, False)
    )
    assert compiled.parameter == pytest.approx(arrays.parameter, rel=1e-12, abs=1e-12)
    assert compiled.measure("max(u)") == pytest.approx(arrays.measure("max(u)"), rel=1e-12, abs=1e-12)
    assert compiled.turning_points[0].value == pytest.approx(arrays.turning_points[0].value, rel=1e-12)
