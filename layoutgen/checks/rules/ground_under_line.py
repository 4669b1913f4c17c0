"""Under every RF line the ground plane is unbroken.

What: the copper of each RF line, coupled pair and radial stub lies wholly over bottom copper on gnd, except
within ``copper.min_edge_distance`` (0.3 mm without that rule) of the profile and of cut-outs, where the
plane must end.
Why: return current that has to go round a slot radiates, and the line's impedance jumps there.
How measured: the area of the line's finished copper with none below, copper of other nets being none;
openings thinner than 20 nm are rounding. Only straight below: a slot beside the line is not looked at.
Source: common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.planar import TOLERANCE_NM, Geometry, parts, whole
from layoutgen.placement import copper_edge

__all__ = ["RULE"]

NAME = "ground.under_line"
_LINE_ROLES = ("line", "pair", "radial")


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each line with no plane under part of it."""
    if board.artwork is None:
        return
    away = _edge_zone(board, board.artwork)
    for piece in board.top.pieces:
        if piece.role not in _LINE_ROLES or not _is_rf(board.artwork, piece.item):
            continue
        if board.plane.covers(piece.polygon):
            continue
        bare = piece.polygon.difference(board.plane).difference(away).buffer(-TOLERANCE_NM)
        for part in parts(bare):
            spot = part.representative_point()
            yield Hit(
                rule=NAME,
                text=f"no ground plane under {part.area / 1e12:.4f} mm^2 of {piece.item}",
                items=named(piece.item),
                at=whole(spot.x, spot.y),
                measured=part.area / 1e12,
                limit=0.0,
                unit="mm^2",
                layer="copper_bottom",
                nets=named(piece.net or "", GROUND),
            )


def _edge_zone(board: Board, artwork: Artwork) -> Geometry:
    """Return where the plane may have ended already: beyond its distance from profile and cut-outs."""
    circuit = artwork.placement.sized.circuit
    reach = max(copper_edge(circuit.rules), (circuit.file.board.margin or 0.0) * 1e9) + TOLERANCE_NM
    zones: list[Geometry] = [cutout.polygon.buffer(reach, join_style="mitre") for cutout in board.cutouts]
    if board.outline is not None:
        x0, y0, x1, y1 = board.outline.bounds
        beyond = shapely.box(x0 - reach, y0 - reach, x1 + reach, y1 + reach)
        zones.append(beyond.difference(board.outline.buffer(-reach, join_style="mitre")))
    return shapely.union_all(zones)


def _is_rf(artwork: Artwork, item: str) -> bool:
    """Tell whether an element carries RF: lines that join DC nets only do not."""
    line = artwork.placement.sized.lines.get(item)
    return line is None or line.rf


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
