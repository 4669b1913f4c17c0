"""What the artwork stage hands on: polygons and holes by layer, each with its net and origin."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from layoutgen.geometry import Point, Ring
from layoutgen.origin import Origin
from layoutgen.placement import Placement

__all__ = ["LAYERS", "Artwork", "Hole", "Label", "LineCopper", "Shape", "Via"]

LAYERS: Mapping[str, tuple[int, int]] = {
    "copper_top": (1, 0),
    "copper_bottom": (2, 0),
    "soldermask_top": (3, 0),
    "soldermask_bottom": (4, 0),
    "paste_top": (5, 0),
    "legend_top": (6, 0),
    "profile": (7, 0),
    "drill_plated": (8, 0),
    "drill_nonplated": (9, 0),
    "reference": (10, 0),
    "findings": (11, 0),
}
"""Layer names of the contract, in drawing order, with their GDS layer and datatype (our own numbers)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Shape:
    """One piece on one layer: outline and holes [nm], its net (None: no copper, or none), what it is.

    ``role`` is one of line, pair, radial, pad, strip, land (round copper of a via or a plated hole), ground
    (copper between a ground pad and its vias), pour, plane, opening, paste, legend, profile, cutout. Shapes
    of one net may overlap; together they are the copper. A line's shape carries the first of its nets that is
    not gnd. Outlines run counter-clockwise, holes clockwise.
    ``undercut`` has already been added to outlines of copper (they are the artwork, not the finished copper).
    """

    layer: str
    outline: Ring
    holes: tuple[Ring, ...] = ()
    net: str | None = None
    role: str
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class Via:
    """A plated through connection: axis, drill, land diameters [nm]; ``purpose`` is the result's ``for``."""

    x: int
    y: int
    drill: int
    land: int
    net: str
    purpose: str
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class Hole:
    """A drilled hole that is no via: middle, diameter [nm], plated or not, net (gnd when plated)."""

    x: int
    y: int
    diameter: int
    plated: bool
    net: str | None
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class Label:
    """A text for people on one layer: anchor [nm], height [nm], rotation [deg]; drawn as text, not copper."""

    layer: str
    text: str
    x: int
    y: int
    height: int
    rotation: float
    origin: Origin


@dataclass(frozen=True, slots=True, kw_only=True)
class LineCopper:
    """What the drawn ground did to a line: pour distance left and right of the path [nm], None beyond 6 h."""

    name: str
    gap_left: int | None
    gap_right: int | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Artwork:
    """The drawing: shapes by layer in a fixed order, vias and holes (the lists findings index), labels."""

    placement: Placement
    shapes: tuple[Shape, ...]
    vias: tuple[Via, ...]
    holes: tuple[Hole, ...]
    labels: tuple[Label, ...]
    line_copper: Mapping[str, LineCopper]
    title_anchor: Point
    notes: tuple[tuple[str, str, str], ...] = ()

    def on(self, layer: str) -> tuple[Shape, ...]:
        """Return the shapes of one layer, in drawing order."""
        return tuple(shape for shape in self.shapes if shape.layer == layer)

    def _repr_svg_(self) -> str:
        """Return the picture that a notebook shows; the writer is imported only then."""
        from layoutgen.writers.svg import artwork_svg

        return artwork_svg(self)
