"""What holds the difference that lengths cannot remove: each cause made ideal in turn, lengths fitted anew.

In: a :class:`Match`. Out: for each element, together with its mirror images, how large the difference would
be without what it adds: a junction its susceptance and strips, a part its pads, the gap under it and its
vias, a grounded line its vias, a coupled pair the unequal speeds of its modes.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import reduce

import numpy as np

from layoutgen.response.copper import Copper, Piece
from layoutgen.response.fit import fitted, largest
from layoutgen.response.match import Match
from layoutgen.response.mirror import grouped, mirror_images
from layoutgen.response.network import GROUND
from layoutgen.response.records import CLOSE_ENOUGH, Holder

__all__ = ["MANY_PORTS", "holders", "reachable"]

_NAMED = 3  # elements named
_HELPS = 0.9  # a cause counts when the difference falls below this share without it [-]
_MOST_PORTS = 40
MANY_PORTS = 12
"""With more ports only kinds of cause are looked into, with more than 40 none: each takes its own fit."""
_REACH = 1.0  # changes of length that are tried [rad]


def reachable(match: Match) -> float:
    """Return the largest difference [-] that the best lengths would leave, whatever their bounds."""
    most = np.full(len(match.groups), _REACH)
    return largest(match.difference(fitted(match, -most, most)[None]))


def holders(match: Match, best: float) -> tuple[Holder, ...]:
    """Return what holds the difference that no lengths remove, the strongest first, at most four.

    Without each, the largest difference in the band would be the holder's ``without`` [-]. When no element
    with its mirror images holds it alone, the strongest kind of cause is named last, with all its elements.
    Each takes a fit of its own: with more than 12 ports only the kinds are tried, with more than 40 nothing.

    Args:
        match: As drawn against wanted.
        best: What the best lengths leave of the drawing as it is [-].
    """
    causes, ports = _causes(match), match.wanted.shape[-1]
    if ports > _MOST_PORTS:
        return ()
    found = _helping(match, causes, _HELPS * best)[:_NAMED] if ports <= MANY_PORTS else []
    if found and found[0].without <= CLOSE_ENOUGH:
        return tuple(found)
    limit = _HELPS * (found[0].without if found else best)
    return (*found, *_helping(match, _kinds(causes), limit)[:1])


def _helping(match: Match, causes: Iterable[_Cause], limit: float) -> list[Holder]:
    """Return the causes without which less than a limit [-] would be left, the strongest first."""
    found = []
    for cause in causes:
        left = reachable(match.with_copper(cause.removed(match.copper)))
        if left < limit:
            first, *alike = cause.names
            found.append(Holder(element=first, what=cause.what, without=left, alike=tuple(alike)))
    return sorted(found, key=lambda holder: holder.without)


@dataclass(frozen=True, slots=True)
class _Cause:
    """What elements add, and how the copper is without that: a function of copper and an element."""

    kind: str
    names: tuple[str, ...]
    what: str
    without: Callable[[Copper, str], Copper]

    def removed(self, copper: Copper) -> Copper:
        """Return the copper without what all the elements add."""
        return reduce(self.without, self.names, copper)


def _causes(match: Match) -> list[_Cause]:
    """Return what may hold a difference, elements that are mirror images together."""
    elements, nets = mirror_images(match.artwork.placement.sized.circuit.file)
    found = [
        *_junction_causes(match.copper, nets),
        *_land_causes(match.copper, elements),
        *_foot_causes(match.copper, elements),
    ]
    pairs = grouped([pair.line for pair in match.copper.pairs], elements)
    what = "the unequal speeds of its modes"
    return [*found, *(_Cause("pair", names, what, _with_equal_modes) for names in pairs)]


def _kinds(causes: Iterable[_Cause]) -> Iterator[_Cause]:
    """Yield the causes of each kind joined, where there are several."""
    by_kind: dict[str, list[_Cause]] = {}
    for cause in causes:
        by_kind.setdefault(cause.kind, []).append(cause)
    for held in by_kind.values():
        if len(held) > 1:
            names = tuple(name for cause in held for name in cause.names)
            longest = max(held, key=lambda cause: len(cause.what))
            yield replace(longest, names=names)


def _junction_causes(copper: Copper, nets: Mapping[str, int]) -> Iterator[_Cause]:
    """Yield the nets whose junctions have a susceptance, or strips."""
    for names in grouped(dict.fromkeys(joint.net for joint in copper.joints), nets):
        busy = any(len(joint.arms) > 2 for joint in copper.joints if joint.net == names[0])
        what = ["the junction's susceptance"] * busy + ["its strips"] * bool(_strips(copper, names[0]))
        if what:
            yield _Cause("junction", names, " and ".join(what), _without_junctions)


def _land_causes(copper: Copper, elements: Mapping[str, int]) -> Iterator[_Cause]:
    """Yield the parts with what their lands add: pads, gap and vias."""
    parts = dict.fromkeys(key.partition(".")[0] for key in copper.terminals)
    for names in grouped(parts, elements):
        part = names[0]
        has_gap = part in copper.gaps
        has_vias = any(post.node in _feet(copper, part) for post in copper.posts)
        if has_gap or has_vias or _pads(copper, part):
            what = "its pads" + ", the gap under it" * has_gap + ", its ground vias" * has_vias
            yield _Cause("part", names, what, _without_lands)


def _foot_causes(copper: Copper, elements: Mapping[str, int]) -> Iterator[_Cause]:
    """Yield the lines and pairs that end on ground vias."""
    grounded = {post.node for post in copper.posts}
    lines = [piece.line for piece in copper.pieces if piece.line] + [pair.line for pair in copper.pairs]
    for names in grouped(dict.fromkeys(lines), elements):
        if _line_feet(names[0]) & grounded:
            yield _Cause("foot", names, "its ground vias", _without_line_feet)


def _strips(copper: Copper, net: str) -> set[int]:
    """Return the numbers of the pieces that are strips of a net."""
    nodes = {joint.node for joint in copper.joints if joint.net == net}
    return {
        number
        for number, piece in enumerate(copper.pieces)
        if piece.near in nodes and piece.far in nodes and not piece.line
    }


def _without_junctions(copper: Copper, net: str) -> Copper:
    """Return the copper with a net's junctions without susceptance and its strips without length."""
    strips = _strips(copper, net)
    pieces = tuple(replace(p, length=0.0) if k in strips else p for k, p in enumerate(copper.pieces))
    joints = tuple(replace(joint, lump=False) if joint.net == net else joint for joint in copper.joints)
    return replace(copper, pieces=pieces, joints=joints)


def _pads(copper: Copper, part: str) -> set[int]:
    """Return the numbers of the pieces that are pads of a part."""
    ends = {node for key, node in copper.terminals.items() if key.partition(".")[0] == part}
    return {
        number
        for number, piece in enumerate(copper.pieces)
        if not piece.line and ends & {piece.near, piece.far}
    }


def _feet(copper: Copper, part: str) -> set[str]:
    """Return the nodes at which a part's pads may end on ground vias."""
    return {f"foot of {key}" for key in copper.terminals if key.partition(".")[0] == part}


def _without_lands(copper: Copper, part: str) -> Copper:
    """Return the copper without what a part's lands add: pads, gap and vias."""
    pads = _pads(copper, part)
    pieces = tuple(_without_pad(copper, k, p) if k in pads else p for k, p in enumerate(copper.pieces))
    gaps = {name: gap for name, gap in copper.gaps.items() if name != part}
    return replace(_grounded(copper, _feet(copper, part)), pieces=pieces, gaps=gaps)


def _without_pad(copper: Copper, number: int, piece: Piece) -> Piece:
    """Return a pad's piece as wide as the line that carries it, or without length where it is an arm."""
    joint = next((j for j in copper.joints if any(arm.piece == number for arm in j.arms)), None)
    others = [] if joint is None else [copper.pieces[a.piece] for a in joint.arms if a.piece != number]
    if len(others) == 1 and others[0].line:
        return replace(piece, width=others[0].width, gaps=others[0].gaps)
    return replace(piece, length=0.0)


def _line_feet(line: str) -> set[str]:
    """Return the nodes at which a line or pair may end on ground vias."""
    return {f"foot {end} of {line}" for end in range(4)}


def _without_line_feet(copper: Copper, line: str) -> Copper:
    """Return the copper with a line's ground vias replaced by perfect ground."""
    return _grounded(copper, _line_feet(line))


def _with_equal_modes(copper: Copper, line: str) -> Copper:
    """Return the copper with equal speeds of a pair's modes."""
    pairs = tuple(replace(pair, equal_modes=True) if pair.line == line else pair for pair in copper.pairs)
    return replace(copper, pairs=pairs)


def _grounded(copper: Copper, feet: set[str]) -> Copper:
    """Return the copper with some posts replaced by perfect ground."""
    posts = tuple(post for post in copper.posts if post.node not in feet)
    ties = (*copper.ties, *((post.node, GROUND) for post in copper.posts if post.node in feet))
    return replace(copper, posts=posts, ties=ties)
