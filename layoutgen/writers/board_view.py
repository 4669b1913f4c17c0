"""A board on a sheet of paper, seen from the top at a stated scale."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.writers.outlines import turned
from layoutgen.writers.records import Result
from layoutgen.writers.sheet import INK, Sheet

__all__ = ["COPPER", "BoardView", "scale_text", "suitable_scale"]

COPPER = "#e7c9ad"
PAD = "#c9a24b"

_SCALES = tuple(
    Fraction(text)
    for text in ("20", "10", "5", "4", "3", "5/2", "2", "3/2", "1", "1/2", "1/4", "1/5", "1/10", "1/20")
)
_NM_PER_MM = 1e6
_CHORD_MM = 0.02


def suitable_scale(result: Result, width: float, height: float) -> Fraction:
    """Return the largest usual scale at which the board fits into so much room [mm]."""
    board = (result.placement.width / _NM_PER_MM, result.placement.height / _NM_PER_MM)
    fitting = (s for s in _SCALES if board[0] * float(s) <= width and board[1] * float(s) <= height)
    return next(fitting, _SCALES[-1])


def scale_text(scale: Fraction) -> str:
    """Return a scale as drawings have it, such as 2:1."""
    return f"{scale.numerator}:{scale.denominator}"


class BoardView:
    """Places board coordinates [nm] on a sheet, the board's south-west corner at a point [mm]."""

    def __init__(self, sheet: Sheet, x: float, y: float, scale: Fraction) -> None:
        """Begin a view."""
        self.sheet, self.x, self.y, self.scale = sheet, x, y, float(scale)

    def at(self, x: float, y: float) -> tuple[float, float]:
        """Return the place of a point [nm] on the sheet [mm]."""
        factor = self.scale / _NM_PER_MM
        return self.x + x * factor, self.y + y * factor

    def size(self, nm: float) -> float:
        """Return a length [nm] on the sheet [mm]."""
        return nm * self.scale / _NM_PER_MM

    def ring(self, ring: Ring) -> npt.NDArray[np.float64]:
        """Return an outline's vertices on the sheet [mm], arcs as chords."""
        points = np.array(ring.chords(_CHORD_MM * _NM_PER_MM / self.scale), dtype=float) * (
            self.scale / _NM_PER_MM
        )
        moved: npt.NDArray[np.float64] = points + np.array([self.x, self.y])
        return moved

    def rings(self, shape: Shape) -> list[npt.NDArray[np.float64]]:
        """Return a shape's outline counter-clockwise and its holes clockwise [mm]."""
        return [
            self.ring(turned(shape.outline, 1)),
            *(self.ring(turned(hole, -1)) for hole in shape.holes),
        ]

    def draw(
        self, shapes: Iterable[Shape], fill: str | None = None, pen: str | None = None, weight: float = 0.1
    ) -> None:
        """Draw shapes in one style."""
        self.sheet.area([ring for shape in shapes for ring in self.rings(shape)], fill, pen, weight)

    def profile(self, result: Result, fill: str | None = None, weight: float = 0.35) -> None:
        """Draw the board's outline and its cut-outs."""
        shapes = result.artwork.on("profile")
        outer = [self.ring(turned(s.outline, 1)) for s in shapes if s.role == "profile"]
        inner = [self.ring(turned(s.outline, -1)) for s in shapes if s.role == "cutout"]
        self.sheet.area([*outer, *inner], fill, INK, weight)

    def copper(self, result: Result, where: Callable[[Shape], bool], fill: str = COPPER) -> None:
        """Draw the top copper of some shapes."""
        self.draw([shape for shape in result.artwork.on("copper_top") if where(shape)], fill)

    def drills(self, result: Result, crosses: bool = True) -> None:
        """Draw vias and holes as circles with centre marks."""
        drills = [(via.x, via.y, via.drill) for via in result.artwork.vias]
        drills += [(hole.x, hole.y, hole.diameter) for hole in result.artwork.holes]
        circles = [(*self.at(x, y), self.size(diameter) / 2.0) for x, y, diameter in drills]
        self.sheet.circles(circles, "#ffffff", INK, 0.13)
        if crosses:
            self.sheet.strokes([stroke for circle in circles for stroke in _cross(*circle)], 0.08)

    def numbered(self, marks: Sequence[tuple[str, float, float]], size: float = 2.3) -> None:
        """Draw short texts in discs at points [nm], pushed apart where they would overlap."""
        radius = 0.95 * size
        placed: list[tuple[float, float]] = []
        for text, x, y in marks:
            spot = _free_spot(self.at(x, y), placed, 2.1 * radius)
            placed.append(spot)
            self.sheet.line([self.at(x, y), spot], weight=0.15)
            self.sheet.circle(*spot, radius, fill="#ffffff", pen=INK, weight=0.18)
            self.sheet.text(*spot, text, size, "center", middle=True)


def _cross(x: float, y: float, radius: float) -> list[list[tuple[float, float]]]:
    """Return the two centre lines of a hole [mm]."""
    arm = radius + min(1.0, radius)
    return [[(x - arm, y), (x + arm, y)], [(x, y - arm), (x, y + arm)]]


def _free_spot(
    at: tuple[float, float], taken: Sequence[tuple[float, float]], distance: float
) -> tuple[float, float]:
    """Return the first spot [mm] on a spiral about a point that keeps its distance to others."""
    for turn in range(400):
        radius, angle = 0.12 * distance * turn**0.5 * 2.0, 2.4 * turn
        spot = at[0] + radius * np.cos(angle), at[1] + radius * np.sin(angle)
        if all(np.hypot(spot[0] - x, spot[1] - y) >= distance for x, y in taken):
            return float(spot[0]), float(spot[1])
    return at
