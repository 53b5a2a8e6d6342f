"""Kinds without a formula behind them: radial, shells, coefficients and sources that depend on x and u', unequal and nonlinear ends."""

from __future__ import annotations

from dataclasses import replace

import sympy

from tests.campaign.draft import BI, LAM, Draft, draft
from tests.campaign.model import U, V, X
from tests.campaign.sources import Generator, Source, conductivity, number, smooth, symbol

GEOMETRIES = ("slab", "cylinder", "sphere")
A, FREQUENCY, VELOCITY, COLD, HOT, SIGMA = (symbol(name) for name in ("a", "w", "vel", "cold", "hot", "sigma"))


def radial(rng: Generator, turn: int, kind: str, geometry: str) -> Draft:
    """A ball or cylinder, its surface fixed or cooled."""
    source = smooth(rng, turn)
    cooled = turn % 2 == 1
    parameters = source.parameters | ({"Bi": number(rng, 0.3, 30.0, logarithmic=True)} if cooled else {})
    radius = 1 if turn % 3 else number(rng, 0.5, 2.0)
    form = "laplacian" if turn % 4 else ("text-book", "weighted")[turn // 4 % 2]
    unit = float(f"{2 / radius**2:.2g}")
    end = V + BI * U if cooled else U
    return draft(
        kind,
        form,
        LAM * source.expression,
        (V, end),
        parameters,
        ends=(0, radius),
        geometry=geometry,
        axis_said=form != "laplacian",
        along_unit=unit,
    )


def cylinder(rng: Generator, turn: int) -> Draft:
    """Cylinders."""
    return radial(rng, turn, "cylinder", "cylinder")


def sphere(rng: Generator, turn: int) -> Draft:
    """Spheres."""
    return radial(rng, turn + 5, "sphere", "sphere")


def shell(rng: Generator, turn: int) -> Draft:
    """Between two radii: inner surface insulated, fixed or cooled."""
    source = smooth(rng, turn)
    inner = number(rng, 0.05, 2.0, logarithmic=True)
    outer = float(f"{inner + number(rng, 0.5, 1.5):.4g}")
    bi = {"Bi": number(rng, 0.5, 20.0, logarithmic=True)}
    inside, outside, extra = ((V, U, {}), (U, U, {}), (U, V + BI * U, bi), (V - BI * U, U, bi))[turn % 4]
    geometry = GEOMETRIES[1 + turn % 2] if turn % 4 < 2 else GEOMETRIES[2 - turn % 2]
    return draft(
        "annulus and shell",
        "laplacian",
        LAM * source.expression,
        (inside, outside),
        source.parameters | extra,
        ends=(inner, outer),
        geometry=geometry,
        along_unit=float(f"{2 / (outer - inner) ** 2:.2g}"),
    )


def weights(rng: Generator, turn: int) -> tuple[sympy.Expr, dict[str, float]]:
    """A positive weight of x on [0, 1]."""
    forms = (
        (1 + A * X, {"a": number(rng, -0.8, 3.0)}),
        (1 + A * sympy.cos(FREQUENCY * X), {"a": number(rng, -0.8, 0.8), "w": number(rng, 1.0, 9.0)}),
        (sympy.exp(-A * X), {"a": number(rng, -1.5, 3.0)}),
        (1 / (1 + A * X**2), {"a": number(rng, 0.3, 4.0)}),
        (1 + A * X**3, {"a": number(rng, -0.8, 3.0)}),
    )
    return forms[turn % len(forms)]


def source_of_place(rng: Generator, turn: int) -> Draft:
    """lam g(x) f(u), the weight one-sided, in all geometries."""
    source = smooth(rng, turn)
    weight, parameters = weights(rng, turn)
    geometry = GEOMETRIES[turn % 3]
    left = U if turn % 2 else V
    return draft(
        "source depends on x", "laplacian", LAM * weight * source.expression, (left, U), source.parameters | parameters, geometry=geometry
    )


def convection(rng: Generator, turn: int) -> Draft:
    """A first derivative: constant, varying or proportional to u, either sign."""
    source = smooth(rng, turn)
    form = (VELOCITY, VELOCITY * X, VELOCITY * U, VELOCITY * sympy.cos(X))[turn % 4]
    slow = source.most > 1.0
    velocity = number(rng, -4.0, 6.0) if slow else number(rng, -3.0, 3.0)
    geometry = "slab" if turn % 5 else GEOMETRIES[1 + turn // 5 % 2]
    form = form if geometry == "slab" or turn % 2 else VELOCITY * X
    parameters = source.parameters | {"vel": velocity}
    return draft(
        "convection",
        "plain" if geometry == "slab" and turn % 2 == 0 else "laplacian",
        LAM * source.expression + form * V,
        (U, U),
        parameters,
        geometry=geometry,
        along_unit=4.0,
    )


def unequal_ends(rng: Generator, turn: int) -> Draft:
    """Different values or different cooling at the two ends."""
    source = smooth(rng, turn)
    room = min(source.most, 4.0)
    low, high = number(rng, -0.2, 0.15) * room, number(rng, 0.02, 0.2) * room
    cold, hot = float(f"{low:.3g}"), float(f"{high:.3g}")
    bi = number(rng, 0.5, 15.0, logarithmic=True)
    left, right, extra = (
        (U - COLD, U - HOT, {"cold": cold, "hot": hot}),
        (V - BI * U, U - HOT, {"Bi": bi, "hot": hot}),
        (U, V + BI * (U - HOT), {"Bi": bi, "hot": hot}),
        (V - BI * U, V + 2 * BI * U, {"Bi": bi}),
    )[turn % 4]
    guess = COLD + (HOT - COLD) * X if turn % 4 == 0 else HOT * X if turn % 4 == 1 else sympy.Integer(0)
    return draft("unequal ends", "plain", LAM * source.expression, (left, right), source.parameters | extra, guess=guess, along_unit=2.0)


def nonlinear_ends(rng: Generator, turn: int) -> Draft:
    """Radiation, cooling that grows with u, or a heated wall where the traced parameter stands in the condition."""
    source = smooth(rng, turn)
    geometry = GEOMETRIES[turn % 3]
    sigma = {"sigma": number(rng, 0.3, 5.0, logarithmic=True)}
    radiating = V + SIGMA * ((1 + U) ** 4 - 1) / 4
    growing = V + SIGMA * U * (1 + A * U)
    if turn % 3 == 2:
        reaction = V - LAM * source.expression
        sink = {"a": number(rng, 0.2, 3.0)}
        return draft(
            "nonlinear conditions",
            "laplacian",
            -A * U,
            (U if geometry == "slab" else V, reaction),
            source.parameters | sink,
            geometry=geometry,
        )
    end, extra = ((radiating, sigma), (growing, sigma | {"a": number(rng, 0.1, 1.5)}))[turn % 2]
    return draft("nonlinear conditions", "laplacian", LAM * source.expression, (V, end), source.parameters | extra, geometry=geometry)


def conductivity_of_both(rng: Generator, turn: int) -> Draft:
    """Fluxes with k(x, u) in all geometries."""
    source, k = smooth(rng, turn), conductivity(rng, turn)
    weight, parameters = (1 + A * X**2, {"a": number(rng, -0.6, 2.0)}) if turn % 3 else (sympy.exp(A * X), {"a": number(rng, -1.5, 1.5)})
    geometry = GEOMETRIES[turn % 3]
    form = "flux" if geometry == "slab" and turn % 2 else "divergence"
    return draft(
        "conductivity k(x, u)",
        form,
        LAM * source.expression,
        (U if geometry == "slab" and turn % 2 else V, U),
        source.parameters | k.parameters | parameters,
        k=k.expression * weight,
        geometry=geometry,
    )


def gradient_source(rng: Generator, turn: int) -> Draft:
    """A source that holds the square of u'."""
    source: Source = smooth(rng, turn)
    bump = {"a": number(rng, -0.3, 0.5)}
    f = LAM * source.expression * (1 + A * V**2) if turn % 2 else LAM * source.expression + A * V**2
    return draft("source with u'^2", "laplacian", f, (V, U), source.parameters | bump, geometry=GEOMETRIES[turn % 3])


def kinked_weight(rng: Generator, turn: int) -> Draft:
    """A weight of the source, or a conductivity, with a kink at one place."""
    place = number(rng, 0.15, 0.85)
    parameters = {"kink": place, "a": number(rng, 0.5, 3.0)}
    source = smooth(rng, turn)
    bend = 1 + A * sympy.Abs(X - symbol("kink"))
    left = U if turn % 4 < 2 else V
    if turn % 2:
        return draft("kink in x", "plain", LAM * bend * source.expression, (left, U), source.parameters | parameters, breaks=(place,))
    return draft("kink in x", "flux", LAM * source.expression, (left, U), source.parameters | parameters, k=bend, breaks=(place,))


def narrow_source(rng: Generator, turn: int) -> Draft:
    """A source in a narrow strip somewhere, a bell of width 0.04 to 0.2."""
    source = smooth(rng, turn)
    centre, width = symbol("centre"), symbol("width")
    parameters = {"centre": number(rng, 0.1, 0.9), "width": number(rng, 0.04, 0.2, logarithmic=True)}
    bell = sympy.exp(-(((X - centre) / width) ** 2))
    unit = float(f"{1 / parameters['width']:.2g}")
    return draft("narrow source", "plain", LAM * bell * source.expression, (U, U), source.parameters | parameters, along_unit=unit)


def strong_convection(rng: Generator, turn: int) -> Draft:
    """A flow that leaves a layer at one end, at the other for every second problem.

    Shooting loses its digits where it runs against the flow: the mirror image, whose turning point is the same, is
    what the truth of those is worked out from.
    """
    source = smooth(rng, turn)
    velocity = number(rng, 8.0, 20.0)
    unit = float(f"{velocity:.2g}")
    made = draft(
        "strong convection", "plain", LAM * source.expression + VELOCITY * V, (U, U), source.parameters | {"vel": velocity}, along_unit=unit
    )
    if turn % 2 == 0:
        return made
    return replace(made, problem={**made.problem, "parameters": {**made.problem["parameters"], "vel": -velocity}})


KINDS = {
    cylinder: 22,
    sphere: 22,
    shell: 18,
    source_of_place: 20,
    convection: 20,
    unequal_ends: 16,
    nonlinear_ends: 18,
    conductivity_of_both: 20,
    gradient_source: 12,
    kinked_weight: 8,
    narrow_source: 12,
    strong_convection: 12,
}
