"""Parts as rigid bodies in their own frame: pads, ground vias, and what they need around them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from layoutgen.circuit import End
from layoutgen.placement.frame import Box, Pose, ahead, box_to_world, grown, to_world, unit
from layoutgen.sizing import Land, Lands
from layoutgen.units import to_nm

if TYPE_CHECKING:
    from layoutgen.placement.model import Limits

__all__ = ["OVERLAP", "BodyHole", "BodyLand", "PartBody", "beyond", "part_body"]

OVERLAP = 10_000
"""How far [nm] pieces of one net that meet edge to edge are pushed into each other."""

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
class PartBody:
    """A part in its own frame [nm]: pads, vias of ground pads, ground copper, outlines, cut-out, holes."""

    name: str
    lands: tuple[BodyLand, ...]
    vias: tuple[tuple[int, int], ...]
    grounds: tuple[Box, ...]
    outline: Box
    courtyard: Box
    cutout: Box | None
    holes: tuple[BodyHole, ...]

    @property
    def solid(self) -> tuple[Box, ...]:
        """Where nothing else may stand: the courtyard, or for a flange package the body over its cut-out.

        A flange package's tabs reach far out of its body, and a feed may pass beside them.
        """
        return (self.courtyard,) if self.cutout is None else (grown(self.cutout, _BODY_EXCESS),)

    def land_at(self, end: End) -> BodyLand:
        """Return the pad at one end of the part."""
        if end.pin:
            return next(land for land in self.lands if land.pin == end.pin)
        return self.lands[end.index]

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


def beyond(body: PartBody, land: BodyLand) -> int:
    """Return how far the courtyard reaches beyond a pad's outer edge [nm]."""
    turned = Pose(0, 0, -land.heading % 360.0)
    courtyard = box_to_world(turned, body.courtyard)
    edge = to_world(turned, land.outer.x, land.outer.y)[0]
    return max(0, courtyard[2] - edge)


def part_body(lands: Lands, limits: Limits) -> PartBody:
    """Return the rigid body of a part, with the ground vias its pads on gnd need."""
    pads = tuple(_body_land(land) for land in lands.pads)
    vias: list[tuple[int, int]] = []
    grounds: list[Box] = []
    for land in pads:
        if land.net != _GROUND or land.ground == "flange" or not land.has_copper:
            continue
        found, box = _thermal_vias(land, limits) if land.ground == "vias" else _row_of_vias(land, limits)
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


def _row_of_vias(land: BodyLand, limits: Limits) -> tuple[list[tuple[int, int]], list[Box]]:
    """Return a row of vias just outside a ground pad's mask opening, and the copper that joins them."""
    count = limits.ground_vias
    outward = limits.expansion + limits.land // 2 + 50_000
    span = (count - 1) * limits.pitch
    row = [ahead(land.outer, outward, round(-span / 2 + k * limits.pitch)).point for k in range(count)]
    half = max(land.across // 2, span // 2 + limits.land // 2)
    frame = Pose(land.outer.x, land.outer.y, land.heading)
    box = box_to_world(frame, (-OVERLAP, -half, outward + limits.land // 2, half))
    return row, [box]


def _thermal_vias(land: BodyLand, limits: Limits) -> tuple[list[tuple[int, int]], list[Box]]:
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
