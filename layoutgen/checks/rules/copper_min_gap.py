"""Between two pieces of copper there is room for the etchant.

What: the distance between copper of two nets, and between facing edges of one net (slits), is at least
``copper.min_gap``.
Why: a narrower gap may stay closed, or be bridged by solder.
How measured: between nets exactly, polygon to polygon, corners included; lines join their nets into one,
and a line that ends on gnd is taken as cut at that end. Copper of two nets that meets is
``connectivity.short``, not a gap. Within one net between facing edges across empty board, on the joined
copper; two places of one outline less than 3.5 limits apart along it are a corner and are not counted. On
finished copper (see ``copper.min_width``); 10 nm short of the limit passes.
Source: the limit is the board house's; the 3.5 limits are a choice of this project.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.near import near_nets
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.spots import item_at, net_at, spots

__all__ = ["RULE"]

NAME = "copper.min_gap"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each gap and slit."""
    limit = board.limits.nm(NAME)
    if limit is not None:
        for layer in board.layers:
            yield from _gaps(layer, limit)
            yield from _slits(layer, limit)


def _gaps(layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield a hit for each pair of pieces of two nets."""
    for pair in near_nets(layer, limit):
        a, b = layer.pieces[pair.first], layer.pieces[pair.second]
        text = f"gap between {a.item} and {b.item}"
        items, nets = named(a.item, b.item), named(a.net or "", b.net or "")
        yield too_small(NAME, text, pair.distance, limit, pair.at, items, nets, layer.name)


def _slits(layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield a hit for each slit between facing edges of one net."""
    for spot in spots(layer, layer.slits(limit)):
        if spot.first >= 0 and spot.second >= 0 and layer.nodes[spot.first] != layer.nodes[spot.second]:
            continue  # between nets: measured there
        items = named(item_at(layer, spot.first), item_at(layer, spot.second))
        nets = named(net_at(layer, spot.first), net_at(layer, spot.second))
        text = f"slit in copper of {' and '.join(items)}"
        yield too_small(NAME, text, spot.distance, limit, spot.at, items, nets, layer.name)


RULE = Rule(names=(NAME,), find=find)
