"""What holds the difference that lengths cannot remove: each cause made ideal in turn, lengths fitted anew.

In: a :class:`Match`. Out: for each element, how large the difference would be without what it adds: a
junction its susceptance and strips, a part its pads, the gap under it and its vias, a grounded line its vias,
a coupled pair the unequal speeds of its modes. Lengths are fitted along their derivatives only, which is
enough for a comparison.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from layoutgen.response.chain import ComplexArray
from layoutgen.response.copper import Copper, Piece
from layoutgen.response.match import Match
from layoutgen.response.network import GROUND
from layoutgen.response.records import Holder

__all__ = ["holders", "reachable"]

_PRICE = 4e-3  # what a change of a radian costs, as a difference of S [-]
_NAMED = 3  # elements named
_HELPS = 0.95  # a cause counts when the difference falls below this share without it [-]


def reachable(match: Match) -> float:
    """Return the largest difference [-] that the best lengths would leave, whatever their bounds."""
    return _largest(_fitted(*match.around(np.zeros(len(match.groups)))))


def holders(match: Match) -> tuple[Holder, ...]:
    """Return what holds the difference that no lengths remove, the strongest first, at most three.

    Without each, the largest difference in the band would be the holder's ``without`` [-].
    """
    here, slope = match.around(np.zeros(len(match.groups)))
    limit = _HELPS * _largest(_fitted(here, slope))
    zero = np.zeros((1, len(match.groups)))
    found = []
    for element, what, bare in _idealised(match.copper):
        left = _largest(_fitted(match.difference(zero, bare).ravel(), slope))
        found.append(Holder(element=element, what=what, without=left))
    real = [holder for holder in found if holder.without < limit]
    return tuple(sorted(real, key=lambda holder: holder.without)[:_NAMED])


def _largest(difference: ComplexArray) -> float:
    """Return the largest magnitude [-], zero of nothing."""
    return float(np.max(np.abs(difference), initial=0.0))


def _fitted(difference: ComplexArray, slope: ComplexArray) -> ComplexArray:
    """Return what small changes of the lengths leave of a difference."""
    if not slope.shape[1]:
        return difference
    curve = (slope.conj().T @ slope).real + _PRICE**2 * difference.size * np.eye(slope.shape[1])
    x = np.linalg.solve(curve, -(slope.conj().T @ difference).real)
    return np.asarray(difference + slope @ x)


def _idealised(copper: Copper) -> Iterator[tuple[str, str, Copper]]:
    """Yield an element, what it adds, and the copper without that."""
    for net in dict.fromkeys(joint.net for joint in copper.joints):
        yield from _without_junctions(copper, net)
    for part in dict.fromkeys(key.partition(".")[0] for key in copper.terminals):
        yield from _without_lands(copper, part)
    grounded = {post.node for post in copper.posts}
    names = [piece.line for piece in copper.pieces if piece.line] + [pair.line for pair in copper.pairs]
    for line in dict.fromkeys(names):
        feet = {f"foot {end} of {line}" for end in range(4)}
        if feet & grounded:
            yield line, "its ground vias", _grounded(copper, feet)
    for pair in copper.pairs:
        equal = tuple(replace(p, equal_modes=True) if p is pair else p for p in copper.pairs)
        yield pair.line, "the unequal speeds of its modes", replace(copper, pairs=equal)


def _without_junctions(copper: Copper, net: str) -> Iterator[tuple[str, str, Copper]]:
    """Yield a net's junctions without susceptance and its strips without length."""
    nodes = {joint.node for joint in copper.joints if joint.net == net}
    strips = [
        piece for piece in copper.pieces if piece.near in nodes and piece.far in nodes and not piece.line
    ]
    busy = any(len(joint.arms) > 2 for joint in copper.joints if joint.net == net)
    if not strips and not busy:
        return
    pieces = tuple(replace(p, length=0.0) if p in strips else p for p in copper.pieces)
    joints = tuple(replace(joint, lump=False) if joint.net == net else joint for joint in copper.joints)
    what = " and ".join(["the junction's susceptance"] * busy + ["its strips"] * bool(strips))
    yield net, what, replace(copper, pieces=pieces, joints=joints)


def _without_lands(copper: Copper, part: str) -> Iterator[tuple[str, str, Copper]]:
    """Yield the copper without what a part's lands add: pads, gap and vias."""
    ends = {node for key, node in copper.terminals.items() if key.partition(".")[0] == part}
    feet = {f"foot of {key}" for key in copper.terminals if key.partition(".")[0] == part}
    pieces = tuple(
        _without_pad(copper, number, piece) if not piece.line and ends & {piece.near, piece.far} else piece
        for number, piece in enumerate(copper.pieces)
    )
    has_gap = part in copper.gaps
    has_vias = any(post.node in feet for post in copper.posts)
    if pieces == copper.pieces and not has_gap and not has_vias:
        return
    gaps = {name: gap for name, gap in copper.gaps.items() if name != part}
    bare = replace(_grounded(copper, feet), pieces=pieces, gaps=gaps)
    yield part, "its pads" + ", the gap under it" * has_gap + ", its ground vias" * has_vias, bare


def _without_pad(copper: Copper, number: int, piece: Piece) -> Piece:
    """Return a pad's piece as wide as the line that carries it, or without length where it is an arm."""
    joint = next((j for j in copper.joints if any(arm.piece == number for arm in j.arms)), None)
    others = [] if joint is None else [copper.pieces[a.piece] for a in joint.arms if a.piece != number]
    if len(others) == 1 and others[0].line:
        return replace(piece, width=others[0].width, gaps=others[0].gaps)
    return replace(piece, length=0.0)


def _grounded(copper: Copper, feet: set[str]) -> Copper:
    """Return the copper with some posts replaced by perfect ground."""
    posts = tuple(post for post in copper.posts if post.node not in feet)
    ties = (*copper.ties, *((post.node, GROUND) for post in copper.posts if post.node in feet))
    return replace(copper, posts=posts, ties=ties)
