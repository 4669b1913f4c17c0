"""The response stage: does the drawn copper still do what the schematic did?

In: an :class:`~layoutgen.artwork.Artwork`. Out: a :class:`Response`, the S-parameters between the ports of
the schematic taken literally (``wanted``) and of what was placed (``as_drawn``). ``network``, ``chain``,
``reduce`` and ``solve`` are a solver that knows nothing of boards; ``wanted`` and ``drawn`` build its
networks; ``trace`` reads the drawn copper; ``touchstone`` reads the parts' data. Nothing here changes a
drawing, and nothing writes files. Coupling between neighbouring lines that are no pair is not modelled.
"""

from layoutgen.response.records import NOTE_RULE, Response
from layoutgen.response.respond import respond

__all__ = ["NOTE_RULE", "Response", "respond"]
