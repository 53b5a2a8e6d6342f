"""Figures for a report: a branch with its title, caution and published values, as PNG and SVG."""

from __future__ import annotations

import io
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cases.published import Compared
from cases.words import NUMERICAL_ONLY
from continuation.digits import with_uncertainty

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from cases.case import PublishedValue
    from continuation.records import Branch

DOTS_PER_INCH = 200
TITLE_SIZE, TITLE_HEIGHT = 10.5, 15.0  # points
_MARGIN = 6.0
# The same branch gives the same bytes on every run, whatever matplotlib settings a person has.
_STYLE = {"font.family": "DejaVu Sans", "svg.hashsalt": "hairpin", "svg.fonttype": "path", "text.usetex": False}


def branch_figure(
    branch: Branch,
    *,
    title: str,
    caution: str | None = None,
    published: Sequence[PublishedValue | Compared] = (),
    measure: str | None = None,
) -> Figure:
    """A figure 160 mm wide of a branch (see `continuation.plot`), its title above; below it the caution and what is published.

    It belongs to no pyplot window. KeyError where `measure` was not measured.
    """
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    from continuation.drawing.paper import DARK, GREY, LINE_HEIGHT, POINTS_PER_INCH, TEXT_SIZE, WIDTH, wrapped
    from continuation.plot import draw_branch, height_of_figure

    with _settings():
        figure = Figure(figsize=(WIDTH, height_of_figure(branch)), layout="constrained")
        FigureCanvasAgg(figure)
        width = WIDTH * POINTS_PER_INCH - 2 * _MARGIN
        heading = wrapped(title, width, figure, TITLE_SIZE, "bold")
        warned = f"Caution: {caution} An uncertainty is {NUMERICAL_ONLY}." if caution else ""
        lines = [(line, DARK) for line in wrapped(warned, width, figure)]
        for sentence in _published(published):
            lines += [(line, GREY) for line in wrapped(sentence, width, figure)]
        above = len(heading) * TITLE_HEIGHT + _MARGIN
        below = len(lines) * LINE_HEIGHT + (2 * _MARGIN if lines else 0.0)
        whole = height_of_figure(branch) * POINTS_PER_INCH + above + below
        figure.set_size_inches(WIDTH, whole / POINTS_PER_INCH)
        style: dict[str, Any] = {"ha": "left", "va": "top", "parse_math": False}
        for number, line in enumerate(heading):
            height = whole - _MARGIN - number * TITLE_HEIGHT
            figure.text(
                _MARGIN / POINTS_PER_INCH / WIDTH, height / whole, line, fontsize=TITLE_SIZE, fontweight="bold", color=DARK, **style
            )
        for number, (line, color) in enumerate(lines):
            height = below - _MARGIN - number * LINE_HEIGHT
            figure.text(_MARGIN / POINTS_PER_INCH / WIDTH, height / whole, line, fontsize=TEXT_SIZE, color=color, **style)
        layout: Any = figure.get_layout_engine()
        pad = _MARGIN / POINTS_PER_INCH
        layout.set(rect=(0, below / whole, 1, 1 - (above + below) / whole), w_pad=pad, h_pad=pad)
        draw_branch(branch, measure, figure.add_subplot())
        figure.set_layout_engine("none")  # labels were placed for this layout
    return figure


def rendered(figure: Figure) -> dict[str, bytes]:
    """The files of a figure by their names: `figure.png` and `figure.svg`, the same bytes for the same figure."""
    files = {}
    for kind, metadata in (("png", {"Software": None}), ("svg", {"Date": None})):
        buffer = io.BytesIO()
        with _settings():
            figure.savefig(buffer, format=kind, dpi=DOTS_PER_INCH, metadata=metadata)
        files[f"figure.{kind}"] = buffer.getvalue()
    return files


def save(figure: Figure, folder: Path) -> None:
    """Write `figure.png` and `figure.svg` into a folder, each whole or not at all. Raises StoreError."""
    from cases.store import write_whole

    for name, data in rendered(figure).items():
        write_whole(folder / name, data)


@contextmanager
def _settings() -> Iterator[None]:
    """matplotlib's own settings with ours above them, and no word on standard error about letters that no font has."""
    import warnings

    from matplotlib import style

    with style.context(["default", _STYLE]), warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="Glyph .* missing from")
        yield


def _published(values: Iterable[PublishedValue | Compared]) -> Iterator[str]:
    """What is published, a sentence for each source."""
    by_source: dict[str, list[str]] = {}
    for value in values:
        known, agrees = (value.published, value.agrees) if isinstance(value, Compared) else (value, None)
        verdict = {True: " (agrees)", False: " (disagrees)", None: ""}[agrees]
        words = f"{known.quantity}: {with_uncertainty(known.value, known.uncertainty)}{verdict}"
        by_source.setdefault(known.source, []).append(words)
    for source, named in by_source.items():
        yield f"Published: {'; '.join(named)}. Source: {source.rstrip('.')}."
