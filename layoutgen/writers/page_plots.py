"""Plots of the response on the page, as inline SVG: level, phase, Smith chart; wanted dashed, as drawn solid.

They can be read and printed as they stand; where scripts run, page_plots.js lays a cursor over them.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from layoutgen.numbers import fixed
from layoutgen.response import Response
from layoutgen.writers.charts import Trace
from layoutgen.writers.html import escape

__all__ = ["level_plot", "phase_plot", "plot_data", "plot_height", "smith_height", "smith_plot"]

_WIDTH, _HEIGHT, _LEFT, _RIGHT, _TOP, _BOTTOM = 760, 300, 52, 130, 14, 40
_SMITH, _RADIUS = 360, 160
_FLOOR_DB = -60.0
_COLOURS = 6
_LETTER = 7  # width of a letter
_MICRO = 1e6

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class _Axes:
    """The scales of a plot over frequency: its range [Hz], and that of its other axis."""

    first: float
    last: float
    low: float
    high: float

    def x(self, frequency: npt.ArrayLike) -> Floats:
        """Return places across for frequencies [Hz]."""
        span = max(self.last - self.first, 1e-12)
        across = (np.asarray(frequency, dtype=np.float64) - self.first) / span
        return _LEFT + across * (_WIDTH - _LEFT - _RIGHT)

    def y(self, value: npt.ArrayLike) -> Floats:
        """Return places down for values, held within the plot."""
        held = np.clip(np.asarray(value, dtype=np.float64), self.low, self.high)
        return _HEIGHT - _BOTTOM - (held - self.low) / (self.high - self.low) * (_HEIGHT - _TOP - _BOTTOM)


def level_plot(title: str, response: Response, traces: Sequence[Trace], band: tuple[float, float]) -> str:
    """Return the level of traces over frequency."""
    least = min((min(t.wanted.min(), t.as_drawn.min()) for t in traces), default=-10.0)
    most = max((max(t.wanted.max(), t.as_drawn.max()) for t in traces), default=0.0)
    low = float(max(_FLOOR_DB, min(-10.0, 10.0 * np.floor(least / 10.0))))
    high = float(max(0.0, 10.0 * np.ceil((most - 0.05) / 10.0)))
    axes = _axes(response, low, high)
    curves = [[axes.y(trace.wanted), axes.y(trace.as_drawn)] for trace in traces]
    return _plot(title, "level (dB)", 10.0, axes, response, traces, band, curves)


def phase_plot(title: str, response: Response, traces: Sequence[Trace], band: tuple[float, float]) -> str:
    """Return the phase of traces over frequency, from -180 to 180 degrees; a jump lifts the pen."""
    axes = _axes(response, -180.0, 180.0)
    curves = [
        [_lifted(axes, np.degrees(np.angle(s[:, t.row, t.column]))) for s in _both(response)] for t in traces
    ]
    return _plot(title, "phase (deg)", 60.0, axes, response, traces, band, curves)


def smith_plot(title: str, response: Response, traces: Sequence[Trace]) -> str:
    """Return the reflection at the ports on a Smith chart, each port to its own impedance."""
    half = _SMITH // 2
    width = _SMITH + _key_width(traces)
    parts = [
        f'<svg class="chart smith" viewBox="0 0 {width} {smith_height(len(traces))}" role="img" '
        f'aria-label="{escape(title)}" data-middle="{half}" data-radius="{_RADIUS}">'
        f"<title>{escape(title)}</title>",
        *_smith_grid(half),
    ]
    for k, trace in enumerate(traces):
        colour = f"t{k % _COLOURS}"
        for style, s in zip("wd", _both(response), strict=True):
            gamma = s[:, trace.row, trace.column]
            shown = _points(half + _RADIUS * gamma.real, half - _RADIUS * gamma.imag)
            parts.append(f'<polyline class="{style} {colour}" data-trace="{k}" points="{shown}"/>')
        parts += _key(k, colour, trace.name, _SMITH + 4)
    return "".join([*parts, *_styles(len(traces), _SMITH + 4), "</svg>"])


def plot_height(traces: int) -> int:
    """Return the height of a plot over frequency, or of its key when there are many traces."""
    return max(_HEIGHT, _key_height(traces))


def smith_height(traces: int) -> int:
    """Return the height of a Smith chart, or of its key when there are many traces."""
    return max(_SMITH, _key_height(traces))


def _key_width(traces: Sequence[Trace]) -> int:
    """Return the width that the names of traces need beside a plot."""
    return max(_RIGHT, 40 + _LETTER * max((len(trace.name) for trace in traces), default=0))


def _key_height(traces: int) -> int:
    return _TOP + 20 + 18 * traces + 32


def plot_data(
    response: Response, groups: Sequence[tuple[str, Sequence[Trace]]], first: float
) -> dict[str, object]:
    """Return the numbers under the cursor: frequencies [Hz], real and imaginary parts in millionths.

    Args:
        response: What is plotted.
        groups: The traces of each block of plots, with its name.
        first: The frequency that the cursor stands at first [Hz].
    """
    return {
        "first": int(np.argmin(np.abs(response.frequencies - first))),
        "frequencies": [round(f) for f in response.frequencies.tolist()],
        "groups": [
            {
                "name": name,
                "traces": [
                    {
                        "name": trace.name,
                        "wanted": _millionths(response.wanted[:, trace.row, trace.column]),
                        "drawn": _millionths(response.as_drawn[:, trace.row, trace.column]),
                    }
                    for trace in traces
                ],
            }
            for name, traces in groups
        ],
    }


def _millionths(s: Complexes) -> list[int]:
    """Return real and imaginary parts in turn."""
    pairs = np.stack([s.real, s.imag], axis=1) * _MICRO
    return [int(v) for v in np.rint(pairs).ravel().tolist()]


def _axes(response: Response, low: float, high: float) -> _Axes:
    return _Axes(float(response.frequencies[0]), float(response.frequencies[-1]), low, high)


def _both(response: Response) -> tuple[Complexes, Complexes]:
    return response.wanted, response.as_drawn


def _lifted(axes: _Axes, degrees: Floats) -> Floats:
    """Return places down with a gap (not a number) where the phase jumps by more than half a turn."""
    y = axes.y(degrees)
    y[1:][np.abs(np.diff(degrees)) > 180.0] = np.nan
    return y


def _plot(
    title: str,
    axis: str,
    step: float,
    axes: _Axes,
    response: Response,
    traces: Sequence[Trace],
    band: tuple[float, float],
    curves: Sequence[Sequence[Floats]],
) -> str:
    """Return a plot over frequency with its grid and key; ``curves`` are wanted and as drawn by trace."""
    x = axes.x(response.frequencies)
    width = _WIDTH - _RIGHT + _key_width(traces)
    parts = [
        f'<svg class="chart" viewBox="0 0 {width} {plot_height(len(traces))}" role="img" '
        f'aria-label="{escape(title)}" data-left="{_LEFT}" data-right="{_WIDTH - _RIGHT}" data-top="{_TOP}" '
        f'data-bottom="{_HEIGHT - _BOTTOM}"><title>{escape(title)}</title>',
        _band(axes, band),
        *_grid(axes, axis, step),
    ]
    for k, (trace, pair) in enumerate(zip(traces, curves, strict=True)):
        colour = f"t{k % _COLOURS}"
        parts += (
            f'<path class="{style} {colour}" data-trace="{k}" d="{_path(x, y)}"/>'
            for style, y in zip("wd", pair, strict=True)
        )
        parts += _key(k, colour, trace.name, _WIDTH - _RIGHT + 10)
    return "".join([*parts, *_styles(len(traces), _WIDTH - _RIGHT + 10), "</svg>"])


def _path(x: Floats, y: Floats) -> str:
    """Return an SVG path; it begins anew after each place that is not a number."""
    out, pen = [], "M"
    for a, b in zip(x.tolist(), y.tolist(), strict=True):
        if b != b:  # a jump: the next point begins a new stroke
            pen = "M"
            continue
        out.append(f"{pen}{fixed(a, 1)} {fixed(b, 1)}")
        pen = "L"
    return "".join(out)


def _points(x: Floats, y: Floats) -> str:
    return " ".join(f"{fixed(a, 1)},{fixed(b, 1)}" for a, b in zip(x.tolist(), y.tolist(), strict=True))


def _band(axes: _Axes, band: tuple[float, float]) -> str:
    left, right = (float(x) for x in axes.x(np.clip(band, axes.first, axes.last)))
    size = f'width="{fixed(max(right - left, 1.0), 1)}" height="{_HEIGHT - _TOP - _BOTTOM}"'
    return f'<rect class="band" x="{fixed(left, 1)}" y="{_TOP}" {size}/>'


def _grid(axes: _Axes, axis: str, step: float) -> Iterator[str]:
    """Yield the lines of the grid with their numbers, and what the axes are."""
    for value in _ticks(axes.first / 1e9, axes.last / 1e9):
        x = fixed(float(axes.x(value * 1e9)), 1)
        yield f'<line class="g" x1="{x}" x2="{x}" y1="{_TOP}" y2="{_HEIGHT - _BOTTOM}"/>'
        yield f'<text class="m" x="{x}" y="{_HEIGHT - _BOTTOM + 16}">{value:g}</text>'
    for level in np.arange(axes.low, axes.high + 0.5, step).tolist():
        y = fixed(float(axes.y(level)), 1)
        yield f'<line class="g" x1="{_LEFT}" x2="{_WIDTH - _RIGHT}" y1="{y}" y2="{y}"/>'
        yield f'<text class="e" x="{_LEFT - 6}" y="{y}" dy="4">{fixed(level, 0).replace("-", "−")}</text>'
    middle = (_LEFT + _WIDTH - _RIGHT) // 2
    yield f'<text class="m" x="{middle}" y="{_HEIGHT - 6}">frequency (GHz)</text>'
    yield f'<text class="m" transform="translate(13 {_HEIGHT // 2 - 12}) rotate(-90)">{axis}</text>'


def _ticks(low: float, high: float) -> list[float]:
    """Return five to ten round numbers between two; the first when they are one."""
    rough = (high - low) / 6.0
    if rough <= 0.0:
        return [low]
    power = 10.0 ** np.floor(np.log10(rough))
    step = next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= rough)
    first = int(np.ceil(low / step - 1e-9))
    return [round(k * step, 9) for k in range(first, int(np.floor(high / step + 1e-9)) + 1)]


def _smith_grid(half: int) -> Iterator[str]:
    """Yield circles of constant resistance and arcs of constant reactance, as fractions of the reference."""
    yield f'<circle class="g f" cx="{half}" cy="{half}" r="{_RADIUS}"/>'
    yield f'<line class="g" x1="{half - _RADIUS}" x2="{half + _RADIUS}" y1="{half}" y2="{half}"/>'
    for r in (0.2, 0.5, 1.0, 2.0, 5.0):
        radius = _RADIUS / (1.0 + r)
        middle = fixed(half + _RADIUS - radius, 1)
        yield f'<circle class="g f" cx="{middle}" cy="{half}" r="{fixed(radius, 1)}"/>'
        x = half + _RADIUS - 2.0 * radius
        yield f'<text class="s" x="{fixed(x + 2.0, 1)}" y="{half - 3}">{r:g}</text>'
    for x in (0.2, 0.5, 1.0, 2.0, 5.0):
        for sign in (1, -1):
            yield _reactance(half, x * sign)


def _reactance(half: int, x: float) -> str:
    """Return the arc of one reactance, from the rim to the point of the open circuit, with its number."""
    rim = (1j * x - 1.0) / (1j * x + 1.0)
    px, py = half + _RADIUS * rim.real, half - _RADIUS * rim.imag
    radius = fixed(_RADIUS / abs(x), 1)
    tx, ty = half + (_RADIUS + 9) * rim.real, half - (_RADIUS + 9) * rim.imag + 4
    number = f"{x:g}".replace("-", "−") + "j"
    return (
        f'<path class="g f" d="M{fixed(px, 1)} {fixed(py, 1)}A{radius} {radius} 0 0 {int(x < 0)} '
        f'{half + _RADIUS} {half}"/><text class="s m" x="{fixed(tx, 1)}" y="{fixed(ty, 1)}">{number}</text>'
    )


def _key(index: int, colour: str, name: str, x: int) -> Iterator[str]:
    y = _TOP + 10 + 18 * index
    stroke = f'<line class="d {colour}" x1="{x}" x2="{x + 18}" y1="{y}" y2="{y}"/>'
    yield f'<g class="key" data-key="{index}">{stroke}'
    yield f'<text x="{x + 23}" y="{y + 4}">{escape(name)}</text></g>'


def _styles(rows: int, x: int) -> Iterator[str]:
    y = _TOP + 20 + 18 * rows
    for k, (style, name) in enumerate((("d", "as drawn"), ("w", "wanted"))):
        at = y + 16 * k
        yield f'<line class="{style} ink" x1="{x}" x2="{x + 18}" y1="{at}" y2="{at}"/>'
        yield f'<text x="{x + 23}" y="{at + 4}">{name}</text>'
