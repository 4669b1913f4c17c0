"""Charts of the response as inline SVG: wanted dashed, as drawn solid, the band shaded."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from layoutgen.numbers import fixed
from layoutgen.response import Response
from layoutgen.writers.html import escape

__all__ = ["Trace", "chart", "decibels", "match_traces", "transmission_traces"]

_WIDTH, _HEIGHT, _LEFT, _RIGHT, _TOP, _BOTTOM = 760, 300, 52, 130, 14, 40
_FLOOR_DB = -60.0
_COLOURS = 6

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Trace:
    """One S-parameter over the sweep: row, column, its name, wanted and as-drawn level (F,) [dB]."""

    row: int
    column: int
    name: str
    wanted: Floats
    as_drawn: Floats


def decibels(s: npt.ArrayLike) -> Floats:
    """Return levels [dB] of S-parameters [-], never below -200 dB."""
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(s), 1e-10)), dtype=np.float64)


def match_traces(response: Response) -> list[Trace]:
    """Return the reflection at each port."""
    return [_trace(response, k, k) for k in range(len(response.ports))]


def transmission_traces(response: Response) -> list[Trace]:
    """Return the transmission between each pair of ports that sees more than -60 dB somewhere."""
    count = len(response.ports)
    traces = [_trace(response, row, column) for column in range(count) for row in range(column + 1, count)]
    return [t for t in traces if max(t.wanted.max(), t.as_drawn.max()) > _FLOOR_DB]


def _trace(response: Response, row: int, column: int) -> Trace:
    name = response.ports[row] if row == column else f"{response.ports[column]} to {response.ports[row]}"
    wanted, drawn = decibels(response.wanted[:, row, column]), decibels(response.as_drawn[:, row, column])
    return Trace(row, column, name, wanted, drawn)


def chart(title: str, frequencies: Floats, traces: Sequence[Trace], band: tuple[float, float]) -> str:
    """Return the traces over frequency [Hz] as an SVG chart with its own key."""
    low = _lower_limit(traces)
    across = (_LEFT, _WIDTH - _RIGHT, frequencies[0], frequencies[-1])
    down = (_HEIGHT - _BOTTOM, _TOP, low, 0.0)
    x = _scaled(frequencies, *across)
    parts = [
        f'<svg class="chart" viewBox="0 0 {_WIDTH} {_HEIGHT}" role="img" aria-label="{escape(title)}">',
        f"<title>{escape(title)}</title>",
        *_band(_scaled(np.array(band), *across)),
        *_grid(across, down),
    ]
    for k, trace in enumerate(traces):
        colour = f"t{k % _COLOURS}"
        for style, level in (("w", trace.wanted), ("d", trace.as_drawn)):
            y = _scaled(np.clip(level, low, 0.0), *down)
            parts.append(f'<polyline class="{style} {colour}" points="{_points(x, y)}"/>')
        parts += _key(k, colour, trace.name)
    return "".join([*parts, *_line_styles(len(traces)), "</svg>"])


def _lower_limit(traces: Sequence[Trace]) -> float:
    """Return the chart's lower edge [dB], a multiple of ten between -60 and -10."""
    least = min((min(t.wanted.min(), t.as_drawn.min()) for t in traces), default=-10.0)
    return float(max(_FLOOR_DB, min(-10.0, 10.0 * np.floor(least / 10.0))))


def _scaled(values: Floats, at_low: float, at_high: float, low: float, high: float) -> Floats:
    return at_low + (values - low) / (high - low) * (at_high - at_low)


def _points(x: Floats, y: Floats) -> str:
    return " ".join(f"{fixed(a, 1)},{fixed(b, 1)}" for a, b in zip(x.tolist(), y.tolist(), strict=True))


def _band(x: Floats) -> Iterator[str]:
    left, right = float(np.clip(x[0], _LEFT, _WIDTH - _RIGHT)), float(np.clip(x[1], _LEFT, _WIDTH - _RIGHT))
    width, height = max(right - left, 1.0), _HEIGHT - _TOP - _BOTTOM
    yield f'<rect class="band" x="{fixed(left, 1)}" y="{_TOP}" width="{fixed(width, 1)}" height="{height}"/>'


def _grid(across: tuple[float, ...], down: tuple[float, ...]) -> Iterator[str]:
    """Yield the lines of the grid with their numbers: frequency in GHz, level in dB."""
    for value in _ticks(across[2] / 1e9, across[3] / 1e9):
        x = fixed(float(_scaled(np.array(value * 1e9), *across)), 1)
        yield f'<line class="g" x1="{x}" x2="{x}" y1="{_TOP}" y2="{_HEIGHT - _BOTTOM}"/>'
        yield f'<text class="m" x="{x}" y="{_HEIGHT - _BOTTOM + 16}">{value:g}</text>'
    for level in np.arange(down[2], 1.0, 10.0).tolist():
        y = fixed(float(_scaled(np.array(level), *down)), 1)
        yield f'<line class="g" x1="{_LEFT}" x2="{_WIDTH - _RIGHT}" y1="{y}" y2="{y}"/>'
        yield f'<text class="e" x="{_LEFT - 6}" y="{y}" dy="4">{fixed(level, 0).replace("-", "−")}</text>'
    middle = (_LEFT + _WIDTH - _RIGHT) // 2
    yield f'<text class="m" x="{middle}" y="{_HEIGHT - 6}">frequency (GHz)</text>'
    yield f'<text class="m" transform="translate(13 {_HEIGHT // 2 - 12}) rotate(-90)">level (dB)</text>'


def _ticks(low: float, high: float) -> list[float]:
    """Return five to ten round numbers between two."""
    rough = (high - low) / 6.0
    power = 10.0 ** np.floor(np.log10(rough))
    step = next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= rough)
    first = int(np.ceil(low / step - 1e-9))
    return [round(k * step, 9) for k in range(first, int(np.floor(high / step + 1e-9)) + 1)]


def _key(index: int, colour: str, name: str) -> Iterator[str]:
    x, y = _WIDTH - _RIGHT + 10, _TOP + 10 + 18 * index
    yield f'<line class="d {colour}" x1="{x}" x2="{x + 18}" y1="{y}" y2="{y}"/>'
    yield f'<text x="{x + 23}" y="{y + 4}">{escape(name)}</text>'


def _line_styles(rows: int) -> Iterator[str]:
    x, y = _WIDTH - _RIGHT + 10, _TOP + 20 + 18 * rows
    for k, (style, name) in enumerate((("d", "as drawn"), ("w", "wanted"))):
        at = y + 16 * k
        yield f'<line class="{style} ink" x1="{x}" x2="{x + 18}" y1="{at}" y2="{at}"/>'
        yield f'<text x="{x + 23}" y="{at + 4}">{name}</text>'
