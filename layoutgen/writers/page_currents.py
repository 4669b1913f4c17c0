"""The map of direct current on the page: the density in the copper of each net off ground, as solved.

The densities are those of the checks, painted dot by dot into a picture of its own inside the drawing;
outlines and texts take the page's colours, so that it reads in light, in dark and on paper.
"""

from __future__ import annotations

import base64
import io
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed, mm_short
from layoutgen.writers.html import escape, table
from layoutgen.writers.records import Result

if TYPE_CHECKING:
    from layoutgen.checks.sheet import NetSheet

__all__ = ["current_map_section", "density_dots", "scale_top"]

Floats = npt.NDArray[np.float64]

_DOTS = 700
"""Dots along the longer side of the map [-]."""
_MARGIN = 1_000_000
"""Board shown about the copper that carries current [nm]."""
_SHARE = 0.995
"""Part of the copper's area that the colour scale has to cover: the rest is the tips of inner corners [-]."""
_STOPS = ((58, 108, 178), (56, 160, 158), (148, 192, 84), (240, 190, 50), (226, 92, 44), (176, 24, 60))
"""Colours of the scale from none to most."""
_MM = 1e6
_BAR, _BAR_LEFT, _BAR_TOP, _BAR_HEIGHT = 460.0, 40.0, 20.0, 14.0


@dataclass(frozen=True, slots=True)
class _Frame:
    """The part of the board that is shown [nm], and how large a dot is [nm]."""

    x0: int
    y0: int
    x1: int
    y1: int

    @property
    def dot(self) -> float:
        """Side of a dot [nm]."""
        return max(self.x1 - self.x0, self.y1 - self.y0) / _DOTS

    @property
    def size(self) -> tuple[int, int]:
        """Columns and rows of dots."""
        width, height = ((self.x1 - self.x0) / self.dot, (self.y1 - self.y0) / self.dot)
        return max(1, round(width)), max(1, round(height))


def current_map_section(result: Result) -> Iterator[str]:
    """Yield the map of current density with its scale, and a table of the nets; nothing without current."""
    currents = result.checks.currents
    sheets = () if currents is None else currents.solved
    if not sheets:
        return
    frame, top = _frame(result, sheets), scale_top(sheets)
    yield "<h3>Direct current in the copper</h3>"
    yield f"<p>{_text(result)}</p>"
    yield _map(result, frame, density_dots(sheets, (frame.x0, frame.y0), frame.dot, frame.size), top)
    yield _scale(result, top)
    yield table(
        "Direct current by net, off ground",
        ("Net", "Current (mA)", "Voltage drop (mV)", "Heat (mW)"),
        [_row(sheet) for sheet in sheets],
    )


def _row(sheet: NetSheet) -> list[str]:
    """Return a net's figures: its largest terminal current, drop and heat."""
    figures = (fixed(sheet.largest * 1e3, 3), fixed(sheet.drop * 1e3, 3), fixed(sheet.power * 1e3, 3))
    return [escape(sheet.net), *figures]


def _text(result: Result) -> str:
    """Return what the map shows, and what the rule file allows."""
    thickness = result.circuit.file.substrate.copper_thickness
    rule = result.circuit.rules.current
    parts = [
        "Sheet current density: amperes through each millimetre of a cross-section, from a finite-element "
        "solution of the drawn copper. Inner corners have a peak that grows without end as triangles "
        "shrink; the checks judge the mean over whole cross-sections."
    ]
    if rule is not None and rule.max_density is not None:
        allowed = f"{rule.max_density / 1e6:g} A/mm²"
        here = fixed(rule.max_density * thickness / 1e3, 2)
        parts.append(f"The rule file allows {allowed}: {here} A/mm in this copper.")
    return escape(" ".join(parts))


def _frame(result: Result, sheets: Sequence[NetSheet]) -> _Frame:
    """Return the board about the copper that carries current."""
    points = np.concatenate([sheet.flow.mesh.points for sheet in sheets])
    (x0, y0), (x1, y1) = points.min(axis=0) - _MARGIN, points.max(axis=0) + _MARGIN
    placement = result.placement
    return _Frame(
        max(0, math.floor(x0)),
        max(0, math.floor(y0)),
        min(placement.width, math.ceil(x1)),
        min(placement.height, math.ceil(y1)),
    )


def scale_top(sheets: Sequence[NetSheet]) -> float:
    """Return where the colour scale ends [A/nm]: 1, 2 or 5 times a power of ten, above nearly all copper."""
    density = np.concatenate([sheet.flow.density for sheet in sheets])
    areas = np.concatenate([sheet.flow.mesh.areas for sheet in sheets])
    order = np.argsort(density, kind="stable")
    reached = np.searchsorted(np.cumsum(areas[order]), _SHARE * areas.sum())
    value = max(float(density[order][min(int(reached), len(order) - 1)]), 1e-15)
    decade = 10.0 ** math.floor(math.log10(value))
    return next((n * decade for n in (1.0, 2.0, 5.0) if value <= n * decade), 10.0 * decade)


def density_dots(
    sheets: Sequence[NetSheet], origin: tuple[float, float], dot: float, size: tuple[int, int]
) -> Floats:
    """Return the density [A/nm] under each dot's middle, rows from the north (rows, columns); -1 off copper.

    Args:
        sheets: The solved nets.
        origin: South-west corner of the dots [nm].
        dot: Side of a dot [nm].
        size: Columns and rows.
    """
    columns, rows = size
    dots = np.full((rows, columns), -1.0)
    for sheet in sheets:
        mesh = sheet.flow.mesh
        corners = (mesh.points[mesh.triangles] - np.asarray(origin)) / dot - 0.5
        column, row, triangle = _covered(corners, columns, rows)
        dots[rows - 1 - row, column] = sheet.flow.density[triangle]
    return dots


def _covered(
    corners: Floats, columns: int, rows: int
) -> tuple[npt.NDArray[np.intp], npt.NDArray[np.intp], npt.NDArray[np.intp]]:
    """Return columns and rows of the dots that lie in triangles (N, 3, 2) [dots], and in which."""
    limit = np.array((columns, rows)) - 1.0
    low = np.clip(np.ceil(corners.min(axis=1) - 1e-9), 0.0, None)
    high = np.minimum(np.floor(corners.max(axis=1) + 1e-9), limit)
    spans = np.clip(high - low + 1.0, 0.0, None).astype(np.intp)
    counts = spans[:, 0] * spans[:, 1]
    triangle = np.repeat(np.arange(len(corners)), counts)
    number = np.arange(len(triangle)) - np.repeat(np.cumsum(counts) - counts, counts)
    up, right = np.divmod(number, spans[triangle, 0]) if len(triangle) else (number, number)
    x, y = low[triangle, 0] + right, low[triangle, 1] + up
    inside = np.ones(len(triangle), dtype=bool)
    steps = np.roll(corners, -1, axis=1) - corners
    offset = steps[..., 0] * corners[..., 1] - steps[..., 1] * corners[..., 0]
    for k in range(3):
        side = steps[triangle, k, 0] * y - steps[triangle, k, 1] * x
        inside &= side - offset[triangle, k] >= -1e-9
    return x[inside].astype(np.intp), y[inside].astype(np.intp), triangle[inside]


def _palette() -> Floats:
    """Return the colours (256, 3) of the dots: the first for no copper, then the scale."""
    shares = np.linspace(0.0, len(_STOPS) - 1.0, 255)
    stops = np.array(_STOPS, dtype=float)
    colours = [np.interp(shares, np.arange(len(_STOPS)), stops[:, k]) for k in range(3)]
    return np.concatenate((np.zeros((1, 3)), np.column_stack(colours)))


def _picture(dots: Floats, top: float) -> str:
    """Return dots as a PNG with a palette, for a data address."""
    from PIL import Image

    levels = np.where(dots < 0.0, 0.0, 1.0 + np.clip(np.rint(dots / top * 254.0), 0.0, 254.0))
    image = Image.fromarray(levels.astype(np.uint8), "P")
    image.putpalette(np.rint(_palette()).astype(np.uint8).tobytes())
    stream = io.BytesIO()
    image.save(stream, "PNG", transparency=0, compress_level=6)
    return base64.b64encode(stream.getvalue()).decode("ascii")


def _map(result: Result, frame: _Frame, dots: Floats, top: float) -> str:
    """Return the map as inline SVG, millimetres."""
    x, y = frame.x0 / _MM, -frame.y1 / _MM
    columns, rows = frame.size
    width, height = columns * frame.dot / _MM, rows * frame.dot / _MM
    shapes = [shape for shape in result.artwork.on("copper_top") if shape.role not in ("pour", "land")]
    outlines = "".join(_outline(ring) for shape in shapes for ring in _rings(shape))
    where = f'x="{x:.4f}" y="{y:.4f}" width="{width:.4f}" height="{height:.4f}"'
    return (
        f'<svg class="chart currents" viewBox="{x:.4f} {y:.4f} {width:.4f} {height:.4f}" role="img" '
        f'aria-label="Direct current density in the copper, up to {top * _MM:g} amperes per millimetre">'
        f'<image {where} preserveAspectRatio="none" href="data:image/png;base64,{_picture(dots, top)}"/>'
        f'<path class="ink" fill="none" stroke-width="{width / 800.0:.4f}" d="{outlines}"/>'
        f"{''.join(_names(result, frame, width / 80.0))}</svg>"
    )


def _rings(shape: Shape) -> tuple[Ring, ...]:
    return (shape.outline, *shape.holes)


def _outline(ring: Ring) -> str:
    """Return an outline as a closed path [mm], y down."""
    points = "L".join(f"{mm_short(x)} {mm_short(-y)}" for x, y in ring.chords())
    return f"M{points}Z"


def _names(result: Result, frame: _Frame, size: float) -> Iterator[str]:
    """Yield the names of parts and ports on the map, size in [mm], moved in from its edges."""
    placement = result.placement
    places = [(part.name, part.x, part.y) for part in placement.parts.values()]
    places += [(port.name, port.x, port.y) for port in placement.ports.values()]
    for name, x, y in places:
        if frame.x0 < x < frame.x1 and frame.y0 < y < frame.y1:
            half = round(0.35 * size * _MM) * len(name)
            x = min(max(x, frame.x0 + half), frame.x1 - half)
            y = min(y, frame.y1 - round(size * _MM))
            where = f'x="{mm_short(x)}" y="{mm_short(-y)}" font-size="{size:.3f}"'
            yield f'<text class="m" {where}>{escape(name)}</text>'


def _scale(result: Result, top: float) -> str:
    """Return the colour scale with its figures [A/mm], and the rule file's limit where it lies on it."""
    stops = "".join(
        f'<stop offset="{k / (len(_STOPS) - 1):.2f}" stop-color="rgb({r},{g},{b})"/>'
        for k, (r, g, b) in enumerate(_STOPS)
    )
    ticks = "".join(_tick(share, top) for share in (0.0, 0.25, 0.5, 0.75, 1.0))
    unit = f'<text x="{_BAR_LEFT + _BAR + 12:g}" y="{_BAR_TOP + 11:g}">A/mm</text>'
    return (
        '<svg class="chart" viewBox="0 0 760 56" role="img" aria-label="Colours of the map">'
        f'<defs><linearGradient id="density">{stops}</linearGradient></defs>'
        f'<rect x="{_BAR_LEFT:g}" y="{_BAR_TOP:g}" width="{_BAR:g}" height="{_BAR_HEIGHT:g}" '
        f'fill="url(#density)"/>{ticks}{unit}{_limit_mark(result, top)}</svg>'
    )


def _tick(share: float, top: float) -> str:
    """Return one figure of the scale; the last one stands for all above."""
    x, value = _BAR_LEFT + share * _BAR, f"{share * top * _MM:g}"
    over = " or more" if share == 1.0 else ""
    return f'<text class="m" x="{x:g}" y="{_BAR_TOP + _BAR_HEIGHT + 16:g}">{value}{over}</text>'


def _limit_mark(result: Result, top: float) -> str:
    """Return a line across the scale at ``current.max_density``, nothing where the scale ends before."""
    rule = result.circuit.rules.current
    if rule is None or rule.max_density is None:
        return ""
    share = rule.max_density * result.circuit.file.substrate.copper_thickness * 1e-9 / top
    if share > 1.0:
        return ""
    x = _BAR_LEFT + share * _BAR
    return (
        f'<path class="ink" stroke-width="2" d="M{x:g} {_BAR_TOP - 5:g}V{_BAR_TOP + _BAR_HEIGHT + 3:g}"/>'
        f'<text class="m" x="{x:g}" y="{_BAR_TOP - 7:g}">limit</text>'
    )
