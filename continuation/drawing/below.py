"""What stands below the axes: how to read the figure, and the list of turning points where they are numbered."""

from __future__ import annotations

from typing import TYPE_CHECKING

from continuation.digits import significant, with_uncertainty
from continuation.drawing.paper import DARK, GREY, LINE_HEIGHT, TEXT_SIZE, box_of, frame_of, from_corner, root_figure, settle, wrapped
from continuation.drawing.pieces import unstable_beside
from continuation.records import Branch

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.text import Text

LONGEST_LIST = 16  # turning points listed below a figure
_GAP = 16.0  # points between two columns
READING = "Solid: stable. Dashed: unstable; beside each piece its number of unstable directions."
NO_STABILITY = "Stability is not defined for this problem; every piece is drawn solid."
STRIP = "Strip: number of states on this branch, as far as it was traced."
NUMBERS = "Bold numbers: turning points, listed here."


def write_below(axes: Axes, branch: Branch, measure: str, heads: tuple[str, str], numbered: bool) -> list[Text]:
    """Write the reading lines, and the list if the turning points are numbered; the layout is settled before and after.

    `heads` are the parameter and the measure as they stand over the columns, with their units.
    """
    settle(axes)
    frame = frame_of(axes)
    words = [NO_STABILITY if branch.unstable_directions is None else READING, STRIP, *([NUMBERS] if numbered else [])]
    height = box_of(axes.xaxis.label).bottom - frame.bottom - 4
    written = []
    for line in wrapped(" ".join(words), frame.right - frame.left, root_figure(axes)):
        written.append(_text(axes, 0.0, height, line, GREY))
        height -= LINE_HEIGHT
    if numbered:
        written += _list(axes, branch, measure, heads, height - 3)
    settle(axes)
    return written


def lines_below(branch: Branch, numbered: bool) -> int:
    """About how many lines `write_below` writes on a figure of the usual width."""
    return 2 + (min(len(branch.turning_points), LONGEST_LIST + 1) + 2 if numbered else 0)


def _list(axes: Axes, branch: Branch, measure: str, heads: tuple[str, str], height: float) -> list[Text]:
    listed = branch.turning_points[:LONGEST_LIST]
    columns = [["turning point", *(str(number) for number in range(1, len(listed) + 1))]]
    columns.append([_cut(heads[0]), *(with_uncertainty(point.value, point.uncertainty) for point in listed)])
    columns.append([_cut(heads[1]), *(significant(point.measures.get(measure)) for point in listed)])
    beside = [unstable_beside(branch, point.position) for point in listed]
    if branch.unstable_directions is not None:
        columns.append(["unstable before, after", *("-" if counts is None else f"{counts[0]}, {counts[1]}" for counts in beside)])
    if not all(point.survives for point in listed):
        columns.append(["", *("" if point.survives else "does not survive refinement" for point in listed)])
    written: list[Text] = []
    left, room = 0.0, frame_of(axes).right - frame_of(axes).left
    for column in columns:
        texts = [_text(axes, left, height - row * LINE_HEIGHT, cell, GREY if row == 0 else DARK) for row, cell in enumerate(column)]
        for text in texts[1:] if left == 0.0 else []:
            text.set_fontweight("bold")
        boxes = [box_of(text) for text in texts]
        width = max(box.right - box.left for box in boxes)
        if left + width > room and len(written) > len(texts):  # narrow axes: no more than number and value
            for text in texts:
                text.remove()
            break
        left += width + _GAP
        written += texts
    if len(listed) < len(branch.turning_points):
        words = f"and {len(branch.turning_points) - len(listed)} more"
        written.append(_text(axes, 0.0, height - (len(listed) + 1) * LINE_HEIGHT, words, GREY))
    return written


def _cut(words: str, longest: int = 32) -> str:
    return words if len(words) <= longest else words[: longest - 1] + "…"


def _text(axes: Axes, left: float, top: float, words: str, color: str) -> Text:
    corner = from_corner(axes)
    return axes.text(
        left, top, words, transform=corner, ha="left", va="top", fontsize=TEXT_SIZE, color=color, parse_math=False, gid="below"
    )
