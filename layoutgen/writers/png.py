"""PNG: the preview picture in dots, its longer side ten inches; drawn by matplotlib's Agg and fonts."""

from __future__ import annotations

import functools
import io
from typing import Any

import numpy as np
import numpy.typing as npt

from layoutgen.geometry import Ring
from layoutgen.writers.outlines import as_circle
from layoutgen.writers.picture import STYLES, Area, Picture, Text, picture_of
from layoutgen.writers.records import Job, Result

__all__ = ["write_png"]

_INCHES = 10.0
_MOST_DOTS = 20_000
_CAPITAL = 0.729
"""Height of a capital letter of DejaVu Sans in a font of size one [-]."""


def write_png(result: Result, job: Job) -> bytes:
    """Return the PNG file: the picture, its longer side ten inches, at the job's resolution."""
    from PIL import Image

    picture = picture_of(result.artwork, result.findings)
    x0, y0, x1, y1 = picture.box
    scale = min(round(_INCHES * job.dpi), _MOST_DOTS) / max(x1 - x0, y1 - y0)
    columns, rows = (max(1, round(side * scale)) for side in (x1 - x0, y1 - y0))
    dots = np.asarray(_drawn(picture, columns, rows, scale))[:, :, :3]
    stream = io.BytesIO()
    Image.fromarray(np.ascontiguousarray(dots)).save(stream, "PNG", dpi=(job.dpi, job.dpi), compress_level=4)
    return stream.getvalue()


def _drawn(picture: Picture, columns: int, rows: int, scale: float) -> Any:
    """Return the dots (rows, columns, 4) of the picture, ``scale`` dots to the nanometre."""
    from matplotlib.backends.backend_agg import RendererAgg
    from matplotlib.transforms import Affine2D

    agg: Any = RendererAgg
    renderer = agg(columns, rows, 72)
    to_dots = Affine2D().translate(-picture.box[0], -picture.box[1]).scale(scale)
    for area in picture.areas:
        _draw_area(renderer, area, to_dots, scale)
    for text in picture.texts:
        _draw_text(renderer, text, to_dots)
    return renderer.buffer_rgba()


def _draw_area(renderer: Any, area: Area, to_dots: Any, scale: float) -> None:
    from matplotlib.colors import to_rgb

    style = STYLES[area.style]
    context = renderer.new_gc()
    context.set_linewidth(max(style.width * scale, 0.6) if style.pen not in (None, style.fill) else 0.0)
    context.set_foreground(style.pen or style.fill)
    context.set_antialiased(True)
    renderer.draw_path(context, _path(area.rings), to_dots, to_rgb(style.fill) if style.fill else None)


def _path(rings: tuple[Ring, ...]) -> Any:
    """Return the outlines as one path; the winding fills it, holes run the other way."""
    from matplotlib.path import Path

    points, codes = [], []
    for ring in rings:
        chords = _vertices(ring)
        points += [chords, chords[:1]]
        codes += [Path.MOVETO, *[Path.LINETO] * (len(chords) - 1), Path.CLOSEPOLY]
    return Path(np.concatenate(points), codes)


def _vertices(ring: Ring) -> npt.NDArray[np.float64]:
    """Return an outline's vertices [nm], arcs as chords; circles of one size share theirs."""
    circle = as_circle(ring)
    return np.array(ring.chords(), dtype=float) if circle is None else _circle(circle[2]) + circle[:2]


@functools.lru_cache(maxsize=64)
def _circle(radius: int) -> npt.NDArray[np.float64]:
    return np.array(Ring.circle(0, 0, radius).chords(), dtype=float)


def _draw_text(renderer: Any, text: Text, to_dots: Any) -> None:
    """Draw a text as outlines, so that it does not depend on the machine's fonts."""
    from matplotlib.colors import to_rgb
    from matplotlib.font_manager import FontProperties
    from matplotlib.path import Path
    from matplotlib.textpath import TextToPath
    from matplotlib.transforms import Affine2D

    vertices, codes = TextToPath().get_text_path(FontProperties("DejaVu Sans"), text.text, ismath=False)
    if not len(vertices):
        return
    size = text.height / _CAPITAL / TextToPath.FONT_SCALE
    outline = np.asarray(vertices)
    shift = {"start": 0.0, "middle": 0.5, "end": 1.0}[text.anchor] * outline[:, 0].max()
    place = Affine2D().translate(-shift, 0).scale(size).rotate_deg(text.turn).translate(text.x, text.y)
    fill = STYLES[text.style].fill
    context = renderer.new_gc()
    context.set_linewidth(0.0)
    renderer.draw_path(context, Path(outline, codes), place + to_dots, to_rgb(fill) if fill else None)
