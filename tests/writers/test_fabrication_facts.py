"""What the board house is told of edges, cut-outs and mask: on the drawing, from the model."""

from __future__ import annotations

from dataclasses import replace

import pytest

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.writers import Result
from layoutgen.writers.fabrication_facts import notes, stack_rows


def with_shapes(result: Result, *shapes: Shape) -> Result:
    return replace(result, artwork=replace(result.artwork, shapes=(*result.artwork.shapes, *shapes)))


def near_edges(result: Result) -> list[str]:
    return [note for note in notes(result) if note.startswith("Copper comes as near as")]


def box(layer: str, role: str, *corners: int) -> Shape:
    return Shape(layer=layer, outline=Ring.box(*corners), net=None, role=role, origin=Origin("x"))


def test_copper_left_near_an_edge_on_purpose_is_said(handmade: Result) -> None:
    """A board house that finds it stops the order, or shaves the pad of the transistor's lead."""
    least = handmade.circuit.rules.copper.min_edge_distance
    assert least == pytest.approx(0.3e-3)
    pad = box("copper_top", "pad", 13_020_000, 1_000_000, 13_900_000, 2_000_000)
    (note,) = (note for note in near_edges(with_shapes(handmade, pad)) if "cut-out" in note)
    assert (
        note == "Copper comes as near as 0.02 mm to the edge of the cut-out under Q1: on purpose, leave it."
    )


def test_copper_that_keeps_its_distance_needs_no_words(handmade: Result) -> None:
    """A note on every board would be read on none."""
    kept = tuple(s for s in handmade.artwork.shapes if not s.layer.startswith("copper"))
    inner = box("copper_top", "line", 5_000_000, 5_000_000, 6_000_000, 6_000_000)
    result = replace(handmade, artwork=replace(handmade.artwork, shapes=(*kept, inner)))
    assert near_edges(result) == []


def test_the_flange_in_a_cutout_and_its_corners_are_named(handmade: Result) -> None:
    """A router leaves a radius in inner corners; the flange would not go in."""
    (note,) = (note for note in notes(handmade) if "inner corners" in note)
    assert note.startswith("The flange of Q1 stands in a cut-out")
    other = box("profile", "cutout", 3_000_000, 3_000_000, 4_000_000, 4_000_000)
    told = [note for note in notes(with_shapes(handmade, other)) if "nner corners" in note]
    assert len(told) == 2


def test_a_mask_that_is_open_all_over_is_none(handmade: Result) -> None:
    """Quoted and printed, a mask that covers nothing costs money; taken for a closed one, it insulates."""
    materials = {row[0]: row[2] for row in stack_rows(handmade)}
    assert materials["solder mask, bottom"] == "solder mask"
    opened = box("soldermask_bottom", "opening", 0, 0, handmade.placement.width, handmade.placement.height)
    materials = {row[0]: row[2] for row in stack_rows(with_shapes(handmade, opened))}
    assert materials["solder mask, bottom"] == "none: open all over"
    assert materials["solder mask, top"] == "solder mask"
