"""The artwork stage: from poses and centre-lines to everything that is made, by layer.

In: a :class:`~layoutgen.placement.Placement`. Out: an :class:`Artwork`: copper with nets and origins, vias,
holes, mask, paste, legend, profile, names, and the pour's measured distance to each line. Not done here:
judging it against the rules (checks), what it does at RF (response), files (writers). Signal copper is drawn
where the placement puts it; only the ground pour and what is printed find their own places.

A turned or mirrored placement gives the artwork turned or mirrored, to the nanometre: every board is drawn
lying one way, its straight path heading east, and then moved back (see :mod:`layoutgen.artwork.lying`). Only
the legend does not turn: texts are set on the finished board so that they read from below or from the right,
and since they come last, no text moves a via.
"""

from layoutgen.artwork.draw import Sketch, complete, draw, sketch
from layoutgen.artwork.records import (
    LAYERS,
    Artwork,
    Hole,
    Label,
    LineCopper,
    Shape,
    Via,
)

__all__ = [
    "LAYERS",
    "Artwork",
    "Hole",
    "Label",
    "LineCopper",
    "Shape",
    "Sketch",
    "Via",
    "complete",
    "draw",
    "sketch",
]
