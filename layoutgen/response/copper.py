"""The drawn copper as a graph: lengths of line between joints, grounded posts, terminals, ports.

Records only; ``trace`` fills them from an artwork, ``drawn`` turns them into a network. Positions are in
nanometres, widths, gaps and lengths in metres. Lengths are those of centre-lines: what junctions, bends and
open ends add is not in them.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from layoutgen.placement import Bend

__all__ = ["ChipGap", "Copper", "Joint", "JointArm", "PairCopper", "Piece", "Post"]


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """A uniform length of copper between two nodes.

    ``width``, ``length`` [m]; ``gaps`` to the pour on both sides [m]; ``bends`` along it; ``is_open`` when
    its far end is an open end; ``line`` is the line whose centre-line it is, empty for pads, strips and the
    ends of pairs. A length may be negative: it moves a plane back.
    """

    near: str
    far: str
    width: float
    gaps: tuple[float, float]
    length: float
    bends: tuple[Bend, ...] = ()
    is_open: bool = False
    line: str = ""


@dataclass(frozen=True, slots=True)
class JointArm:
    """A piece as met in a joint: its number, its heading away from it [deg], width [m], line or not."""

    piece: int
    heading: float
    width: float
    is_line: bool


@dataclass(slots=True)
class Joint:
    """A point of a net where pieces end: place [nm], node, and the arms that meet there.

    ``lump`` False leaves out the susceptance of a tee or cross; what if, not what is drawn.
    """

    net: str
    node: str
    x: float
    y: float
    arms: list[JointArm] = field(default_factory=list)
    lump: bool = True


@dataclass(frozen=True, slots=True)
class Post:
    """Ground vias at the end of a piece ``width`` [m] wide: axes [m], radius with plating [m]."""

    node: str
    axes: tuple[tuple[float, float], ...]
    radius: float
    width: float


@dataclass(frozen=True, slots=True)
class PairCopper:
    """A coupled pair: its four nodes, width, gap, pour's distance and centre-line length [m], its name.

    ``equal_modes`` gives both modes the mean of their speeds; what if it were so, not what is drawn.
    """

    nodes: tuple[str, str, str, str]
    width: float
    gap: float
    pour_gap: float
    length: float
    line: str = ""
    equal_modes: bool = False


@dataclass(frozen=True, slots=True)
class ChipGap:
    """The gap between the pads of a two-pad part: its terminals' nodes, width and gap [m]."""

    nodes: tuple[str, str]
    width: float
    gap: float


@dataclass(frozen=True, slots=True)
class Copper:
    """All that carries RF, traced.

    ``terminals`` maps ``C1.0`` or ``Q1.gate`` to its node, ``ports`` a port's name to its node, ``radials``
    a radial stub's name to the node of its apex, ``gaps`` a two-pad part's name to the gap under it;
    ``ties`` are nodes of one net that no traced copper joins, and ``notes`` say so.
    """

    pieces: tuple[Piece, ...]
    joints: tuple[Joint, ...]
    posts: tuple[Post, ...]
    pairs: tuple[PairCopper, ...]
    radials: Mapping[str, str]
    terminals: Mapping[str, str]
    ports: Mapping[str, str]
    gaps: Mapping[str, ChipGap]
    ties: tuple[tuple[str, str], ...]
    notes: tuple[tuple[str, str, str], ...]
