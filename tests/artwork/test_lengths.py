"""Every line of every example is as long as its angle asks, measured from the copper, loops included."""

from __future__ import annotations

import math
from collections.abc import Iterator
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork import Artwork
from layoutgen.placement import PlacedLine
from layoutgen.sizing import BudgetEntry

MOST_DEG = 0.05


def polygon_of(artwork: Artwork, measures: ModuleType, name: str, which: int = 0) -> shapely.Polygon:
    """Return the copper of a line [nm], or of one strip of a pair."""
    shapes = [s for s in artwork.on("copper_top") if s.origin.element == name and s.role in ("line", "pair")]
    found: shapely.Polygon = measures.polygon(shapes[which], measures.undercut_of(artwork))
    return found


def cut_back(artwork: Artwork, line: PlacedLine) -> list[shapely.Polygon]:
    """Return the pads on a line's nets at parts with a cut-out: there the line's own copper is cut back."""
    parts = [part for part in artwork.placement.parts.values() if part.cutout is not None]
    return [pad.outline.polygon() for part in parts for pad in part.pads if pad.net in line.nets]


def extent_along(shapes: list[shapely.Polygon], line: PlacedLine) -> float:
    """Return how far copper reaches along a straight line's direction [nm]."""
    (ax, ay), (bx, by) = line.path
    ux, uy = (bx - ax) / math.dist(*line.path), (by - ay) / math.dist(*line.path)
    along = [x * ux + y * uy for shape in shapes for x, y in shape.exterior.coords]
    return max(along) - min(along)


def centre_line(artwork: Artwork, measures: ModuleType, line: PlacedLine) -> float:
    """Return a line's length [nm] from its copper: its area, what the mitres cut off put back, by its width.

    The area of a bent strip with sharp corners is its width times its centre-line, whatever the turns.
    """
    copper = polygon_of(artwork, measures, line.name)
    if pads := cut_back(artwork, line):
        return extent_along([copper, *pads], line)
    area = copper.area
    for bend in line.bends:
        turn = math.radians(abs(bend.turn))
        edge = bend.mitre_percent / 100.0 * line.width / math.cos(turn / 2.0) / math.sin(turn / 2.0)
        area += 0.5 * edge * edge * math.sin(turn)
    return float(area / line.width)


def lines_with_an_angle(artwork: Artwork) -> Iterator[tuple[PlacedLine, float]]:
    """Yield the lines whose angle the circuit asks for, each with it [rad]."""
    for name, line in artwork.placement.lines.items():
        asked = artwork.placement.sized.circuit.file.lines[name].angle
        if asked is not None:
            yield line, asked


def corrections(budget: tuple[BudgetEntry, ...]) -> float:
    """Return all of a budget that is not the line itself [rad]."""
    return sum(entry.angle for entry in budget if entry.cause != "line")


def test_drawn_length_and_corrections_make_the_angle(artwork: Artwork, measures: ModuleType) -> None:
    """Would catch a leg lost or added, a mitre drawn otherwise than budgeted, a loop closed by cheating."""
    for line, asked in lines_with_an_angle(artwork):
        drawn = centre_line(artwork, measures, line) * 1e-9 * artwork.placement.sized.lines[line.name].beta
        off = math.degrees(drawn + corrections(line.budget) - asked)
        assert off == pytest.approx(0.0, abs=MOST_DEG), line.name


def test_drawn_pairs_and_corrections_make_the_angle(artwork: Artwork, measures: ModuleType) -> None:
    """Would catch a coupled pair whose strips are not as long as its budget says, or not alike."""
    for name, pair in artwork.placement.pairs.items():
        for side in (0, 1):
            x0, y0, x1, y1 = polygon_of(artwork, measures, name, side).bounds
            assert max(x1 - x0, y1 - y0) == pytest.approx(pair.centre_line, abs=1.0)
        asked = artwork.placement.sized.circuit.file.coupled[name].angle
        line_angle = next(entry.angle for entry in pair.budget if entry.cause == "line")
        assert math.degrees(line_angle + corrections(pair.budget)) == pytest.approx(
            math.degrees(asked), abs=MOST_DEG
        )
        beta = artwork.placement.sized.pairs[name].beta
        assert math.degrees(pair.centre_line * 1e-9 * beta - line_angle) == pytest.approx(0.0, abs=MOST_DEG)
