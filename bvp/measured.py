"""Measured functions: a smooth curve through data, monotone where the data are, that ends where the data end."""

from __future__ import annotations

import inspect
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.errors import InputError
from bvp.monotone import coefficients, monotone_slopes

Floats = npt.NDArray[np.float64]

MOST_POINTS = 100_000
MOST_BYTES = 20_000_000
LARGEST = 1e100  # slopes and their squares stay finite


class MeasuredFunction:
    """A function of one argument through points (xs, ys), each of shape (n,), n at least 2, in any order.

    The curve is a cubic spline with two continuous derivatives. Where that would rise and fall between points that
    do not, its slopes are limited (see `bvp.monotone`), at the cost of a jump in the second derivative; `notes` say
    where. Outside of `domain` the value is nan, never an extrapolation. InputError where the data make no function.
    """

    arguments = 1

    def __init__(self, name: str, xs: npt.ArrayLike, ys: npt.ArrayLike, origin: str = "") -> None:
        self.name = name
        place = origin or f"measured function {name}"
        knots, values, moved = _sorted(_numbers(xs, place), _numbers(ys, place), place)
        slopes, limited = monotone_slopes(knots, values)
        self.knots: Floats = knots
        self.table: Floats = np.concatenate([knots, coefficients(knots, values, slopes).ravel()])
        self.notes = (*_note_on_order(moved, place), *_note_on_limits(limited, knots, place))

    @classmethod
    def from_csv(cls, path: str | Path, name: str = "") -> MeasuredFunction:
        """The function in a file of two columns, separated by commas, semicolons or blanks, under at most one line of headings."""
        path = Path(path)
        xs, ys = _read(path)
        return cls(name or path.stem, xs, ys, origin=path.name)

    @property
    def domain(self) -> tuple[float, float]:
        """Where the data begin and end."""
        return float(self.knots[0]), float(self.knots[-1])

    def __call__(self, x: Any, order: int = 0) -> Any:
        """The value at x, a number or an array, or the derivative of the given order; nan outside of the domain."""
        at = np.asarray(x, dtype=float)
        count = self.knots.size
        inside = (at >= self.knots[0]) & (at <= self.knots[-1])
        interval = np.clip(np.searchsorted(self.knots, at, side="right") - 1, 0, count - 2)
        pieces = self.table[count:].reshape(count - 1, 4)[interval]
        for _ in range(min(order, 4)):
            pieces = np.concatenate([pieces[..., 1:] * np.arange(1, pieces.shape[-1]), np.zeros((*at.shape, 1))], axis=-1)
        t = np.where(inside, at, self.knots[interval]) - self.knots[interval]
        c0, c1, c2, c3 = np.moveaxis(pieces, -1, 0)
        found = np.where(inside, c0 + t * (c1 + t * (c2 + t * c3)), np.nan)
        return found if at.ndim else float(found)

    def evaluate(self, x: Any, orders: tuple[int, ...] = (0,)) -> Any:
        """As `__call__`, in the way that formulas ask for it."""
        return self(x, sum(orders))


def source_text() -> str:
    """The kernels that evaluate tables, as text for a module that imports `kernel`, numpy as np, and annotations."""
    from bvp.kernels import tables
    from bvp.kernels.jit import interpreted

    return "\n\n".join(inspect.getsource(interpreted(function)) for function in (tables.table_interval, tables.table_value))


def _numbers(values: npt.ArrayLike, place: str) -> Floats:
    try:
        made = np.array(values, dtype=float)
    except (TypeError, ValueError):
        made = np.empty((0, 0))
    if made.ndim != 1:
        raise InputError(f"{place}: the data are not one row of numbers.\nExpected: as many abscissae as values.")
    return made


def _sorted(xs: Floats, ys: Floats, place: str) -> tuple[Floats, Floats, bool]:
    """The points in the order of x, and whether they came in another."""
    if xs.size != ys.size:
        raise InputError(f"{place}: {xs.size} abscissae and {ys.size} values.\nExpected: as many of one as of the other.")
    if xs.size < 2:
        found = "1 point" if xs.size else "no points"
        raise InputError(f"{place}: {found}.\nExpected: at least 2, since nothing is extrapolated.")
    if xs.size > MOST_POINTS:
        raise InputError(f"{place}: {xs.size} points.\nExpected: at most {MOST_POINTS}; give fewer, the curve between them is smooth.")
    bad = np.flatnonzero(~((np.abs(xs) <= LARGEST) & (np.abs(ys) <= LARGEST)))
    if bad.size:
        raise InputError(f"{place}: point {bad[0] + 1} is ({xs[bad[0]]}, {ys[bad[0]]}).\nExpected: finite numbers, at most {LARGEST:g}.")
    order = np.argsort(xs, kind="stable")
    knots, values = xs[order], ys[order]
    double = np.flatnonzero(np.diff(knots) == 0)
    if double.size:
        at = double[0]
        raise InputError(
            f"{place}: two values, {values[at]:.15g} and {values[at + 1]:.15g}, at the same abscissa {knots[at]:.15g}.\n"
            "Expected: one value at each; leave one out, or take their mean."
        )
    return knots, values, bool(np.any(np.diff(order) < 0))


def _note_on_order(moved: bool, place: str) -> list[str]:
    return [f"{place}: the points were not in the order of their abscissae; they were sorted."] if moved else []


def _note_on_limits(limited: npt.NDArray[np.bool_], knots: Floats, place: str) -> list[str]:
    """One note on where the second derivative jumps, naming the first few points."""
    at = knots[limited]
    if not at.size:
        return []
    places = ", ".join(f"{x:.6g}" for x in at[:4]) + (f" and {at.size - 4} more" if at.size > 4 else "")
    return [
        f"{place}: slopes were limited at {places}, so that the curve rises and falls only where the data do; "
        "its second derivative jumps there, which costs digits where a grid's nodes do not meet these points."
    ]


def _read(path: Path) -> tuple[list[float], list[float]]:
    """The two columns of a file; InputError with the number of the line that is not two numbers."""
    try:
        if path.stat().st_size > MOST_BYTES:
            raise InputError(
                f"{path}: {path.stat().st_size} bytes.\nExpected: at most {MOST_BYTES}, which is room for {MOST_POINTS} points."
            )
        text = path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(f"{path}: is no text file.\nExpected: two columns of numbers, such as a spreadsheet saves as CSV.") from None
    except OSError as error:
        reason = f"cannot be read ({error.strerror})"
        raise InputError(
            f"{path}: {reason}.\nExpected: a file of two columns of numbers, beside the case file or under its full path."
        ) from None
    xs: list[float] = []
    ys: list[float] = []
    headings = False
    for number, line in enumerate(text.splitlines(), start=1):
        fields = _fields(line)
        if not fields:
            continue
        if len(fields) != 2:
            found = f"{path.name}, line {number}: {len(fields)} column{'s' if len(fields) > 1 else ''}, {line.strip()[:60]!r}"
            raise InputError(f"{found}.\nExpected: two, the abscissa and the value.{_hint(fields)}")
        numbers = [_number(field) for field in fields]
        if not xs and not headings and numbers == [None, None]:
            headings = True
            continue
        for field, value in zip(fields, numbers, strict=True):
            if value is None:
                found = f"{path.name}, line {number}: {field[:40]!r} is not a number"
                raise InputError(f"{found}.\nExpected: numbers with a decimal point, such as 1.5 or 2e-3.")
        xs.append(numbers[0])  # type: ignore[arg-type]
        ys.append(numbers[1])  # type: ignore[arg-type]
    return xs, ys


def _fields(line: str) -> list[str]:
    """The fields of a line without what follows a #: split at semicolons, else at commas, else at tabs or blanks."""
    line = line.split("#")[0].strip()
    for separator in (";", ","):
        if separator in line:
            return [field.strip().strip('"') for field in line.split(separator)]
    return line.split()


def _number(field: str) -> float | None:
    try:
        return float(field) if "_" not in field else None
    except ValueError:
        return None


def _hint(fields: Sequence[str]) -> str:
    if len(fields) == 4 and all(field.lstrip("+-").isdigit() for field in fields):
        return " Decimal commas are not understood: write 1.5 for 1,5."
    return " Leave out other columns." if len(fields) > 2 else ""
