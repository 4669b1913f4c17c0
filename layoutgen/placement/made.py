"""What a placement says of the way it was made, so that a later draft can be made the same way."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace

from layoutgen.placement.model import line_heights
from layoutgen.placement.records import PlacedLine, Placement
from layoutgen.sizing import SizedCircuit

__all__ = ["as_chained", "as_led", "as_spaced", "as_wide", "keeps_folds"]

_ROUNDING = 10.0  # [nm]


def as_wide(found: Placement) -> Placement:
    """Return a placement that says that its loops were drawn with all that lies on them."""
    assert found.choices is not None  # it was searched for
    return replace(found, choices=replace(found.choices, wide=True))


def as_chained(found: Placement, longer: float, combed: bool) -> Placement:
    """Return a placement that says how its chains were made."""
    assert found.choices is not None  # it was searched for
    return replace(found, choices=replace(found.choices, longer=longer, combed=combed))


def as_led(found: Placement, port: str) -> Placement:
    """Return a placement that says to which port its straight path leads."""
    assert found.choices is not None  # it was searched for
    text = f"no placement was found with the path to the next port drawn straight; the path to {port} is"
    note = ("assumption.spine", port, text)
    return replace(found, choices=replace(found.choices, spine_to=port), notes=(*found.notes, note))


def as_spaced(found: Placement, sized: SizedCircuit, heights: float) -> Placement:
    """Return a placement found with another distance of lines as one under the circuit's own rules."""
    assert found.choices is not None  # it was searched for
    asked = line_heights(sized.circuit.rules)
    text = f"no placement was found with lines {asked:g} substrate heights apart; {heights:g} were kept"
    return replace(
        found,
        sized=replace(found.sized, circuit=sized.circuit),
        choices=replace(found.choices, heights=heights),
        notes=(*found.notes, ("assumption.spacing", "", text)) if heights < asked else found.notes,
    )


def keeps_folds(found: Placement, heights: float) -> bool:
    """Tell whether no two legs of a line that no one bend joins are nearer than some substrate heights."""
    least = heights * found.sized.circuit.file.substrate.height * 1e9 - _ROUNDING
    return all(_nearest_legs(line) >= least for line in found.lines.values())


def _nearest_legs(line: PlacedLine) -> float:
    """Return the least distance [nm] of two legs of a line that no one bend joins; infinity where none is."""
    import shapely

    legs = [
        shapely.LineString(leg).buffer(line.width / 2, cap_style="flat")
        for leg in itertools.pairwise(line.path)
    ]
    pairs = itertools.combinations(range(len(legs)), 2)
    return min((float(legs[i].distance(legs[j])) for i, j in pairs if j - i > 1), default=math.inf)
