"""Facing places with the pieces of copper they belong to."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from layoutgen.checks.board import Layer
from layoutgen.checks.facing import Places
from layoutgen.checks.planar import whole
from layoutgen.geometry import Point

__all__ = ["Spot", "item_at", "net_at", "spots"]


class Spot(NamedTuple):
    """A pair of facing places: middle [nm], distance [nm], indices of the two pieces (-1 for none)."""

    at: Point
    distance: float
    first: int
    second: int


def spots(layer: Layer, places: Places) -> Iterator[Spot]:
    """Yield the places with the pieces on whose outlines they lie."""
    first, second = layer.owners(places.first), layer.owners(places.second)
    centre = (places.first + places.second) / 2.0
    for k, distance in enumerate(places.distance.tolist()):
        yield Spot(whole(*centre[k].tolist()), distance, first[k], second[k])


def item_at(layer: Layer, piece: int) -> str:
    """Return a piece's item, the empty text for none."""
    return layer.pieces[piece].item if piece >= 0 else ""


def net_at(layer: Layer, piece: int) -> str:
    """Return the net written at a piece, the empty text for none."""
    return layer.pieces[piece].net or "" if piece >= 0 else ""
