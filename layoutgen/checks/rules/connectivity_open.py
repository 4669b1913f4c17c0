"""Every net of the circuit hangs together.

What: all copper of a net (of nets that lines join, of gnd) is one piece, and so is each line's own; there is
copper all along each line, strip of a pair and radial stub, under the whole of each pad and at each port.
Why: what is not joined does not work.
How measured: from finished polygons and plated holes alone; touching is joining, also through other copper.
Pads, ports, the centre-lines of lines and of pairs' strips and three rays through each radial stub are looked
for at their places, so that copper left out is found; a micrometre may be missing, what the mitre of a bend
cuts off, and what an unplated hole takes away. A line cut through is found also where its halves hang
together another way round, as in a ring; copper that touches both halves joins them. An end of a line or
strip on gnd must meet copper on gnd that hangs on the ground plane by a plated hole, and not by way of the
line itself. Pour that hangs on nothing is ``connectivity.floating``. The place is the middle of the shortest
way between the pieces, or of what lies bare.
Source: the circuit file.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.connections import Connections
from layoutgen.checks.netgraph import clusters
from layoutgen.checks.nodes import GROUND, ground_end
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import whole
from layoutgen.checks.wanted import bare_places
from layoutgen.geometry import Point

__all__ = ["RULE"]

NAME = "connectivity.open"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each net in pieces and for each place without copper."""
    if board.artwork is None:
        return
    joined, broken = Connections(board), list[Hit]()
    for found in (_broken, _parted, _missing, _ungrounded):
        told = {item for hit in broken for item in hit.items}
        broken += [hit for hit in found(joined, board.artwork) if not told.intersection(hit.items)]
    yield from broken


def _broken(joined: Connections, _: Artwork) -> Iterator[Hit]:
    """Yield a hit for each piece of a net that does not hang together with the rest of it."""
    for members in joined.nodes().values():
        groups: dict[int, list[int]] = {}
        for k in members:
            groups.setdefault(int(joined.cluster[k]), []).append(k)
        largest = max(groups.values(), key=lambda g: (len(g), sum(joined.pieces[k].polygon.area for k in g)))
        for group in groups.values():
            if group is largest or all(joined.pieces[k].role == "pour" for k in group):
                continue
            a, b, at, distance = joined.nearest(group, largest)
            where = f"{mm(distance)} apart" if distance > 0.0 else "one above the other"
            yield Hit(
                rule=NAME,
                text=f"{a.item} and {b.item} of net {a.net} are not joined, {where}",
                items=named(a.item, b.item),
                at=at,
                measured=distance / 1e6,
                limit=0.0,
                unit="mm",
                nets=named(a.net or "", b.net or ""),
            )


def _parted(joined: Connections, _: Artwork) -> Iterator[Hit]:
    """Yield a hit for each line whose own copper is in pieces that no other copper bridges."""
    own: dict[tuple[str, str], list[int]] = {}
    for k, piece in enumerate(joined.board.top.pieces):
        if piece.role == "line" and piece.node is not None:
            own.setdefault((piece.item, piece.node), []).append(k)
    several = {key: members for key, members in own.items() if len(members) > 1}
    if not several:
        return
    touching = joined.board.top.touching
    for members in several.values():
        one, other = _halves(members, touching)
        if other:
            a, b, at, distance = joined.nearest(other, one)
            yield Hit(
                rule=NAME,
                text=f"{a.item} is cut through, {mm(distance)} wide",
                items=(a.item,),
                at=at,
                measured=distance / 1e6,
                limit=0.0,
                unit="mm",
                nets=named(a.net or "", b.net or ""),
            )


def _halves(members: list[int], touching: npt.NDArray[np.intp]) -> tuple[list[int], list[int]]:
    """Return the pieces that hang together with the first, and the others; one piece may lie between."""
    near = touching[np.isin(touching, members).any(axis=1)]
    known = {k: n for n, k in enumerate(dict.fromkeys([*members, *near.ravel().tolist()]))}
    pairs = np.array([(known[a], known[b]) for a, b in near.tolist()], dtype=np.intp).reshape(-1, 2)
    label = clusters(len(known), pairs)
    first = [k for k in members if label[known[k]] == label[known[members[0]]]]
    return first, [k for k in members if k not in first]


def _missing(joined: Connections, artwork: Artwork) -> Iterator[Hit]:
    """Yield a hit for each pad, port, line, strip and stub that lies bare of copper somewhere."""
    for (item, net, place), bare in bare_places(joined.board, artwork):
        largest = max(shapely.get_parts(bare), key=lambda part: (part.area, part.length))
        if bare.area > 0.0:
            size, unit, spot = bare.area / 1e12, "mm^2", largest.representative_point()
        else:
            size, unit, spot = bare.length / 1e6, "mm", largest.interpolate(0.5, normalized=True)
        what = item if bare.equals(place) else f"{size:.4f} {unit} of {item}"
        yield Hit(
            rule=NAME,
            text=f"no copper for {what}",
            items=(item,),
            at=whole(spot.x, spot.y),
            measured=size,
            limit=0.0,
            unit=unit,
            nets=named(net),
        )


def _ungrounded(joined: Connections, artwork: Artwork) -> Iterator[Hit]:
    """Yield a hit for each end of a line or strip on gnd that meets no copper leading to the ground plane."""
    ends = list(_ground_ends(artwork))
    if not ends:
        return
    pieces, grounded = joined.pieces, _grounded(joined)
    tree = shapely.STRtree(np.array([pieces[k].polygon for k in grounded], dtype=object))
    for item, at, width in ends:
        near = shapely.Point(at).buffer(width)
        own = [p.polygon for p in joined.board.top.pieces if p.item == item and p.role in ("line", "pair")]
        end = shapely.union_all([polygon.intersection(near) for polygon in own if polygon.intersects(near)])
        if not len(tree.query(end, predicate="intersects")):
            text = f"the end of {item} on {GROUND} has no way to the ground plane"
            yield Hit(rule=NAME, text=text, items=(item,), at=at, nets=(GROUND,))


def _grounded(joined: Connections) -> list[int]:
    """Return the top's copper on gnd (no lines or strips) and the barrels that hang on the ground plane."""
    pieces, top = joined.pieces, len(joined.board.top.pieces)
    on_gnd = np.array([p.node == GROUND and p.role not in ("line", "pair") for p in pieces], dtype=bool)
    label = clusters(len(pieces), joined.touching[on_gnd[joined.touching].all(axis=1)])
    plane = {int(label[k]) for k in range(top, top + len(joined.board.bottom.pieces)) if on_gnd[k]}
    above = [k for k in range(len(pieces)) if joined.layer_of[k] != "copper_bottom"]
    return [k for k in above if on_gnd[k] and int(label[k]) in plane]


def _ground_ends(artwork: Artwork) -> Iterator[tuple[str, Point, int]]:
    """Yield the ends of lines and strips on gnd: element, point and width [nm]."""
    for line in artwork.placement.lines.values():
        if (end := ground_end(line.nets)) is not None:
            yield line.name, line.path[-end], line.width
    for pair in artwork.placement.pairs.values():
        for index, net in enumerate(pair.nets):
            if net == GROUND:
                yield pair.name, pair.paths[index // 2][-(index % 2)], pair.width


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
