"""The response stage: does the drawn copper still do what the schematic did?

In: an :class:`~layoutgen.artwork.Artwork`. Out: a :class:`Response`, the S-parameters between the ports of
the schematic taken literally (``wanted``) and of what was placed (``as_drawn``), with what transistors see
and where the model is doubtful; a :class:`LengthFit`, how much longer or shorter lines should be drawn; a
:class:`Tolerance`. ``network``, ``chain``, ``reduce`` and ``solve`` are a solver that knows nothing of
boards; ``wanted`` and ``drawn`` build its networks; ``trace`` reads the drawn copper; ``touchstone`` reads
the parts' data. ``match`` compares both, ``fit`` finds the lengths that bring them nearest (``mirror`` and
``rings`` say which move together), ``holders`` names what lengths cannot remove. Nothing here changes a
drawing, and nothing writes files. Coupling between neighbouring lines that are no pair is not modelled.
"""

from layoutgen.response.correct import LengthFit, correct_lengths
from layoutgen.response.records import (
    CLOSE_ENOUGH,
    NOTE_RULE,
    Correction,
    DeviceView,
    Doubt,
    FeedView,
    Holder,
    PinView,
    Response,
    Stability,
)
from layoutgen.response.respond import respond
from layoutgen.response.tolerance import Contributor, Corner, LimitYield, Tolerance, tolerance

__all__ = [
    "CLOSE_ENOUGH",
    "NOTE_RULE",
    "Contributor",
    "Corner",
    "Correction",
    "DeviceView",
    "Doubt",
    "FeedView",
    "Holder",
    "LengthFit",
    "LimitYield",
    "PinView",
    "Response",
    "Stability",
    "Tolerance",
    "correct_lengths",
    "respond",
    "tolerance",
]
