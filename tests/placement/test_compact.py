"""How much of its copper's box a drawing uses.

The measure: the box around all signal copper and parts (with their ground vias), over the sum of what each
line, pair, radial stub, strip and part takes with the spacing rule kept round it. The amplifier is held to a
stricter one, with half the rule round each, as if neighbours could share it everywhere. Rings enclose what
they do not use and are not judged.
"""

from __future__ import annotations

from collections import defaultdict
from pathlib import Path

import pytest
import shapely

from layoutgen.circuit import build_circuit
from layoutgen.geometry import sector_ring
from layoutgen.placement import Placement, place
from layoutgen.reading import read_inputs
from layoutgen.sizing import size_circuit
from tests.placement.legal import copper

EXAMPLES = Path(__file__).parents[2] / "examples"
MOST = 1.6


def pieces(placement: Placement) -> list[shapely.Geometry]:
    """Return what each element takes [nm]: its copper, and for a part courtyard, cut-out and vias."""
    found = defaultdict(list)
    for name, (_, area) in copper(placement).items():
        part = name.rsplit(".", 1)[0]
        found[part if part in placement.parts else name].append(area)
    for part in placement.parts.values():
        rings = [part.courtyard] if part.cutout is None else [part.courtyard, part.cutout]
        found[part.name] += [ring.polygon() for ring in rings]
    for via in placement.vias:
        found[via.origin.element].append(shapely.Point(via.x, via.y).buffer(via.land / 2))
    for stub in placement.radials.values():
        frame = (stub.apex, stub.heading, stub.sector_deg, stub.inner_radius, stub.outer_radius)
        found[stub.name].append(sector_ring(*frame).polygon())
    return [shapely.union_all(shapes) for shapes in found.values()]


def compactness(placement: Placement, margins: float = 1.0) -> float:
    """Return the measure [-], with ``margins`` times the spacing rule round each element."""
    sized = placement.sized.circuit
    spacing = sized.rules.spacing.min_line_heights * sized.file.substrate.height * 1e9  # type: ignore[union-attr, operator]
    own = pieces(placement)
    x0, y0, x1, y1 = shapely.union_all(own).bounds
    taken = sum(piece.buffer(margins * spacing, join_style="mitre").area for piece in own)
    return float((x1 - x0) * (y1 - y0) / taken)


@pytest.mark.parametrize(
    ("name", "margins"),
    [
        ("telemetry_driver", 0.5),
        ("two_stage_driver", 1.0),
        ("balanced_stage", 1.0),
        ("corporate_feed_8", 1.0),
    ],
)
def test_examples_are_compact(name: str, margins: float) -> None:
    """Catches a search that spreads a circuit over a board with room to spare."""
    inputs = read_inputs(EXAMPLES / f"{name}.toml")
    placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    assert compactness(placement, margins) <= MOST
