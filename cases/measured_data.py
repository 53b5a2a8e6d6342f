"""Files with two columns, as they are under [measured]: from text to two lists of numbers."""

from __future__ import annotations

import math
import re
from pathlib import Path

from bvp.errors import InputError

MOST_BYTES = 20_000_000
MOST_ROWS = 1_000_000


def read_columns(path: Path, origin: str) -> tuple[list[float], list[float]]:
    """The two columns of a file: separated by comma, semicolon, tabulator or blanks; # opens a remark, one heading is let pass.

    With semicolons or tabulators a comma is read as the decimal sign. Raises InputError with the line that is wrong.
    """
    first: list[float] = []
    second: list[float] = []
    heading_seen = False
    for number, line in enumerate(_text(path, origin).splitlines(), start=1):
        content = line.split("#", 1)[0].strip()
        if not content:
            continue
        cells = _cells(content)
        values = [_number(cell) for cell in cells]
        if not first and not heading_seen and cells and all(value is None for value in values):
            heading_seen = True
            continue
        if len(values) != 2 or values[0] is None or values[1] is None:
            raise InputError(
                f"{origin}: {path.name}, line {number}: {content[:40]!r} is not two finite numbers.\nExpected: abscissa and value."
            )
        first.append(values[0])
        second.append(values[1])
        if len(first) > MOST_ROWS:
            raise InputError(f"{origin}: {path.name} has more than {MOST_ROWS} rows.\nGive fewer.")
    if len(first) < 2:
        raise InputError(f"{origin}: {path.name} has {len(first)} row{'s' * (len(first) != 1)} of numbers.\nExpected: at least two.")
    return first, second


def _text(path: Path, origin: str) -> str:
    try:
        with path.open("rb") as file:
            data = file.read(MOST_BYTES + 1)
    except OSError as error:
        raise InputError(
            f"{origin}: {path} cannot be read: {error.strerror}.\nExpected: a file with two columns, its path seen from the case file."
        ) from None
    if len(data) > MOST_BYTES:
        raise InputError(f"{origin}: {path.name} holds more than {MOST_BYTES} bytes.\nGive fewer rows.")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(f"{origin}: {path.name} is not UTF-8.\nExpected: a text file with two columns.") from None


def _cells(content: str) -> list[str]:
    for separator in (";", "\t"):
        if separator in content:
            return [cell.strip().replace(",", ".") for cell in content.split(separator)]
    if "," in content:
        return [cell.strip() for cell in content.split(",")]
    return re.split(r"\s+", content)


def _number(cell: str) -> float | None:
    try:
        value = float(cell)
    except ValueError:
        return None
    return value if math.isfinite(value) else None
