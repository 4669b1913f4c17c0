"""Fifth stage: a place for everything.

In: a :class:`~layoutgen.sizing.SizedCircuit`. Out: a :class:`Placement`: poses of parts, centre-lines of
lines with their final length budgets, strips, ports on their edges, vias that belong to parts and lines, all
in whole nanometres with the origin at the board's south-west corner. It draws no copper and no ground.

Before all else ``leads`` joins pads of one part that are one conductor, sets the ground vias of leads in rows
(``grounds``) and says where lines too wide for their lead begin; ``launches`` finds the edge connectors at
ports. The walk (``tour``) decides from the schematic what goes straight on at each net; ``loops`` sorts out
how loops are laid, and ``likes`` gives like lines at loops one cross-section. ``routes`` and ``words`` say
which shapes a line may take, ``meetings`` what its legs must keep for what it meets, ``runs`` how free
lines come to meet what is pinned. ``drawings`` and ``closure`` say which shapes a loop (``cluster``) may
take, its legs from one linear program, ``demands`` what each piece asks of it, ``symmetry`` how it maps on
itself; ``bows`` take up what lines are a little too long, ``wide`` draws loops with the transistors and free
lines on them, by ``walks`` that keep the drawings of the smaller loops inside.
``lay`` adds one thing, and what follows from it, to a candidate, by ``lines``, ``pairs``,
``ports``, ``banks``, ``beside``, ``turned`` and ``lay_cluster``; ``ways`` lists the choices, ``search`` keeps
the best drawings so far, rejecting by ``clearance`` and ``neighbours``, and what ``lookahead`` finds shut in.
``twins`` finds equal branches, which are laid alike, and ``rooms`` makes room for them. ``finish`` settles
the board's frame. ``stubs`` refuses stubs that would lie inside what they leave, ``explain`` says why a
loop cannot be drawn, and ``remedies`` what would do, by placing ``requests`` that differ a little.
``made`` has a placement tell how it was made, and what was given up for it: distances, the straight path.
"""

from layoutgen.placement.model import DEFAULT_GAP, copper_edge, hole_land
from layoutgen.placement.place import fits, place
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
    "DEFAULT_GAP",
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
    "copper_edge",
    "fits",
    "hole_land",
    "place",
]
