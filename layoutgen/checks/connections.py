"""What copper and barrels join, from polygons and holes alone; where nets meet that should not."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.checks.board import Board, Piece
from layoutgen.checks.drills import touched
from layoutgen.checks.netgraph import clusters
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.planar import middle, whole
from layoutgen.geometry import Point

__all__ = ["Connections", "Joint"]


@dataclass(frozen=True, slots=True, eq=False)
class Joint:
    """A place where copper of two nodes meets: the two pieces, directly or through unnamed copper."""

    first: Piece
    second: Piece
    at: Point
    layer: str


class Connections:
    """The copper of both layers and the plated barrels as one graph.

    Pieces are numbered top, then bottom, then barrels (barrels are pieces of copper too).
    """

    def __init__(self, board: Board) -> None:
        """Take the board."""
        self.board = board
        self.pieces: tuple[Piece, ...] = (*board.top.pieces, *board.bottom.pieces, *self._barrels())
        self.layer_of = [name for layer in board.layers for name in [layer.name] * len(layer.pieces)]
        self.layer_of += ["drill_plated"] * (len(self.pieces) - len(self.layer_of))

    def _barrels(self) -> Iterator[Piece]:
        """Yield the plated holes as pieces; their outlines only serve to name a place."""
        discs = shapely.buffer(self.board.drill_points, self.board.drill_radii, quad_segs=4)
        for drill, disc in zip(self.board.drills, discs, strict=True):
            if drill.plated:
                yield Piece(disc, drill.item, drill.net, drill.node, "barrel")

    @cached_property
    def touching(self) -> npt.NDArray[np.intp]:
        """Index pairs (M, 2) of pieces that meet."""
        top, bottom = self.board.layers
        offset = len(top.pieces)
        pairs = [top.touching, bottom.touching + offset]
        plated = [k for k, drill in enumerate(self.board.drills) if drill.plated]
        first = offset + len(bottom.pieces)
        for layer, shift in ((top, 0), (bottom, offset)):
            met = touched(self.board, layer)
            found = [(piece + shift, first + n) for n, k in enumerate(plated) for piece in met[k]]
            pairs.append(np.array(found, dtype=np.intp).reshape(-1, 2))
        return np.concatenate(pairs)

    @cached_property
    def cluster(self) -> npt.NDArray[np.intp]:
        """Each piece's cluster (N,): the lowest index of the copper that hangs together with it."""
        return clusters(len(self.pieces), self.touching)

    def nodes(self) -> Mapping[str, list[int]]:
        """Return the pieces of each node, barrels left out, in order."""
        found: dict[str, list[int]] = {}
        for k, piece in enumerate(self.pieces):
            if piece.node is not None and piece.role != "barrel":
                found.setdefault(piece.node, []).append(k)
        return found

    def joints(self) -> Iterator[Joint]:
        """Yield the places where copper of two nodes meets.

        The two halves of a line or strip that is cut at its end on gnd are not a joint. Copper without a node
        is a bridge: it joins what it touches.
        """
        links: dict[int, list[int]] = {}
        for a, b in self.touching.tolist():
            one, other = self.pieces[a], self.pieces[b]
            if one.node is not None and other.node is not None:
                if one.node != other.node and not self._is_cut(one, other):
                    yield Joint(one, other, middle(one.polygon, other.polygon), self.layer_of[b])
            else:
                links.setdefault(a, []).append(b)
                links.setdefault(b, []).append(a)
        yield from self._bridges(links)

    def _is_cut(self, one: Piece, other: Piece) -> bool:
        """True for two pieces of one line, or of one strip of a pair: such are cut at their end on gnd."""
        if one.item != other.item or one.role != other.role or one.role not in ("line", "pair"):
            return False
        artwork = self.board.artwork
        pair = None if artwork is None else artwork.placement.pairs.get(one.item)
        if pair is None:
            return True
        strips = shapely.linestrings([list(path) for path in pair.paths])
        near = [int(np.argmin(shapely.distance(piece.polygon.centroid, strips))) for piece in (one, other)]
        return near[0] == near[1] and GROUND in (one.node, other.node)

    def _bridges(self, links: Mapping[int, list[int]]) -> Iterator[Joint]:
        """Yield the joints through unnamed copper; ``links`` are the neighbours over which it may lead."""
        unnamed = [k for k in sorted(links) if self.pieces[k].node is None]
        inner = [(a, b) for a in unnamed for b in links[a] if self.pieces[b].node is None]
        label = clusters(len(self.pieces), np.array(inner, dtype=np.intp).reshape(-1, 2))
        reached: dict[int, dict[str, int]] = {}
        for bridge in unnamed:
            for other in sorted(links[bridge]):
                if (node := self.pieces[other].node) is not None:
                    reached.setdefault(int(label[bridge]), {}).setdefault(node, other)
        for group, ends in reached.items():
            copper = shapely.union_all([self.pieces[k].polygon for k in unnamed if label[k] == group])
            first, *rest = ends.values()
            for other in rest:
                one, two = self.pieces[first], self.pieces[other]
                at = middle(copper.intersection(one.polygon), copper.intersection(two.polygon))
                yield Joint(one, two, at, self.layer_of[unnamed[0]])

    def nearest(self, one: list[int], other: list[int]) -> tuple[Piece, Piece, Point, float]:
        """Return the nearest pieces of two lists, the middle between them [nm] and their distance [nm]."""
        polygons = np.array([self.pieces[k].polygon for k in other], dtype=object)
        tree = shapely.STRtree(polygons)
        mine = np.array([self.pieces[k].polygon for k in one], dtype=object)
        (i, j), distance = tree.query_nearest(mine, all_matches=False, return_distance=True)
        best = int(np.lexsort((j, i, distance))[0])
        a, b = self.pieces[one[i[best]]], self.pieces[other[j[best]]]
        return a, b, middle(a.polygon, b.polygon), float(distance[best])

    def centre(self, members: list[int]) -> Point:
        """Return a point on the largest of some pieces [nm]."""
        largest = max(members, key=lambda k: (self.pieces[k].polygon.area, -k))
        spot = self.pieces[largest].polygon.representative_point()
        return whole(spot.x, spot.y)
