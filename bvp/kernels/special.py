"""Functions of the tool's own, for numbers: those of the fitted scheme, cardinal and the weights of its three-point formula.

The weight is W(p, z) = e^p z/(2 (cosh p - cosh sqrt(p^2 - z))). With s and d the roots of t^2 - p t + z/4 it is
b(s) b(d), b(t) = 2 t/(1 - e^(-2 t)), where nothing cancels and nothing overflows. Its derivatives are
W_z = W l[s, d]/4 with l(t) = coth t - 1/t, and W_p = W (1 - (t l)[s, d]); f[s, d] is (f(s) - f(d))/(s - d).

From the first kernel on the text is copied into generated modules, so it holds no names of this module but kernels.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from bvp.kernels.jit import kernel

Floats = npt.NDArray[np.float64]


@kernel
def cardinal(z: float) -> float:
    """4 sin^2(sqrt(z)/2)/z; sinh for z < 0, 1 at z = 0, nan from pi^2 on."""
    if z >= math.pi * math.pi:
        return math.nan
    half = math.sqrt(abs(z)) / 2.0
    if half == 0.0:
        return 1.0
    if z < 0.0 and half > 700.0:
        return math.inf
    ratio = (math.sin(half) if z > 0.0 else math.sinh(half)) / half
    return ratio * ratio


@kernel
def cardinal_slope(z: float) -> float:
    """The derivative of cardinal: (sin(sqrt z)/sqrt z - cardinal(z))/z, a series near 0."""
    if z >= math.pi * math.pi:
        return math.nan
    if abs(z) < 4.0:  # the closed form loses digits there; the terms are 2 m (-1)^m/(2 m + 2)! of z^(m - 1)
        terms = (
            -1.0 / 12.0,
            1.0 / 180.0,
            -1.0 / 6720.0,
            1.0 / 453600.0,
            -1.0 / 47900160.0,
            1.0 / 7264857600.0,
            -1.0 / 1494484992000.0,
            1.0 / 400148356608000.0,
            -1.0 / 1.3516122267648e17,
            1.0 / 5.620003638888038e19,
            -1.0 / 2.820220007878361e22,
            1.0 / 1.6803810880275235e25,
            -1.0 / 1.1726474792758225e28,
            1.0 / 9.473316421863967e30,
        )
        total = 0.0
        for m in range(len(terms) - 1, -1, -1):
            total = total * z + terms[m]
        return total
    root = math.sqrt(abs(z))
    if z < 0.0 and root > 700.0:
        return -math.inf
    wave = math.sin(root) if z > 0.0 else math.sinh(root)
    half = (math.sin(root / 2.0) if z > 0.0 else math.sinh(root / 2.0)) / (root / 2.0)
    return (wave / root - half * half) / z


@kernel
def weight(p: float, z: float, part: int) -> float:
    """W(p, z) for part 0, its derivative by p for 1, by z for 2; nan where z - p^2 reaches pi^2."""
    square = p * p - z
    if not square > -math.pi * math.pi:
        return math.nan
    size = abs(p)
    behind = math.exp(-2.0 * size) if p < 0.0 else 1.0  # W(-p, z) = e^(-2 p) W(p, z)
    s = d = q = sine = below = 0.0
    if square >= 0.0:  # real roots s >= |d|, s - d = q
        q = math.sqrt(square)
        s = 0.5 * (size + q)
        d = 0.25 * z / s if s > 0.0 else 0.0
        value = behind
        if s > 0.0:
            value *= 2.0 * s / -math.expm1(-2.0 * s)
        if d > 0.0:
            value *= 2.0 * d / -math.expm1(-2.0 * d)
        elif d < 0.0:
            value *= 2.0 * d * math.exp(2.0 * d) / math.expm1(2.0 * d)
    else:  # a pair of conjugates (p ± i q)/2, 0 < q < pi, and z > p^2
        q = math.sqrt(-square)
        sine = math.sin(0.5 * q)
        below = math.expm1(-size) ** 2 + 4.0 * math.exp(-size) * sine * sine
        value = z * behind / below
    if part == 0:
        return value

    # slope = l[s, d] and rest = 1 - (t l)[s, d], for |p|. l(t) = sum terms[n] t^(2 n + 1) converges for |t| < pi and has 16
    # digits up to |t| = 1; the terms are 2^(2 n + 2) B(2 n + 2)/(2 n + 2)! with Bernoulli's numbers B.
    terms = (
        1.0 / 3.0,
        -1.0 / 45.0,
        2.0 / 945.0,
        -1.0 / 4725.0,
        2.0 / 93555.0,
        -1382.0 / 638512875.0,
        4.0 / 18243225.0,
        -3617.0 / 162820783125.0,
        2.2507846516808992854e-9,
        -2.2805151204592182866e-10,
        2.3106432599002624097e-11,
        -2.3411706819824883959e-12,
        2.3721017400233654295e-13,
        -2.4034415333307706179e-14,
        2.4351954029183368731e-15,
        -2.4673688045172074706e-16,
        2.499967277122080898e-17,
    )
    slope = rest = 0.0
    if (square >= 0.0 and s <= 1.0) or (square < 0.0 and z <= 4.0):
        mixed, before = 1.0, 0.0  # the sum of all products of n factors s and d, by its recurrence
        for n in range(len(terms)):
            slope += terms[n] * mixed
            mixed, before = size * mixed - 0.25 * z * before, mixed
            rest += terms[n] * mixed
            mixed, before = size * mixed - 0.25 * z * before, mixed
        rest = 1.0 - rest
    elif square < 0.0:
        wave = math.sin(q) / q
        slope = 4.0 / z - 4.0 * math.exp(-size) * wave / below
        rest = 2.0 * math.exp(-size) * (math.expm1(-size) + 2.0 * sine * sine + size * wave) / below
    elif d < 0.6:  # so far apart that the values at s > 1 and d are simply subtracted
        langevin = 0.0
        if abs(d) <= 1.0:
            for n in range(len(terms) - 1, -1, -1):
                langevin = langevin * d * d + terms[n]
            langevin *= d
        else:
            langevin = 1.0 / math.tanh(d) - 1.0 / d
        slope = (1.0 / math.tanh(s) - 1.0 / s - langevin) / q
        fading = 2.0 * d / math.expm1(2.0 * d) if d != 0.0 else 1.0
        rest = (fading - 2.0 * s * math.exp(-2.0 * s) / -math.expm1(-2.0 * s)) / q
    else:
        one_s, one_d = -math.expm1(-2.0 * s), -math.expm1(-2.0 * d)
        per_q = -math.expm1(-2.0 * q) / q if q > 0.0 else 2.0
        slope = 4.0 / z - 2.0 * math.exp(-2.0 * d) * per_q / (one_s * one_d)
        rest = 2.0 * (d * math.exp(-2.0 * d) * per_q - math.exp(-2.0 * s) * one_d) / (one_s * one_d)
    if part == 2:
        return 0.25 * value * slope
    return value * rest if p >= 0.0 else value * (2.0 - rest)


@kernel
def fit(p: float, z: float) -> float:
    """W(p, z)."""
    return weight(p, z, 0)


@kernel
def fit_by_drift(p: float, z: float) -> float:
    """The derivative of W by p."""
    return weight(p, z, 1)


@kernel
def fit_by_slope(p: float, z: float) -> float:
    """The derivative of W by z."""
    return weight(p, z, 2)


@kernel
def step_le(a: float, b: float) -> float:
    """1 where a <= b, else 0."""
    return 1.0 if a <= b else 0.0


@kernel
def weights(p: Floats, z: Floats, part: int, out: Floats) -> None:
    """`weight` at every pair of two arrays of one shape (n,), into out."""
    for i in range(out.shape[0]):
        out[i] = weight(p[i], z[i], part)
