"""Which conductor of one artwork is which of the other; nets that were joined or parted."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.planar import middle
from layoutgen.compare.records import Change
from layoutgen.foreign import ForeignArtwork, board_of_foreign
from layoutgen.reading import rules_from_data

__all__ = ["Conductors"]

_NO_RULES = {
    "format": 1,
    "name": "nothing is asked",
    "holes": {"drills": ["1 mm"]},
    "vias": {"diameter": "2 mm", "drill": "1 mm"},
}
"""A comparison asks no rule; the board is only used to find what hangs together."""

_LEAST_NM2 = 1e6
"""Common area from which two conductors are the same copper [nm^2]: a square micrometre."""


class Conductors:
    """The conductors of two artworks. Names are those of the first: ``net:N``, the largest first."""

    def __init__(self, first: ForeignArtwork, second: ForeignArtwork) -> None:
        """Find the conductors of both, and which have copper in common."""
        rules = rules_from_data(_NO_RULES)
        self._boards = board_of_foreign(first, rules), board_of_foreign(second, rules)
        self._common = self._overlaps()
        self._renamed = self._names()

    def _overlaps(self) -> dict[tuple[str, str], float]:
        """Return the common area [nm^2] of each pair of conductors that have any."""
        found: dict[tuple[str, str], float] = {}
        for old, new in zip(self._boards[0].layers, self._boards[1].layers, strict=True):
            if not old.pieces or not new.pieces:
                continue
            i, j = new.tree.query(old.polygons, predicate="intersects")
            area = shapely.area(shapely.intersection(old.polygons[i], new.polygons[j]))
            for a, b, common in zip(i.tolist(), j.tolist(), area.tolist(), strict=True):
                pair = old.pieces[a].net or "", new.pieces[b].net or ""
                if common > _LEAST_NM2:
                    found[pair] = found.get(pair, 0.0) + common
        return found

    def _names(self) -> dict[str, str]:
        """Return for each conductor of the second artwork its name in the first."""
        best: dict[str, tuple[float, str]] = {}
        for (old, new), common in self._common.items():
            best[new] = max(best.get(new, (0.0, "")), (common, old))
        return {new: old for new, (_, old) in best.items()}

    def name_in_first(self, layer: str, shape: shapely.Polygon) -> str:
        """Return the conductor of the first artwork that a shape belongs to, empty off copper."""
        return _net_at(self._boards[0], layer, shape)

    def name_in_second(self, layer: str, shape: shapely.Polygon) -> str:
        """Return the conductor of the second artwork that a shape belongs to, by its name in the first."""
        net = _net_at(self._boards[1], layer, shape)
        return self._renamed.get(net, net.replace("net:", "new:"))

    def changes(self) -> Iterator[Change]:
        """Yield a change for each conductor that became several, and for those that became one."""
        parted: dict[str, list[str]] = {}
        joined: dict[str, list[str]] = {}
        for old, new in sorted(self._common):
            parted.setdefault(old, []).append(new)
            joined.setdefault(new, []).append(old)
        for old, several in parted.items():
            if len(several) > 1:
                text = f"{old} is in {len(several)} pieces in the second artwork"
                yield self._net_change("parted", old, text, 1, several)
        for several in joined.values():
            if len(several) > 1:
                text = f"{', '.join(several)} are one conductor in the second artwork"
                yield self._net_change("joined", several[0], text, 0, several)

    def _net_change(self, kind: str, net: str, text: str, board: int, nets: list[str]) -> Change:
        """Return the change of nets, placed between two of their pieces."""
        layers = self._boards[board].layers
        layer = next(
            (one for one in layers if len(_pieces(one, nets[0])) and len(_pieces(one, nets[1]))), layers[0]
        )
        first, second = _pieces(layer, nets[0]), _pieces(layer, nets[1])
        at = (
            middle(shapely.union_all(first), shapely.union_all(second))
            if len(first) and len(second)
            else (0, 0)
        )
        return Change(
            kind="joined" if kind == "joined" else "parted",
            layer=layer.name,
            severity="error",
            at=at,
            net=net,
            size=0.0,
            text=text,
        )


def _pieces(layer: Layer, net: str) -> np.ndarray[tuple[int], np.dtype[np.object_]]:
    """Return the polygons of one conductor on a layer."""
    return np.asarray(layer.polygons[[piece.net == net for piece in layer.pieces]])


def _net_at(board: Board, layer: str, shape: shapely.Polygon) -> str:
    """Return the conductor that a shape touches on a layer, empty for none."""
    for one in board.layers:
        if one.name == layer and one.pieces:
            met = one.tree.query(shape, predicate="intersects")
            return (one.pieces[int(met.min())].net or "") if len(met) else ""
    return ""
