"""What the placement stage hands on: poses and centre-lines in whole nanometres."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import dataclass

from layoutgen.geometry import Point, Ring
from layoutgen.origin import Origin
from layoutgen.sizing import BudgetEntry, SizedCircuit

__all__ = [
    "Bend",
    "Choice",
    "Choices",
    "PlacedHole",
    "PlacedLine",
    "PlacedPad",
    "PlacedPair",
    "PlacedPart",
    "PlacedPort",
    "PlacedRadial",
    "PlacedVia",
    "Placement",
    "Strip",
]


@dataclass(frozen=True, slots=True)
class Bend:
    """A bend: index of its vertex in the path, turn [deg, counter-clockwise positive], mitre drawn [%]."""

    vertex: int
    turn: float
    mitre_percent: float


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedLine:
    """A line's centre-line: vertices [nm] with sharp corners, from the node of nets[0] to that of nets[1].

    ``centre_line`` [nm] is the length through the sharp corners (float: a sum of whole-nanometre legs, or
    of diagonals); ``budget`` adds up to ``angle`` [rad]. The copper is the stroke along the path with
    square ends, cut back by the artwork stage to the edge distance from cut-outs.
    """

    name: str
    nets: tuple[str, ...]
    width: int
    path: tuple[Point, ...]
    bends: tuple[Bend, ...]
    centre_line: float
    budget: tuple[BudgetEntry, ...]
    angle: float
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPair:
    """A coupled pair: two straight centre-lines [nm] of one width, gap [nm] between their edges."""

    name: str
    nets: tuple[str, ...]
    width: int
    gap: int
    paths: tuple[tuple[Point, ...], tuple[Point, ...]]
    centre_line: float
    budget: tuple[BudgetEntry, ...]
    angle: float
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedRadial:
    """A radial stub: apex [nm] on the host's centre-line, heading [deg] of its axis, sector, radii [nm]."""

    name: str
    nets: tuple[str, ...]
    apex: Point
    heading: float
    sector_deg: float
    inner_radius: int
    outer_radius: int
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPad:
    """A pad: its outline [nm], middle [nm], outgoing heading [deg]; ``ground`` as in the footprint."""

    pin: str
    net: str
    x: int
    y: int
    outline: Ring
    heading: float
    ground: str | None = None
    thermal: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPart:
    """A part: middle between its pads or footprint origin [nm], heading [deg], pads, outlines, cut-out."""

    name: str
    x: int
    y: int
    heading: float
    pads: tuple[PlacedPad, ...]
    outline: Ring
    courtyard: Ring
    cutout: Ring | None
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPort:
    """A port: the end of its copper [nm], heading [deg] into the board, its edge, its copper's width."""

    name: str
    net: str
    x: int
    y: int
    heading: float
    edge: str
    width: int
    to_edge: bool
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class Strip:
    """Copper that no line of the circuit stands for: between pads of a net, or a bank's common strip."""

    name: str
    net: str
    width: int
    path: tuple[Point, ...]
    current: float
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedVia:
    """A via of a part or a line, placed with it: axis [nm], drill and land diameters [nm]."""

    x: int
    y: int
    drill: int
    land: int
    net: str
    purpose: str  # part:C1, line:x
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedHole:
    """A drilled hole that is no via: middle and diameter [nm]."""

    x: int
    y: int
    diameter: int
    plated: bool
    origin: Origin


@dataclass(frozen=True, slots=True)
class Choice:
    """How one element was laid: turn off its node [deg], side of banks or pairs, word, legs [nm].

    ``plan`` is the drawing of a loop cluster, laid as it is (``side`` 1) or mirrored (-1); ``heading`` is
    that of the traveller who arrived at the node [deg].
    """

    turn: float
    side: int
    word: tuple[float, ...] = ()
    legs: tuple[int, ...] = ()
    edge: str | None = None
    plan: Hashable = None
    heading: float = 0.0

    @property
    def shape(self) -> tuple[object, ...]:
        """What stays the same when only lengths change."""
        return self.turn, self.side, self.word, self.edge, self.plan

    @property
    def mirrored(self) -> tuple[float, int, tuple[float, ...]]:
        """The shape of the mirror image, for lines and what hangs on them; edges follow from the words."""
        return -self.turn, -self.side, tuple(-turn for turn in self.word)


@dataclass(frozen=True, slots=True)
class Choices:
    """What the search decided, so that a drawing with slightly other lengths can be made the same way.

    ``wide`` tells whether loops were drawn with the transistors and free lines on them; ``longer`` how much
    longer the strips of chains are than their arms ask, in widths of the spacing rule [-], and ``combed``
    whether the lines that leave them sideways are straight; ``heights`` how far lines kept apart [substrate
    heights] where that is not what the rule file asks, and ``spine_to`` the port to which the straight path
    leads where it is not the one that follows from the circuit.
    """

    effort: int
    start: int
    ways: Mapping[str, Choice]
    wide: bool = False
    longer: float = 0.0
    combed: bool = False
    heights: float | None = None
    spine_to: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Placement:
    """Everything that has a place. Board from (0, 0) to (width, height) [nm], corners rounded.

    ``ground_shapes`` are copper pieces on ground that belong to parts or lines (between a ground pad and
    its vias); ``notes`` are assumptions for the findings list: (rule, element, text); ``choices`` is what
    the search decided.
    """

    sized: SizedCircuit
    width: int
    height: int
    corner_radius: int
    lines: Mapping[str, PlacedLine]
    pairs: Mapping[str, PlacedPair]
    radials: Mapping[str, PlacedRadial]
    parts: Mapping[str, PlacedPart]
    ports: Mapping[str, PlacedPort]
    strips: tuple[Strip, ...]
    vias: tuple[PlacedVia, ...]
    holes: tuple[PlacedHole, ...]
    ground_shapes: tuple[tuple[Ring, Origin], ...]
    notes: tuple[tuple[str, str, str], ...]
    choices: Choices | None = None
