"""Parts as rigid bodies in their own frame: pads, ground vias, and what they need around them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from layoutgen.circuit import End
from layoutgen.geometry import Point
from layoutgen.placement.frame import Box, Pose, ahead, box_to_world, grown, to_world, unit
from layoutgen.sizing import Land, Lands
from layoutgen.units import to_nm

if TYPE_CHECKING:
    from layoutgen.placement.model import Limits

__all__ = [
    "BESIDE_OPENING",
    "CLEAR",
    "OVERLAP",
    "BodyHole",
    "BodyLand",
    "Bond",
    "PartBody",
    "beyond",
    "clear_of",
    "ground_copper",
    "part_body",
]

OVERLAP = 10_000
"""How far [nm] pieces of one net that meet edge to edge are pushed into each other."""

CLEAR = 200_000
"""What copper of two nets keeps at a part's pads at least [nm]: common practice, no source."""

BESIDE_OPENING = 50_000
"""Between a pad's mask opening and the land of a via [nm]: common practice, no source."""

_GROUND = "gnd"
_BODY_EXCESS = 250_000  # around a flange body [nm]; common practice, no source


@dataclass(frozen=True, slots=True)
class BodyLand:
    """A pad in its part's frame [nm]: middle, size, outgoing heading [deg], net and ground kind."""

    pin: str
    net: str
    x: int
    y: int
    box: Box
    heading: float
    ground: str | None
    thermal: float | None

    @property
    def has_copper(self) -> bool:
        """False for a pin that meets the carrier only."""
        return self.box[2] > self.box[0] and self.box[3] > self.box[1]

    @property
    def along(self) -> int:
        """Size [nm] along the outgoing heading."""
        return self._size(0)

    @property
    def across(self) -> int:
        """Size [nm] across the outgoing heading."""
        return self._size(1)

    def _size(self, axis: int) -> int:
        east_west = abs(unit(self.heading)[0]) > 0.5
        first = axis if east_west else 1 - axis
        return self.box[2 + first] - self.box[first]

    @property
    def outer(self) -> Pose:
        """Middle of the edge where lines leave, heading outward, in the part's frame."""
        return ahead(Pose(self.x, self.y, self.heading), self.along / 2)

    @property
    def inner(self) -> Pose:
        """Middle of the opposite edge, heading outward (over the pad), in the part's frame."""
        return ahead(Pose(self.x, self.y, self.heading), -self.along / 2)


@dataclass(frozen=True, slots=True)
class BodyHole:
    """A drilled hole of a footprint [nm]."""

    x: int
    y: int
    diameter: int
    plated: bool


@dataclass(frozen=True, slots=True)
class Bond:
    """A strip that joins two pads of one part on one net: net, width and path in the part's frame [nm]."""

    net: str
    width: int
    path: tuple[Point, ...]


@dataclass(frozen=True, slots=True)
class PartBody:
    """A part in its own frame [nm]: pads, vias of ground pads, ground copper, outlines, cut-out, holes.

    ``bonds`` join pads that are one conductor, and ``leads`` stand in place of those that a bar across joins;
    ``nodes`` say for pins how far beyond the pad's outer edge lies the node of what meets it there.
    """

    name: str
    lands: tuple[BodyLand, ...]
    vias: tuple[tuple[int, int], ...]
    grounds: tuple[Box, ...]
    outline: Box
    courtyard: Box
    cutout: Box | None
    holes: tuple[BodyHole, ...]
    bonds: tuple[Bond, ...] = ()
    leads: tuple[BodyLand, ...] = ()
    nodes: tuple[tuple[str, int], ...] = ()

    @property
    def solid(self) -> tuple[Box, ...]:
        """Where nothing else may stand: the courtyard, or for a flange package the body over its cut-out.

        A flange package's tabs reach far out of its body, and a feed may pass beside them.
        """
        return (self.courtyard,) if self.cutout is None else (grown(self.cutout, _BODY_EXCESS),)

    def land_at(self, end: End) -> BodyLand:
        """Return the pad at one end of the part."""
        return self.land(end.pin) if end.pin else self.lands[end.index]

    def land(self, pin: str) -> BodyLand:
        """Return the pad of a pin, or what stands in place of several."""
        return next(land for land in (*self.leads, *self.lands) if land.pin == pin)

    def is_joined(self, land: BodyLand) -> bool:
        """True for what stands in place of several pads that a bar across joins."""
        return land in self.leads

    def node_of(self, land: BodyLand) -> int:
        """Return how far beyond a pad's outer edge the node of what meets it lies [nm]; negative: on it."""
        return next((node for pin, node in self.nodes if pin == land.pin), -land.along)

    def is_apart(self, land: BodyLand) -> bool:
        """True for a pad that is an arm of its node, and not part of the line that meets it."""
        return self.node_of(land) != -land.along

    def free_from(self, land: BodyLand, half: float, gap: int) -> int:
        """Return how far beyond a pad's outer edge copper of a half width is clear of its neighbours [nm].

        0 where none of them is in its way; an infinite half width stands for copper to both sides.
        """
        room = max(gap, CLEAR) + OVERLAP
        boxes = (box for box in self.copper_ahead(land) if box[2] > -room)
        in_way = [box[2] for box in boxes if max(box[1], -box[3]) < half + room]
        return max(0, max(in_way)) + room if in_way else 0

    def has_row_on_one_side(self, land: BodyLand) -> bool:
        """True when a pad's neighbours stand to one side of its way out only."""
        boxes = [box for box in self.copper_ahead(land) if box[2] > -CLEAR]
        return len({box[1] + box[3] > 0 for box in boxes}) < 2

    def copper_ahead(self, land: BodyLand) -> list[Box]:
        """Return the copper of the part's other nets as seen from a pad's outer edge, heading out [nm]."""
        others = [other.box for other in self.lands if other.net != land.net and other.has_copper]
        return [self.seen_ahead(land, box) for box in (*others, *self.grounds)]

    def seen_ahead(self, land: BodyLand, box: Box) -> Box:
        """Return a box of the part as seen from a pad's outer edge, heading out [nm]."""
        return _seen_from(land.outer, box)

    def entered_by(self, land: BodyLand, at: Pose, *, edge: str) -> Pose:
        """Return the part's pose when a traveller with pose ``at`` meets one edge of a pad.

        Args:
            land: The pad that is met; its outgoing heading will point back along the traveller's path.
            at: Where the traveller stands and where it is heading.
            edge: ``inner`` or ``outer``: which edge of the pad lies at ``at``.
        """
        heading = (at.heading + 180.0 - land.heading) % 360.0
        point = land.inner if edge == "inner" else land.outer
        ux, uy = unit(heading)
        dx, dy = point.x * ux - point.y * uy, point.x * uy + point.y * ux
        return Pose(round(at.x - dx), round(at.y - dy), heading)

    def extent(self, pose: Pose) -> Box:
        """Return the box around courtyard and ground copper at a pose."""
        boxes = [box_to_world(pose, box) for box in (self.courtyard, *self.grounds)]
        return (
            min(b[0] for b in boxes),
            min(b[1] for b in boxes),
            max(b[2] for b in boxes),
            max(b[3] for b in boxes),
        )


def _seen_from(frame: Pose, box: Box) -> Box:
    """Return a box of a part's frame in the frame of a pose there, whose heading is a quarter turn."""
    moved = (box[0] - frame.x, box[1] - frame.y, box[2] - frame.x, box[3] - frame.y)
    return box_to_world(Pose(0, 0, -frame.heading % 360.0), moved)


def clear_of(a: Box, b: Box, gap: int) -> bool:
    """True when two boxes are at least a gap [nm] apart."""
    dx, dy = max(a[0] - b[2], b[0] - a[2], 0), max(a[1] - b[3], b[1] - a[3], 0)
    return dx * dx + dy * dy >= gap * gap


def beyond(body: PartBody, land: BodyLand) -> int:
    """Return how far the courtyard reaches beyond a pad's outer edge [nm]."""
    turned = Pose(0, 0, -land.heading % 360.0)
    courtyard = box_to_world(turned, body.courtyard)
    edge = to_world(turned, land.outer.x, land.outer.y)[0]
    return max(0, courtyard[2] - edge)


def part_body(lands: Lands, limits: Limits) -> PartBody:
    """Return the rigid body of a part, with the ground vias its pads on gnd need."""
    pads = tuple(_body_land(land) for land in lands.pads)
    vias, grounds = list[Point](), list[Box]()
    for land in pads:
        found, box = ground_copper(land, limits)
        vias.extend(found)
        grounds.extend(box)
    return PartBody(
        name=lands.part,
        lands=pads,
        vias=tuple(vias),
        grounds=tuple(grounds),
        outline=_box_nm(lands.outline),
        courtyard=_box_nm(lands.courtyard),
        cutout=None if lands.cutout is None else _box_nm(lands.cutout),
        holes=tuple(BodyHole(to_nm(x), to_nm(y), to_nm(d), plated) for x, y, d, plated in lands.holes),
    )


def _box_nm(box: tuple[float, float, float, float]) -> Box:
    return to_nm(box[0]), to_nm(box[1]), to_nm(box[2]), to_nm(box[3])


def _body_land(land: Land) -> BodyLand:
    x, y = to_nm(land.x), to_nm(land.y)
    half_w, half_h = to_nm(land.width / 2), to_nm(land.height / 2)
    return BodyLand(
        pin=land.pin,
        net=land.net,
        x=x,
        y=y,
        box=(x - half_w, y - half_h, x + half_w, y + half_h),
        heading=land.heading % 360.0,
        ground=land.ground,
        thermal=land.thermal,
    )


def ground_copper(land: BodyLand, limits: Limits) -> tuple[list[Point], list[Box]]:
    """Return the vias that a pad on gnd needs, and the copper that joins them to it; nothing for others."""
    if land.net != _GROUND or land.ground == "flange" or not land.has_copper:
        return [], []
    return _thermal_vias(land, limits) if land.ground == "vias" else _row_of_vias(land, limits)


def _row_of_vias(land: BodyLand, limits: Limits) -> tuple[list[Point], list[Box]]:
    """Return a row of vias just outside a ground pad's mask opening, and the copper that joins them."""
    count = limits.ground_vias
    outward = limits.expansion + limits.land // 2 + BESIDE_OPENING
    span = (count - 1) * limits.pitch
    row = [ahead(land.outer, outward, round(-span / 2 + k * limits.pitch)).point for k in range(count)]
    half = max(land.across // 2, span // 2 + limits.land // 2)
    frame = Pose(land.outer.x, land.outer.y, land.heading)
    box = box_to_world(frame, (-OVERLAP, -half, outward + limits.land // 2, half))
    return row, [box]


def _thermal_vias(land: BodyLand, limits: Limits) -> tuple[list[Point], list[Box]]:
    """Return the grid of vias that fits under an exposed pad, lands inside it."""
    x0, y0, x1, y1 = land.box
    columns = _grid(x0, x1, limits)
    rows = _grid(y0, y1, limits)
    return [(x, y) for y in rows for x in columns], []


def _grid(low: int, high: int, limits: Limits) -> list[int]:
    """Return evenly spaced positions so that lands stay inside an interval; the middle if none fits twice."""
    room = high - low - limits.land
    count = max(0, room) // limits.pitch + 1
    middle = (low + high) // 2
    return [middle + round((k - (count - 1) / 2) * limits.pitch) for k in range(count)]
