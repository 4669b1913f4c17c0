"""Fifth stage: a place for everything.

In: a :class:`~layoutgen.sizing.SizedCircuit`. Out: a :class:`Placement`: poses of parts, centre-lines of
lines with their final length budgets, strips, ports on their edges, vias that belong to parts and lines, all
in whole nanometres with the origin at the board's south-west corner. It draws no copper and no ground.

The walk (``tour``) decides from the schematic what goes straight on at each net; ``routes`` and ``words`` say
which shapes a line may take; ``lay`` adds one thing and what follows from it to a candidate; ``search`` keeps
the best drawings so far, rejecting by ``clearance``; ``finish`` settles the board's frame.
"""

from layoutgen.placement.place import place
from layoutgen.placement.records import (
    Bend,
    Choice,
    Choices,
    PlacedHole,
    PlacedLine,
    PlacedPad,
    PlacedPair,
    PlacedPart,
    PlacedPort,
    PlacedRadial,
    PlacedVia,
    Placement,
    Strip,
)

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
    "place",
]
