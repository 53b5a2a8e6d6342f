"""Values on grids of halved steps extrapolated to step zero, only as far as measured exponents allow, with an uncertainty.

Each column of the table (Richardson; Romberg) removes one power of the step. The power is read off the three finest
entries and has to settle at a whole number before it is used: a scheme has the series it has, not the one assumed. Two
families of grids, N 2^j and 3/2 N 2^j, hold the result against each other: a wrong power or the rounding of the solves
that hides within one shows between the two.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

SAFETY = 4.0  # what an estimated truncation error is multiplied by; the campaign of tests found no miss at 2
FAMILIES_SAFETY = 2.0
ROUGH_SAFETY = 3.0
SETTLED = 0.15  # how near to a whole number a measured exponent has to be: the next power contributes less than that
PLAIN = 0.05  # and how near where it is believed at once
STEADY = 0.75  # how much an exponent may change from grid to grid to be used at all
HIGHEST = 14
HIGHEST_FIRST = 4  # no scheme here is of a higher order: what shrinks faster on coarse grids is about to stop doing so,
SLOWEST = 2.0  # so that an exponent that has not settled counts as two at most
ROUNDING = 4e-13  # relative: states are solved until their last correction is 1e-13 of them, and measures are sums of such values
ROUNDING_OF_EXTREME = 2e-14  # of a value that has an extremum at the state, so that the state's rounding enters squared


@dataclass(frozen=True)
class Column:
    """One column of the table: entries from coarse to fine, and the exponent that the next column would remove."""

    entries: tuple[float, ...]
    exponent: float | None


@dataclass(frozen=True)
class Limit:
    """An extrapolated value, the estimate of its error, the order observed, and how many columns were used."""

    value: float
    error: float
    order: float | None
    columns: int


def measured_exponent(entries: Sequence[float], floor: float) -> float | None:
    """log2 of the ratio of the last two differences; None where they do not shrink or are within rounding."""
    if len(entries) < 3:
        return None
    before, after = entries[-2] - entries[-3], entries[-1] - entries[-2]
    if abs(after) <= 4.0 * floor or not before * after > 0.0 or not abs(after) < abs(before):
        return None
    return math.log2(before / after)


def highest_likely(removed: float) -> float:
    """What a first measured exponent may come to at most: series here go up by one power or by two."""
    return (removed + 2.0 if removed else HIGHEST_FIRST) + SETTLED


def _leaps(last: float, earlier: float, earliest: float | None) -> bool:
    """Whether exponents rise faster and faster: on the way to a power of the series their changes shrink."""
    change = last - earlier
    return change > STEADY or (earliest is not None and change > abs(earlier - earliest))


def usable_exponent(entries: Sequence[float], above: float, floor: float) -> int | None:
    """The whole exponent that the entries follow, greater than `above`; None where they follow none."""
    last = measured_exponent(entries, floor)
    if last is None:
        return None
    whole = round(last)
    if not above < whole <= (HIGHEST if above else HIGHEST_FIRST):
        return None
    gap, earlier = abs(last - whole), measured_exponent(entries[:-1], floor)
    if earlier is None:
        passing = len(entries) > 3 or last > highest_likely(above)
    else:
        passing = abs(earlier - last) > STEADY or (gap > PLAIN and _leaps(last, earlier, measured_exponent(entries[:-2], floor)))
    if passing:
        return None  # one that only passes by a whole number on its way says nothing
    return whole if gap <= SETTLED else None


def error_of_last(entries: Sequence[float], whole: int | None, floor: float, removed: float = 0.0) -> float:
    """The error of the last entry: its difference from the one before, over what the exponent to come divides it by.

    That exponent is the settled one; else the last measured less its change from the one before, or less 1 where there
    is no earlier one. Two entries have no measured exponent, but the powers of a series rise: it is no less than the one
    removed before, `removed`; two at most count here too, for a map of the nodes that is smooth to some order only ends
    the series there. Where the last difference is small because two terms of the error pass each other (its exponent
    leaps up, or is higher than any series goes, or its sign has changed) it says nothing of what is to come: the
    difference before counts, with the slowest power that can be left.
    """
    gap = abs(entries[-1] - entries[-2])
    if whole is not None:
        return gap / (2.0**whole - 1.0)
    last = measured_exponent(entries, floor)
    if len(entries) == 2:
        return gap / (2.0 ** min(removed, SLOWEST) - 1.0) if removed > 0.0 else 2.0 * gap
    passing = abs(entries[-2] - entries[-3]) / 2.0 ** (removed + 1.0)
    if last is None:
        return gap if gap <= 8.0 * floor else max(2.0 * gap, passing)
    earlier = measured_exponent(entries[:-1], floor)
    if last > highest_likely(removed) if earlier is None else _leaps(last, earlier, measured_exponent(entries[:-2], floor)):
        return max(gap, passing)
    coming = last - (1.0 if earlier is None else abs(last - earlier))
    return gap / max(2.0 ** min(coming, SLOWEST) - 1.0, 0.5)


def powers_of(entries: Sequence[float], floor: float) -> tuple[list[int], bool]:
    """The powers that the columns follow one after the other, and whether they end in the rounding rather than in doubt."""
    column, noise = list(entries), floor
    powers: list[int] = []
    while len(column) > 2:
        whole = usable_exponent(column, float(powers[-1]) if powers else 0.0, noise)
        if whole is None:
            return powers, abs(column[-1] - column[-2]) <= 8.0 * noise
        powers.append(whole)
        column, noise = _without(column, whole), noise * (1.0 + 2.0 / (2.0**whole - 1.0))
    return powers, True


def _without(column: Sequence[float], whole: int) -> list[float]:
    """The next column: one power of the step removed."""
    return [after + (after - before) / (2.0**whole - 1.0) for before, after in pairwise(column)]


def limit_of(entries: Sequence[float], floor: float, powers: Sequence[int] | None = None) -> Limit:
    """The best limit of one family of halved steps: of all columns that exponents allow, the one with the least error.

    At least two entries. powers : those that may be removed at most, where another family has a say in it.
    """
    column = list(entries)
    order = measured_exponent(column, floor)
    allowed = powers_of(entries, floor)[0] if powers is None else powers
    removed = 0.0
    best: Limit | None = None
    noise = floor
    for depth in range(len(entries)):
        if len(column) < 2:
            break
        whole = usable_exponent(column, removed, noise)
        if depth >= len(allowed) or whole != allowed[depth]:
            whole = None
        error = max(error_of_last(column, whole, noise, removed), noise)
        if best is None or error < best.error:
            best = Limit(column[-1], error, order, depth)
        if whole is None:
            break
        column = _without(column, whole)
        noise *= 1.0 + 2.0 / (2.0**whole - 1.0)
        removed = float(whole)
    assert best is not None
    return best


def common_powers(first: Sequence[float], second: Sequence[float], floor: float) -> list[int]:
    """The powers that both families show: a series is the scheme's, so that one seen by one family alone is a coincidence.

    Where one family has come down to the rounding the other goes on alone.
    """
    (one, one_ended), (other, other_ended) = powers_of(first, floor), powers_of(second, floor)
    common = []
    for depth in range(max(len(one), len(other))):
        if depth < len(one) and depth < len(other):
            if one[depth] != other[depth]:
                break
        elif not (one_ended if depth >= len(one) else other_ended):
            break
        common.append(one[depth] if depth < len(one) else other[depth])
    return common


def combined(first: Sequence[float], second: Sequence[float], floor: float, rounding: float = ROUNDING) -> tuple[Limit, float]:
    """The limit of two families, and its uncertainty; the second family's grids are 3/2 as fine as the first's.

    floor : the rounding of the entries. rounding : the same as a share of the value, where it is known beforehand.
    """
    powers = common_powers(first, second, floor)
    one, other = limit_of(first, floor, powers), limit_of(second, floor, powers)
    better = other if other.error <= one.error else one
    apart = abs(one.value - other.value)
    uncertainty = max(SAFETY * better.error, FAMILIES_SAFETY * apart, rounding * abs(better.value), 2.0 * floor)
    return better, uncertainty


def combined_rough(entries: Mapping[int, float], floor: float) -> tuple[Limit, float]:
    """The limit where the equation has a corner: C h^2 with a C that changes from grid to grid, as nodes meet the corner or not.

    entries : the value by the number of intervals. No exponent settles, and where one seems to, it is because the corner
    sits on the same node of every grid. The limit is that of the line in h^2 through the finest six, its uncertainty
    the whole of the term in h^2 that is left on the finest grid, by the largest C seen.
    """
    counts = sorted(entries)[-6:]
    squares = [1.0 / (count * count) for count in counts]
    values = [entries[count] for count in counts]
    weights = [float(count) ** 4 for count in counts]  # an error C h^2 weighs alike on every grid
    total = sum(weights)
    mean, middle = (sum(w * v for w, v in zip(weights, column, strict=True)) / total for column in (squares, values))
    spread = sum(w * (square - mean) ** 2 for w, square in zip(weights, squares, strict=True))
    slope = sum(w * (square - mean) * (v - middle) for w, square, v in zip(weights, squares, values, strict=True)) / spread
    limit = middle - slope * mean
    largest = max(abs(value - limit) / square for value, square in zip(values, squares, strict=True))
    error = largest * squares[-1]
    order = measured_exponent(values[1::2], floor)
    return Limit(limit, error, order, 1), max(ROUGH_SAFETY * error, ROUNDING * abs(limit), 2.0 * floor)
