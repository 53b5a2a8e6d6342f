"""Kinds of problems with a closed form or an energy integral behind them."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import sympy
from mpmath import mp, mpf

from tests.campaign.draft import BI, LAM, Draft, EnergyIntegral, draft
from tests.campaign.model import U, V, X
from tests.campaign.sources import Generator, conductivity, kinked, number, smooth, symbol
from tests.recomputed.exponential import cooled_cylinder, cooled_slab, interval_turning_point
from tests.recomputed.membrane import disk

ONE = sympy.Integer(1)


def exponential_interval(rng: Generator, turn: int) -> Draft:
    """u'' + lam e^u = 0, u = 0 at two random ends: 3.5138…/length^2."""
    left = number(rng, -2.0, 1.0)
    right = float(f"{left + number(rng, 0.4, 3.0):.4g}")

    def closed() -> list[Any]:
        return [interval_turning_point() / (mpf(right) - mpf(left)) ** 2]

    form = "plain" if turn % 2 else "laplacian"
    size = 4 / (right - left) ** 2
    return draft(
        "exponential, interval", form, LAM * sympy.exp(U), (U, U), {}, ends=(left, right), along_unit=float(f"{size:.2g}"), closed=closed
    )


def exponential_cooled_slab(rng: Generator, turn: int) -> Draft:
    """Half a slab of half width R, u'(0) = 0, u'(R) + Bi u(R) = 0: that of half width 1 with Bi R, over R^2."""
    bi = number(rng, 0.03, 60.0, logarithmic=True)
    width = 1 if turn % 2 else number(rng, 0.4, 2.5)

    def closed() -> list[Any]:
        return [cooled_slab(mpf(bi) * mpf(width)) / mpf(width) ** 2]

    size = float(f"{min(1.0, bi * width) / width**2:.2g}")
    return draft(
        "exponential, cooled slab",
        "laplacian",
        LAM * sympy.exp(U),
        (V, V + BI * U),
        {"Bi": bi},
        ends=(0, width),
        along_unit=size,
        closed=closed,
    )


def exponential_cooled_cylinder(rng: Generator, turn: int) -> Draft:
    """The cylinder of radius 1: lam = 8B/(1+B)^2 exp(-4B/(Bi(1+B)))."""
    bi = number(rng, 0.05, 80.0, logarithmic=True)

    def closed() -> list[Any]:
        return [cooled_cylinder(bi)]

    form = ("laplacian", "text-book", "weighted")[turn % 3]
    return draft(
        "exponential, cooled cylinder",
        form,
        LAM * sympy.exp(U),
        (V, V + BI * U),
        {"Bi": bi},
        geometry="cylinder",
        axis_said=form != "laplacian",
        along_unit=float(f"{min(2.0, bi):.2g}"),
        closed=closed,
    )


def weighted_cylinder(rng: Generator, turn: int) -> Draft:
    """u'' + u'/r + lam r^a e^u = 0: with z = r^(1 + a/2) the plain cylinder, lam/(1 + a/2)^2 and Bi/(1 + a/2)."""
    a = number(rng, 0.2, 3.0)
    bi = None if turn % 2 else number(rng, 0.5, 30.0, logarithmic=True)
    factor = 1 + mpf(a) / 2
    parameters = {"a": a} | ({} if bi is None else {"Bi": bi})

    def closed() -> list[Any]:
        return [(mpf(2) if bi is None else cooled_cylinder(mpf(bi) / factor)) * factor**2]

    end = U if bi is None else V + BI * U
    return draft(
        "weight r^a, cylinder",
        "laplacian",
        LAM * X ** symbol("a") * sympy.exp(U),
        (V, end),
        parameters,
        geometry="cylinder",
        closed=closed,
        closed_origin="closed form after z = r^(1 + a/2)",
        collocation=False,
        axis_power=symbol("a"),
    )


def weighted_disk(rng: Generator, turn: int) -> Draft:
    """The membrane disk with r^a before the attraction: the plain disk's turning point times (1 + a/2)^2."""
    a = number(rng, 0.3, 2.5)

    def closed() -> list[Any]:
        with mp.workdps(32):
            return [disk(1)[0][0] * (1 + mpf(a) / 2) ** 2]

    f = LAM * X ** symbol("a") / (1 - U) ** 2
    return draft(
        "weight r^a, disk membrane",
        "laplacian",
        f,
        (V, U),
        {"a": a},
        geometry="cylinder",
        names=("w", "r"),
        closed=closed,
        closed_origin="Taylor series of the plain disk after z = r^(1 + a/2)",
        collocation=False,
        axis_power=symbol("a"),
    )


def autonomous(rng: Generator, turn: int, kind: str, cooled: bool, with_conductivity: bool, whole: bool, kink: bool = False) -> Draft:
    """An autonomous slab, half of it with u' = 0 in the middle or the whole between two equal ends."""
    source = kinked(rng) if kink else smooth(rng, turn)
    k = conductivity(rng, turn + turn // 5) if with_conductivity else None
    form = "plain" if k is None else ("flux" if turn % 2 else "divergence")
    k_expression = ONE if k is None else k.expression
    bi = number(rng, 0.3, 30.0, logarithmic=True) if cooled else None
    left: float | int = number(rng, -1.5, 0.5) if whole else 0
    right: float | int = float(f"{left + number(rng, 0.6, 2.5):.4g}") if whole else (1 if turn % 3 else number(rng, 0.5, 2.0))
    wall = U if bi is None else k_expression * V + BI * U
    opposite = U if bi is None else k_expression * V - BI * U
    half = (Fraction(right) - Fraction(left)) / (2 if whole else 1)
    parameters = {**source.parameters, **({} if k is None else k.parameters), **({} if bi is None else {"Bi": bi})}
    return draft(
        kind,
        form,
        LAM * source.expression,
        (opposite if whole else V, wall),
        parameters,
        k=k_expression,
        ends=(left, right),
        along_unit=float(f"{float(1 / half**2):.2g}"),
        energy=EnergyIntegral(source.expression, k_expression, half, bi, source.kinks, source.most),
        collocation=not kink,
    )


def slab_fixed(rng: Generator, turn: int) -> Draft:
    """u = 0 at the walls."""
    return autonomous(rng, turn, "slab, fixed ends", cooled=False, with_conductivity=False, whole=turn % 2 == 0)


def slab_cooled(rng: Generator, turn: int) -> Draft:
    """Cooled walls."""
    return autonomous(rng, turn, "slab, cooled ends", cooled=True, with_conductivity=False, whole=turn % 4 == 0)


def slab_conductivity(rng: Generator, turn: int) -> Draft:
    """A conductivity k(u), walls fixed or cooled."""
    return autonomous(rng, turn, "slab, conductivity k(u)", cooled=turn % 2 == 1, with_conductivity=True, whole=turn % 3 == 0)


def slab_kink(rng: Generator, turn: int) -> Draft:
    """A source with a kink at one value of u, which lies at another place in every state."""
    return autonomous(rng, turn, "slab, source with a kink in u", cooled=turn % 2 == 1, with_conductivity=False, whole=False, kink=True)


KINDS = {
    exponential_interval: 8,
    exponential_cooled_slab: 12,
    exponential_cooled_cylinder: 12,
    weighted_cylinder: 8,
    weighted_disk: 5,
    slab_fixed: 24,
    slab_cooled: 20,
    slab_conductivity: 25,
    slab_kink: 8,
}
