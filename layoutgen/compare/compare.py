"""The public function: every layer of two artworks against each other."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.checks.planar import array_of, whole
from layoutgen.compare.conductors import Conductors
from layoutgen.compare.holes import changed_holes
from layoutgen.compare.moves import Move, moves_of
from layoutgen.compare.records import Change, Comparison
from layoutgen.compare.regions import Region, joined, regions
from layoutgen.foreign import ForeignArtwork, read_artwork

__all__ = ["TOLERANCE_NM", "compare"]

TOLERANCE_NM = 1_000.0
"""How far an outline may differ and still count as equal [nm]."""

_COPPER = ("copper_top", "copper_bottom")
_NOT_AREAS = ("reference", "findings", "drill_plated", "drill_nonplated")


def compare(first: str | Path | ForeignArtwork, second: str | Path | ForeignArtwork) -> Comparison:
    """Return what changed from one artwork to another.

    Outlines that differ by up to 1 um, the chords of GDSII among them, count as equal. Texts are not
    compared.

    Args:
        first: A path to GDSII, OASIS or DXF with our layers, or what
            :func:`~layoutgen.foreign.read_artwork` returned (for other layers or units).
        second: The other one.

    Raises:
        WrongInputError: A file cannot be read.
    """
    a, b = (art if isinstance(art, ForeignArtwork) else read_artwork(art) for art in (first, second))
    nets = Conductors(a, b)
    changes = [*nets.changes()]
    for layer in LAYERS:
        if layer not in _NOT_AREAS:
            changes += _layer(a, b, layer, nets)
    changes += changed_holes(a.holes, b.holes, TOLERANCE_NM)
    order = {name: k for k, name in enumerate(LAYERS)}
    changes.sort(key=lambda c: (c.severity != "error", order[c.layer], c.at, c.kind, c.text))
    return Comparison(first=a.file, second=b.file, changes=tuple(changes))


def _layer(a: ForeignArtwork, b: ForeignArtwork, layer: str, nets: Conductors) -> Iterator[Change]:
    """Yield the changes of one layer."""
    old, new = joined(_polygons(a, layer)), joined(_polygons(b, layer))
    removed, added = regions(old, new, TOLERANCE_NM), regions(new, old, TOLERANCE_NM)
    if not removed and not added:
        return
    moves = moves_of(old, new, removed, added, TOLERANCE_NM)
    for move in moves:
        yield _moved(move, layer, nets)
    gone = shapely.union_all([move.before for move in moves] + [move.after for move in moves])
    for region in removed:
        if not region.shape.intersects(gone):
            yield _change("removed", region, layer, nets.name_in_first(layer, region.shape))
    for region in added:
        if not region.shape.intersects(gone):
            yield _change("added", region, layer, nets.name_in_second(layer, region.shape))


def _polygons(artwork: ForeignArtwork, layer: str) -> np.ndarray[tuple[int], np.dtype[np.object_]]:
    """Return a layer's polygons."""
    return array_of(artwork.profile if layer == "profile" else artwork.layers[layer])


def _change(kind: str, region: Region, layer: str, net: str) -> Change:
    """Return the change that an added or removed region is."""
    spot = region.shape.representative_point()
    x0, y0, x1, y1 = region.shape.bounds
    text = (
        f"{(x1 - x0) / 1e6:.4f} x {(y1 - y0) / 1e6:.4f} mm {kind}, up to {region.reach / 1e3:.1f} um "
        f"from the other outline, at {spot.x / 1e6:.4f}, {spot.y / 1e6:.4f} mm"
    )
    return Change(
        kind="added" if kind == "added" else "removed",
        layer=layer,
        severity="error" if layer in _COPPER else "note",
        at=whole(spot.x, spot.y),
        net=net,
        size=region.reach,
        text=text,
        shape=region.shape,
    )


def _moved(move: Move, layer: str, nets: Conductors) -> Change:
    """Return the change that a moved piece is."""
    spot = move.after.representative_point()
    dx, dy = move.way
    text = f"moved by {dx / 1e3:.1f}, {dy / 1e3:.1f} um to {spot.x / 1e6:.4f}, {spot.y / 1e6:.4f} mm"
    return Change(
        kind="moved",
        layer=layer,
        severity="error" if layer in _COPPER else "note",
        at=whole(spot.x, spot.y),
        net=nets.name_in_first(layer, move.before),
        size=float(np.hypot(dx, dy)),
        text=text,
        shape=move.after,
    )
