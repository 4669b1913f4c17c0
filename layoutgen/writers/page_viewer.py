"""The board's part of the report page: canvas, switches and panel, and the picture in their stead."""

from __future__ import annotations

from layoutgen.writers.records import Job, Result
from layoutgen.writers.svg import artwork_svg

__all__ = ["board_figure"]

_KEYS = (
    ("Arrow keys", "move the board under the cross; with Shift in small steps"),
    ("+ and −", "zoom in and out"),
    ("0", "whole board"),
    ("Enter", "choose what is under the cross; when measuring, take the point"),
    ("m", "measure, on and off"),
    ("n, p", "next and previous finding"),
    ("Escape", "stop measuring; then choose nothing; then back to the table"),
)

_VIEWER = """<div class="viewer" id="viewer"><div class="stage">
<div class="tools" role="toolbar" aria-label="View of the board">
<button type="button" id="zoom-in" aria-label="Zoom in">+</button>
<button type="button" id="zoom-out" aria-label="Zoom out">−</button>
<button type="button" id="whole">Whole board</button>
<button type="button" id="measure" aria-pressed="false">Measure</button>
<output id="measured" aria-live="polite"></output></div>
<canvas id="canvas" tabindex="0" role="application" aria-label="Board seen from the top"
 aria-describedby="keys"></canvas>
<fieldset id="layers"><legend class="unseen">Layers</legend></fieldset></div>
<div class="side"><section id="panel" tabindex="0" aria-label="What is pointed at or chosen"></section>
<details><summary>Keys</summary><dl id="keys">{keys}</dl>
<p class="soft">Wheel or two fingers zoom, dragging moves.</p></details></div>
<p id="said" class="unseen" role="status"></p></div>
"""


def board_figure(result: Result, job: Job) -> str:
    """Return the viewer, and the picture for paper and for browsers without scripts."""
    keys = "".join(f"<dt>{name}</dt><dd>{does}</dd>" for name, does in _KEYS)
    return _VIEWER.format(keys=keys) + _picture(result, job)


def _picture(result: Result, job: Job) -> str:
    """Return the picture, taken from the SVG file when that has been written already."""
    data = job.files.get(f"{job.stem}.svg")
    svg = data.decode("utf-8") if data else artwork_svg(result.artwork, result.findings)
    return f'<figure id="still"><noscript>{svg}</noscript></figure>'
