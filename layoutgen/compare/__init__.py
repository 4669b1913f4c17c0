"""Two artworks side by side: what was added, removed or moved, layer by layer and net by net.

In: two drawings of any origin (paths, or :class:`~layoutgen.foreign.ForeignArtwork`). Out: a
:class:`Comparison`, and a picture of both (:func:`overlay`). Copper that changed by more than a micrometre is
an error, since a drawing does not say which of it carries RF; anything else is a note. Does not: judge which
of the two is right.
"""

from layoutgen.compare.compare import TOLERANCE_NM, compare
from layoutgen.compare.overlay import overlay
from layoutgen.compare.records import Change, Comparison

__all__ = ["TOLERANCE_NM", "Change", "Comparison", "compare", "overlay"]
