"""What junctions, bends, open ends and ground vias are worth at every frequency, from the shapes as drawn.

In: a joint or a piece of the traced copper, and the medium. Out: changes of length [m] of the pieces that
meet, and what is lumped: a susceptance [S], an impedance [ohm]. The models are those the length budgets are
made with; here they get every arm that was drawn, and what a budget cannot hold: the susceptance.
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layoutgen.formulas.bends import bend_excess, douville_james_1978_mitre
from layoutgen.formulas.ends import open_end
from layoutgen.formulas.steps import step
from layoutgen.formulas.tees import cross, tee
from layoutgen.formulas.vias import goldfarb_pucel_1991, via_inductance, via_resistance
from layoutgen.response.chain import ComplexArray, FloatArray
from layoutgen.response.copper import Joint, JointArm, Piece, Post
from layoutgen.response.medium import Medium
from layoutgen.sizing import Arm, cross_order, tee_order

__all__ = ["JunctionEffect", "junction_effect", "own_change", "post_impedance"]

_COLLINEAR_DEG = 1.0
_MOST_ARMS = 4
_NODES = 5


@dataclass(frozen=True, slots=True, eq=False)
class JunctionEffect:
    """What a joint adds: to the lengths of pieces by number [m], and a shunt susceptance [S] or None."""

    changes: tuple[tuple[int, FloatArray], ...] = ()
    susceptance: FloatArray | None = None


def junction_effect(joint: Joint, medium: Medium) -> JunctionEffect:
    """Return what the model of a joint adds to its arms.

    Two arms in one direction make a step, two at an angle a bend of which each gets half; three a tee, four
    a cross. One arm, or more than four, is left as it is.
    """
    arms = joint.arms
    if len(arms) == 2:
        turn = 180.0 - _between(arms[0].heading, arms[1].heading)
        return _step(arms, medium) if turn <= _COLLINEAR_DEG else _corner(arms, medium, turn)
    if len(arms) not in (3, _MOST_ARMS):
        return JunctionEffect()
    stand_ins = [Arm(str(i), i, arm.heading, arm.width, arm.is_line) for i, arm in enumerate(arms)]
    order = tee_order(stand_ins) if len(arms) == 3 else cross_order(stand_ins)
    ordered = [arms[arm.index] for arm in order]
    planes, susceptance = _over_frequency([medium.u(arm.width) for arm in ordered], medium)
    changes = tuple((arm.piece, -d * medium.height) for arm, d in zip(ordered, planes, strict=True))
    return JunctionEffect(changes, susceptance if joint.lump else None)


def _over_frequency(
    u: Sequence[float | FloatArray], medium: Medium
) -> tuple[tuple[FloatArray, ...], FloatArray]:
    """Return planes [-] and susceptance [S] of a tee or cross of widths over h [-], at all frequencies.

    For samples of a tolerance analysis they are worked out at five frequencies; the polynomial through
    those gives the others.
    """
    f = medium.frequencies
    if len(medium.shape) == 1 or f.size <= _NODES:
        return _planes(u, medium, medium.fh)
    nodes = np.linspace(np.min(f), np.max(f), _NODES)
    weights = np.ones((_NODES, f.size))
    for k, j in itertools.permutations(range(_NODES), 2):
        weights[k] *= (f - nodes[j]) / (nodes[k] - nodes[j])
    planes, susceptance = _planes(u, medium, nodes * medium.height)
    return tuple(plane @ weights for plane in planes), np.asarray(susceptance @ weights)


def _planes(
    u: Sequence[float | FloatArray], medium: Medium, fh: FloatArray
) -> tuple[tuple[FloatArray, ...], FloatArray]:
    """Return planes over h [-] and susceptance [S] of a tee or cross; ``fh`` is f times h [Hz m]."""
    if len(u) == 3:
        at = tee(u[0], u[1], u[2], medium.er, fh, medium.t)
        return (at.d_a, at.d_b, at.d_side), at.susceptance
    four = cross(u[0], u[1], u[2], u[3], medium.er, fh, medium.t)
    return (four.d_w, four.d_e, four.d_n, four.d_s), four.susceptance


def _step(arms: Sequence[JointArm], medium: Medium) -> JunctionEffect:
    """Return what a step in width adds; nothing where the widths are equal."""
    a, b = arms
    if a.width == b.width:
        return JunctionEffect()
    found = step(medium.u(a.width), medium.u(b.width), medium.er, medium.t)
    return JunctionEffect(((a.piece, found.d_1 * medium.height), (b.piece, found.d_2 * medium.height)))


def _corner(arms: Sequence[JointArm], medium: Medium, turn: float) -> JunctionEffect:
    """Return what a corner adds: mitred between two lines, as drawn by the artwork, else left square."""
    mitred = all(arm.is_line for arm in arms)
    changes = []
    for arm in arms:
        u = medium.u(arm.width)
        percent = douville_james_1978_mitre(u) if mitred else 0.0
        excess = bend_excess(u, medium.er, percent, turn, medium.t).length_change
        changes.append((arm.piece, 0.5 * excess * medium.height))
    return JunctionEffect(tuple(changes))


def own_change(piece: Piece, medium: Medium) -> FloatArray:
    """Return what a piece's own bends and its open end add to its length [m]."""
    u = medium.u(piece.width)
    total = np.zeros(())
    for bend in piece.bends:
        excess = bend_excess(u, medium.er, bend.mitre_percent, abs(bend.turn), medium.t)
        total = total + excess.length_change * medium.height
    if piece.is_open:
        total = total + open_end(u, medium.er, medium.t) * medium.height + 0.5 * medium.width_change
    return total


def post_impedance(post: Post, medium: Medium) -> ComplexArray:
    """Return the impedance (B,) [ohm] of ground vias, from the plane of their axes.

    One via has the inductance of a via at the end of a strip; several share it as bare posts at their
    places do, which is more than one over their number.
    """
    one = via_inductance(post.radius, medium.height, post.width + medium.width_change)
    inductance = one * _share(post, medium)
    z = 1j * medium.omega * inductance
    if medium.lossless or medium.plating <= 0.0:
        return np.asarray(z)
    r = via_resistance(medium.frequencies, post.radius, medium.height, medium.plating, medium.conductivity)
    return np.asarray(z + r / len(post.axes))


def _share(post: Post, medium: Medium) -> FloatArray:
    """Return the inductance of the vias in parallel over that of one, as bare posts [-]."""
    axes = np.asarray(post.axes)
    apart = np.hypot(*(axes[:, None, :] - axes[None, :, :]).transpose(2, 0, 1))
    height = np.asarray(medium.height)[..., None, None]
    matrix = goldfarb_pucel_1991(np.where(apart > 0.0, apart, post.radius), height)
    currents = np.linalg.solve(matrix, np.ones((*matrix.shape[:-1], 1)))
    return np.asarray(matrix[..., 0, 0] ** -1 / currents.sum(axis=(-2, -1)))


def _between(a: float, b: float) -> float:
    """Return the angle between two headings [deg], 0 to 180."""
    return abs((a - b + 180.0) % 360.0 - 180.0)
