"""The membrane under voltage, laplacian(w) + lam/(1 - w)^2 = 0: strip in closed form, disk by Taylor series; the clamped strip."""

from __future__ import annotations

from typing import Any

from mpmath import mp, mpf

from tests.recomputed.roots import newton
from tests.taylor import Series, advance, advance_until, radial, radial_until


def strip() -> tuple[Any, Any]:
    """(lam, w(0)) at the turning point of the strip [-1/2, 1/2].

    With a = 1 - w(0): half width = (a^(3/2)/sqrt(2 lam)) (sqrt(z(z-1)) + ln(sqrt(z) + sqrt(z-1))), z = 1/a (energy integral).
    """

    def parameter(a: Any) -> Any:
        z = 1 / a
        return 2 * a**3 * (mp.sqrt(z * (z - 1)) + mp.log(mp.sqrt(z) + mp.sqrt(z - 1))) ** 2

    a = mp.findroot(lambda a: mp.diff(parameter, a), mpf("0.6"))
    return parameter(a), 1 - a


def attraction(_: Series, v: Series) -> Series:
    """With gap v = 1 - w scaled to 1 in the middle: v'' + (1/p) v' - 1/v^2 = 0."""
    return -1 / (v * v)


def disk(count: int) -> list[tuple[Any, Any]]:
    """(lam, 1 - w(0)) at the first turning points of the disk.

    1 - w = c V(p r) with c V(p) = 1 gives lam = p^2 c^3 = p^2/V(p)^3: d lam/dp = 0 where 2 V = 3 p V'.
    """
    found = []

    def slope(p: Any, v: Any, dv: Any) -> Any:
        return 2 * v - 3 * p * dv

    p, (v, dv) = radial_until(attraction, 1, 1, slope)
    while True:
        found.append((p**2 / v**3, 1 / v))
        if len(found) == count:
            return found
        further = p * mpf("1.000001")
        v, dv = advance(radial(attraction, 1), p, (v, dv), further)
        p, (v, dv) = advance_until(radial(attraction, 1), further, (v, dv), slope)


def clamped_strip() -> Any:
    """w'''' = lam/(1 - w)^2 on a unit length, w = w' = 0 at both ends: lam at the turning point, from the middle outward.

    Unknown are w(0), w''(0) and lam; the third equation is the vanishing determinant of (w, w')(1/2) by (w(0), w''(0)).
    """

    def field(x: Series, *y: Series) -> list[Series]:
        w, w1, w2, w3, lam, *rest = y
        forms: list[Series] = [w1, w2, w3, lam / ((1 - w) * (1 - w)), lam * 0]
        while rest:  # the two variations
            d, d1, d2, d3, *rest = rest
            forms += [d1, d2, d3, lam * 2 * d / (1 - w) ** 3]
        return forms

    def rows(middle: Any, bending: Any, lam: Any) -> list[Any]:
        start = [middle, 0, bending, 0, lam, 1, 0, 0, 0, 0, 0, 1, 0]
        y = advance(field, 0, [mpf(one) for one in start], mpf(1) / 2)
        return [y[0], y[1], y[5] * y[10] - y[6] * y[9]]

    return newton(rows, ("0.41", "-13", "70"))[2]


def values() -> dict[str, Any]:
    """Everything recorded about membranes."""
    lam, middle = strip()
    found = {"strip, membrane, turning point": lam, "strip, membrane, turning point, w(0)": middle}
    for number, (lam, gap) in enumerate(disk(3), start=1):
        found[f"disk, membrane, turning point {number}"] = lam
        if number == 1:
            found["disk, membrane, turning point 1, 1-w(0)"] = gap
    # The singular state 1 - w = r^(2/3): (r^(2/3))'' + (r^(2/3))'/r = (4/9) r^(-4/3).
    found["disk, membrane, limit"] = mpf(2) / 3 * (mpf(2) / 3 - 1) + mpf(2) / 3
    found["clamped strip, turning point"] = clamped_strip()
    return found
