"""Layer numbers for mask houses, as comma-separated values."""

from __future__ import annotations

from layoutgen.artwork import LAYERS
from layoutgen.writers.plain import comma_separated
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import layers_of

__all__ = ["LAYER_HEADS", "write_layer_table"]

LAYER_HEADS = ("Layer", "GDS layer", "GDS datatype", "Shapes", "Tone", "Meaning")
"""Headings of the table."""

_MEANINGS = {
    "copper_top": ("copper", "lines, pads, pour"),
    "copper_bottom": ("copper", "ground plane"),
    "soldermask_top": ("openings", "solder mask is where no shape is"),
    "soldermask_bottom": ("openings", "solder mask is where no shape is"),
    "paste_top": ("openings", "stencil openings"),
    "legend_top": ("ink", "text as outlines"),
    "profile": ("outline", "board and each cut-out, even-odd"),
    "drill_plated": ("holes", "finished diameters, plated"),
    "drill_nonplated": ("holes", "finished diameters, not plated"),
    "reference": ("text", "names of ports and lines, origin"),
    "findings": ("marks", "faults that the checks found; not to be made"),
}


def write_layer_table(result: Result, job: Job) -> bytes:
    """Return the table; it is the same for equal results (``job`` changes nothing)."""
    shapes = layers_of(result)
    rows = [(name, *numbers, len(shapes[name]), *_MEANINGS[name]) for name, numbers in LAYERS.items()]
    return comma_separated(LAYER_HEADS, rows)
