"""Dimensions on a drawing: ordinates from the board's corner, and overall lengths with arrows."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from layoutgen.numbers import fixed
from layoutgen.writers.board_view import BoardView
from layoutgen.writers.sheet import INK, Sheet

__all__ = ["ordinates_x", "ordinates_y", "overall_height", "overall_width", "spread"]

_SIZE = 2.3
_STEP = 3.2
_TICK, _KINK, _REACH = 2.0, 4.0, 7.0


def spread(wanted: Sequence[float], distance: float) -> list[float]:
    """Return places as near as may be to those wanted (rising), each so far from the one before it.

    Neighbours that are too near are moved apart about their common middle.
    """
    groups: list[list[float]] = []  # each: sum of wanted places minus offsets, count
    for place in wanted:
        groups.append([place, 1.0])
        while len(groups) > 1 and _start(groups[-1], distance) < _end(groups[-2], distance) + distance:
            last, before = groups.pop(), groups[-1]
            before[0] += last[0]
            before[1] += last[1]
    places: list[float] = []
    for group in groups:
        first = _start(group, distance)
        places += [first + k * distance for k in range(int(group[1]))]
    return places


def _start(group: Sequence[float], distance: float) -> float:
    return group[0] / group[1] - (group[1] - 1.0) * distance / 2.0


def _end(group: Sequence[float], distance: float) -> float:
    return group[0] / group[1] + (group[1] - 1.0) * distance / 2.0


def ordinates_x(view: BoardView, values: Iterable[int], below: float) -> None:
    """Draw the x of features [nm] under the board, from an ordinate [mm] of the sheet downwards."""
    marked = sorted(set(values))
    places = spread([view.at(value, 0)[0] for value in marked], _STEP)
    for value, place in zip(marked, places, strict=True):
        x = view.at(value, 0)[0]
        view.sheet.line(
            [(x, below), (x, below - _TICK), (place, below - _KINK), (place, below - _REACH)], 0.1
        )
        view.sheet.text(place + 0.8, below - _REACH - 1.0, _text(value), _SIZE, "right", turn=90.0)


def ordinates_y(view: BoardView, values: Iterable[int], left: float) -> None:
    """Draw the y of features [nm] beside the board, from an abscissa [mm] of the sheet to the left."""
    marked = sorted(set(values))
    places = spread([view.at(0, value)[1] for value in marked], _STEP)
    for value, place in zip(marked, places, strict=True):
        y = view.at(0, value)[1]
        view.sheet.line([(left, y), (left - _TICK, y), (left - _KINK, place), (left - _REACH, place)], 0.1)
        view.sheet.text(left - _REACH - 1.0, place - 0.8, _text(value), _SIZE, "right")


def overall_width(view: BoardView, width: int, above: float) -> None:
    """Draw the board's width [nm] above it, at an ordinate [mm] of the sheet."""
    x0, x1 = view.at(0, 0)[0], view.at(width, 0)[0]
    view.sheet.line([(x0, above - 4.0), (x0, above + 1.0)], 0.1)
    view.sheet.line([(x1, above - 4.0), (x1, above + 1.0)], 0.1)
    view.sheet.line([(x0, above), (x1, above)], 0.13)
    _arrow(view.sheet, x0, above, 1.0, 0.0)
    _arrow(view.sheet, x1, above, -1.0, 0.0)
    view.sheet.text((x0 + x1) / 2.0, above + 1.0, f"{_text(width)} mm", 3.0, "center", bold=True)


def overall_height(view: BoardView, height: int, right: float) -> None:
    """Draw the board's height [nm] to its right, at an abscissa [mm] of the sheet."""
    y0, y1 = view.at(0, 0)[1], view.at(0, height)[1]
    view.sheet.line([(right - 4.0, y0), (right + 1.0, y0)], 0.1)
    view.sheet.line([(right - 4.0, y1), (right + 1.0, y1)], 0.1)
    view.sheet.line([(right, y0), (right, y1)], 0.13)
    _arrow(view.sheet, right, y0, 0.0, 1.0)
    _arrow(view.sheet, right, y1, 0.0, -1.0)
    middle = (y0 + y1) / 2.0
    view.sheet.text(right + 3.6, middle, f"{_text(height)} mm", 3.0, "center", bold=True, turn=90.0)


def _arrow(sheet: Sheet, x: float, y: float, dx: float, dy: float) -> None:
    """Draw the head of an arrow whose tip is at a point; (dx, dy) points away from the tip."""
    long, wide = 2.2, 0.5
    sides = [
        (x + long * dx - wide * dy, y + long * dy + wide * dx),
        (x + long * dx + wide * dy, y + long * dy - wide * dx),
    ]
    sheet.area([[(x, y), *sides]], fill=INK)


def _text(nm: int) -> str:
    return fixed(nm / 1e6, 3)
