"""What is read from a file of other origin, before and after it is given our layers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.errors import WrongInputError
from layoutgen.geometry import Point
from layoutgen.origin import Fault, Location

__all__ = ["ForeignArtwork", "ForeignNote", "LayerKey", "Primitive", "Raw", "RoundHole", "refused"]

Floats = npt.NDArray[np.float64]
LayerKey = str | tuple[int, int]
"""A layer of a foreign file: a name (DXF), or layer and datatype (GDSII, OASIS)."""


@dataclass(frozen=True, slots=True, eq=False)
class Primitive:
    """One drawn thing: outlines as points (N, 2), in the file's unit or in nanometres.

    ``kind`` is ``loop`` (a closed outline without a fill), ``path`` (an open line without a width) or
    ``area`` (filled copper: first ring outside, the others holes). ``turn`` is 1 for loops drawn
    counter-clockwise, -1 for clockwise ones, 0 where the direction means nothing.
    """

    layer: LayerKey
    kind: Literal["loop", "path", "area"]
    rings: tuple[Floats, ...]
    turn: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Raw:
    """A file's contents in nanometres: primitives, the unit's name, entities not read by kind and
    layer; ``chord`` [nm] is how far its straight edges may lie off the curves they stand for."""

    primitives: tuple[Primitive, ...]
    unit: str
    skipped: Mapping[tuple[str, str], int] = field(default_factory=dict)
    notes: tuple[ForeignNote, ...] = ()
    chord: float = 0.0


@dataclass(frozen=True, slots=True)
class ForeignNote:
    """Something assumed, mended or left out in reading: its rule name, layer, place [nm] and text."""

    rule: str
    layer: str
    at: Point | None
    text: str


@dataclass(frozen=True, slots=True)
class RoundHole:
    """A drilled hole: middle [nm], diameter [nm], plated or not."""

    x: float
    y: float
    diameter: float
    plated: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ForeignArtwork:
    """A drawing of other origin on our layers.

    ``layers`` holds the polygons [nm] of each layer as drawn, overlapping ones not joined; ``profile`` the
    board's outlines with their cut-outs as holes, the largest first; ``holes`` the drilled holes in file
    order; ``unit`` is the file's; ``unread`` what was left out: text -> how many;
    ``chord`` [nm] is how far straight edges may lie off the curves that they stand for, 0 where the file has
    true curves.
    """

    file: str
    unit: str
    layers: Mapping[str, tuple[shapely.Polygon, ...]]
    profile: tuple[shapely.Polygon, ...]
    holes: tuple[RoundHole, ...]
    notes: tuple[ForeignNote, ...]
    unread: Mapping[str, int]
    chord: float = 0.0


def refused(file: str, found: str, allowed: str) -> WrongInputError:
    """Return the error that refuses a file as a whole."""
    return WrongInputError([Fault(Location(file, 0), "", found, allowed)])
