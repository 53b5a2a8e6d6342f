"""Tables of text: columns under their heads, numbers set to the right, words to the left."""

from __future__ import annotations

import textwrap
import unicodedata
from collections.abc import Sequence

WIDTH = 100


def table(heads: Sequence[str], rows: Sequence[Sequence[str]], indent: str = "  ") -> list[str]:
    """The lines of a table; a column in which every cell opens with a digit or a sign is set to the right."""
    columns = list(zip(heads, *rows, strict=True))
    widths = [max(map(_width, column)) for column in columns]
    right = [bool(rows) and all(_numeric(cell) for cell in column[1:]) for column in columns]
    lines = []
    for row in (heads, *rows):
        cells = [_set(cell, width, to_right) for cell, width, to_right in zip(row, widths, right, strict=True)]
        lines.append((indent + "   ".join(cells)).rstrip())
    lines.insert(1, indent + "   ".join("─" * width for width in widths))
    return lines


def wrapped(text: str, indent: str = "", opening: str = "") -> list[str]:
    """Prose in lines of at most WIDTH, what follows the first line set under `opening`."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=indent + opening,
        subsequent_indent=indent + " " * _width(opening),
        break_long_words=False,
        break_on_hyphens=False,
    )


def _numeric(cell: str) -> bool:
    return cell[:1].isdigit() or cell[:1] in "-+" or not cell


def _set(cell: str, width: int, to_right: bool) -> str:
    filling = " " * (width - _width(cell))
    return filling + cell if to_right else cell + filling


def _width(text: str) -> int:
    """Columns that a text takes on a terminal: combining signs take none."""
    return sum(not unicodedata.combining(character) for character in text)
